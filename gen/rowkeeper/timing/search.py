"""The choice of ticks: the largest worst margin, then the next worst, and so on; then fewer ticks.

Takes `Facts` and the ticks given by hand; gives a tick table for access and refresh (not for the timer). Every margin
is the sum of promises on one path of a network, so it moves in a straight line with each tick until another path
takes over. The search keeps every such line it has met, picks the best table by those lines, has it judged in full,
learns new lines, and stops when the pick has been judged. A kept line is never above the true margin, so nothing is
promised that the judge does not confirm. Must not know the board file.
"""

from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass, field, replace

from rowkeeper.contract import TickTable
from rowkeeper.reading.board import Chip, GivenTicks
from rowkeeper.timing.arbitration import leaning_events, spare_by_notice
from rowkeeper.timing.device import Facts, with_ticks
from rowkeeper.timing.margins import Judged, judged
from rowkeeper.timing.refresh_bounds import spare_by_service
from rowkeeper.timing.scenes import chips_of

__all__ = ["best_ticks", "first_guess", "patient", "sorted_margins"]

_ROUNDS = 8
_REACH = 8  # how far from the guess each tick is tried
_CHOSEN = ("mux", "column", "row_hold", "row_setup", "write_lead", "column_rest", "refresh_low", "precharge")
_LEAST = {"mux": 1, "column": 2, "row_hold": 2, "row_setup": 1, "write_lead": 1, "column_rest": 2}
_LEAST |= {"refresh_low": 2, "precharge": 3}
_HOPELESS = -250_000  # ticks cannot mend what misses by more: all such margins count alike
_NEVER = 10**15  # a case that cannot happen has time without end
_TRADES = ((1, -1), (1, -2), (2, -1), (1, 1), (-1, -1))
_SINGLES = ((1, 0), (-1, 0), (2, 0), (-2, 0))
_PATIENCE_CLOCKS = 1  # bus clocks to spare before an access is given up or a column strobe ended

Line = tuple[int, tuple[tuple[int, int], ...]]  # constant, and picoseconds per tick of each of _CHOSEN that counts
Case = tuple[tuple[Line, ...], tuple[Line, ...]]  # the margin's lines, and what must not be negative for it to happen
Group = tuple[tuple[Case, ...], int]  # the cases of a margin, and how many margins move so
Key = tuple[str, ...]
Worth = tuple[int, list[int], int]


@dataclass(slots=True)
class _Lines:
    """Lines met so far of each hard margin, case by case, and the guards of each case."""

    margins: dict[Key, dict[str, set[Line]]] = field(default_factory=dict)
    guards: dict[tuple[Key, str], set[Line]] = field(default_factory=dict)

    def learn(self, ticks: TickTable, found: Iterable[Judged]) -> None:
        for one in found:
            if one.margin.kind != "hard":
                continue
            key = _key(one)
            line = _line(ticks, one.margin.margin_ps, one.per_tick)
            self.margins.setdefault(key, {}).setdefault(one.case, set()).add(line)
            guards = self.guards.setdefault((key, one.case), set())
            guards.update(_line(ticks, c.total_ps, c.per_tick) for c in one.conditions)

    def grouped(self) -> list[Group]:
        """Margins that move alike are worked out once; those that no tick moves are left out.

        A guard's line is never below the true guard, so any of them that is negative rules the case out.
        """
        groups: dict[tuple[Case, ...], int] = {}
        for key, cases in self.margins.items():
            each = {(_apart(lines, max), _apart(self.guards[key, case], min)) for case, lines in cases.items()}
            group = tuple(sorted(each))
            groups[group] = groups.get(group, 0) + 1
        return [group for group in groups.items() if any(_moves(group, i) for i in range(len(_CHOSEN)))]


def _apart(lines: Iterable[Line], which: Callable[[int, int], int]) -> tuple[Line, ...]:
    """Of lines that run side by side only the one that counts."""
    kept: dict[tuple[tuple[int, int], ...], int] = {}
    for constant, slopes in lines:
        kept[slopes] = which(kept[slopes], constant) if slopes in kept else constant
    return tuple(sorted((constant, slopes) for slopes, constant in kept.items()))


