"""Quantities: exact where they are right, refused where they are not."""

from collections.abc import Callable
from fractions import Fraction
from typing import TypeVar

import pytest
from hypothesis import given
from hypothesis import strategies as st

from rowkeeper.reading import units
from rowkeeper.reading.position import Position
from rowkeeper.reading.problems import Problems
from rowkeeper.reading.tree import Scalar

T = TypeVar("T")
AT = Position("board.yaml", 1, 1)


def converted(convert: Callable[[Scalar, Problems], T], text: str) -> T:
    """The value of a text that must be right."""
    problems = Problems()
    value = convert(Scalar(text, AT), problems)
    assert problems.in_order() == ()
    return value


def refused(convert: Callable[[Scalar, Problems], object], text: str) -> tuple[str, str]:
    """Message and fix for a text that must be wrong."""
    problems = Problems()
    convert(Scalar(text, AT), problems)
    (problem,) = problems.in_order()
    return problem.message, problem.fix


@pytest.mark.parametrize(
    ("text", "picoseconds"),
    [
        ("150 ns", 150_000),
        ("150ns", 150_000),
        ("0.5 ns", 500),
        ("2 ms", 2 * 10**9),
        ("15.625 us", 15_625_000),
        ("1 s", 10**12),
        ("7 ps", 7),
        ("0 ns", 0),
    ],
)
def test_times(text: str, picoseconds: int) -> None:
    """Every unit of time, as integer picoseconds."""
    assert picoseconds == converted(units.time_ps, text)


@pytest.mark.parametrize("text", ["10 nS", "10 NS", "10 Ns", "10 nanoseconds", "10 µs", "10 n s", "10 ns ns"])
def test_units_of_time_are_spelled_one_way(text: str) -> None:
    """nS is nanosiemens; nothing but the listed units will do."""
    refused(units.time_ps, text)


def test_wrong_case_names_the_unit_meant() -> None:
    """The nearest unit stands in the fix, with the user's own number."""
    assert refused(units.time_ps, "10 nS") == (
        "`nS` is not a unit of time",
        "write `10 ns`; the units are ps, ns, us, ms or s",
    )


def test_missing_unit() -> None:
    """A bare number is never a time."""
    assert refused(units.time_ps, "150")[0] == "this time has no unit"


@pytest.mark.parametrize("text", ["", " ", "ns", "1e3 ns", "0x10 ns", "1,5 ns", "+-1 ns", "١٠ ns", "1" * 40 + " ns"])
def test_not_a_number(text: str) -> None:
    """Only plain decimal digits make a number."""
    assert "is not a time" in refused(units.time_ps, text)[0]


def test_negative_times() -> None:
    """A board has none; a sheet may (tWCS, tCRP)."""
    assert "negative" in refused(units.time_ps, "-20 ns")[0]
    assert converted(units.signed_time_ps, "-20 ns") == -20_000


def test_finer_than_a_picosecond() -> None:
    """Nothing is rounded behind the user's back."""
    assert "whole number of picoseconds" in refused(units.time_ps, "0.0005 ns")[0]


def test_unlimited() -> None:
    """The word stands for no bound, where it is allowed."""
    assert converted(units.time_or_unlimited_ps, "unlimited") is None
    assert converted(units.time_or_unlimited_ps, "1 ms") == 10**9


def test_other_quantities() -> None:
    """One example of each."""
    assert Fraction(4_000_000) == converted(units.frequency_hz, "4 MHz")
    assert Fraction(5_000_000, 2) == converted(units.frequency_hz, "2.5 MHz")
    assert Fraction(12, 25) == converted(units.share, "48 %")
    assert Fraction(50) == converted(units.parts_per_million, "50 ppm")
    assert converted(units.voltage_mv, "3.3 V") == 3300
    assert converted(units.capacitance_ff, "80 pF") == 80_000
    assert converted(units.resistance_milliohm, "4.7 kohm") == 4_700_000
    assert converted(units.size_bytes, "16 KiB") == 16384
    assert converted(units.address, "0xC000") == 0xC000
    assert converted(units.address, "49152") == 0xC000
    assert converted(units.count, "010") == 10
    assert converted(units.yes_or_no, "no") is False
    assert converted(units.yes_or_no, "yes") is True


@pytest.mark.parametrize("text", ["NO", "on", "true", "y", ""])
def test_yes_and_no_only(text: str) -> None:
    """Other words of YAML for true and false are refused, not guessed."""
    assert "neither yes nor no" in refused(units.yes_or_no, text)[0]


@pytest.mark.parametrize(
    ("convert", "text"),
    [
        (units.frequency_hz, "0 MHz"),
        (units.frequency_hz, "-4 MHz"),
        (units.share, "0 %"),
        (units.share, "100 %"),
        (units.share, "1.5"),
        (units.parts_per_million, "-1 ppm"),
        (units.parts_per_million, "100001 ppm"),
        (units.size_bytes, "1.5 bytes"),
        (units.address, "C000"),
        (units.address, "-1"),
        (units.count, "-1"),
        (units.count, "1.0"),
        (units.count, "0x8"),
    ],
)
def test_beyond_reason(convert: Callable[[Scalar, Problems], object], text: str) -> None:
    """One problem each, and a stand-in value so that reading can go on."""
    refused(convert, text)


@given(st.integers(0, 10**9), st.sampled_from(sorted(units.TIME.units)))
def test_times_are_exact(number: int, unit: str) -> None:
    """Integer arithmetic only: the outside judge is the power of ten of the unit."""
    power = {"ps": 0, "ns": 3, "us": 6, "ms": 9, "s": 12}[unit]
    assert number * 10**power == converted(units.time_ps, f"{number} {unit}")


@given(st.text(max_size=30))
def test_any_text_is_a_value_or_one_problem(text: str) -> None:
    """No text makes a converter fail, and none gets two complaints."""
    for convert in (units.time_ps, units.frequency_hz, units.share, units.size_bytes, units.address, units.count):
        problems = Problems()
        convert(Scalar(text, AT), problems)
        assert len(problems) <= 1
