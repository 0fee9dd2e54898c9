"""Quantities with their units, exact.

Takes a scalar as it stands in a file (`150 ns`, `4 MHz`, `33 ohm`, `16 KiB`); gives integer picoseconds, fractions of
hertz, integer millivolts and so on, or notes what is wrong with it. A missing unit is a mistake, never a default. After
a noted problem a converter returns a stand-in, so that reading can go on; the phase ends in a refusal anyway. Must not
know which component the quantity belongs to.
"""

import re
from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction

from rowkeeper.reading.problems import Problems, listed, nearest, quoted
from rowkeeper.reading.tree import Scalar

__all__ = [
    "CAPACITANCE",
    "CURRENT",
    "FREQUENCY",
    "PARTS_PER_MILLION",
    "RESISTANCE",
    "SHARE",
    "SIZE",
    "TIME",
    "VOLTAGE",
    "Dimension",
    "address",
    "capacitance_ff",
    "count",
    "current_ua",
    "exact",
    "frequency_hz",
    "parts_per_million",
    "plain_text",
    "resistance_milliohm",
    "share",
    "signed_time_ps",
    "size_bytes",
    "time_or_unlimited_ps",
    "time_ps",
    "voltage_mv",
    "whole",
    "yes_or_no",
]


@dataclass(frozen=True, slots=True)
class Dimension:
    """A kind of quantity: its units, each as a multiple of the unit we keep it in, and an example to copy."""

    name: str
    units: Mapping[str, Fraction]
    kept_in: str
    example: str


TIME = Dimension(
    "time",
    {"ps": Fraction(1), "ns": Fraction(10**3), "us": Fraction(10**6), "ms": Fraction(10**9), "s": Fraction(10**12)},
    "picoseconds",
    "150 ns",
)
FREQUENCY = Dimension(
    "frequency", {"Hz": Fraction(1), "kHz": Fraction(10**3), "MHz": Fraction(10**6)}, "hertz", "4 MHz"
)
SHARE = Dimension("share", {"%": Fraction(1, 100)}, "parts of one", "48 %")
PARTS_PER_MILLION = Dimension("tolerance", {"ppm": Fraction(1)}, "ppm", "100 ppm")
VOLTAGE = Dimension("voltage", {"mV": Fraction(1), "V": Fraction(1000)}, "millivolts", "3.3 V")
CAPACITANCE = Dimension("capacitance", {"pF": Fraction(1000)}, "femtofarads", "80 pF")
RESISTANCE = Dimension("resistance", {"ohm": Fraction(1000), "kohm": Fraction(10**6)}, "milliohms", "33 ohm")
CURRENT = Dimension("current", {"uA": Fraction(1), "mA": Fraction(1000)}, "microamperes", "0.4 mA")
SIZE = Dimension("size", {"bytes": Fraction(1), "KiB": Fraction(1024), "MiB": Fraction(1024**2)}, "bytes", "16 KiB")

_QUANTITY = re.compile(r"([+-]?[0-9]{1,12}(?:\.[0-9]{1,12})?) ?([^0-9\s.+-]\S{0,15})?", re.ASCII)
_COUNT = re.compile(r"[0-9]{1,9}", re.ASCII)
_ADDRESS = re.compile(r"0x[0-9A-Fa-f]{1,8}|[0-9]{1,9}", re.ASCII)


def _unit_problem(scalar: Scalar, number: str, unit: str, dimension: Dimension, problems: Problems) -> None:
    names = list(dimension.units)
    guess = nearest(unit, names) or names[0]
    problems.add(
        scalar.at,
        f"{quoted(unit)} is not a unit of {dimension.name}",
        f"write `{number} {guess}`; the units are {listed(names)}",
    )


def exact(scalar: Scalar, dimension: Dimension, problems: Problems) -> Fraction | None:
    """The quantity in the unit it is kept in, or None with the problem noted."""
    match = _QUANTITY.fullmatch(scalar.text.strip())
    if match is None:
        problems.add(
            scalar.at,
            f"{quoted(scalar.text)} is not a {dimension.name}",
            f"write a number and a unit, for example `{dimension.example}`",
        )
        return None
    number, unit = match[1], match[2]
    if unit is None:
        problems.add(
            scalar.at,
            f"this {dimension.name} has no unit",
            f"write `{number} {dimension.example.split()[1]}` if that is meant; the units are "
            f"{listed(dimension.units)}",
        )
        return None
    if unit not in dimension.units:
        _unit_problem(scalar, number, unit, dimension, problems)
        return None
    return Fraction(number) * dimension.units[unit]