def _key(one: Judged) -> Key:
    """What makes a margin one margin, whatever case it is in."""
    m = one.margin
    return (m.symbol, m.cycle, m.neighbour, m.sense, *one.events)


def _line(ticks: TickTable, value_ps: int, per_tick: Mapping[str, int]) -> Line:
    slopes = tuple((i, per_tick[name]) for i, name in enumerate(_CHOSEN) if per_tick.get(name))
    return value_ps - sum(slope * getattr(ticks, _CHOSEN[i]) for i, slope in slopes), slopes


def _at(line: Line, at: tuple[int, ...]) -> int:
    total, slopes = line
    for i, slope in slopes:
        total += slope * at[i]
    return total


def sorted_margins(found: Iterable[Judged]) -> tuple[int, ...]:
    """Hard margins, the worst case of each, worst first: what one plan is compared to another by."""
    worst: dict[Key, int] = {}
    for one in found:
        if one.margin.kind == "hard":
            key = _key(one)
            worst[key] = min(one.margin.margin_ps, worst.get(key, _NEVER))
    return tuple(sorted(max(value, _HOPELESS) for value in worst.values()))


def _value(group: Group, at: tuple[int, ...]) -> int:
    """The worst case of a margin."""
    worst = _NEVER
    for lines, guards in group[0]:
        value = _at(lines[0], at) if len(lines) == 1 else max([_at(line, at) for line in lines])
        if value < worst and all([_at(guard, at) >= 0 for guard in guards]):  # noqa: C419  # a list is quicker here
            worst = value
    return max(worst, _HOPELESS)


@dataclass(slots=True)
class _Goal:
    """What a table is worth by the lines met so far: room for the timer, the sorted margins, then fewer ticks."""

    groups: list[Group]
    room: Callable[[tuple[int, ...]], int]

    def values(self, at: tuple[int, ...]) -> list[int]:
        """Every margin that moves, worst first."""
        values: list[int] = []
        for group in self.groups:
            values += [_value(group, at)] * group[1]
        values.sort()
        return values

    def worth(self, at: tuple[int, ...]) -> Worth:
        return self.room(at), self.values(at), -sum(at)

    def beats(self, at: tuple[int, ...], best: Worth) -> Worth | None:
        """The worth of `at` where it is more than `best`; a margin below the worst of `best` ends it early."""
        if best[0] < 0:
            worth = self.worth(at)
            return worth if worth > best else None
        least = best[1][0] if best[1] else -_NEVER
        values: list[int] = []
        for place, group in enumerate(self.groups):
            value = _value(group, at)
            if value < least:
                if place:  # it is likely to end the next comparison as well
                    self.groups.insert(0, self.groups.pop(place))
                return None
            values += [value] * group[1]
        values.sort()
        worth = 0, values, -sum(at)
        return worth if worth > best and self.room(at) == 0 else None

    def about(self, i: int) -> "_Goal":
        """Margins that a tick does not move are the same on both sides of a comparison and fall out of it."""
        return _Goal([group for group in self.groups if _moves(group, i)], self.room)


# --- the first guess ---------------------------------------------------------------------------------------------


