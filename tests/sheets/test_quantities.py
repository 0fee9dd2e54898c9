"""Quantities are printed exactly, with a space before the unit."""

from fractions import Fraction

import pytest
from hypothesis import given
from hypothesis import strategies as st

from rowkeeper.sheets import quantities as q


@pytest.mark.parametrize(
    ("time_ps", "expected"),
    [
        (12_350, "12.35 ns"),
        (-3_000, "-3.0 ns"),
        (0, "0.0 ns"),
        (1, "0.001 ns"),
        (-1, "-0.001 ns"),
        (999_999, "999.999 ns"),
        (1_000_000, "1.0 us"),
        (-1_500_000, "-1.5 us"),
        (2_000_000_000, "2.0 ms"),
        (1_935_000_001, "1.935000001 ms"),
        (50_000_000_000, "50.0 ms"),
    ],
)
def test_time_has_the_largest_unit_and_every_digit(time_ps: int, expected: str) -> None:
    """Nothing is rounded away, and a hyphen is the sign."""
    assert expected == q.time_text(time_ps)


@given(st.integers(-(10**13), 10**13))
def test_time_reads_back_exactly(time_ps: int) -> None:
    """The printed number times its unit is the time that was given."""
    number, unit = q.time_text(time_ps).split(" ")
    assert time_ps == Fraction(number) * {"ns": 10**3, "us": 10**6, "ms": 10**9}[unit]
    assert time_ps == Fraction(q.nanoseconds(time_ps)) * 1000
    assert time_ps == Fraction(q.signed_nanoseconds(time_ps)) * 1000


@given(st.fractions(max_denominator=10**6))
def test_decimal_reads_back_exactly(value: Fraction) -> None:
    """A value without an exact decimal is printed as whole and fraction, not rounded."""
    text = q.decimal(value)
    whole, _, rest = text.partition(" ")
    magnitude = Fraction(whole.lstrip("-")) + (Fraction(rest) if rest else 0)
    assert value == (-magnitude if text.startswith("-") else magnitude)


def test_open_ends_are_said_in_words() -> None:
    """A window without a bound on one side does not show a number there."""
    assert q.window(None, 12_500) == "open .. 12.5"
    assert q.time_or_open(None) == "open"
    assert q.time_or_open(5) == "0.005 ns"


@pytest.mark.parametrize(
    ("level_mv", "expected"), [(5000, "5.0 V"), (135, "0.135 V"), (-5000, "-5.0 V"), (2400, "2.4 V")]
)
def test_volts(level_mv: int, expected: str) -> None:
    """Millivolts become volts."""
    assert expected == q.volts(level_mv)


@pytest.mark.parametrize(
    ("value_hz", "expected"),
    [
        (4_000_000, "4 MHz"),
        (2_500_000, "2.5 MHz"),
        (Fraction(14_318_181_818, 1000), "14.318181818 MHz"),
        (Fraction(10**7, 3), "3 1/3 MHz"),
        (32_768, "32.768 kHz"),
        (0, "0 Hz"),
        (10**9, "1 GHz"),
    ],
)
def test_frequency(value_hz: Fraction, expected: str) -> None:
    """The largest unit that leaves a whole part."""
    assert expected == q.frequency(value_hz)


def test_shares_sizes_and_addresses() -> None:
    """Per cent, kibibytes and hexadecimal addresses."""
    assert q.percent(Fraction(48, 100)) == "48 %"
    assert q.percent(Fraction(1, 3)) == "33 1/3 %"
    assert q.bytes_text(16 * 1024) == "16 KiB"
    assert q.bytes_text(1000) == "1000 bytes"
    assert q.bytes_text(0) == "0 bytes"
    assert q.hexadecimal(0xC000) == "0xC000"
    assert q.hexadecimal(0) == "0x0000"
