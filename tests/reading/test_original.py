"""The `original` section of a board file: read strictly, refused with places, known to editors."""

import json
from fractions import Fraction
from importlib import resources
from pathlib import Path

import jsonschema
import pytest
import yaml

from rowkeeper.reading import read_board_text
from rowkeeper.reading.board import Board
from rowkeeper.reading.problems import Problem, Refused

LOOM = (Path(__file__).parents[2] / "boards" / "loom-16k.yaml").read_text(encoding="utf-8").split("\noriginal:")[0]
SCHEMA = json.loads((resources.files("rowkeeper") / "catalog" / "board.schema.json").read_text(encoding="utf-8"))
SECTION = """
original:
  row_to_select:
    {r: 330 ohm ± 5 %, c: 100 pF ± 10 %, input: LS14, driver: LS, edge: rising, gate: {min: 0 ns, max: 15 ns}}
  select_to_column: {r: 1.2 kohm +/- 2.5 %, c: 68 pF ± 10 %, input: LS}
  multiplexer: {min: 0 ns, max: 27 ns}
"""


def board(section: str) -> Board:
    return read_board_text((LOOM + section).encode(), "loom-16k.yaml", None)


def refused(old: str, new: str) -> tuple[Problem, ...]:
    assert SECTION.count(old) == 1
    with pytest.raises(Refused) as caught:
        board(SECTION.replace(old, new))
    return caught.value.problems


def test_section_as_written() -> None:
    """Values with their tolerances, exactly; a driver is the input's family where none is named."""
    original = board(SECTION).original
    assert original is not None
    select, column = original.row_to_select, original.select_to_column
    assert (330_000, Fraction(1, 20)) == (select.resistance_milliohm, select.resistance_tolerance)
    assert (100_000, Fraction(1, 10)) == (select.capacitance_ff, select.capacitance_tolerance)
    assert (select.input.name, select.driver.name, select.edge, select.gate_hi_ps) == ("LS14", "LS", "rising", 15_000)
    assert (1_200_000, Fraction(1, 40)) == (column.resistance_milliohm, column.resistance_tolerance)
    assert (column.driver.name, column.edge, column.gate_hi_ps) == ("LS", "both", 0)
    assert (original.multiplexer_lo_ps, original.multiplexer_hi_ps) == (0, 27_000)


def test_section_is_optional() -> None:
    """A board need not say what stands there; no family is then part of its digest."""
    assert board("").original is None
    assert board("").digest != board(SECTION).digest


@pytest.mark.parametrize(
    ("old", "new", "message", "raw"),
    [
        ("330 ohm ± 5 %", "330 ohm", "`330 ohm` has no tolerance", "330 ohm"),
        ("330 ohm ± 5 %", "330 ± 5 %", "this resistance has no unit", "330"),
        ("330 ohm ± 5 %", "330 ohm ± 5", "this share has no unit", "5"),
        ("330 ohm ± 5 %", "330 ohm ± 51 %", "the tolerance of a part lies between 0 % and 50 %", "51 %"),
        ("330 ohm ± 5 %", "0 ohm ± 5 %", "0 ohm makes no delay", "0 ohm"),
        ("c: 68 pF", "c: 68 uF", "`uF` is not a unit of capacitance", "68 uF"),
        ("input: LS14", "input: LS15", "the catalogue has no logic family `LS15`", "LS15"),
        ("edge: rising", "edge: up", "`up` is not a known edge", "up"),
        ("gate: {min: 0 ns, max: 15 ns}", "gate: {min: 20 ns, max: 15 ns}", "`gate`: min 20 ns is over max", "20 ns"),
        ("driver: LS,", "drivr: LS,", "`row_to_select` has no key `drivr`", "drivr"),
        ("multiplexer: {min: 0 ns, ", "multiplexer: {", "`multiplexer` lacks the key `min`", "{max"),
    ],
)
def test_refusals(old: str, new: str, message: str, raw: str) -> None:
    """Each mistake in its place, with a fix."""
    (problem,) = refused(old, new)
    assert message in problem.message
    assert problem.fix
    assert problem.line[problem.at.column - 1 :].startswith(raw)


def test_both_delays_are_needed() -> None:
    """Half a description compares nothing."""
    with pytest.raises(Refused, match="`original` lacks the key `select_to_column`"):
        board("\noriginal:\n  row_to_select: {r: 330 ohm ± 5 %, c: 100 pF ± 10 %, input: LS}\n")


def test_schema_knows_the_section() -> None:
    """An editor accepts the section and marks a missing tolerance and an unknown key."""
    jsonschema.validate(yaml.safe_load(LOOM + SECTION), SCHEMA)
    for old, new in (("330 ohm ± 5 %", "330 ohm"), ("edge: rising", "edge: up"), ("driver: LS,", "drivr: LS,")):
        with pytest.raises(jsonschema.ValidationError):
            jsonschema.validate(yaml.safe_load(LOOM + SECTION.replace(old, new)), SCHEMA)
