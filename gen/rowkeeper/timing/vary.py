"""What if: the same board with another bus clock or another grade of chip, and how far it can go.

Takes a board and the values to try; gives a `Variation`, each value planned anew, and `Reach`: the slowest bus clock,
the longest wait and grant, and the next slower grade of chip. Whether a value holds is found by planning, never by
drawing a line through two others. Must not know how values are written or drawn.
"""

from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass, replace
from fractions import Fraction

from rowkeeper.contract import Plan
from rowkeeper.reading.board import Board, Chip
from rowkeeper.timing.paths import default_delays
from rowkeeper.timing.plan import settle

__all__ = ["Point", "Reach", "Variation", "reach", "same_kind", "vary_chip", "vary_clock", "with_chip", "with_clock"]

_LEAST_CLOCK_HZ = 50_000
_CLOCK_STEP_HZ = 50_000
_MOST_WAITS = 64  # clocks
_MOST_GRANT_PS = 10**10
_GRANT_STEP_PS = 10**6
_RATED = "bus clock"  # cycle of the margins of the bus clock itself

Limit = tuple[str, str]  # symbol, and min or max


@dataclass(frozen=True, slots=True)
class Point:
    """One value: its hard margins, the worst of each limit, and the worst of all, with its situation.

    `inside`: the worst one apart from the processor's own limits on its clock.
    """

    label: str
    position: Fraction
    holds: bool
    margins_ps: Mapping[Limit, int]
    worst: Limit
    where: str
    inside: Limit
    own: bool  # the value that the board file gives


@dataclass(frozen=True, slots=True)
class Variation:
    """Points in the order of their positions. `unit`: of the positions, empty where they only count."""

    what: str
    unit: str
    points: tuple[Point, ...]


@dataclass(frozen=True, slots=True)
class Reach:
    """How far the board can go, one thing changed at a time. `None` for an end: none was found.

    `wait_open`, `grant_open`: the longest one tried still holds.
    """

    least_clock_hz: Fraction | None
    clock_step_hz: int
    most_wait_ps: int | None
    wait_open: bool
    most_grant_ps: int | None
    grant_open: bool
    slower_chip: str  # the next slower grade, empty where the board has the slowest
    slower_chip_limit: Limit | None
    slower_chip_margin_ps: int | None
    slower_chip_holds: bool


def with_clock(board: Board, hertz: Fraction) -> Board:
    """The same board on another bus clock."""
    return replace(board, bus_clock=replace(board.bus_clock, frequency_hz=hertz))


def with_chip(board: Board, chip: Chip) -> Board:
    """The same board with this chip in every bank."""
    return replace(board, banks=tuple(replace(bank, chip=chip) for bank in board.banks))


def same_kind(chip: Chip, others: Iterable[Chip]) -> tuple[Chip, ...]:
    """The grades of one kind of chip, this one among them, the fastest first."""
    found = {other.name: other for other in (*others, chip) if _kind(other) == _kind(chip)}
    return tuple(sorted(found.values(), key=lambda one: (_access_ps(one), one.name)))


def _kind(chip: Chip) -> tuple[object, ...]:
    sizes = (chip.words, chip.width, chip.row_bits, chip.column_bits, chip.refresh_rows, chip.refresh_row_bits)
    return (*sizes, chip.supplies)


def _access_ps(chip: Chip) -> int:
    return (chip.limits["tRAC"].hi_ps or 0) if "tRAC" in chip.limits else 0


Tell = Callable[[str], None]


def _silent(_text: str) -> None:
    return


def vary_clock(
    board: Board, hertz: Sequence[Fraction], label: Callable[[Fraction], str], tell: Tell = _silent
) -> Variation:
    """The bus clock at each of these frequencies and at the board's own."""
    own = board.bus_clock.frequency_hz
    points = []
    for value in sorted({*hertz, own}):
        tell(label(value))
        points.append(_point(with_clock(board, value), label(value), value / 10**6, value == own))
    return Variation("bus clock", "MHz", tuple(points))


def vary_chip(board: Board, chips: Sequence[Chip], tell: Tell = _silent) -> Variation:
    """Each of these chips in the board."""
    points = []
    for place, chip in enumerate(chips):
        tell(chip.name)
        own = all(bank.chip.name == chip.name for bank in board.banks)
        points.append(_point(with_chip(board, chip), chip.name, Fraction(place), own))
    return Variation("chip", "", tuple(points))


