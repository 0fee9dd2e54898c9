// Time, random numbers and the table of checks. Takes the generated parameters; must not know memory, bus or logic.
// bench.v holds the same rules; both engines must agree on every event of a run.
#pragma once
#include <cstdint>
#include <cstdio>
#include <cstdlib>
#include <cstring>
#include "parameters.h"

typedef int64_t Time;  // picoseconds
static const Time FAR = 1000000000000000LL;
static const Time NONE = -1000000000000000000LL;  // the sheet gives no such limit

enum { CORNER_MIN = 0, CORNER_MAX = 1, CORNER_RANDOM = 2 };

static inline Time even(Time t) { return t & ~(Time)1; }

// Xorshift of 32 bits; one stream per source of chance, so that the order between sources never matters.
struct Random {
  uint32_t state;
  void start(uint32_t seed, uint32_t stream) {
    state = (seed * 2654435761u) ^ (stream * 40503u + 0x9E3779B9u);
    if (state == 0) state = 1;
    for (int i = 0; i < 8; i++) next();
  }
  uint32_t next() {
    state ^= state << 13;
    state ^= state >> 17;
    state ^= state << 5;
    return state;
  }
  uint32_t below(uint32_t n) { return next() % n; }
  // A delay of [lo, hi] at a corner; even, so that no bus event ever falls on an edge of the device clock.
  Time within(int corner, Time lo, Time hi) {
    if (corner == CORNER_MIN || hi <= lo) return lo;
    if (corner == CORNER_MAX) return hi;
    return lo + 2 * (Time)below((uint32_t)((hi - lo) / 2 + 1));
  }
};

// The last things that moved: kept until a little after the first violation, then printed.
struct Waves {
  struct Moved { Time at; const char *signal; unsigned value; };
  Moved ring[512];
  unsigned count, stop;
  Waves() : count(0), stop(0) {}
  void moved(Time at, const char *signal, unsigned value) {
    if (stop && count >= stop) return;
    Moved m = {at, signal, value};
    ring[count++ & 511] = m;
  }
  void freeze() { if (!stop) stop = count + 128; }
  void print() const {
    if (!stop) return;
    for (unsigned i = count > 512 ? count - 512 : 0; i < count; i++) {
      const Moved &m = ring[i & 511];
      printf("wave %lld %s %u\n", (long long)m.at, m.signal, m.value);
    }
  }
};

// How often each check was made, the least slack it had, and what failed.
struct Checks {
  long count[CHECKS], failed[CHECKS], violations, derated, reference, early, reads;
  Time slack[CHECKS];
  Time now, excuse_from, excuse_until;
  Waves waves;
  Checks() : violations(0), derated(0), reference(0), early(0), reads(0), now(0) {
    memset(count, 0, sizeof count);
    memset(failed, 0, sizeof failed);
    for (int i = 0; i < CHECKS; i++) slack[i] = FAR;
    excuse_from = excuse_until = -FAR;
  }
  bool judge(int id, Time measured, Time limit, Time spare) {
    count[id]++;
    if (spare < slack[id]) slack[id] = spare;
    if (spare >= 0) return true;
    failed[id]++;
    waves.freeze();
    if (violations++ < 20)
      printf("violation %lld %s %lld %lld\n", (long long)now, CHECK_NAMES[id], (long long)measured, (long long)limit);
    return false;
  }
  bool least(int id, Time measured, Time limit) {
    return limit == NONE || judge(id, measured, limit, measured - limit);
  }
  bool most(int id, Time measured, Time limit) {
    return limit == NONE || judge(id, measured, limit, limit - measured);
  }
  // A cell under write when reset strikes is unknown, not an error.
  bool least_of_data(int id, Time measured, Time limit) {
    if (now >= excuse_from && now <= excuse_until && measured < limit) return false;
    return least(id, measured, limit);
  }
  long total() const {
    long sum = 0;
    for (int i = 0; i < CHECKS; i++) sum += count[i];
    return sum;
  }
};
