"""What stands on the board now: guaranteed windows of its delay networks, beside those of the replacement.

Takes a board with an `original` section and the plan of its replacement; gives an `OriginalReport`. Nothing in here is
judged: the worn board is shown for what it relied on. Must not know how the plan was found.
"""

from collections.abc import Iterable
from dataclasses import replace
from decimal import ROUND_HALF_EVEN
from fractions import Fraction
from typing import Literal

from rowkeeper.contract import Margin, OriginalDelay, OriginalLimit, OriginalReport, OriginalStage, Plan
from rowkeeper.reading.board import Board, LogicLevel, Original, RcDelay
from rowkeeper.reading.figures import Mark
from rowkeeper.timing.resistor_capacitor import Crossing, Network, Span, crossing, exact_ps

__all__ = ["delay_windows", "network_of", "original_report"]

Edge = Literal["rising", "falling"]
_NONE: Span = (Fraction(0), Fraction(0))
_READS = ("memory read", "opcode fetch", "interrupt acknowledge")


def original_report(board: Board, plan: Plan) -> OriginalReport | None:
    """Windows and limits, or None where the board file does not say what stands there."""
    original = board.original
    if original is None:
        return None
    select, column = delay_windows(original.row_to_select), delay_windows(original.select_to_column)
    return OriginalReport((*select, *column), tuple(_limits(board, original, plan, _hull(select), _hull(column))))


# --- one delay ---------------------------------------------------------------------------------------------------


def delay_windows(delay: RcDelay) -> tuple[OriginalDelay, ...]:
    """The window of every edge that counts."""
    edges: tuple[Edge, ...] = ("rising", "falling") if delay.edge == "both" else (delay.edge,)
    return tuple(_window(delay, edge) for edge in edges)


def network_of(delay: RcDelay, edge: Edge, supply_mv: int, currents: bool, driver: bool) -> Network:
    """The network of one edge at one supply; input current and the driver's own resistance counted or not."""
    rises, family, output = edge == "rising", delay.input, delay.driver
    high, low = _at(output.high, supply_mv), _at(output.low, supply_mv)
    high_ohm, low_ohm = (_span(*output.high_milliohm), _span(*output.low_milliohm)) if driver else (_NONE, _NONE)
    feeds = _span(-family.input_high_ua, family.input_low_ua) if currents else _NONE
    before = _span(0, family.input_low_ua) if rises else _span(-family.input_high_ua, 0)
    return Network(
        rises,
        _toleranced(delay.resistance_milliohm, delay.resistance_tolerance),
        _toleranced(delay.capacitance_ff, delay.capacitance_tolerance),
        _at(family.rising if rises else family.falling, supply_mv),
        low if rises else high,
        high if rises else low,
        low_ohm if rises else high_ohm,
        high_ohm if rises else low_ohm,
        before if currents else _NONE,
        feeds,
    )


def _span(low: int, high: int) -> Span:
    return Fraction(low), Fraction(high)


def _at(levels: tuple[LogicLevel, LogicLevel], supply_mv: int) -> Span:
    return levels[0].at(supply_mv), levels[1].at(supply_mv)


def _toleranced(value: int, tolerance: Fraction) -> Span:
    return value * (1 - tolerance), value * (1 + tolerance)


def _supplies(delay: RcDelay) -> tuple[int, ...]:
    """Both ends of the supply that both families allow: they share it."""
    low = max(delay.input.supply_min_mv, delay.driver.supply_min_mv)
    high = min(delay.input.supply_max_mv, delay.driver.supply_max_mv)
    return (low, high) if low <= high else (delay.input.supply_min_mv, delay.input.supply_max_mv)


def _over_supplies(delay: RcDelay, edge: Edge, currents: bool, driver: bool) -> Crossing:
    found = [crossing(network_of(delay, edge, supply, currents, driver)) for supply in _supplies(delay)]
    earliest = [one.earliest_ps for one in found if one.earliest_ps is not None]
    latest = [one.latest_ps for one in found]
    known = [ps for ps in latest if ps is not None]
    slopes = [one.slowest_ps_per_v for one in found if one.slowest_ps_per_v is not None]
    return Crossing(
        min(earliest, default=None),
        max(known) if len(known) == len(latest) else None,
        next((one.never for one in found if one.never is not None), None),
        any(one.at_once for one in found),
        max(slopes, default=None),
    )


