// The bus, straight from its AC table: machine cycles clock by clock, every edge at the delay its corner gives, never
// against a width or separation the table promises. Takes cycles to run; checks the data it reads, and watches itself.
#pragma once
#include "board.h"

enum { RFSH = INPUTS, IORQ, LINES };  // lines that do not reach the logic
static const char *const LINE_NAMES[] = {"mreq_n", "m1_n", "rd_n", "wr_n", "busreq_n", "busack_n", "reset_n",
                                         "rfsh_n", "iorq_n"};
enum { FETCH, REFRESH, ACCESS };      // what the next MREQ is

#define DRAW(symbol) chance.within(corner, symbol##_LO, symbol##_HI)

static inline Time later(Time a, Time b) { return a > b ? a : b; }

struct Bus {
  Checks &checks;
  Memory &memory;
  Board &board;
  Random chance;
  int corner, request;
  int64_t clock_fs, period_fs;
  Time now, cr, cf, next_cr, cut, struck;
  bool level[LINES], released, trusted, driving, ending, pending, held;
  Time rose[LINES], fell[LINES];
  unsigned address, pending_cell, pending_value;
  Time address_at, data_at, address_free, hold_at, sampled;
  long drought, resets, grants;
  bool log;
  std::vector<uint16_t> shadow;

  Bus(Checks &c, Memory &m, Board &b) : checks(c), memory(m), board(b), corner(0), request(FETCH), now(0), cut(FAR),
      struck(-FAR), released(true), trusted(false), driving(false), ending(false), pending(false), held(false), address(0xFFFF),
      pending_cell(0), pending_value(0), address_at(-FAR), data_at(-FAR), address_free(-FAR), hold_at(0), sampled(0), drought(0),
      resets(0), grants(0), log(false), shadow(WINDOW_SIZE, UNKNOWN) {
    for (int i = 0; i < LINES; i++) { level[i] = true; rose[i] = fell[i] = -FAR; }
  }

  void start(uint32_t seed, int at_corner) {
    corner = at_corner;
    chance.start(seed, 1);
    period_fs = corner == CORNER_RANDOM ? BUS_FAST_FS + (int64_t)chance.below((uint32_t)(BUS_SLOW_FS - BUS_FAST_FS + 1))
                                        : BUS_FAST_FS;
    clock_fs = BUS_START * 1000;
    next_cr = even(clock_fs / 1000);
    released = true;
  }

  // --- time -------------------------------------------------------------------------------------------------------

  bool stopped() const { return now >= cut; }

  void to(Time t) {
    if (!released && cut <= t) release();
    now = t;
    board.advance(t);
    checks.now = t;
    if (held && t >= hold_at) {
      held = false;
      Time gone = memory.valid_until < board.buffer_until ? memory.valid_until : board.buffer_until;
      checks.least(CHECK_data_hold, (gone < t ? gone : t) - hold_at, ThD);  // from RD rising at the processor
      if (gone < hold_at) checks.early++;
    }
  }

  // One clock: rising reference point, then falling.
  void tick() {
    int64_t share = corner == CORNER_MIN ? DUTY_MIN_E4 : corner == CORNER_MAX ? DUTY_MAX_E4
                  : DUTY_MIN_E4 + (int64_t)chance.below(DUTY_MAX_E4 - DUTY_MIN_E4 + 1);
    cr = next_cr;
    cf = even((clock_fs + period_fs / 10000 * share) / 1000);
    clock_fs += period_fs;
    next_cr = even(clock_fs / 1000);
    to(cr);
    drought++;
    if (pending) {
      pending = false;
      if (!stopped() && trusted) shadow[pending_cell] = (uint16_t)pending_value;
    }
    if (ending) release_data(later(cr + DRAW(TdCr_Dz), rose[WR] + TdWRr_D));
  }
  void fall() { to(cf); }
  void idle(int clocks) {
    for (int i = 0; i < clocks && !stopped(); i++) { tick(); fall(); }
  }

  // --- lines ------------------------------------------------------------------------------------------------------

