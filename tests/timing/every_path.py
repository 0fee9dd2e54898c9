"""Every margin of a board as a function of all ticks at once: an outside judge of the choice of ticks.

The search learns how margins move from the tables it has tried. Here nothing is tried: the length of every simple path
through every network is worked out with the ticks left open, and a solver is asked whether any table whatever does
better. What decides which paths count is the sign of a sum of plain numbers and multiples of ticks.
"""

from collections.abc import Iterable, Iterator
from dataclasses import dataclass, replace
from heapq import heappop, heappush
from typing import Any

import pytest
import z3

from rowkeeper.contract import TickTable
from rowkeeper.timing import scenes as scenes_room
from rowkeeper.timing.arbitration import leaning_events, spare_by_notice
from rowkeeper.timing.device import Facts, counted, with_ticks
from rowkeeper.timing.limits import Rule, rules_of
from rowkeeper.timing.margins import judged
from rowkeeper.timing.network import SAME, Network, Promise
from rowkeeper.timing.refresh_bounds import timer_ticks
from rowkeeper.timing.scenes import Scene, scenes
from rowkeeper.timing.search import sorted_margins

TICKS = ("mux", "column", "row_hold", "row_setup", "write_lead", "column_rest", "refresh_low", "precharge")
TICKS += ("give_up", "column_cap")
LEAST = (1, 2, 2, 1, 1, 2, 2, 3, 1, 1)
REACH = (*(8,) * 8, 30, 30)  # the box: so far from the ticks in `Facts`
NEVER = 10**15
HOPELESS = -250_000  # what misses by more counts alike: no tick mends it

Box = tuple[tuple[int, int], ...]
Line = tuple[int, tuple[int, ...]]  # picoseconds, and picoseconds for one more of each of TICKS
NO_TICK = (0,) * len(TICKS)


@dataclass(frozen=True)
class Case:
    """The margin in one case is the largest of `lines`; the case can happen while none of `guards` is below 0.

    `cap`: where the margin is no limit any more (a longer cycle that only lowers the ambient temperature).
    """

    lines: tuple[Line, ...]
    guards: tuple[Line, ...]
    cap: int


def value(line: Line, at: tuple[int, ...]) -> int:
    return line[0] + sum(slope * tick for slope, tick in zip(line[1], at, strict=True))


# --- lengths of paths with open ticks ----------------------------------------------------------------------------


def _open_arc(promises: tuple[Promise, ...], forward: bool, weight: int, ticks: TickTable) -> Line:
    slopes = list(NO_TICK)
    for p in promises:
        for name, times in p.counts:
            slopes[TICKS.index(name)] += times * (p.tick_hi_ps if forward else -p.tick_lo_ps)
    return weight - sum(s * getattr(ticks, n) for s, n in zip(slopes, TICKS, strict=True)), tuple(slopes)


def _add(one: Line, other: Line) -> Line:
    return one[0] + other[0], tuple(a + b for a, b in zip(one[1], other[1], strict=True))


def box_of(ticks: TickTable) -> Box:
    """The tables that the solver may choose from."""
    at = (getattr(ticks, name) for name in TICKS)
    return tuple((max(least, t - reach), t + reach) for t, least, reach in zip(at, LEAST, REACH, strict=True))


def _most(line: Line, box: Box) -> int:
    """The largest value of a line in the box."""
    return line[0] + sum(s * (most if s > 0 else least) for s, (least, most) in zip(line[1], box, strict=True) if s)


def _never_shorter(one: Line, other: Line, box: Box) -> bool:
    """Whether `one` is at least `other` for all ticks in the box."""
    low = one[0] - other[0]
    if one[1] == other[1]:
        return low >= 0
    for a, b, (least, most) in zip(one[1], other[1], box, strict=True):
        if a != b:
            low += (a - b) * (least if a > b else most)
    return low >= 0


def _keep(found: list[Line], line: Line, box: Box) -> bool:
    """Add a path unless one that is never longer is known; drop those that the new one is never longer than."""
    if any(_never_shorter(line, known, box) for known in found):
        return False
    found[:] = [known for known in found if not _never_shorter(known, line, box)]
    found.append(line)
    return True


