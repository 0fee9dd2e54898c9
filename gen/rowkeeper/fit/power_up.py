"""From power to valid strobes, against the reset that the machine makes at power-on.

Takes a board and the ticks; gives a `PowerUp` record. Must not know the device beyond its published figures.

The configuration time of the family is published as a typical value only, and a typical value never decides: it can
show that the time is too long, never that it is short enough.
"""

from dataclasses import dataclass

from rowkeeper.contract import Term, TickTable
from rowkeeper.reading.board import Board
from rowkeeper.reading.figures import Mark, Source

__all__ = ["PowerUp", "power_up"]

_DERIVED = Source(Mark.DERIVED, "ticks of the sequencer at the slowest device clock")


@dataclass(frozen=True, slots=True)
class PowerUp:
    """The sum against the shortest power-on reset. `exceeds`: too long even with the typical figure."""

    terms: tuple[Term, ...]
    total_ps: int
    reset_min_ps: int
    exceeds: bool
    remark: str

    @property
    def margin_ps(self) -> int:
        return self.reset_min_ps - self.total_ps


def power_up(board: Board, ticks: TickTable) -> PowerUp:
    """Configuration, then the pause, then the warm-up refreshes: the first access may follow."""
    configuration = board.device.configuration_typical_ps
    pause = _slowest(board, ticks.pause)
    refreshes = _slowest(board, ticks.warm_up_cycles * _refresh_ticks(ticks))
    terms = (
        Term("configuration (typical)", None, None, configuration, board.device.configuration_source),
        Term("pause", pause, pause, pause, _DERIVED),
        Term(f"{ticks.warm_up_cycles} warm-up refreshes", None, refreshes, refreshes, _DERIVED),
    )
    total = sum(term.used_ps for term in terms)
    reset = board.at_worst.power_on_reset_min_ps
    return PowerUp(terms, total, reset, total > reset, _remark(total, reset))


def _refresh_ticks(ticks: TickTable) -> int:
    """Most ticks from one warm-up refresh strobe to the next: set up, low, high, and the steps between states."""
    return ticks.row_setup + ticks.refresh_low + max(ticks.precharge, ticks.column_rest) + 3


def _slowest(board: Board, ticks: int) -> int:
    """Longest time of `ticks` periods, in picoseconds rounded up."""
    slowest_hz = board.device_clock.frequency_hz * (1 - board.device_clock.tolerance_ppm / 1_000_000)
    time = ticks * 10**12 / slowest_hz
    return -(-time.numerator // time.denominator)


def _remark(total_ps: int, reset_ps: int) -> str:
    typical = "the configuration time is typical only, no maximum is published"
    if total_ps > reset_ps:
        return f"too long even with the typical figure; {typical}"
    return f"not proved: {typical}; hold the machine in reset until the device signals that it is configured"
