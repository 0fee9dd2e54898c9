"""`margins --vary` from the command line: what is read, and what a wrong word is told."""

from fractions import Fraction

import pytest

from rowkeeper.run.output import UnknownNameError
from rowkeeper.run.what_if import clock_values


@pytest.mark.parametrize(
    ("text", "megahertz"),
    [
        ("2..4MHz/1MHz", ("2", "3", "4")),
        ("2..8MHz", ("2", "2.5", "3", "3.5", "4", "4.5", "5", "5.5", "6", "6.5", "7", "7.5", "8")),
        ("900kHz..1 MHz / 50 kHz", ("0.9", "0.95", "1")),
        ("2.5..3.5MHz/0.75MHz", ("2.5", "3.25")),
    ],
)
def test_ranges_of_the_clock(text: str, megahertz: tuple[str, ...]) -> None:
    """A step that is not given is chosen so that there are at most seventeen values."""
    assert clock_values(text) == tuple(Fraction(value) * 10**6 for value in megahertz)


@pytest.mark.parametrize(
    "text", ["", "2", "2..", "8..2MHz", "0..2MHz", "2..8", "1..8MHz/1Hz", "2..8MHz/0MHz", "-1..8MHz"]
)
def test_ranges_that_are_none(text: str) -> None:
    """Refused with a way to write it, never a traceback."""
    with pytest.raises(UnknownNameError, match="--vary clock"):
        clock_values(text)