def _window(delay: RcDelay, edge: Edge) -> OriginalDelay:
    plain = _over_supplies(delay, edge, currents=False, driver=False)
    with_current = _over_supplies(delay, edge, currents=True, driver=False)
    whole = _over_supplies(delay, edge, currents=True, driver=True)
    earliest = None if whole.earliest_ps is None else whole.earliest_ps + delay.gate_lo_ps
    latest = None if whole.latest_ps is None else whole.latest_ps + delay.gate_hi_ps
    stages = [
        OriginalStage("thresholds, R and C at their ends", plain.earliest_ps, plain.latest_ps),
        OriginalStage("and the current of the input", with_current.earliest_ps, with_current.latest_ps),
        OriginalStage("and the driver's own resistance", whole.earliest_ps, whole.latest_ps),
    ]
    if delay.gate_hi_ps:
        stages.append(OriginalStage("and the gates behind it", earliest, latest))
    sources = dict.fromkeys((*delay.input.sources, *delay.driver.sources))
    return OriginalDelay(
        delay.name,
        edge,
        _network_text(delay),
        tuple(stages),
        earliest,
        latest,
        _nominal(delay, edge),
        _never(delay, edge, whole),
        tuple(_remarks(delay, whole)),
        tuple(sources),
        any(source.mark is Mark.MEMORY for source in sources),
    )


def _number(value: Fraction, places: int = 3) -> str:
    text = f"{float(value):.{places}f}"
    return text.rstrip("0").rstrip(".") if "." in text else text


def _network_text(delay: RcDelay) -> str:
    r, c = Fraction(delay.resistance_milliohm, 1000), Fraction(delay.capacitance_ff, 1000)
    r_share, c_share = 100 * delay.resistance_tolerance, 100 * delay.capacitance_tolerance
    drives = "" if delay.driver == delay.input else f", driven by {delay.driver.name}"
    return (
        f"{_number(r)} ohm +/- {_number(r_share)} %, {_number(c)} pF +/- {_number(c_share)} % into "
        f"{delay.input.name}{drives}"
    )


def _nominal(delay: RcDelay, edge: Edge) -> int | None:
    """What a usual part does, without its currents: shown, never judged."""
    if delay.input.nominal is None or delay.driver.nominal is None or (delay.input.schmitt and edge == "falling"):
        return None  # the usual threshold of a Schmitt input is that of the rising edge
    supply = sum(_supplies(delay)) // 2
    threshold = delay.input.nominal[0].at(supply)
    high, low = (level.at(supply) for level in delay.driver.nominal[1:])
    start, end = (low, high) if edge == "rising" else (high, low)
    if not min(start, end) < threshold < max(start, end):
        return None
    ratio = (end - start) / (end - threshold)
    exact = exact_ps(Fraction(delay.resistance_milliohm), Fraction(delay.capacitance_ff), ratio)
    return int(exact.to_integral_value(ROUND_HALF_EVEN))


def _volts(millivolts: Fraction) -> str:
    return f"{_number(millivolts / 1000)} V"


def _never(delay: RcDelay, edge: Edge, whole: Crossing) -> str:
    if whole.never is None:
        return ""
    settled, threshold = whole.never
    return (
        f"NEVER in this corner: {edge}, the input of {delay.input.name} settles at {_volts(settled)}, which is not "
        f"{'below' if edge == 'falling' else 'above'} a threshold of {_volts(threshold)}"
    )


def _remarks(delay: RcDelay, whole: Crossing) -> Iterable[str]:
    allowed = delay.input.slowest_edge_ps_per_v
    slowest = whole.slowest_ps_per_v
    if not delay.input.schmitt and allowed is not None and slowest is not None and slowest > allowed:
        yield (
            f"the edge may cross the threshold at {_number(slowest / 1000, 0)} ns/V; {delay.input.name} takes "
            f"{_number(Fraction(allowed, 1000))} ns/V: it may switch more than once; only a Schmitt input may follow "
            "such a network"
        )
    if whole.at_once:
        yield "in some corner the input never was on the other side of its threshold: the delay may be nothing"


# --- beside the replacement --------------------------------------------------------------------------------------


