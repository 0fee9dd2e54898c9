"""Properties over many boards: what makes a design worse never makes its margins better."""

from dataclasses import replace

from hypothesis import given, settings
from hypothesis import strategies as st

from rowkeeper.contract import TickTable
from rowkeeper.reading.board import Board
from rowkeeper.timing.device import facts_of
from rowkeeper.timing.margins import Judged, judged
from rowkeeper.timing.paths import default_delays
from timing.hand_built import CHIP_4116_15, LOOM, clock, device, ns

TICKS = TickTable("counted", 3, 4, 6, 12, 1, 60, 200, 3, 17, 12, 400, 1490, 80, 20000, 8)
Key = tuple[str, ...]

few = settings(max_examples=8, deadline=None)


def table(board: Board, ticks: TickTable = TICKS) -> dict[Key, Judged]:
    """The worst case of each limit, by symbol, situation and events."""
    found: dict[Key, Judged] = {}
    for one in judged(facts_of(board, default_delays(board), ticks)):
        m = one.margin
        key = (m.symbol, m.cycle, m.neighbour, m.sense, *one.events)
        if key not in found or m.margin_ps < found[key].margin.margin_ps:
            found[key] = one
    return found


def by_case(ticks: TickTable) -> dict[Key, Judged]:
    """Every margin in every case, each under a name of its own."""
    found = judged(facts_of(LOOM, default_delays(LOOM), ticks))
    return {(m.symbol, m.cycle, m.neighbour, m.sense, *o.events, o.case): o for o in found for m in (o.margin,)}


def none_better(worse: Board, better: Board) -> None:
    now, then = table(worse), table(better)
    assert now.keys() == then.keys()
    for key, one in now.items():
        assert one.margin.margin_ps <= then[key].margin.margin_ps, key


@few
@given(st.integers(0, 5), st.integers(0, 5), st.integers(0, 5), st.integers(0, 5))
def test_wider_pads_never_help(in_lo: int, in_hi: int, out_lo: int, out_hi: int) -> None:
    """Less known of the device, no margin larger."""
    close = device((5, 10), (8, 15))
    wide = device((5 - in_lo, 10 + in_hi), (8 - out_lo, 15 + out_hi))
    none_better(replace(LOOM, device=wide), replace(LOOM, device=close))


@few
@given(st.integers(0, 8), st.integers(0, 400))
def test_a_less_certain_bus_clock_never_helps(percent: int, ppm: int) -> None:
    """Wider duty and tolerance, no margin larger."""
    duty = (f"0.{50 - percent:02d}", f"0.{50 + percent:02d}")
    none_better(replace(LOOM, bus_clock=clock("4", ppm, duty)), replace(LOOM, bus_clock=clock("4", 0, ("0.5", "0.5"))))


@few
@given(st.sampled_from(sorted(s for s, f in CHIP_4116_15.limits.items() if f.lo_ps is not None)), st.integers(1, 80))
def test_a_chip_that_asks_more_gets_the_less(symbol: str, more_ns: int) -> None:
    """A larger minimum costs its own margin just that much, and no other."""
    figure = CHIP_4116_15.limits[symbol]
    chip = replace(
        CHIP_4116_15,
        limits={**CHIP_4116_15.limits, symbol: replace(figure, lo_ps=(figure.lo_ps or 0) + (ns(more_ns) or 0))},
    )
    before, after = table(LOOM), table(replace(LOOM, banks=(replace(LOOM.banks[0], chip=chip),)))
    for key, one in after.items():
        own = key[0] == symbol and one.margin.sense == "min" and one.margin.source == figure.source
        assert one.margin.margin_ps == before[key].margin.margin_ps - (ns(more_ns) if own else 0)  # type: ignore[operator]


@few
@given(st.sampled_from(("mux", "column", "row_hold", "write_lead", "precharge", "refresh_low")), st.integers(-2, 3))
def test_the_planner_s_lines_never_promise_too_much(name: str, step: int) -> None:
    """A margin moved along its line is at most the true margin at the other ticks, case by case."""
    value = max(1, getattr(TICKS, name) + step)
    moved = replace(TICKS, **{name: value})
    if moved.mux >= moved.column:
        return
    facts = facts_of(LOOM, default_delays(LOOM), moved)
    true = {
        (o.margin.symbol, o.margin.cycle, o.margin.neighbour, o.margin.sense, *o.events, o.case): o
        for o in judged(facts)
    }
    for one in judged(facts_of(LOOM, default_delays(LOOM), TICKS)):
        m = one.margin
        key = (m.symbol, m.cycle, m.neighbour, m.sense, *one.events, one.case)
        if key in true:
            line = m.margin_ps + one.per_tick.get(name, 0) * (value - getattr(TICKS, name))
            assert line <= true[key].margin.margin_ps, key


@few
@given(st.integers(0, 3))
def test_a_wait_never_hurts_the_access(clocks: int) -> None:
    """The case without waits is always judged too, so waits can add worse cases but never hide one."""
    waiting = replace(LOOM, at_worst=replace(LOOM.at_worst, wait_max_ps=clocks * 250_000))
    now, then = table(waiting), table(LOOM)
    assert all(now[key].margin.margin_ps <= then[key].margin.margin_ps for key in then)
