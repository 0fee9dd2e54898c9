"""Quantities as text, exactly: times, volts, frequencies, shares.

Takes integers and fractions; gives text with a space before the unit. Nothing is rounded and no float is made: what is
printed is what was judged. The sign is a plain hyphen, which every terminal and spreadsheet knows. Must not know
what a quantity belongs to.
"""

from fractions import Fraction

__all__ = [
    "bytes_text",
    "decimal",
    "frequency",
    "hexadecimal",
    "nanoseconds",
    "percent",
    "signed_nanoseconds",
    "time_or_open",
    "time_text",
    "volts",
    "window",
]

_TIME_UNITS = ((10**9, "ms"), (10**6, "us"), (10**3, "ns"))
_FREQUENCY_UNITS = ((10**9, "GHz"), (10**6, "MHz"), (10**3, "kHz"), (1, "Hz"))
OPEN = "open"


def decimal(value: Fraction, least_places: int = 0) -> str:
    """The exact decimal of `value` with at least `least_places` places; a mixed fraction where no decimal is exact."""
    sign = "-" if value < 0 else ""
    whole, rest = divmod(abs(value), 1)
    places = _places(rest.denominator)
    if places is None:
        return f"{sign}{whole} {rest.numerator}/{rest.denominator}"
    digits = str(int(rest * 10**places)).rjust(places, "0") if places else ""
    digits = digits.ljust(least_places, "0")
    return f"{sign}{whole}.{digits}" if digits else f"{sign}{whole}"


def _places(denominator: int) -> int | None:
    """How many decimal places a fraction in lowest terms needs; None where it never ends."""
    twos = fives = 0
    while denominator % 2 == 0:
        denominator, twos = denominator // 2, twos + 1
    while denominator % 5 == 0:
        denominator, fives = denominator // 5, fives + 1
    return max(twos, fives) if denominator == 1 else None


def nanoseconds(time_ps: int) -> str:
    """Only the number, in nanoseconds, for a column whose heading has the unit."""
    return decimal(Fraction(time_ps, 1000), 1)


def signed_nanoseconds(time_ps: int) -> str:
    """Like `nanoseconds`, with a plus sign where it is not negative."""
    return nanoseconds(time_ps) if time_ps < 0 else f"+{nanoseconds(time_ps)}"


def time_text(time_ps: int) -> str:
    """A time in the largest of ms, us and ns that leaves a whole part, in ns where none does."""
    for size_ps, unit in _TIME_UNITS:
        if abs(time_ps) >= size_ps:
            return f"{decimal(Fraction(time_ps, size_ps), 1)} {unit}"
    return f"{nanoseconds(time_ps)} ns"


def time_or_open(time_ps: int | None) -> str:
    """A time, or the word for an end that has no bound."""
    return OPEN if time_ps is None else time_text(time_ps)


def window(lo_ps: int | None, hi_ps: int | None) -> str:
    """Both ends of a window in nanoseconds, without the unit."""
    lo, hi = (OPEN if end is None else nanoseconds(end) for end in (lo_ps, hi_ps))
    return f"{lo} .. {hi}"


def volts(level_mv: int) -> str:
    """Millivolts as volts."""
    return f"{decimal(Fraction(level_mv, 1000), 1)} V"


def frequency(value_hz: Fraction | int) -> str:
    """A frequency in the largest unit that leaves a whole part."""
    exact_hz = Fraction(value_hz)
    for size_hz, unit in _FREQUENCY_UNITS:
        if abs(exact_hz) >= size_hz:
            return f"{decimal(exact_hz / size_hz)} {unit}"
    return f"{decimal(exact_hz)} Hz"


def percent(share: Fraction) -> str:
    """A share of one as per cent."""
    return f"{decimal(share * 100)} %"


def bytes_text(count: int) -> str:
    """A memory size: whole kibibytes where they are whole, else bytes."""
    return f"{count // 1024} KiB" if count and count % 1024 == 0 else f"{count} bytes"


def hexadecimal(address: int) -> str:
    """An address as four or more hexadecimal digits."""
    return f"0x{address:04X}"
