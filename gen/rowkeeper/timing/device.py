"""The device on its ticks: when it sees the bus, and what its registers then do at counted ticks.

Takes a board, delays and ticks as `Facts`; adds events and promises to a network. Small letters name clock edges of
the device, capitals what the chip sees at its pins. Edges are spaced exactly: k ticks are k times the period. The
order of states is that of `logic/sequencer.py`, told here in spans only. Must not know limits.
"""

from collections.abc import Mapping
from dataclasses import dataclass, replace
from math import ceil, floor

from rowkeeper.contract import Delays, TickTable
from rowkeeper.reading.board import Board
from rowkeeper.reading.figures import Figure, Mark, Source
from rowkeeper.timing.bus import from_figure
from rowkeeper.timing.bus_clock import BusClock, bus_clock, period_window
from rowkeeper.timing.network import Network, Promise, minus
from rowkeeper.timing.paths import Path, group_path, is_pad, skew_between, travel

__all__ = ["Facts", "ahead", "counted", "drive", "facts_of", "sample", "skewed", "through", "with_ticks"]

_NETS = (
    *("mreq_n", "m1_n", "rd_n", "wr_n", "busreq_n", "busack_n", "reset_n", "a"),
    *("ras_n", "cas_n", "we_n", "read_n", "ma", "data_in", "data_out"),
)
_STROBES = ("ras_n", "cas_n", "we_n")
SYNCHRONISER = 2  # from the edge at which the first flip-flop sees the bus to the edge at which a strobe can move


@dataclass(frozen=True, slots=True)
class Facts:
    """Everything a scene is built from: all paths by net or group, skews by pair of strobes."""

    board: Board
    delays: Delays
    ticks: TickTable
    clock: BusClock
    clock_source: Source
    tick_lo_ps: int
    tick_hi_ps: int
    tick_source: Source
    aperture: Figure
    paths: Mapping[str, Path]
    skews: Mapping[tuple[str, str], Figure]

    @property
    def aperture_ps(self) -> int:
        """How long around its clock edge the first flip-flop may decide either way."""
        return max(abs(self.aperture.lo_ps or 0), abs(self.aperture.hi_ps or 0))


def facts_of(board: Board, delays: Delays, ticks: TickTable) -> Facts:
    """Windows of both clocks, rounded outward to whole picoseconds, and every path."""
    shortest, longest = period_window(board.device_clock)
    pairs = [(one, other) for one in _STROBES for other in _STROBES if one != other]
    found = {pair: skew_between(board, *pair) for pair in pairs}
    return Facts(
        board,
        delays,
        ticks,
        bus_clock(board.bus_clock),
        Source(Mark.BOARD, f"bus clock in {board.file}"),
        floor(shortest),
        ceil(longest),
        Source(Mark.BOARD, f"device clock in {board.file}"),
        board.device.flip_flop_window,
        {name: group_path(board, delays, name) for name in _NETS},
        {pair: figure for pair, figure in found.items() if figure is not None},
    )


def with_ticks(facts: Facts, ticks: TickTable) -> Facts:
    """The same board with other ticks: nothing else is worked out again."""
    return replace(facts, ticks=ticks)


def counted(facts: Facts, *names: str, plus: int = 0, at_least: bool = False, at_most: bool = False) -> Promise:
    """A span of whole ticks: those named in the tick table together, and `plus` more."""
    total = plus + sum(getattr(facts.ticks, name) for name in names)
    words = " + ".join([*names, *([str(plus)] if plus or not names else [])])
    counts = tuple((name, names.count(name)) for name in dict.fromkeys(names))
    return Promise(
        f"{total} ticks ({words})" if names else f"{total} ticks",
        None if at_most else total * facts.tick_lo_ps,
        None if at_least else total * facts.tick_hi_ps,
        facts.tick_source,
        None,
        counts,
        facts.tick_lo_ps,
        facts.tick_hi_ps,
    )


def ahead(facts: Facts, earlier: str, later: str) -> Promise:
    """The span between two ticks that are counted from the same clock edge."""
    total = getattr(facts.ticks, later) - getattr(facts.ticks, earlier)
    lo, hi = sorted((total * facts.tick_lo_ps, total * facts.tick_hi_ps))
    counts = ((later, 1), (earlier, -1))
    name = f"{total} ticks ({later} - {earlier})"
    return Promise(name, lo, hi, facts.tick_source, None, counts, facts.tick_lo_ps, facts.tick_hi_ps)


def sample(network: Network, facts: Facts, net: str, event: str, seen: str) -> None:
    """`seen` is the clock edge at which the first flip-flop takes the line's new level.

    It is the first edge after the signal has arrived, one tick away at most, give or take the flip-flop's aperture.
    """
    arrives = f"{event} arrives"
    travel(network, event, arrives, facts.paths[net])
    network.promise(arrives, seen, *_first_edge(facts))


def drive(network: Network, facts: Facts, net: str, edge: str, event: str) -> None:
    """A register that moves at `edge` is seen at the chip as `event`."""
    travel(network, edge, event, facts.paths[net])


def through(network: Network, facts: Facts, line: tuple[str, str], strobe: tuple[str, str], *spans: Promise) -> None:
    """From a bus line to a strobe that follows it: both pads together, where the sheet bounds them as a pair.

    `line` and `strobe` are a net and its event, `spans` the ticks from the first flip-flop to the register that moves.
    """
    pair = facts.board.device.pads_together
    if pair is None:
        return
    inwards, outwards = facts.paths[line[0]].slow, facts.paths[strobe[0]].slow
    parts = [
        *(p for p in inwards if not is_pad(p)),
        *_first_edge(facts),
        *spans,
        *(p for p in outwards if not is_pad(p)),
        from_figure(pair, f"{line[0]} and {strobe[0]}: pads together"),
    ]
    network.promise(line[1], strobe[1], *(replace(p, lo_ps=None) for p in parts))


def _first_edge(facts: Facts) -> tuple[Promise, Promise]:
    """From a signal's arrival to the edge that first sees it: one tick at most, give or take the aperture."""
    wide = facts.aperture_ps
    edge = Promise("to the next device clock edge", 0, facts.tick_hi_ps, facts.tick_source)
    return edge, Promise("aperture of the first flip-flop", -wide, wide, facts.aperture.source)


def skewed(network: Network, facts: Facts, one: tuple[str, str], other: tuple[str, str], span: Promise) -> None:
    """Two strobes through one package, turning the same way `span` apart: the package's skew is a promise of its own.

    `one` and `other` are a net and its event at the chip. Device and settling still count, each on its own.
    """
    figure = facts.skews.get((one[0], other[0]))
    if figure is None or figure.hi_ps is None:
        return
    first, second = facts.paths[one[0]].fast, facts.paths[other[0]].fast
    skew = Promise(f"skew of {one[0]} and {other[0]} in one package", -figure.hi_ps, figure.hi_ps, figure.source)
    # Third in the path of an output comes the package, after fabric and pad: the skew stands for both its delays.
    parts = (*(p for i, p in enumerate(second) if i != 2), *(minus(p) for i, p in enumerate(first) if i != 2))
    network.promise(one[1], other[1], span, *parts, skew)