class Lengths:
    """All path lengths of one network: plain arcs are folded by shortest paths, counted arcs stay open."""

    def __init__(self, network: Network, ticks: TickTable) -> None:
        self.box, self.at = box_of(ticks), tuple(getattr(ticks, name) for name in TICKS)
        self.place = {event: i for i, event in enumerate(network.arcs)}
        size = len(self.place)
        self.plain = [[NEVER] * size for _ in range(size)]
        self.counted: list[tuple[int, int, Line]] = []
        for i in range(size):
            self.plain[i][i] = 0
        for arcs in network.arcs.values():
            for arc in arcs:
                start, end = self.place[arc.start], self.place[arc.end]
                if any(p.counts for p in arc.promises):
                    self.counted.append((start, end, _open_arc(arc.promises, arc.forward, arc.weight, ticks)))
                else:
                    self.plain[start][end] = min(self.plain[start][end], arc.weight)
        self._fold()
        self.known: dict[int, dict[int, list[Line]]] = {}

    def _fold(self) -> None:
        plain = self.plain
        for middle, through in enumerate(plain):
            for row in plain:
                first = row[middle]
                if first < NEVER:
                    for end, rest in enumerate(through):
                        if first + rest < row[end]:
                            row[end] = first + rest

    def between(self, start: str, end: str) -> list[Line]:
        """Every line of which the least is the length from `start` to `end`; none where no path leads there."""
        here, there = self.place[start], self.place[end]
        found: list[Line] = []
        if self.plain[here][there] < NEVER:
            found.append((self.plain[here][there], NO_TICK))
        for number, lines in self._from(here).items():
            rest = self.plain[self.counted[number][1]][there]
            if rest < NEVER:
                for line in lines:
                    _keep(found, (line[0] + rest, line[1]), self.box)
        return found

    def _from(self, start: int) -> dict[int, list[Line]]:
        """For each counted arc, the paths from `start` that end with it; no arc twice on a path, shortest first."""
        if start in self.known:
            return self.known[start]
        found: dict[int, list[Line]] = {}
        waiting: list[tuple[int, int, Line, int]] = []

        def walk(place: int, so_far: Line, seen: int) -> None:
            for number, (tail, _, line) in enumerate(self.counted):
                step = self.plain[place][tail]
                if step < NEVER and not seen >> number & 1:
                    longer = _add((so_far[0] + step, so_far[1]), line)
                    heappush(waiting, (value(longer, self.at), number, longer, seen | 1 << number))

        walk(start, (0, NO_TICK), 0)
        while waiting:
            _, number, line, seen = heappop(waiting)
            if _keep(found.setdefault(number, []), line, self.box):
                walk(self.counted[number][1], line, seen)
        self.known[start] = found
        return found


# --- margins with open ticks -------------------------------------------------------------------------------------


def _both_cases(
    scene: Scene, facts: Facts, one: str, other: str, words: tuple[str, str], event: str = "go"
) -> Iterator[Scene]:
    """The later of two edges, both ways, whatever the ticks; the condition of each is left open too."""
    tick = counted(facts, plus=1, at_least=True)
    condition: Any
    for first, second, wait, condition in (
        (one, other, Promise(words[0], 0, None, facts.tick_source), (scene.network, other, one, 0)),
        (other, one, tick, (scene.network, one, other, facts.tick_lo_ps)),
    ):
        network = scene.network.copy()
        network.promise(first, event, SAME)
        network.promise(second, first, wait)
        case = ", ".join(part for part in (scene.case, words[0] if first == one else words[1]) if part)
        yield replace(scene, network=network, case=case, conditions=(*scene.conditions, condition))


def margins_of(facts: Facts) -> dict[tuple[str, ...], set[Case]]:
    """Every hard margin in every case."""
    found: dict[tuple[str, ...], set[Case]] = {}
    folded: dict[int, tuple[Network, Lengths]] = {}
    box = box_of(facts.ticks)

    def lengths(network: Network) -> Lengths:
        if id(network) not in folded:
            folded[id(network)] = network, Lengths(network, facts.ticks)
        return folded[id(network)][1]

    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(scenes_room, "_later", _both_cases)
        for scene in scenes(facts):
            guards = [
                (line[0] - least, line[1])
                for network, start, end, least in scene.conditions  # type: ignore[misc]
                for line in lengths(network).between(start, end)
            ]
            if any(_most(guard, box) < 0 for guard in guards):
                continue
            inside = lengths(scene.network)
            for rule in rules_of(scene, facts):
                case = _case(scene, rule, inside, tuple(sorted(guards)), facts)
                if case is not None:
                    neighbour = scene.neighbour if rule.later.startswith("next ") else ""
                    key = (rule.symbol, scene.cycle, neighbour, rule.sense, rule.earlier, rule.later)
                    found.setdefault(key, set()).add(case)
    at = tuple(getattr(facts.ticks, name) for name in TICKS)
    slopes = tuple(-facts.tick_hi_ps if n in ("row_setup", "refresh_low", "precharge") else 0 for n in TICKS)
    for event, left in sums_of(facts, facts.ticks):
        found["arbitration", event] = {Case(((left - value((0, slopes), at), slopes),), (), NEVER)}
    return found


def _case(scene: Scene, rule: Rule, inside: Lengths, guards: tuple[Line, ...], facts: Facts) -> Case | None:
    if rule.kind != "hard":
        return None
    lower = rule.sense == "min"
    ends = (rule.later, rule.earlier) if lower else (rule.earlier, rule.later)
    asked = rule.required
    bound = asked.lo_ps if lower and not asked.counts else asked.hi_ps
    paths = inside.between(*ends)
    if bound is None or not paths:
        return None
    required, slopes = _open_arc((asked,), True, bound, facts.ticks)
    sign = 1 if lower else -1
    lines = [(-line[0] - sign * required, tuple(-a - sign * b for a, b in zip(line[1], slopes, strict=True)))
             for line in paths]  # fmt: skip
    cap = NEVER
    if rule.symbol == "tRC" and "MK4116" in asked.source.document:
        parts = [scene.chip.limits[s].lo_ps or 0 for s in ("tRAS", "tRP") if s in scene.chip.limits]
        cap = sum(parts) + 10_000 - bound  # tT twice, at the 5 ns of the sheets' own figures
    return Case(tuple(sorted(lines)), guards, cap)


