"""How often a first flip-flop is still undecided when the second one looks.

Takes a board; gives estimates by MTBF = exp(C2 x dt) / (fclk x fdata x C1) (SRPS017 p. 17 and AC312 pp. 22-1 to 22-5).
No constants of the devices in the catalogue are published in a document at hand. Two other families' are shown,
marked as borrowed: their time constants differ by ten, so they span a scale and decide nothing. Exact up to the last
rounding. Must not know what the flip-flops feed.
"""

from dataclasses import dataclass
from decimal import Context, Decimal
from fractions import Fraction
from math import floor

from rowkeeper.contract import Settling
from rowkeeper.reading.board import Board
from rowkeeper.reading.figures import Mark, Source
from rowkeeper.timing.bus_clock import period_window

__all__ = ["CONSTANTS", "Constants", "mean_time_years", "settling"]

_EXACT = Context(prec=40, Emax=10**6, Emin=-(10**6))
_YEAR_S = Decimal(31_557_600)  # 365.25 days


@dataclass(frozen=True, slots=True)
class Constants:
    """C1 in femtoseconds and C2 per microsecond, as measured on one family."""

    family: str
    c1_fs: int
    c2_per_us: int
    source: Source


CONSTANTS = (
    Constants("bipolar PAL (slow)", 915_000_000, 959, Source(Mark.SHEET, "SRPS017", "p. 17")),
    Constants("flash FPGA", 15_600, 9148, Source(Mark.SHEET, "AC312 (51700094-023-0)", "pp. 22-1 to 22-5")),
)


def mean_time_years(constants: Constants, clock_hz: Fraction, data_hz: Fraction, resolve_ps: int) -> Decimal:
    """Mean time between failures in years."""
    exponent = _EXACT.divide(Decimal(constants.c2_per_us * resolve_ps), Decimal(10**6))
    rate = clock_hz * data_hz * constants.c1_fs / 10**15
    per_second = _EXACT.divide(Decimal(rate.numerator), Decimal(rate.denominator))
    seconds = _EXACT.divide(_EXACT.exp(exponent), per_second)
    return _EXACT.divide(seconds, _YEAR_S)


def settling(board: Board) -> tuple[Settling, ...]:
    """One estimate per set of constants, for one line of the bus.

    Time to decide: the shortest tick, less the flip-flop's own window and the way between the two as assumed before
    routing. The line may move once per bus clock. A third flip-flop follows the second and is not counted.
    """
    device, clock_hz, data_hz = board.device, board.device_clock.frequency_hz, board.bus_clock.frequency_hz
    window = max(abs(device.flip_flop_window.lo_ps or 0), abs(device.flip_flop_window.hi_ps or 0))
    resolve = floor(period_window(board.device_clock)[0]) - window - (device.before_routing_input.hi_ps or 0)
    return tuple(
        Settling(
            constants.family,
            constants.source,
            constants.c1_fs,
            constants.c2_per_us,
            int(clock_hz),
            int(data_hz),
            resolve,
            _shown(mean_time_years(constants, clock_hz, data_hz, resolve)),
            borrowed=True,
        )
        for constants in CONSTANTS
    )


def _shown(years: Decimal) -> str:
    """Two digits: the constants are not known any better."""
    if Decimal("0.1") <= years < 10_000:
        return f"{years:.1f}" if years < 100 else f"{years:.0f}"
    return f"{years:.1E}"
