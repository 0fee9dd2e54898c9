"""The bus clock against the processor's own limits, before anything else is believed.

Takes the board's clock and the bus grade; gives margins and notes. A grade is rated by nominal frequency, so TcC is
judged on it, and the widths on their shares of the nominal period; where the tolerance dips below, a note says so.
Duty and edges are judged at their worst. Must not know cycles or ticks.
"""

from dataclasses import replace
from fractions import Fraction

from rowkeeper.contract import Margin, Note, Term
from rowkeeper.reading.board import Board
from rowkeeper.reading.figures import Figure, Mark, Source
from rowkeeper.timing.bus_clock import bus_clock

__all__ = ["clock_margins", "clock_notes"]

_PS = 10**12


def clock_margins(board: Board) -> list[Margin]:
    """TcC, TwCh, TwCl, TrC and TfC of the grade, each against the board's clock."""
    clock, figures = bus_clock(replace(board.bus_clock, tolerance_ppm=Fraction(0))), board.grade.figures
    edges = (("TfC", board.bus_clock.fall_max_ps), ("TrC", board.bus_clock.rise_max_ps))
    widths = (
        ("TwCh", clock.high_lo_ps, clock.high_hi_ps, clock.fall_max_ps),
        ("TwCl", clock.low_lo_ps, clock.low_hi_ps, clock.rise_max_ps),
    )
    source = Source(Mark.BOARD, f"bus clock in {board.file}")
    found: list[Margin] = []
    if "TcC" in figures:
        nominal = _nominal_ps(board)
        found += _margins(figures["TcC"], [Term("nominal period", nominal, nominal, nominal, source)], None)
    for symbol, shortest, longest, edge in widths:
        if symbol in figures:
            least = [
                Term(f"phase of {symbol}", shortest, longest, shortest, source),
                Term("its slowest edge", 0, edge, -edge, source),
            ]
            most = [Term(f"phase of {symbol}", shortest, longest, longest, source)]
            found += _margins(figures[symbol], least, most)
    for symbol, edge in edges:
        if symbol in figures:
            found += _margins(figures[symbol], None, [Term(symbol, 0, edge, edge, source)])
    return found


def clock_notes(board: Board) -> list[Note]:
    """The tolerance below the shortest period is common practice, and is said."""
    figure = board.grade.figures.get("TcC")
    if figure is None or figure.lo_ps is None or bus_clock(board.bus_clock).period_lo_ps >= figure.lo_ps:
        return []
    short = figure.lo_ps - bus_clock(board.bus_clock).period_lo_ps
    text = f"TcC {figure.lo_ps} ps is met at nominal frequency; the clock's tolerance can make it {short} ps shorter"
    return [Note("bus clock", f"{text} (a grade is rated by nominal frequency)")]


def _nominal_ps(board: Board) -> int:
    """The nominal period, rounded down to a picosecond."""
    period: Fraction = _PS / board.bus_clock.frequency_hz
    return period.numerator // period.denominator


def _margins(figure: Figure, least: list[Term] | None, most: list[Term] | None) -> list[Margin]:
    found: list[Margin] = []
    if least is not None and figure.lo_ps is not None:
        found.append(_margin(figure, "min", figure.lo_ps, least))
    if most is not None and figure.hi_ps is not None:
        found.append(_margin(figure, "max", figure.hi_ps, most))
    return found


def _margin(figure: Figure, sense: str, required: int, terms: list[Term]) -> Margin:
    total = sum(term.used_ps for term in terms)
    lower = sense == "min"
    margin = total - required if lower else required - total
    return Margin(
        figure.symbol,
        "bus clock",
        "",
        "min" if lower else "max",
        "hard",
        required,
        total if lower else None,
        None if lower else total,
        margin,
        tuple(terms),
        figure.source,
        figure.source.mark is Mark.MEMORY,
        "the processor's own limit",
    )