  void move(int net, Time t, bool value) {
    if (level[net] == value) return;
    Time last = later(rose[net], fell[net]);
    if (t <= last) t = last + 2;
    level[net] = value;
    if (value) rose[net] = t; else fell[net] = t;
    if (net < INPUTS) board.drive(net, t, value);
    checks.waves.moved(t, LINE_NAMES[net < ADDRESS ? net : net - INPUTS + ADDRESS], value);
    checks.now = t;
    watch(net, t, value);
  }
  void line(int net, Time t, bool value) {
    if (t < cut) move(net, t, value);
  }
  void put_address(Time t, unsigned to) {
    unsigned moved = to ^ address;
    if (!moved) return;
    for (int i = 0; i < ADDRESS_BITS; i++)
      if (moved >> i & 1) board.drive(ADDRESS + i, t, to >> i & 1);
    address = to;
    address_at = t;
    checks.waves.moved(t, "address", to);
  }
  void to_address(Time t, unsigned to) {
    t = later(t, address_free);
    if (t < cut) put_address(t, to);
  }
  void mreq_falls(Time t, int kind) {
    request = kind;
    line(MREQ, later(t, later(address_at + TdA_MREQf, rose[MREQ] + TwMREQh)), 0);
  }
  void mreq_rises(Time t) { line(MREQ, later(t, fell[MREQ] + TwMREQl), 1); }
  void rd_falls(Time t, bool foreign) {
    line(RD, t, 0);
    if (foreign && t < cut) { board.driven_from = t; board.driven_until = FAR; }
  }
  void rd_rises(Time t) {
    line(RD, t, 1);
    if (board.driven_until == FAR && !driving) board.driven_until = t;
  }
  void drive_data(unsigned value) {
    if (stopped()) return;
    driving = true;
    board.driven_from = cf;
    board.driven_until = FAR;
    board.drive_data(cf, UNKNOWN);
    data_at = cf + DRAW(TdCf_D);
    if (data_at < cut) board.drive_data(data_at, value);
  }
  void release_data(Time t) {
    driving = ending = false;
    board.drive_data(t, UNKNOWN);
    board.driven_until = t;
  }

  // --- what is assumed of the bus, watched --------------------------------------------------------------------------

  void assume(int id, bool holds) { checks.least(id, holds ? 0 : -1, 0); }

  void watch(int net, Time t, bool value) {
    if (net == MREQ && !value) {
      checks.least(CHECK_mreq_high, t - rose[MREQ], TwMREQh);
      checks.least(CHECK_address_before_mreq, t - address_at, TdA_MREQf);
      if (request == FETCH) assume(CHECK_m1_before_mreq, !level[M1] && fell[M1] < t);
      if (request == REFRESH) assume(CHECK_m1_before_mreq, level[M1] && rose[M1] < t);
      assume(CHECK_grant_silent, level[BUSACK] && rose[BUSACK] < t);
      assume(CHECK_reset_silent, t < fell[RESET] + RESET_SETTLE_CLOCKS * (period_fs / 1000 + 1) ||
             t > rose[RESET] + RESET_RESTART_CLOCKS * (period_fs / 1000));
      if (request == REFRESH) {
        checks.most(CHECK_drought, drought, GAP_CLOCKS);
        drought = 0;
      }
    } else if (net == MREQ && t < cut) {
      checks.least(CHECK_mreq_low, t - fell[MREQ], TwMREQl);
    } else if (net == WR && !value) {
      checks.least(CHECK_data_before_write, t - data_at, TdD_WRf);
    } else if (net == RESET && value) {
      assume(CHECK_reset_length, true);
    }
  }

  // --- data read ----------------------------------------------------------------------------------------------------

  static bool inside(unsigned a) { return a >= WINDOW_BASE && a < WINDOW_BASE + WINDOW_SIZE; }

