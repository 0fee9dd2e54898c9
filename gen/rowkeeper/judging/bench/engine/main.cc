// Runs one scenario at one corner: bench scenario corner seed full log. Prints what happened, a line per fact.
#include "program.h"
#include <memory>

static int result(const Checks &checks, const Board &board, const Bus &bus) {
  for (int i = 0; i < CHECKS; i++)
    if (checks.count[i])
      printf("check %s %ld %ld %lld\n", CHECK_NAMES[i], checks.count[i], checks.failed[i], (long long)checks.slack[i]);
  printf("reads %ld\nchecks %ld\nviolations %ld\nderated %ld\nreference %ld\nearly %ld\n", checks.reads,
         checks.total(), checks.violations, checks.derated, checks.reference, checks.early);
  printf("strobes %ld\nresets %ld\ngrants %ld\nclocks %llu\nbus_ps %lld\n", bus.memory.strobes, bus.resets, bus.grants,
         (unsigned long long)board.clocks, (long long)bus.now);
  checks.waves.print();
  bool passed = checks.violations == 0 && checks.reads > 0;
  printf("%s\n", passed ? "PASS" : checks.reads ? "FAIL" : "FAIL no checks");
  return passed ? 0 : 1;
}

int main(int count, char **argument) {
  if (count != 6) return 4;
  int corner = !strcmp(argument[2], "min") ? CORNER_MIN : !strcmp(argument[2], "max") ? CORNER_MAX : CORNER_RANDOM;
  uint32_t seed = (uint32_t)strtoul(argument[3], 0, 10);
  std::unique_ptr<Checks> checks(new Checks);
  std::unique_ptr<Memory> memory(new Memory(*checks));
  std::unique_ptr<Board> board(new Board(*checks, *memory));
  std::unique_ptr<Bus> bus(new Bus(*checks, *memory, *board));
  Random phase;
  phase.start(seed, 4);
  board->start(seed, corner, phase.below(DEVICE_SLOW_FS / 1000));
  bus->start(seed, corner);
  memory->log = bus->log = argument[5][0] == '1';
  Program program(*bus, seed, argument[4][0] == '1', !strcmp(argument[1], "march-c"));
  program.run(argument[1]);
  memory->finish(bus->now);
  return result(*checks, *board, *bus);
}
