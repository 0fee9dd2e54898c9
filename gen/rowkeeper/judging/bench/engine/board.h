// The board between bus and chips: the logic itself, the delay of every net, the device clock, the data buffer.
// Takes bus edges; gives chip pins to the memory. The logic is the CXXRTL model of the subject.
#pragma once
#include "memory.h"
#include "logic.cc"
#include "ports.h"

enum { MREQ, M1, RD, WR, BUSREQ, BUSACK, RESET, ADDRESS };           // input nets; address bits follow
enum { RAS, CAS, WE, READ, ENABLE, MEMORY_ADDRESS };                 // output nets; address bits follow
static const int DIN = OUTPUTS;                                      // the data-in path, an event of the chip

struct Event {
  Time at;
  int net;
  unsigned value;
};

// A short queue kept in order of time; events of one time keep the order they came in.
struct Queue {
  Event e[512];
  unsigned head, tail;
  Queue() : head(0), tail(0) {}
  void put(Time at, int net, unsigned value) {
    unsigned i = tail++;
    for (; i != head && e[(i - 1) & 511].at > at; i--) e[i & 511] = e[(i - 1) & 511];
    e[i & 511].at = at;
    e[i & 511].net = net;
    e[i & 511].value = value;
    if (tail - head > 500) { printf("fault queue\n"); exit(4); }
  }
  bool due(Time t) const { return head != tail && e[head & 511].at <= t; }
  const Event &take() { return e[head++ & 511]; }
};

struct Board {
  Checks &checks;
  Memory &memory;
  cxxrtl_design::Top top;
  Random in_chance[INPUTS], out_chance[OUTPUTS + 1];
  Time in_last[INPUTS], out_last[OUTPUTS + 1];
  int corner;
  Queue arriving, leaving;
  int64_t clock_fs, period_fs;
  Time edge, last_edge, row_delay;
  bool fresh;
  unsigned address;
  uint32_t outputs;
  Pins pins;
  bool buffer_on, enabled;
  Time buffer_since, buffer_until, driven_from, driven_until;
  uint64_t clocks;

  Board(Checks &c, Memory &m) : checks(c), memory(m), corner(0), fresh(true), address(0xFFFF), clocks(0) {
    for (int i = 0; i < INPUTS; i++) in_last[i] = -FAR;
    for (int i = 0; i <= OUTPUTS; i++) out_last[i] = -FAR;
    pins = m.pin;
    outputs = (1u << RAS) | (1u << CAS) | (1u << WE) | (1u << READ) | (1u << ENABLE);
    buffer_on = enabled = false;
    buffer_since = buffer_until = driven_from = driven_until = -FAR;
    for (int i = 0; i < ADDRESS; i++) set_line(top, i, 1);
    top.p_a.data[0] = address & ADDRESS_MASK;
  }

  void start(uint32_t seed, int at_corner, Time phase) {
    corner = memory.corner = at_corner;
    for (int i = 0; i < INPUTS; i++) in_chance[i].start(seed, 100 + i);
    for (int i = 0; i <= OUTPUTS; i++) out_chance[i].start(seed, 200 + i);
    memory.data_path.start(seed, 300);
    row_delay = out_chance[RAS].within(corner, OUT_LO[RAS], OUT_HI[RAS]);
    Random clock;
    clock.start(seed, 2);
    period_fs = at_corner == CORNER_MIN ? DEVICE_FAST_FS
              : at_corner == CORNER_MAX ? DEVICE_SLOW_FS
              : DEVICE_FAST_FS + (int64_t)clock.below((uint32_t)(DEVICE_SLOW_FS - DEVICE_FAST_FS + 1));
    clock_fs = (DEVICE_START + phase) * 1000;
    edge = (clock_fs / 1000) | 1;  // odd: bus events are even
    last_edge = 0;
  }

  // A bus line or address bit moves at `t`; it reaches the logic after the delay of its net.
  void drive(int net, Time t, unsigned value) {
    Time at = even(t + in_chance[net].within(corner, IN_LO[net], IN_HI[net]));
    if (at <= in_last[net]) at = in_last[net] + 2;
    in_last[net] = at;
    arriving.put(at, net, value);
  }
  void drive_data(Time t, unsigned value) {
    Time at = t + out_chance[DIN].within(corner, DATA_IN_LO, DATA_IN_HI);
    if (at <= out_last[DIN]) at = out_last[DIN] + 2;
    out_last[DIN] = at;
    leaving.put(at, DIN, value);
  }

  void deliver(Time t) {
    while (arriving.due(t)) {
      const Event &e = arriving.take();
      if (e.net < ADDRESS) {
        set_line(top, e.net, e.value);
      } else {
        unsigned bit = 1u << (e.net - ADDRESS);
        address = e.value ? address | bit : address & ~bit;
        top.p_a.data[0] = address & ADDRESS_MASK;
      }
    }
  }

  // Outputs are registers: what an evaluation shows has stood since the last edge.
  void show() {
    uint32_t now = read_outputs(top);
    uint32_t moved = now ^ outputs;
    if (!moved) return;
    outputs = now;
    for (int net = 0; net < OUTPUTS; net++) {
      if (!(moved >> net & 1)) continue;
      // From one fall of the row strobe to the next, the same path adds the same delay: tRC rests on that.
      bool row_falls = net == RAS && !(now >> RAS & 1);
      Time at = last_edge + (row_falls ? row_delay : out_chance[net].within(corner, OUT_LO[net], OUT_HI[net]));
      if (at <= out_last[net]) at = out_last[net] + 2;
      out_last[net] = at;
      leaving.put(at, net, now >> net & 1);
    }
  }

  void clock_edge() {
    deliver(edge);
    top.prev_p_clk.data[0] = 0;
    top.p_clk.data[0] = 1;
    top.eval();
    show();
    top.commit();
    last_edge = edge;
    clocks++;
    clock_fs += period_fs;
    edge = (clock_fs / 1000) | 1;
    fresh = false;
  }

  void advance(Time t) {
    while (edge < t) clock_edge();
    if (!fresh) {
      top.p_clk.data[0] = 0;
      top.eval();
      show();
      fresh = true;
    }
    while (leaving.due(t)) instant();
  }

  void instant() {
    Time at = leaving.e[leaving.head & 511].at;
    bool to_buffer = buffer_on;
    while (leaving.due(at)) {
      const Event &e = leaving.take();
      if (e.net == RAS) pins.ras = e.value;
      else if (e.net == CAS) pins.cas = e.value;
      else if (e.net == WE) pins.we = e.value;
      else if (e.net == READ) to_buffer = !e.value;
      else if (e.net == ENABLE) enabled = !e.value;
      else if (e.net == DIN) pins.din = e.value;
      else {
        unsigned bit = 1u << (e.net - MEMORY_ADDRESS);
        pins.ma = e.value ? pins.ma | bit : pins.ma & ~bit;
      }
    }
    checks.now = at;
    if (!pins.ras && memory.pin.ras) checks.least(CHECK_enable, enabled, 1);
    memory.settle(at, pins);
    if (to_buffer != buffer_on) buffer_moves(at, to_buffer);
  }

  // Two drivers at once on the data lines.
  void buffer_moves(Time t, bool on) {
    buffer_on = on;
    checks.waves.moved(t, "buffer_n", !on);
    if (on) {
      buffer_since = t;
      buffer_until = FAR;
      checks.least(CHECK_contention, (t >= driven_from && t < driven_until) ? -1 : 0, 0);
    } else {
      buffer_until = t;
      bool both = driven_from < t && driven_until > buffer_since;
      checks.least(CHECK_contention, both ? -1 : 0, 0);
    }
  }
};