# --- the question to the solver ----------------------------------------------------------------------------------


class Question:
    """Asks for a table that is lexicographically better than given worst margins."""

    def __init__(self, facts: Facts) -> None:
        self.facts = facts
        self.ticks = [z3.Int(name) for name in TICKS]
        self.groups: dict[frozenset[Case], int] = {}
        for cases in margins_of(facts).values():
            self.groups[frozenset(cases)] = self.groups.get(frozenset(cases), 0) + 1
        self.solver = z3.SolverFor("QF_LIA")
        for tick, (least, most) in zip(self.ticks, box_of(facts.ticks), strict=True):
            self.solver.add(tick >= least, tick <= most)
        self.solver.add(self.ticks[0] < self.ticks[1])

    def at_least(self, cases: frozenset[Case], margin_ps: int) -> Any:
        """Whether this margin is at least so much, in every case that can happen."""
        return z3.And([
            z3.Or(
                *(self._sum(line) < 0 for line in case.guards),
                *(self._sum(line) >= min(margin_ps, case.cap) for line in case.lines),
            )
            for case in sorted(cases, key=repr)
        ])  # fmt: skip

    def _sum(self, line: Line) -> Any:
        return z3.IntVal(line[0]) + z3.Sum([s * t for s, t in zip(line[1], self.ticks, strict=True) if s] or [0])

    def _fewer(self, margin_ps: int, most: int) -> Any:
        """At most `most` margins are below `margin_ps`."""
        if margin_ps <= HOPELESS:
            return z3.BoolVal(True)
        return z3.PbLe([(z3.Not(self.at_least(cases, margin_ps)), count) for cases, count in self.groups.items()], most)

    def better(self, worst: tuple[int, ...], distinct: int) -> TickTable | None:
        """A table that does better within the first `distinct` different values of `worst`, or None."""
        for place in sorted({worst.index(v) for v in sorted(set(worst))[:distinct]}):
            self.solver.push()
            for earlier in sorted({worst.index(v) for v in worst[: place + 1]}):
                self.solver.add(self._fewer(worst[earlier], earlier))
            self.solver.add(self._fewer(worst[place] + 1, place + worst.count(worst[place]) - 1))
            found = self._answer(worst)
            self.solver.pop()
            if found is not None:
                return found
        return None

    def _answer(self, worst: tuple[int, ...]) -> TickTable | None:
        """The solver knows nothing of the refresh timer: what leaves it no room is no answer, nor anything longer."""
        while True:
            answer = self.solver.check()
            assert answer != z3.unknown
            if answer == z3.unsat:
                return None
            at = [self.solver.model().eval(tick, model_completion=True).as_long() for tick in self.ticks]
            table = replace(self.facts.ticks, **dict(zip(TICKS, at, strict=True)))
            if timer_ticks(with_ticks(self.facts, table)).spare_ticks >= 0:
                assert worst_margins(self.facts, table) > worst, "the open margins and the judge disagree"
                return table
            growing = [i for i, name in enumerate(TICKS) if name not in ("mux", "give_up", "column_cap")]
            self.solver.add(z3.Or([self.ticks[i] < at[i] for i in growing]))


def sums_of(facts: Facts, table: TickTable) -> list[tuple[str, int]]:
    """The sums of arbitration at a table, with the bus's own set-up where those of `facts` need it.

    A sum that does not hold at the ticks of `facts` either way is refused by the plan, and no margin.
    """
    leaning = leaning_events(facts)
    now, then = (
        {one.events[0]: one.margin.margin_ps for one in spare_by_notice(with_ticks(facts, ticks), leaning)}
        for ticks in (facts.ticks, table)
    )
    return [(event, then[event]) for event, left in now.items() if left >= 0]


def worst_margins(facts: Facts, table: TickTable) -> tuple[int, ...]:
    """The sorted vector of a table, judged by the tool: hard margins and the sums of arbitration."""
    sums = [max(left, HOPELESS) for _, left in sums_of(facts, table)]
    return tuple(sorted([*sorted_margins(judged(with_ticks(facts, table))), *sums]))


def open_and_judged(facts: Facts, tables: Iterable[TickTable]) -> Iterator[tuple[list[int], list[int]]]:
    """The open margins at each table, and the judge's, both sorted: they have to be the same."""
    margins = margins_of(facts)
    for table in tables:
        at = tuple(getattr(table, name) for name in TICKS)
        values = []
        for cases in margins.values():
            live = [c for c in cases if all(value(g, at) >= 0 for g in c.guards)]
            met = [max(value(line, at) for line in c.lines) for c in live]
            met = [v for v, c in zip(met, live, strict=True) if v < c.cap]
            if met:
                values.append(max(min(met), HOPELESS))
        yield sorted(values), list(worst_margins(facts, table))