def _point(board: Board, label: str, position: Fraction, own: bool) -> Point:
    plan = settle(board, default_delays(board))
    hard = [m for m in plan.margins if m.kind == "hard"]
    margins: dict[Limit, int] = {}
    for m in hard:
        limit = m.symbol, m.sense
        margins[limit] = min(m.margin_ps, margins.get(limit, m.margin_ps))
    worst = min(hard, key=lambda m: (m.margin_ps, m.symbol, m.cycle, m.neighbour))
    inside = min((m for m in hard if m.cycle != _RATED), key=lambda m: (m.margin_ps, m.symbol, m.cycle), default=worst)
    where = f"{worst.cycle}, then {worst.neighbour}" if worst.neighbour else worst.cycle
    return Point(
        label, position, plan.holds, margins, (worst.symbol, worst.sense), where, (inside.symbol, inside.sense), own
    )


# --- how far the board can go ------------------------------------------------------------------------------------


def reach(board: Board, chips: Iterable[Chip], tell: Tell = _silent) -> Reach:
    """The ends, one thing changed at a time."""
    own = settle(board, default_delays(board))
    tell("slowest bus clock")
    clock = _least_clock(board, own)
    tell("longest wait")
    wait, wait_open = _most_wait(board, own)
    tell("longest grant")
    grant, grant_open = _most_grant(board, own)
    slower = _next_slower(board, chips)
    point = None if slower is None else _point(with_chip(board, slower), slower.name, Fraction(0), False)
    return Reach(
        clock, _CLOCK_STEP_HZ, wait, wait_open, grant, grant_open,
        slower.name if slower else "",
        point.inside if point else None,
        point.margins_ps[point.inside] if point else None,
        point is not None and point.holds,
    )  # fmt: skip


def _holds(board: Board) -> bool:
    """Whether the plan of this board holds, as `margins` would say of it."""
    return settle(board, default_delays(board)).holds


def _last(most: int, holds: Callable[[int], bool]) -> int:
    """The largest count up to `most` that holds, where 0 does and holding ends only once."""
    low, high = 0, most + 1
    while high - low > 1:
        middle = (low + high) // 2
        low, high = (middle, high) if holds(middle) else (low, middle)
    return low


def _least_clock(board: Board, own: Plan) -> Fraction | None:
    if not own.holds:
        return None
    begin = board.bus_clock.frequency_hz
    steps = int((begin - _LEAST_CLOCK_HZ) // _CLOCK_STEP_HZ)
    return begin - _CLOCK_STEP_HZ * _last(
        max(steps, 0), lambda count: _holds(with_clock(board, begin - _CLOCK_STEP_HZ * count))
    )


def _most_wait(board: Board, own: Plan) -> tuple[int | None, bool]:
    if not own.holds:
        return None, False
    begin, period = board.at_worst.wait_max_ps, int(10**12 / board.bus_clock.frequency_hz)

    def holds(clocks: int) -> bool:
        worst = replace(board.at_worst, wait_max_ps=begin + clocks * period)
        return _holds(replace(board, at_worst=worst))

    clocks = _last(_MOST_WAITS, holds)
    return begin + clocks * period, clocks == _MOST_WAITS


def _most_grant(board: Board, own: Plan) -> tuple[int | None, bool]:
    """Unlimited is tried first; it holds on every board that refreshes by itself in a grant."""
    begin = board.at_worst.grant_max_ps
    if not own.holds:
        return None, False

    def with_grant(span_ps: int | None) -> Board:
        return replace(board, at_worst=replace(board.at_worst, grant_max_ps=span_ps))

    if begin is None or _holds(with_grant(None)):
        return None, True
    steps = _last(
        (_MOST_GRANT_PS - begin) // _GRANT_STEP_PS,
        lambda count: _holds(with_grant(begin + count * _GRANT_STEP_PS)),
    )
    return begin + steps * _GRANT_STEP_PS, False


def _next_slower(board: Board, chips: Iterable[Chip]) -> Chip | None:
    own = max((bank.chip for bank in board.banks), key=_access_ps)
    slower = [chip for chip in same_kind(own, chips) if _access_ps(chip) > _access_ps(own)]
    return slower[0] if slower else None