def _up(ps: int, tick_ps: int) -> int:
    return -(-ps // tick_ps)


def first_guess(facts: Facts, given: GivenTicks) -> TickTable:
    """Ticks that keep each limit on its own, were all paths as far apart as they can be."""
    tick = facts.tick_lo_ps
    outputs = [facts.paths[n] for n in ("ras_n", "cas_n", "we_n", "ma")]
    spread = max(p.hi_ps for p in outputs) - min(p.lo_ps for p in outputs)

    def ticks_for(*symbols: str) -> int:
        return max(1, *(_up(_asked(chips_of(facts), s) + spread, tick) for s in symbols))

    mux = given.mux or ticks_for("tRAH")
    column = given.column or max(mux + ticks_for("tASC"), ticks_for("tRCD"))
    row_hold = max(ticks_for("tRSH"), ticks_for("tRAS") - column, ticks_for("tCAS") - 1, ticks_for("tCSH") - column - 1)
    if given.row_end is not None:
        row_hold = given.row_end - column
    period = facts.clock.period_hi_ps
    longest = _up((6 * period + facts.board.at_worst.wait_max_ps), tick)
    return TickTable(
        given.style or "counted",
        row_setup=ticks_for("tASR"),
        mux=mux,
        column=column,
        row_hold=row_hold,
        write_lead=ticks_for("tWCS"),
        give_up=longest,
        column_cap=longest,
        column_rest=max(2, ticks_for("tCRP", "tCPN") - column),
        refresh_low=ticks_for("tRAS"),
        precharge=max(3, ticks_for("tRP")),
        standby=1,
        forced=1,
        reset_settle=1,
        pause=1,
        warm_up_cycles=1,
    )


def _asked(chips: tuple[Chip, ...], symbol: str) -> int:
    return max((chip.limits[symbol].lo_ps or 0) if symbol in chip.limits else 0 for chip in chips)


# --- the search --------------------------------------------------------------------------------------------------


def best_ticks(facts: Facts, given: GivenTicks) -> TickTable:
    """The best table found; its margins may still be negative, and then they are the least bad ones met."""
    ticks = first_guess(facts, given)
    lines = _Lines()
    # What even the shortest ticks cannot keep is refused; it does not take time away from the limits that can be kept.
    # A sum that only holds with the bus's own set-up is kept with it.
    begin = with_ticks(facts, ticks)
    leaning = leaning_events(begin)
    kept = {one.events for one in spare_by_notice(begin, leaning) if one.margin.margin_ps >= 0}
    room = _room(facts, ticks)
    met: dict[TickTable, tuple[int, tuple[int, ...], int]] = {}
    for _ in range(_ROUNDS):
        now = with_ticks(facts, ticks)
        found = [*judged(now), *(one for one in spare_by_notice(now, leaning) if one.events in kept)]
        at = tuple(getattr(ticks, name) for name in _CHOSEN)
        met[ticks] = room(at), sorted_margins(found), -sum(at)
        lines.learn(ticks, found)
        ticks = patient(facts, _pick(_Goal(lines.grouped(), room), ticks, given), found)
        if ticks in met:
            break
    return max(met, key=lambda table: met[table])


def _room(facts: Facts, start: TickTable) -> Callable[[tuple[int, ...]], int]:
    """Ticks that a table lacks for the refresh timer, as a number below 0; 0 where there is room.

    Room for the timer comes before any margin, unless the ticks to start from leave none either.
    """
    if spare_by_service(with_ticks(facts, start)) >= 0:
        known: dict[tuple[int, ...], int] = {}

        def room(at: tuple[int, ...]) -> int:
            if at not in known:
                known[at] = min(spare_by_service(with_ticks(facts, _table(start, at))), 0)
            return known[at]

        return room
    return lambda _: 0


def patient(facts: Facts, ticks: TickTable, found: Iterable[Judged]) -> TickTable:
    """`give_up` and `column_cap`: a bus clock later than the bus can need, and no later."""
    spare = _PATIENCE_CLOCKS * facts.clock.period_hi_ps
    for symbol, name in (("give up", "give_up"), ("column cap", "column_cap")):
        margins = [one.margin.margin_ps for one in found if one.margin.symbol == symbol]
        if margins:
            step = _up(spare - min(margins), facts.tick_lo_ps)
            ticks = replace(ticks, **{name: max(getattr(ticks, name) + step, ticks.row_end + ticks.write_lead + 2)})
    return ticks


def _pick(goal: _Goal, start: TickTable, given: GivenTicks) -> TickTable:
    """The best table by the lines met so far.

    For each column tick every other tick is moved in turn until none gets better; then single moves and trades of one
    tick for another, until neither helps.
    """
    near = tuple(getattr(start, name) for name in _CHOSEN)
    best, worth = near, goal.worth(near)
    columns = [given.column] if given.column is not None else _span(near[1], _LEAST["column"])
    for column in columns:
        choice = _settle(goal, (near[0], column, *near[2:]), near, given)
        one = goal.beats(choice, worth)
        if one is not None:
            best, worth = choice, one
    return _table(start, _traded(goal, best, worth, given))


def _table(start: TickTable, at: tuple[int, ...]) -> TickTable:
    """The same table with these ticks in the order of _CHOSEN."""
    mux, column, row_hold, row_setup, write_lead, column_rest, refresh_low, precharge = at
    return replace(
        start,
        mux=mux,
        column=column,
        row_hold=row_hold,
        row_setup=row_setup,
        write_lead=write_lead,
        column_rest=column_rest,
        refresh_low=refresh_low,
        precharge=precharge,
    )


def _traded(goal: _Goal, at: tuple[int, ...], worth: Worth, given: GivenTicks) -> tuple[int, ...]:
    """What single moves cannot reach: one tick more here for some fewer or more there, until nothing gets better."""
    open_ticks = [i for i, name in enumerate(_CHOSEN) if not _given(given, name)]
    if given.row_end is not None and given.column is None:
        open_ticks.remove(1)  # the column tick and the hold would have to move together
    before: tuple[int, ...] | None = None
    while at != before:
        before = at
        for i in open_ticks:
            for j in open_ticks:
                for step, other in _TRADES if i != j else _SINGLES:
                    choice = list(at)
                    choice[i] += step
                    choice[j] += other
                    if choice[0] >= choice[1] or any(choice[k] < _LEAST[_CHOSEN[k]] for k in (i, j)):
                        continue
                    one = goal.beats(tuple(choice), worth)
                    if one is not None:
                        at, worth = tuple(choice), one
            for step in (1, 2):
                made = _made_room(goal, (*at[:i], at[i] + step, *at[i + 1 :]), [j for j in open_ticks if j != i])
                one = goal.beats(made, worth)
                if one is not None:
                    at, worth = made, one
    return at


def _made_room(goal: _Goal, at: tuple[int, ...], payers: list[int]) -> tuple[int, ...]:
    """Fewer of other ticks, where it hurts the margins least, until the refresh timer has room again."""
    while goal.room(at) < 0:
        choices = [(*at[:j], at[j] - 1, *at[j + 1 :]) for j in payers if at[j] > _LEAST[_CHOSEN[j]]]
        choices = [choice for choice in choices if choice[0] < choice[1]]
        if not choices:
            break
        at = max(choices, key=lambda choice: (goal.values(choice), -sum(choice)))
    return at


def _span(ticks: int, least: int) -> range:
    return range(max(least, ticks - _REACH), ticks + _REACH + 1)


def _settle(goal: _Goal, at: tuple[int, ...], near: tuple[int, ...], given: GivenTicks) -> tuple[int, ...]:
    """Every tick but the column's, each at its best while the others stay, until nothing moves."""
    column = at[1]
    mux = min(at[0], column - 1) if given.mux is None else given.mux
    hold = at[2] if given.row_end is None else max(_LEAST["row_hold"], given.row_end - column)
    at = (mux, column, hold, *at[3:])
    open_ticks = [i for i, name in enumerate(_CHOSEN) if name != "column" and not _given(given, name)]
    goals = {i: goal.about(i) for i in open_ticks}
    before: tuple[int, ...] | None = None
    while at != before:
        before = at
        for i in open_ticks:
            worth = goals[i].worth(at)
            for value in range(1, column) if i == 0 else _span(near[i], _LEAST[_CHOSEN[i]]):
                choice = (*at[:i], value, *at[i + 1 :])
                one = goals[i].beats(choice, worth)
                if one is not None:
                    at, worth = choice, one
    return at


def _given(given: GivenTicks, name: str) -> bool:
    return getattr(given, {"row_hold": "row_end"}.get(name, name), None) is not None


def _moves(group: Group, i: int) -> bool:
    return any(index == i for lines, guards in group[0] for line in (*lines, *guards) for index, _ in line[1])