  void sample(unsigned a, Time setup) {
    if (!inside(a) || !trusted) return;
    unsigned want = shadow[a - WINDOW_BASE];
    if (want == UNKNOWN) return;
    checks.now = now;
    checks.reads++;
    bool ours = memory.cas_fell > fell[MREQ] && board.buffer_since > fell[MREQ];
    bool there = ours && memory.valid_until >= now && board.buffer_until >= now;
    unsigned got = there ? memory.cells[memory.cell(memory.row, memory.column)] : UNKNOWN;
    checks.least(CHECK_data_setup, there ? now - later(memory.valid_from, board.buffer_since) : -1, setup);
    checks.least(CHECK_data, got == want ? 0 : -1, 0);
    if (log) printf("event %lld read %u\n", (long long)now, got);
    held = true;
    hold_at = FAR;
    sampled = now;
  }

  // --- machine cycles -----------------------------------------------------------------------------------------------

  void begin(unsigned a) { to_address(cr + DRAW(TdCr_A), a); }
  void begin_m1(unsigned a) {
    begin(a);
    line(M1, cr + DRAW(TdCr_M1f), 0);
    line(RFSH, cr + DRAW(TdCr_RFSHr), 1);
  }
  // Clocks that this machine may add to an access; the gap between refreshes is counted without them.
  int waits() {
    int clocks = (int)(chance.within(corner, 0, 2 * WAIT_CLOCKS) / 2);
    drought -= clocks;
    return clocks;
  }
  void ends_strobes() { address_free = later(rose[MREQ], later(rose[RD], rose[WR])) + TdCTr_A; }
  void hold_data() { if (held) hold_at = rose[RD]; }

  // T3 and T4 of every M1: the refresh. What stands on the address lines then is nobody's business.
  void refresh() {
    mreq_rises(cr + DRAW(TdCr_MREQr));
    rd_rises(cr + DRAW(TdCr_RDr));
    hold_data();
    line(M1, cr + DRAW(TdCr_M1r), 1);
    Time t = cr + DRAW(TdCr_A);
    unsigned any = chance.next() & ADDRESS_MASK;
    if (t < cut) put_address(t, any);
    line(RFSH, cr + DRAW(TdCr_RFSHf), 0);
    fall();
    if (stopped()) return;
    mreq_falls(cf + DRAW(TdCf_MREQf), REFRESH);
    tick();
    if (stopped()) return;
    fall();
    if (stopped()) return;
    mreq_rises(cf + DRAW(TdCf_MREQr));
    address_free = rose[MREQ];
  }

  void fetch(unsigned a, int clocks) {
    tick();
    if (stopped()) return;
    begin_m1(a);
    fall();
    if (stopped()) return;
    mreq_falls(cf + DRAW(TdCf_MREQf), FETCH);
    rd_falls(cf + DRAW(TdCf_RDf), !inside(a));
    idle(1 + waits());
    if (stopped()) return;
    tick();
    if (stopped()) return;
    sample(a, TsD_Cr);
    refresh();
    idle(clocks - 4);
  }

  void read(unsigned a, int clocks) {
    tick();
    if (stopped()) return;
    begin(a);
    fall();
    if (stopped()) return;
    mreq_falls(cf + DRAW(TdCf_MREQf), ACCESS);
    rd_falls(cf + DRAW(TdCf_RDf), !inside(a));
    idle(2 + waits());
    if (stopped()) return;
    sample(a, TsD_Cf);
    mreq_rises(cf + DRAW(TdCf_MREQr));
    rd_rises(cf + DRAW(TdCf_RDr));
    hold_data();
    ends_strobes();
    idle(clocks - 3);
  }

  void write(unsigned a, unsigned value, int clocks) {
    tick();
    if (stopped()) return;
    begin(a);
    if (inside(a)) shadow[a - WINDOW_BASE] = UNKNOWN;
    fall();
    if (stopped()) return;
    mreq_falls(cf + DRAW(TdCf_MREQf), ACCESS);
    drive_data(value);
    idle(1);
    if (stopped()) return;
    line(WR, later(cf + DRAW(TdCf_WRf), data_at + TdD_WRf), 0);
    idle(1 + waits());
    if (stopped()) return;
    mreq_rises(cf + DRAW(TdCf_MREQr));
    line(WR, later(cf + DRAW(TdCf_WRr), fell[WR] + TwWR), 1);
    ends_strobes();
    ending = true;
    pending = inside(a);
    pending_cell = a - WINDOW_BASE;
    pending_value = value;
    idle(clocks - 3);
  }

