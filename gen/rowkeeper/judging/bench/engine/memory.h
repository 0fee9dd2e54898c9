// The memory chips of one bank side by side: cells that lose their charge, and every limit of the sheet.
// Takes pin levels with their times; gives the data output as a span in which it is valid. Knows no bus and no logic.
#pragma once
#include <vector>
#include "basics.h"

static const unsigned UNKNOWN = 0x100;  // a cell or data value that nobody can know

struct Pins {
  bool ras, cas, we;
  unsigned ma, din;
};

struct Memory {
  Checks &checks;
  Random data_path;
  int corner;
  Pins pin;
  Time ras_fell, ras_rose, cas_fell, cas_rose, we_fell, we_rose, ma_moved, din_moved;
  Time write_at, write_row, valid_from, valid_until;
  unsigned row, column, captured;
  bool in_row, column_open, column_held, reading, writing, data_held, strobe_over, touched, was_read;
  long strobes, awake;
  bool log;
  std::vector<uint16_t> cells;
  std::vector<Time> refreshed;

  explicit Memory(Checks &c) : checks(c), corner(0), row(0), column(0), captured(UNKNOWN), log(false),
      cells((size_t)ROWS * COLUMNS, UNKNOWN), refreshed(REFRESH_ROWS, -1) {
    pin.ras = pin.cas = pin.we = true;
    pin.ma = 0;
    pin.din = UNKNOWN;
    ras_fell = ras_rose = cas_fell = cas_rose = we_fell = we_rose = ma_moved = din_moved = -FAR;
    write_at = write_row = -FAR;
    valid_from = FAR;
    valid_until = -FAR;
    in_row = column_open = column_held = reading = writing = data_held = strobe_over = touched = was_read = false;
    strobes = awake = 0;
  }

  // All pins that move at one instant, at once.
  void settle(Time t, const Pins &to) {
    checks.now = t;
    if (to.ma != pin.ma) address_moves(t, to.ma);
    if (to.din != pin.din) data_moves(t, to.din);
    if (to.we != pin.we) { pin.we = to.we; note(t, "we_n", to.we); if (to.we) we_rises(t); else we_falls(t); }
    if (to.ras != pin.ras) { pin.ras = to.ras; note(t, "ras_n", to.ras); if (to.ras) ras_rises(t); else ras_falls(t); }
    if (to.cas != pin.cas) { pin.cas = to.cas; note(t, "cas_n", to.cas); if (to.cas) cas_rises(t); else cas_falls(t); }
  }

  void note(Time t, const char *signal, unsigned value) {
    checks.waves.moved(t, signal, value);
    if (log) printf("event %lld %s %u\n", (long long)t, signal, value);
  }

  size_t cell(unsigned r, unsigned c) const { return (size_t)c * ROWS + r; }

  void lose_row(unsigned r) {
    for (unsigned i = r & (REFRESH_ROWS - 1); i < ROWS; i += REFRESH_ROWS)
      for (unsigned c = 0; c < COLUMNS; c++) cells[cell(i, c)] = UNKNOWN;
  }
  void spoil() { captured = UNKNOWN; touched = true; }

  void address_moves(Time t, unsigned to) {
    note(t, "ma", to);
    bool whole = true;
    if (!pin.ras && !column_open) {
      whole = checks.least(CHECK_tRAH, t - ras_fell, LIMIT_tRAH);
    } else if (column_held) {
      if (t - cas_fell <= -LIMIT_tASC) {
        column = to & (COLUMNS - 1);  // a negative set-up time lets the column come after its strobe
      } else if (t - cas_fell <= LIMIT_tCAH / 2) {  // nearer to its strobe than to the end of its hold: late
        if (!checks.least(CHECK_tASC, cas_fell - t, LIMIT_tASC)) spoil();
      } else {
        column_held = false;
        if (!checks.least(CHECK_tCAH, t - cas_fell, LIMIT_tCAH)) spoil();
        if (!checks.least(CHECK_tAR, t - ras_fell, LIMIT_tAR)) spoil();
      }
    }
    if (!whole) lose_row(row);
    pin.ma = to;
    ma_moved = t;
  }

  void data_moves(Time t, unsigned to) {
    if (data_held && t > write_at) {
      data_held = false;
      if (!checks.least_of_data(CHECK_tDH, t - write_at, LIMIT_tDH)) spoil();
      if (!checks.least_of_data(CHECK_tDHR, t - write_row, LIMIT_tDHR)) spoil();
    }
    pin.din = to;
    din_moved = t;
  }

  void ras_falls(Time t) {
    if (strobes++ == 0) checks.least(CHECK_pause, t, PAUSE);
    bool whole = checks.least(CHECK_tRP, t - ras_rose, LIMIT_tRP);
    whole &= checks.least(CHECK_tASR, t - ma_moved, LIMIT_tASR);
    cycle_time(t - ras_fell);
    if (pin.cas) checks.least(CHECK_tCRP, t - cas_rose, LIMIT_tCRP);
    strobe_over = !pin.cas;
    if (t - ras_fell > REFRESH_PS) awake = 0;
    awake++;
    row = pin.ma & (ROWS - 1);
    unsigned r = row & (REFRESH_ROWS - 1);
    if (refreshed[r] >= 0) whole &= checks.most(CHECK_tREF, t - refreshed[r], REFRESH_PS);
    if (!whole) lose_row(r);
    refreshed[r] = t;
    ras_fell = t;
    in_row = true;
    column_open = column_held = writing = false;
  }

