// Moves the pins of the memory model by hand: each line of pins.txt is a time and the level of every pin.
// Prints the checks that failed, and at the end the cell that the tests look at.
#include "memory.h"

int main() {
  Checks *checks = new Checks;
  Memory *memory = new Memory(*checks);
  memory->data_path.start(1, 1);
  FILE *pins = fopen("pins.txt", "r");
  long long t;
  unsigned ras, cas, we, ma, din;
  while (pins && fscanf(pins, "%lld %u %u %u %u %u", &t, &ras, &cas, &we, &ma, &din) == 6) {
    Pins to = {ras != 0, cas != 0, we != 0, ma, din};
    memory->settle(t, to);
  }
  printf("facts 1\nderated %ld\ncell %u\n", checks->derated, (unsigned)memory->cells[memory->cell(5, 9)]);
  return 0;
}
