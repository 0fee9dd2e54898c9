"""What the outputs of the replacement drive: inputs, load, the current in an edge, and a series resistance to try.

Takes a board; gives one `Drive` per output net. The current of an edge is at most the swing over the series resistance
(Ohm's law, the driver taken for perfect). The resistance is a RANGE for a scope, from common practice: a source
terminates its track where R = Z0 - Rout. Must not know margins.
"""

import re

from rowkeeper.contract import Drive
from rowkeeper.reading.board import Board, Net
from rowkeeper.reading.figures import Mark, Source

__all__ = ["SERIES_SOURCE", "drives", "series_range"]

_TRACK_MILLIOHM = (50_000, 90_000)  # a track without a plane under it
_OUTPUT_MILLIOHM = (20_000, 30_000)  # a buffer's output while it moves
_USUAL_OHM = (10, 12, 15, 18, 22, 27, 33, 39, 47, 56, 68, 82, 100)
_STROBES = ("ras_n", "cas_n", "we_n")
SERIES_SOURCE = Source(Mark.PRACTICE, "R = Z0 - Rout, tracks of 50 to 90 ohm, outputs of 20 to 30 ohm")


def series_range() -> tuple[int, int]:
    """The usual values nearest inside Z0 - Rout, in milliohms."""
    low = _TRACK_MILLIOHM[0] - _OUTPUT_MILLIOHM[1]
    high = _TRACK_MILLIOHM[1] - _OUTPUT_MILLIOHM[0]
    inside = [ohm * 1000 for ohm in _USUAL_OHM if low <= ohm * 1000 <= high]
    return inside[0], inside[-1]


def drives(board: Board) -> tuple[Drive, ...]:
    """Every output net in board file order."""
    return tuple(_drive(board, net) for net in board.wiring.nets if net.side == "output")


def _drive(board: Board, net: Net) -> Drive:
    parts = [element.part for element in net.through if element.part is not None]
    levels = parts[-1].output_levels if parts else board.device.levels
    swing = levels.abs_max_mv or 0
    series = sum(element.series_milliohm for element in net.through)
    load = sum(element.load_ff for element in net.through)
    low, high = series_range()
    return Drive(
        net.name,
        _inputs(board, net),
        load,
        swing,
        series,
        None if series == 0 else -(-swing * 1_000_000 // series),
        _together(board, net),
        low,
        high,
        _note(series, load, low, high),
        SERIES_SOURCE,
    )


def _inputs(board: Board, net: Net) -> int:
    if net.name in _STROBES or net.name.startswith("ma"):
        return board.banks[0].chips
    match = re.fullmatch(r"([A-Z]+)([0-9]+)(?:-[A-Z]+([0-9]+))?\.(.+)", net.meets)
    if match is None:
        return 1
    return (int(match[3] or match[2]) - int(match[2]) + 1) * len(match[4].split("+"))


def _together(board: Board, net: Net) -> int:
    """How many outputs can move in one and the same edge: all address lines do, a strobe moves alone."""
    return sum(other.name.startswith("ma") for other in board.wiring.nets) if net.name.startswith("ma") else 1


def _note(series: int, load: int, low: int, high: int) -> str:
    if series == 0:
        return "no series resistance: nothing damps the edge, and nothing bounds its current here"
    settles = 7 * (high - series) * load // 10**7
    if high <= series:
        return ""
    whole, rest = divmod(settles, 1000)
    below = "below this range: look for ringing; " if series < low else ""
    return (
        below
        + f"{high // 1000} ohm would settle {whole}.{rest // 100} ns later than what the margins count: judge again"
    )