  void cycle_time(Time measured) {
    if (LIMIT_tRC == NONE) return;
    if (TRC_RATED && measured < LIMIT_tRC) checks.derated++;
    else checks.least(CHECK_tRC, measured, LIMIT_tRC);
  }

  void ras_rises(Time t) {
    bool whole = checks.least(CHECK_tRAS_min, t - ras_fell, LIMIT_tRAS_min);
    whole &= checks.most(CHECK_tRAS_max, t - ras_fell, LIMIT_tRAS_max);
    if (strobe_over) { strobe_over = false; checks.least(CHECK_tCRP, ras_fell - t, LIMIT_tCRP); }
    if (column_open) {
      if (!checks.least(CHECK_tRSH, t - cas_fell, LIMIT_tRSH)) spoil();
      if (writing && !checks.least(CHECK_tRWL, t - we_fell, LIMIT_tRWL)) spoil();
    }
    keep();
    if (!whole) lose_row(row);
    ras_rose = t;
    in_row = false;
  }

  void cas_falls(Time t) {
    if (pin.ras) checks.least(CHECK_tRPC, -1, 0);  // a column strobe without its row strobe
    checks.least(CHECK_wake_up, awake, WAKE_UP_CYCLES);
    column = pin.ma & (COLUMNS - 1);
    column_open = column_held = true;
    touched = false;
    bool whole = checks.least(CHECK_tRCD, t - ras_fell, LIMIT_tRCD);
    if (LIMIT_tRCD_max != NONE && t - ras_fell > LIMIT_tRCD_max) checks.reference++;
    whole &= checks.least(CHECK_tASC, t - ma_moved, LIMIT_tASC);
    whole &= checks.least(CHECK_tCPN, t - cas_rose, LIMIT_tCPN);
    cas_fell = t;
    was_read = pin.we;
    if (pin.we) {
      checks.least(CHECK_tRCS, t - we_rose, LIMIT_tRCS);
      open_output(t);
    } else {
      if (!checks.least(CHECK_tWCS, t - we_fell, LIMIT_tWCS)) whole = false;
      capture(t);
    }
    if (!whole) spoil();
  }

  void open_output(Time t) {
    reading = true;
    Time row_access = ras_fell + LIMIT_tRAC, column_access = t + LIMIT_tCAC;
    Time ready = row_access > column_access ? row_access : column_access;
    valid_from = ready + data_path.within(corner, DATA_OUT_LO, DATA_OUT_HI);
    valid_until = FAR;
  }

  void capture(Time t) {
    write_at = t;
    write_row = ras_fell;
    writing = data_held = true;
    captured = pin.din;
    if (!checks.least_of_data(CHECK_tDS, t - din_moved, LIMIT_tDS)) spoil();
  }

  void keep() {
    if (!writing) return;
    writing = false;
    cells[cell(row, column)] = touched ? UNKNOWN : captured;
  }

  void cas_rises(Time t) {
    if (strobe_over) { strobe_over = false; checks.least(CHECK_tCRP, ras_fell - t, LIMIT_tCRP); }
    bool whole = checks.least(CHECK_tCAS_min, t - cas_fell, LIMIT_tCAS_min);
    whole &= checks.most(CHECK_tCAS_max, t - cas_fell, LIMIT_tCAS_max);
    whole &= checks.least(CHECK_tCSH, t - ras_fell, LIMIT_tCSH);
    bool wrote = write_at >= cas_fell;
    if (wrote) whole &= checks.least(CHECK_tCWL, t - we_fell, LIMIT_tCWL);
    if (!whole) { spoil(); if (wrote) cells[cell(row, column)] = UNKNOWN; }
    keep();
    if (reading) {
      reading = false;
      valid_until = t + LIMIT_tOFF_min + data_path.within(corner, DATA_OUT_LO, DATA_OUT_HI);
    }
    cas_rose = t;
  }

  void we_falls(Time t) {
    we_fell = t;
    if (!pin.cas) {
      // After the column strobe: a write only within the negative set-up time of some sheets.
      reading = was_read = false;
      valid_from = FAR;
      capture(t);
      if (!checks.least(CHECK_tWCS, cas_fell - t, LIMIT_tWCS)) spoil();
    } else if (was_read) {
      was_read = false;
      checks.least(CHECK_tRCH, t - cas_rose, LIMIT_tRCH);
      checks.least(CHECK_tRRH, t - ras_rose, LIMIT_tRRH);
    }
  }

  void we_rises(Time t) {
    we_rose = t;
    if (write_at < we_fell) return;  // no column strobe came: nothing was written
    bool whole = checks.least(CHECK_tWP, t - we_fell, LIMIT_tWP);
    whole &= checks.least(CHECK_tWCH, t - cas_fell, LIMIT_tWCH);
    whole &= checks.least(CHECK_tWCR, t - write_row, LIMIT_tWCR);
    if (!whole) { spoil(); cells[cell(row, column)] = UNKNOWN; }
  }

  // Every row must still be charged, and no strobe may be stuck low.
  void finish(Time t) {
    checks.now = t;
    for (unsigned r = 0; r < REFRESH_ROWS; r++)
      checks.most(CHECK_tREF, t - (refreshed[r] < 0 ? 0 : refreshed[r]), REFRESH_PS);
    if (!pin.ras) checks.most(CHECK_tRAS_max, t - ras_fell, LIMIT_tRAS_max);
    if (!pin.cas) checks.most(CHECK_tCAS_max, t - cas_fell, LIMIT_tCAS_max);
  }
};