def _hull(delays: Iterable[OriginalDelay]) -> tuple[int | None, int | None]:
    """Earliest and latest over the edges that count."""
    found = list(delays)
    earliest = [delay.earliest_ps for delay in found if delay.earliest_ps is not None]
    latest = [delay.latest_ps for delay in found if delay.latest_ps is not None]
    return min(earliest, default=None), max(latest) if len(latest) == len(found) else None


def _plus(one: int | None, other: int | None) -> int | None:
    return None if one is None or other is None else one + other


def _limits(
    board: Board,
    original: Original,
    plan: Plan,
    select: tuple[int | None, int | None],
    column: tuple[int | None, int | None],
) -> Iterable[OriginalLimit]:
    """tRAH, tASC, tRCD and the data after the row strobe, limit by limit."""
    fastest, slowest = original.multiplexer_lo_ps, original.multiplexer_hi_ps
    unknown = "the multiplexer's own delay is not in the board file" if slowest is None else ""
    row_hold = _plus(select[0], fastest), _plus(select[1], slowest or 0)
    column_stands = _plus(column[0], -(slowest or 0)), _plus(column[1], -fastest)
    strobe = _plus(select[0], column[0]), _plus(select[1], column[1])
    yield from _limit(board, plan, "tRAH", "row address after the row strobe", "min", row_hold)
    yield from _limit(board, plan, "tASC", "column address before the column strobe", "min", column_stands, unknown)
    yield from _limit(board, plan, "tRCD", "row strobe to column strobe", "min", strobe)
    yield from _limit(board, plan, "tRCD", "row strobe to column strobe", "max", strobe)
    yield from _data(board, plan, strobe)


def _limit(
    board: Board,
    plan: Plan,
    symbol: str,
    what: str,
    sense: Literal["min", "max"],
    window: tuple[int | None, int | None],
    note: str = "",
) -> Iterable[OriginalLimit]:
    figure = board.banks[0].chip.limits.get(symbol)
    required = None if figure is None else figure.lo_ps if sense == "min" else figure.hi_ps
    if figure is None or required is None:
        return
    low, high = window
    margin = _plus(low, -required) if sense == "min" else None if high is None else required - high
    ours = _ours(plan, symbol, sense)
    yield OriginalLimit(
        symbol,
        what,
        sense,
        "reference" if sense == "max" else "hard",
        required,
        low,
        high,
        margin,
        None if ours is None else ours.earliest_ps,
        None if ours is None else ours.latest_ps,
        None if ours is None else ours.margin_ps,
        figure.source,
        note,
    )


def _ours(plan: Plan, symbol: str, sense: str) -> Margin | None:
    """The replacement's worst case of a limit; what is a reference is read off reads, which it concerns."""
    found = [m for m in plan.margins if m.symbol == symbol and m.sense == sense]
    if sense == "max":
        found = [m for m in found if m.cycle in _READS] or found
    else:
        found = [m for m in found if "refresh" not in m.cycle] or found
    return min(found, key=lambda m: (m.margin_ps, m.cycle, m.neighbour), default=None)


def _data(board: Board, plan: Plan, strobe: tuple[int | None, int | None]) -> Iterable[OriginalLimit]:
    """Data after the row strobe fell: the column strobe at its latest and tCAC, against tRAC."""
    limits = board.banks[0].chip.limits
    access, after_column = limits.get("tRAC"), limits.get("tCAC")
    if access is None or after_column is None or access.hi_ps is None or after_column.hi_ps is None:
        return
    for limit in _limit(board, plan, "tRCD", "data after the row strobe, tRCD and tCAC", "max", strobe):
        add = after_column.hi_ps
        theirs = limit.original_latest_ps
        ours = limit.replacement_latest_ps
        yield replace(
            limit,
            symbol="tCAC",
            required_ps=access.hi_ps,
            original_earliest_ps=None,
            original_latest_ps=_plus(theirs, add),
            original_margin_ps=None if theirs is None else access.hi_ps - theirs - add,
            replacement_earliest_ps=None,
            replacement_latest_ps=_plus(ours, add),
            replacement_margin_ps=None if ours is None else access.hi_ps - ours - add,
            source=access.source,
            note="later than tRAC the data waits for the column strobe: the access is slower, not wrong",
        )