def whole(scalar: Scalar, dimension: Dimension, problems: Problems, *, signed: bool = False) -> int:
    """The quantity as a whole number of the unit it is kept in; 0 after a problem."""
    value = exact(scalar, dimension, problems)
    if value is None:
        return 0
    if value < 0 and not signed:
        problems.add(scalar.at, f"a negative {dimension.name} makes no sense here", "write it without the minus sign")
        return 0
    if value.denominator != 1:
        problems.add(
            scalar.at,
            f"{quoted(scalar.text)} is not a whole number of {dimension.kept_in}",
            f"round it to whole {dimension.kept_in}",
        )
        return 0
    return value.numerator


def time_ps(scalar: Scalar, problems: Problems) -> int:
    """A time that is not negative, in picoseconds."""
    return whole(scalar, TIME, problems)


def signed_time_ps(scalar: Scalar, problems: Problems) -> int:
    """A time that a sheet may give as negative (tWCS, tCRP), in picoseconds."""
    return whole(scalar, TIME, problems, signed=True)


def time_or_unlimited_ps(scalar: Scalar, problems: Problems) -> int | None:
    """A time in picoseconds, or None for the word `unlimited`."""
    return None if scalar.text == "unlimited" else time_ps(scalar, problems)


def _positive(scalar: Scalar, dimension: Dimension, problems: Problems) -> Fraction | None:
    value = exact(scalar, dimension, problems)
    if value is not None and value <= 0:
        problems.add(scalar.at, f"this {dimension.name} must be above zero", f"write for example `{dimension.example}`")
        return None
    return value


def frequency_hz(scalar: Scalar, problems: Problems) -> Fraction:
    """A frequency above zero, as an exact fraction of hertz."""
    return _positive(scalar, FREQUENCY, problems) or Fraction(1)


def share(scalar: Scalar, problems: Problems) -> Fraction:
    """A share above 0 % and below 100 %, as a fraction of one."""
    value = _positive(scalar, SHARE, problems)
    if value is not None and value >= 1:
        problems.add(scalar.at, "this share must be below 100 %", "write for example `48 %`")
    return value or Fraction(1, 2)


def parts_per_million(scalar: Scalar, problems: Problems) -> Fraction:
    """A tolerance in ppm, from 0 to 100 000 ppm (a tenth)."""
    value = exact(scalar, PARTS_PER_MILLION, problems)
    if value is not None and not 0 <= value <= 100_000:
        problems.add(scalar.at, "a tolerance lies between 0 ppm and 100000 ppm", "write for example `100 ppm`")
    return Fraction(0) if value is None else value


def voltage_mv(scalar: Scalar, problems: Problems) -> int:
    """A voltage that is not negative, in millivolts."""
    return whole(scalar, VOLTAGE, problems)


def capacitance_ff(scalar: Scalar, problems: Problems) -> int:
    """A capacitance in femtofarads."""
    return whole(scalar, CAPACITANCE, problems)


def resistance_milliohm(scalar: Scalar, problems: Problems) -> int:
    """A resistance in milliohms."""
    return whole(scalar, RESISTANCE, problems)


def current_ua(scalar: Scalar, problems: Problems) -> int:
    """A current in microamperes."""
    return whole(scalar, CURRENT, problems)


def size_bytes(scalar: Scalar, problems: Problems) -> int:
    """A memory size in bytes."""
    return whole(scalar, SIZE, problems)


def count(scalar: Scalar, problems: Problems) -> int:
    """A plain whole number, not negative, without a unit."""
    if _COUNT.fullmatch(scalar.text) is None:
        problems.add(scalar.at, f"{quoted(scalar.text)} is not a whole number", "write digits only, for example `8`")
        return 0
    return int(scalar.text)


def address(scalar: Scalar, problems: Problems) -> int:
    """An address: hexadecimal with 0x, or decimal."""
    text = scalar.text
    if _ADDRESS.fullmatch(text) is None:
        problems.add(scalar.at, f"{quoted(text)} is not an address", "write it in hexadecimal, for example `0xC000`")
        return 0
    return int(text, 16) if text.startswith("0x") else int(text)


def yes_or_no(scalar: Scalar, problems: Problems) -> bool:
    """The words yes and no; nothing else, whatever YAML makes of `on` or `true`."""
    if scalar.text not in ("yes", "no"):
        problems.add(scalar.at, f"{quoted(scalar.text)} is neither yes nor no", "write `yes` or `no`")
    return scalar.text == "yes"


def plain_text(scalar: Scalar, problems: Problems) -> str:  # noqa: ARG001 - the shape of every converter
    """The text itself, of a catalogue file, whose texts are ours or the owner's own."""
    return scalar.text