  void input(unsigned port) {
    tick();
    if (stopped()) return;
    begin(port);
    fall();
    tick();
    if (stopped()) return;
    line(IORQ, cr + DRAW(TdCr_IORQf), 0);
    rd_falls(cr + DRAW(TdCr_RDf), true);
    fall();
    idle(2);
    if (stopped()) return;
    line(IORQ, cf + DRAW(TdCf_IORQr), 1);
    rd_rises(cf + DRAW(TdCf_RDr));
    ends_strobes();
  }

  void output(unsigned port, unsigned value) {
    tick();
    if (stopped()) return;
    begin(port);
    fall();
    if (stopped()) return;
    drive_data(value);
    tick();
    if (stopped()) return;
    line(IORQ, cr + DRAW(TdCr_IORQf), 0);
    data_at = -FAR;  // the table gives no separation here for every grade
    line(WR, cr + DRAW(TdCr_WRf), 0);
    fall();
    idle(2);
    if (stopped()) return;
    line(IORQ, cf + DRAW(TdCf_IORQr), 1);
    line(WR, cf + DRAW(TdCf_WRr), 1);
    ends_strobes();
    ending = true;
  }

  void acknowledge(unsigned a, int clocks) {
    tick();
    if (stopped()) return;
    begin_m1(a);
    fall();
    idle(1);
    if (stopped()) return;
    tick();
    fall();
    if (stopped()) return;
    line(IORQ, cf + DRAW(TdCf_IORQf), 0);
    idle(1);
    if (stopped()) return;
    tick();
    if (stopped()) return;
    line(IORQ, cr + DRAW(TdCr_IORQr), 1);
    refresh();
    idle(clocks - 6);
  }

  // --- grant and reset ----------------------------------------------------------------------------------------------

  void ask_for_grant() { line(BUSREQ, now + 2 + 2 * (Time)chance.below(100), 0); }

  void grant(int clocks) {
    tick();
    if (stopped()) return;
    grants++;
    line(BUSACK, cr + DRAW(TdCr_BUSACKf), 0);
    for (int i = 0; i < clocks; i++) {
      Time t = cr + DRAW(TdCr_Az);
      unsigned any = chance.next() & ADDRESS_MASK;
      if (t < cut) put_address(t, any);
      fall();
      tick();
      drought--;
      if (stopped()) return;
    }
    line(BUSREQ, next_cr - TsBUSREQ, 1);
    fall();
    tick();
    drought -= 2;
    if (stopped()) return;
    fall();
    line(BUSACK, cf + DRAW(TdCf_BUSACKr), 1);
  }

  // RESET falls at `t`; within three clocks, anywhere, the processor lets go of everything.
  void strike(Time t) {
    struck = t;
    move(RESET, t, 0);
    cut = t + 2 + 2 * (Time)chance.below((uint32_t)(RESET_SETTLE_CLOCKS * (period_fs / 2000)));
    released = false;
    checks.excuse_from = t;
    checks.excuse_until = cut + 4 * (period_fs / 1000);
    resets++;
  }

  void release() {
    released = true;
    pending = held = false;
    Time t = cut;
    for (int net = 0; net < LINES; net++)
      if (net != RESET) { Time d = DRAW(TdCr_CTz); move(net, t + d, 1); }
    put_address(t + DRAW(TdCr_Az), ADDRESS_MASK);
    if (driving) release_data(t + DRAW(TdCr_Dz));
    else if (board.driven_until == FAR) board.driven_until = t;
    address_free = -FAR;
  }

  void hold_reset(Time until) {
    cut = FAR;
    while (now < until) { tick(); fall(); }
    move(RESET, next_cr - TsRESET, 1);
    idle(RESET_RESTART_CLOCKS);
    drought = 0;
  }

  void power_on() {
    move(RESET, 2, 0);
    hold_reset(READY_AT);
    trusted = true;
  }
};
