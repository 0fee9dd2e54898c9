// What the bus is made to do: one function per scenario. March notation after van de Goor, "Testing Semiconductor
// Memories: Theory and Practice" (1991). Takes a bus; knows nothing of logic or chips.
#pragma once
#include "bus.h"

struct Program {
  Bus &bus;
  Random chance;
  unsigned columns, cells, code;
  bool full;

  Program(Bus &b, uint32_t seed, bool everything, bool marching) : bus(b), code(0), full(everything) {
    chance.start(seed, 3);
    columns = full ? COLUMNS : marching ? FEW_COLUMNS : FEWER_COLUMNS;
    cells = columns * ROWS;
  }

  // The i-th cell of the test: rows first, columns in an order that spreads.
  unsigned cell(unsigned i) const {
    unsigned column = i / ROWS * 37u % COLUMNS;
    return WINDOW_BASE + ((column * ROWS + i % ROWS) & (WINDOW_SIZE - 1));
  }
  unsigned next_code() { return CODE_BASE + (code++ & (CODE_SIZE - 1)); }
  static unsigned pattern(unsigned a) { return (a * 0x9Du >> 3 ^ a ^ a >> 8) & 0xFF; }

  void load(unsigned a) { bus.fetch(next_code(), 4); bus.read(a, 3); }
  void store(unsigned a, unsigned v) { bus.fetch(next_code(), 4); bus.write(a, v, 3); }
  void modify(unsigned a, unsigned v) { bus.fetch(next_code(), 4); bus.read(a, 4); bus.write(a, v, 3); }

  void fill() { for (unsigned i = 0; i < cells; i++) store(cell(i), pattern(cell(i))); }
  void verify() { for (unsigned i = 0; i < cells; i++) load(cell(i)); }

  // March C-: any(w0); up(r0,w1); up(r1,w0); down(r0,w1); down(r1,w0); any(r0)
  void march() {
    for (unsigned i = 0; i < cells; i++) store(cell(i), 0x00);
    for (unsigned i = 0; i < cells; i++) modify(cell(i), 0xFF);
    for (unsigned i = 0; i < cells; i++) modify(cell(i), 0x00);
    for (unsigned i = cells; i-- > 0;) modify(cell(i), 0xFF);
    for (unsigned i = cells; i-- > 0;) modify(cell(i), 0x00);
    for (unsigned i = 0; i < cells; i++) load(cell(i));
  }

  void idle() {
    fill();
    for (Time end = bus.now + IDLE_PS; bus.now < end;) bus.fetch(next_code(), 4);
    verify();
    reset_for(bus.now + 100, IDLE_PS);
    verify();
  }

  void reset_for(Time at, Time length) {
    bus.strike(at);
    while (!bus.stopped()) bus.fetch(next_code(), 4);
    bus.hold_reset(at + length);
  }

  // Three instructions that hold every kind of access, over and over until the reset has stopped them.
  void strike_at(Time at, Time length) {
    unsigned a = cell(chance.below(cells));
    bus.strike(at);
    while (!bus.stopped()) {
      store(a, pattern(a));
      if (!bus.stopped()) load(cell(chance.below(cells)));
      if (!bus.stopped()) modify(a, pattern(a));
    }
    bus.hold_reset(at + length);
    store(a, pattern(a));
  }

  void reset() {
    Time clock = bus.period_fs / 1000;
    unsigned strikes = full ? STRIKES : FEW_STRIKES;
    fill();
    for (unsigned i = 0; i < strikes; i++) {
      Time length = clock * (3 + (i % 8 == 7 ? chance.below(400) : chance.below(16)));
      strike_at(bus.now + 100 + even(25 * clock * i / strikes), length + 4 * clock);
    }
    unsigned count = full ? LONG_RESETS : 1;
    for (unsigned i = 0; i < count; i++)
      reset_for(bus.now + 100 + even(5 * clock * i / count), full ? LONG_RESET_PS : FEW_RESET_PS);
    verify();
  }

  // Grants after every machine cycle of the longest instruction: the longest, and those too short for a refresh.
  void grants() {
    unsigned count = full ? GRANTS : FEW_GRANTS;
    fill();
    for (unsigned i = 0; i < count; i++) {
      for (unsigned k = 0; k < 5; k++) {
        unsigned a = cell(chance.below(cells));
        bus.ask_for_grant();
        if (k == 0) bus.fetch(next_code(), 4);
        else if (k < 3) bus.read(a, 2 + k);
        else bus.write(a, pattern(a), k == 3 ? 3 : 5);
        bus.grant((int)(i % 4 == 0 ? GRANT_CLOCKS : chance.below(7)));
      }
      if (i % 4 == 3) bus.acknowledge(next_code(), 7);
    }
    verify();
  }

  // One instruction: a fetch, then up to 15 clocks of anything.
  void instruction() {
    unsigned a = cell(chance.below(cells)), b = cell(chance.below(cells)), kind = chance.below(12);
    unsigned from = chance.below(4) == 0 ? b : next_code();
    bus.fetch(from, 4 + (int)chance.below(3));
    if (kind < 3) bus.read(a, 3 + (int)chance.below(2));
    else if (kind < 5) bus.write(a, chance.next() & 0xFF, 3);
    else if (kind < 7) { bus.read(a, 4); bus.write(a, chance.next() & 0xFF, 3); }
    else if (kind == 7) { bus.read(a, 3); bus.read(b, 4); bus.write(b, chance.next() & 0xFF, 3); bus.write(a, chance.next() & 0xFF, 3); }
    else if (kind == 8) bus.input(chance.next() & ADDRESS_MASK);
    else if (kind == 9) bus.output(chance.next() & ADDRESS_MASK, a & 0xFF);
    else if (kind == 10) bus.acknowledge(next_code(), 7);
    else bus.idle(1 + (int)chance.below(9));
  }

  void mix() {
    Time clock = bus.period_fs / 1000;
    unsigned count = full ? MIX : FEW_MIX;
    fill();
    for (unsigned i = 0; i < count; i++) {
      unsigned what = chance.below(64);
      if (what == 0) {
        bus.strike(bus.now + 2 + even(chance.below((uint32_t)(20 * clock))));
        while (!bus.stopped()) instruction();
        bus.hold_reset(bus.struck + clock * (6 + chance.below(40)));
      } else if (what < 5 && HAS_GRANT) {
        bus.ask_for_grant();
        if (chance.below(2)) bus.fetch(next_code(), 4);
        else bus.acknowledge(next_code(), 7);
        bus.grant((int)chance.below(what == 1 ? GRANT_CLOCKS + 1 : 8));
      } else {
        instruction();
      }
    }
    verify();
  }

  // From power-up the processor runs at once; the strobes must keep silent through the pause.
  void warm_up() {
    while (bus.now < READY_AT) {
      bus.fetch(next_code(), 4);
      bus.read(cell(chance.below(cells)), 3);
    }
    bus.trusted = true;
    fill();
    verify();
  }

  void run(const char *scenario) {
    if (!strcmp(scenario, "warm-up")) { warm_up(); return; }
    bus.power_on();
    if (!strcmp(scenario, "march-c")) march();
    else if (!strcmp(scenario, "idle")) idle();
    else if (!strcmp(scenario, "reset")) reset();
    else if (!strcmp(scenario, "grants")) grants();
    else if (!strcmp(scenario, "mix")) mix();
  }
};
