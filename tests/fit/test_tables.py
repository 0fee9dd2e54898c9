"""Tables as gates."""

import itertools
import random

import pytest

from rowkeeper.fit.tables import evaluate, gate_lines


@pytest.mark.parametrize("inputs", [0, 1, 2, 3])
def test_the_gates_of_every_small_table_compute_that_table(inputs: int) -> None:
    """Every table of up to three inputs gives its own bits back, row by row."""
    rows = list(itertools.product((0, 1), repeat=inputs))
    for table in range(1 << (1 << inputs)):
        found = sum(evaluate(table, row[::-1]) << i for i, row in enumerate(rows))
        assert table == found


def test_the_gates_of_tables_of_four_inputs_compute_that_table() -> None:
    """The same for a seeded sample of tables of four inputs."""
    chance = random.Random(4)
    for table in [0x8000, 0x6996, 0xFFFE, 0x0001, *(chance.getrandbits(16) for _ in range(500))]:
        found = sum(evaluate(table, [row >> i & 1 for i in range(4)]) << row for row in range(16))
        assert table == found


def test_a_wide_and_takes_one_gate_per_pair() -> None:
    """Four inputs anded take three gates, and no multiplexer."""
    lines = list(gate_lines(0x8000, ["\\a", "\\b", "\\c", "\\d"], "\\y"))
    assert [line.split()[1] for line in lines if line.startswith("  cell")] == ["$and"] * 3


def test_a_constant_and_a_wire_take_no_gate() -> None:
    """A table that does not depend on an input, or only repeats it, is a plain connection."""
    assert list(gate_lines(0b1111, ["\\a", "\\b"], "\\y")) == ["  connect \\y 1'1"]
    assert list(gate_lines(0b1100, ["\\a", "\\b"], "\\y")) == ["  connect \\y \\b"]
