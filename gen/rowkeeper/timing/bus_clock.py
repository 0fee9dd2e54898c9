"""The bus clock as windows: period and both phases, between the reference points Cr and Cf of the AC table.

Takes the board's `ClockSpec`; gives exact windows, rounded outward to whole picoseconds, and the value of a sum of
clock quantities at its worst. From Cr to Cf is TwCh + TfC, a share (the duty) of the period; from Cf to Cr is
TwCl + TrC, the rest of it. Must not know cycles.
"""

from dataclasses import dataclass
from fractions import Fraction
from math import ceil, floor

from rowkeeper.reading.board import ClockSpec

__all__ = ["BusClock", "bus_clock", "period_window"]

_PS = 10**12


def period_window(clock: ClockSpec) -> tuple[Fraction, Fraction]:
    """Shortest and longest period in picoseconds, exact."""
    nominal = _PS / clock.frequency_hz
    parts = clock.tolerance_ppm / 10**6
    return nominal / (1 + parts), nominal / (1 - parts)


@dataclass(frozen=True, slots=True)
class BusClock:
    """Windows in picoseconds. `fall_max_ps`, `rise_max_ps`: the slowest edges the board's clock has."""

    period_lo_ps: int
    period_hi_ps: int
    high_lo_ps: int
    high_hi_ps: int
    low_lo_ps: int
    low_hi_ps: int
    rise_max_ps: int
    fall_max_ps: int

    def least(self, terms: tuple[str, ...]) -> int:
        """The least that a sum of clock quantities can be on this clock.

        TwCh + TfC and TwCl + TrC are phases as a whole; only a width without its edge loses the slowest edge.
        """
        left = list(terms)
        total = 0
        phases = (("TwCh", "TfC", self.high_lo_ps, self.fall_max_ps), ("TwCl", "TrC", self.low_lo_ps, self.rise_max_ps))
        for width, edge, phase, slowest in phases:
            widths, edges = left.count(width), left.count(edge)
            both = min(widths, edges)
            total += both * phase + (widths - both) * (phase - slowest)
        return total + left.count("TcC") * self.period_lo_ps


def bus_clock(clock: ClockSpec) -> BusClock:
    """Windows of this clock, rounded outward."""
    low, high = period_window(clock)
    return BusClock(
        floor(low),
        ceil(high),
        floor(low * clock.duty_min),
        ceil(high * clock.duty_max),
        floor(low * (1 - clock.duty_max)),
        ceil(high * (1 - clock.duty_min)),
        clock.rise_max_ps,
        clock.fall_max_ps,
    )
