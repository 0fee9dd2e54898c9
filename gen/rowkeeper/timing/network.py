"""A simple temporal network: events, and promises about the time between two of them.

Takes promises `lo <= later - earlier <= hi` in integer picoseconds, each with its source; gives the tightest window
between any two events that all of them together imply, with the promises on the path that decides it. A negative
loop is a contradiction between promises and is given as that loop. (Dechter, Meiri and Pearl, 1991.)
Must not know what an event is.
"""

from collections import deque
from collections.abc import Mapping
from dataclasses import dataclass, field

from rowkeeper.contract import Term
from rowkeeper.reading.figures import Mark, Source, Window

__all__ = ["SAME", "UNPUBLISHED", "Bound", "ContradictionError", "Network", "Promise", "minus"]

UNPUBLISHED = Source(Mark.UNPUBLISHED)

Counts = tuple[tuple[str, int], ...]


@dataclass(frozen=True, slots=True)
class Promise:
    """One promise: the span in picoseconds, `None` for no bound on that side.

    `lo_source` is given where the lower end has another source (a minimum nobody publishes). `counts` names the ticks
    the span is counted by, with how many picoseconds one more of each adds at the lower and at the upper end.
    """

    name: str
    lo_ps: int | None
    hi_ps: int | None
    source: Source
    lo_source: Source | None = None
    counts: Counts = ()
    tick_lo_ps: int = 0
    tick_hi_ps: int = 0


def minus(promise: Promise) -> Promise:
    """The same delay taken off: for the difference of two delays. Only for promises that are not counted."""
    lo = None if promise.hi_ps is None else -promise.hi_ps
    hi = None if promise.lo_ps is None else -promise.lo_ps
    return Promise(f"less {promise.name}", lo, hi, promise.source, promise.lo_source)


SAME = Promise("", 0, 0, Source(Mark.DERIVED))  # two names for one instant; never shown as a term


@dataclass(frozen=True, slots=True)
class Bound:
    """One end of a window: `total_ps`, the terms that add up to it, and how it moves with each tick."""

    total_ps: int
    terms: tuple[Term, ...]
    per_tick: Mapping[str, int]


class ContradictionError(Exception):
    """Promises that cannot all be kept: `bound` adds up to less than no time around a loop."""

    def __init__(self, bound: Bound) -> None:
        super().__init__("; ".join(f"{term.name} ({term.source})" for term in bound.terms))
        self.bound = bound


@dataclass(frozen=True, slots=True)
class _Arc:
    """Time from `start` to `end` is at most `weight`. `forward`: uses the upper end of each promise."""

    start: str
    end: str
    weight: int
    promises: tuple[Promise, ...]
    forward: bool


@dataclass(slots=True)
class Network:
    """Events by name; grows by `promise`, answers `earliest` and `latest`."""

    arcs: dict[str, list[_Arc]] = field(default_factory=dict)
    _answers: dict[str, tuple[dict[str, int], dict[str, _Arc]]] = field(default_factory=dict)

    def promise(self, earlier: str, later: str, *promises: Promise) -> None:
        """`later - earlier` is the sum of these promises."""
        self._answers.clear()
        out, back = self.arcs.setdefault(earlier, []), self.arcs.setdefault(later, [])
        highs = [p.hi_ps for p in promises if p.hi_ps is not None]
        lows = [p.lo_ps for p in promises if p.lo_ps is not None]
        if len(highs) == len(promises):
            out.append(_Arc(earlier, later, sum(highs), promises, True))
        if len(lows) == len(promises):
            back.append(_Arc(later, earlier, -sum(lows), promises, False))

    def copy(self) -> "Network":
        """The same promises, to be added to without touching this one."""
        return Network({event: list(arcs) for event, arcs in self.arcs.items()})

    def holds(self, *events: str) -> bool:
        """Whether every one of these events is in the network."""
        return all(event in self.arcs for event in events)

    def window(self, earlier: str, later: str) -> Window:
        """The tightest window of `later - earlier`."""
        earliest, latest = self.earliest(earlier, later), self.latest(earlier, later)
        return Window(
            None if earliest is None else earliest.total_ps,
            None if latest is None else latest.total_ps,
        )

    def latest(self, earlier: str, later: str) -> Bound | None:
        """The most that `later - earlier` can be, or None where nothing bounds it."""
        return self._bound(earlier, later, 1)

    def earliest(self, earlier: str, later: str) -> Bound | None:
        """The least that `later - earlier` can be, or None where nothing bounds it."""
        return self._bound(later, earlier, -1)

    def _bound(self, start: str, end: str, sign: int) -> Bound | None:
        distance, came_by = self._distances(start)
        if end not in distance:
            return None
        path: list[_Arc] = []
        while end != start:
            path.append(came_by[end])
            end = came_by[end].start
        return _bound_of(path[::-1] if sign > 0 else path, sign)

    def check(self) -> None:
        """Raise `ContradictionError` if the promises contradict each other."""
        distance = dict.fromkeys(self.arcs, 0)
        self._relax(distance, deque(self.arcs))

    def _distances(self, start: str) -> tuple[dict[str, int], dict[str, _Arc]]:
        if start not in self._answers:
            distance = {start: 0}
            self._answers[start] = distance, self._relax(distance, deque([start]))
        return self._answers[start]

    def _relax(self, distance: dict[str, int], waiting: deque[str]) -> dict[str, _Arc]:
        """Shortest paths by relaxation; an event met more often than there are events lies on a negative loop."""
        came_by: dict[str, _Arc] = {}
        queued = set(waiting)
        met = dict.fromkeys(self.arcs, 0)
        while waiting:
            here = waiting.popleft()
            queued.discard(here)
            far = distance[here]
            for arc in self.arcs[here]:
                there = far + arc.weight
                known = distance.get(arc.end)
                if known is None or there < known:
                    distance[arc.end], came_by[arc.end] = there, arc
                    if arc.end not in queued:
                        met[arc.end] += 1
                        if met[arc.end] > len(self.arcs):
                            raise ContradictionError(_loop(came_by, arc.end))
                        queued.add(arc.end)
                        waiting.append(arc.end)
        return came_by


def _loop(came_by: Mapping[str, _Arc], event: str) -> Bound:
    """The negative loop that `event` hangs on."""
    seen: set[str] = set()
    while event not in seen:
        seen.add(event)
        event = came_by[event].start
    path = [came_by[event]]
    while path[-1].start != event:
        path.append(came_by[path[-1].start])
    return _bound_of(path[::-1], 1)


def _bound_of(path: list[_Arc], sign: int) -> Bound:
    """Add up a path; `sign` -1 turns "b is at most x after a" into "a is at least -x after b"."""
    terms: list[Term] = []
    per_tick: dict[str, int] = {}
    for arc in path:
        way = sign if arc.forward else -sign
        for p in arc.promises:
            if p is SAME:
                continue
            end = p.hi_ps if arc.forward else p.lo_ps
            source = p.source if arc.forward or p.lo_source is None else p.lo_source
            terms.append(Term(p.name, p.lo_ps, p.hi_ps, way * (end or 0), source))
            tick = p.tick_hi_ps if arc.forward else p.tick_lo_ps
            for name, times in p.counts:
                per_tick[name] = per_tick.get(name, 0) + way * times * tick
    return Bound(sum(term.used_ps for term in terms), tuple(terms), per_tick)
