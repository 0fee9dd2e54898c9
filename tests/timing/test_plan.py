"""The whole plan of a board: ticks chosen and given, refusals in plain words, and what holds."""

import time
from dataclasses import replace

import pytest

from rowkeeper.contract import Plan
from rowkeeper.reading.board import Bank, Board, GivenTicks
from rowkeeper.timing import default_delays, design_of, judge, refusals, settle
from rowkeeper.timing.device import facts_of
from rowkeeper.timing.margins import judged
from rowkeeper.timing.search import sorted_margins
from timing.hand_built import CHIP_4116_15, KILN, LOOM, clock, device, figures, ns, wiring

# Pads and fabric as a router gives them for this family: no minimum, 6 ns in and 8 ns out.
ROUTED_LIKE = replace(LOOM, device=device((0, 6), (0, 8)))


def plan(board: Board) -> Plan:
    return settle(board, default_delays(board))


def left(found: Plan) -> int:
    """The worst margin of the plan itself: a bus clock at its rated frequency has nothing to spare."""
    return min(m.margin_ps for m in found.margins if m.kind == "hard" and m.cycle != "bus clock")


LOOM_PLAN, KILN_PLAN = plan(ROUTED_LIKE), plan(KILN)


def test_the_loom_fits_at_100_mhz() -> None:
    """Guide figures by hand, with closer pads: mux about 4, column about 6, row end about 18, some nanoseconds left."""
    t = LOOM_PLAN.ticks
    assert LOOM_PLAN.holds
    assert refusals(LOOM_PLAN) == ()
    assert (4 <= t.mux <= 5, t.column, 16 <= t.row_end <= 24) == (True, 6, True)
    assert left(LOOM_PLAN) > 1_000


def test_the_loom_does_not_fit_at_50_mhz() -> None:
    """Guide figure by hand: 20 ns ticks are too coarse between tRAH and tCAC."""
    found = plan(replace(ROUTED_LIKE, device_clock=clock("50", 50)))
    assert not found.holds
    assert any("tCAC" in text or "tRAC" in text for text in refusals(found))


def test_the_kiln_has_tens_of_nanoseconds() -> None:
    """18.6 ns at worst at 50 MHz, where no tick can help; guide figure by hand for all the rest: about 47 ns.

    The memory address stands two ticks of the synchroniser, 2 x 19.999 ns, before any row strobe. Pad, buffer and
    settling (1.93 x 12 ohm x 40 pF = 926.4 ps) bring it at its latest, pad and buffer the strobe at its earliest.
    """
    before_any_strobe = 2 * 19_999 + (3_000 + 1_000) - (15_000 + 9_500 + 927)
    assert KILN_PLAN.holds
    assert before_any_strobe == left(KILN_PLAN) == 18_571
    rest = [
        m.margin_ps
        for m in KILN_PLAN.margins
        if m.kind == "hard" and m.cycle != "bus clock" and (m.symbol, m.cycle) != ("tASR", "any access")
    ]
    assert 30_000 < min(rest) < 60_000


@pytest.mark.parametrize("found", [LOOM_PLAN, KILN_PLAN])
def test_worst_comes_first(found: Plan) -> None:
    """Hard limits in the order of what is left of them, then reference points."""
    order = [(m.kind != "hard", m.margin_ps) for m in found.margins]
    assert order == sorted(order)


@pytest.mark.parametrize(("board", "found"), [(ROUTED_LIKE, LOOM_PLAN), (KILN, KILN_PLAN)])
def test_no_single_tick_does_better(board: Board, found: Plan) -> None:
    """Brute force beside the search: each tick of an access one up and one down, judged in full."""
    delays = default_delays(board)
    best = sorted_margins(judged(facts_of(board, delays, found.ticks)))
    for name in ("mux", "column", "write_lead", "row_setup"):
        for step in (-1, 1):
            value = getattr(found.ticks, name) + step
            if value < 1 or (name == "column" and value <= found.ticks.mux):
                continue
            other = replace(found.ticks, **{name: value})
            assert sorted_margins(judged(facts_of(board, delays, other)))[0] <= best[0], (name, step)


@pytest.mark.parametrize("mux", [3, 4, 5])
def test_mux_and_column_beat_every_other_pair(mux: int) -> None:
    """Brute force beside the search: the worst margin of every other pair is no larger."""
    delays = default_delays(ROUTED_LIKE)
    for column in range(mux + 1, 9):
        other = replace(LOOM_PLAN.ticks, mux=mux, column=column)
        assert left(judge(ROUTED_LIKE, other, delays)) <= left(LOOM_PLAN)


def test_judging_is_pure() -> None:
    """The same board, ticks and delays give the same plan."""
    delays = default_delays(ROUTED_LIKE)
    assert judge(ROUTED_LIKE, LOOM_PLAN.ticks, delays) == judge(ROUTED_LIKE, LOOM_PLAN.ticks, delays) == LOOM_PLAN


def test_given_ticks_are_kept_and_judged() -> None:
    """What the board file gives is not chosen again, however bad."""
    found = plan(replace(ROUTED_LIKE, strobes=GivenTicks("counted", mux=2, column=9, row_end=25)))
    assert (found.ticks.mux, found.ticks.column, found.ticks.row_end) == (2, 9, 25)
    assert not found.holds
    assert any(text.startswith("tRAH") for text in refusals(found))


def test_a_given_mux_leaves_the_column_open() -> None:
    """The rest is still the planner's."""
    assert plan(replace(ROUTED_LIKE, strobes=GivenTicks(mux=4))).ticks.mux == 4


def test_routed_delays_that_break_the_plan_are_seen() -> None:
    """10 ns more in one column strobe, and tCAC says so."""
    delays = default_delays(ROUTED_LIKE)
    slow = replace(delays.nets["cas_n"], window=replace(delays.nets["cas_n"].window, hi_ps=12_000))
    found = judge(ROUTED_LIKE, LOOM_PLAN.ticks, replace(delays, nets={**delays.nets, "cas_n": slow}, routed=True))
    assert (found.holds, found.routed) == (False, True)
    assert any(text.startswith("tCAC") for text in refusals(found))


# --- refusals an engineer can act on -----------------------------------------------------------------------------


def only(board: Board, start: str) -> str:
    found = [text for text in refusals(plan(board)) if text.startswith(start)]
    assert len(found) == 1, found
    return found[0]


def with_limit(**spans: tuple[object, object]) -> Board:
    chip = replace(CHIP_4116_15, limits={**CHIP_4116_15.limits, **figures(CHIP_4116_15.refresh_source, **spans)})
    return replace(ROUTED_LIKE, banks=(replace(ROUTED_LIKE.banks[0], chip=chip),))


def test_row_hold_that_cannot_be_met() -> None:
    """tRAH 90 ns instead of 20 leaves no room for the column."""
    text = only(with_limit(tRAH=(90, None)), "tRAH")
    assert "row address after the row strobe falls must be at least 90.0 ns" in text
    assert "short. Would mend it: a faster device clock" in text


def test_an_address_too_late_for_any_row_strobe() -> None:
    """Wide pads: 2 x 9.999 + 4 - 25.427 = -1.429 ns, shown as 1.5; a faster device clock would take more away."""
    text = only(LOOM, "tASR (any access)")
    assert "can be -1.5 ns: 1.5 ns short" in text
    assert "a smaller series resistor in the memory address lines, or a slower device clock." in text
    assert "a faster device clock" not in text


def test_refresh_interval_that_cannot_be_met() -> None:
    """0.5 ms for 128 rows is less than the bus's longest gap allows."""
    board = replace(
        ROUTED_LIKE, banks=(replace(ROUTED_LIKE.banks[0], chip=replace(CHIP_4116_15, refresh_ps=5 * 10**8)),)
    )
    found = plan(board)
    assert not found.holds
    assert any("refresh" in text for text in refusals(found))


def test_a_bus_clock_beyond_the_processor() -> None:
    """6 MHz on a 4 MHz grade: the processor's own limit is named, with what would mend it."""
    text = only(replace(ROUTED_LIKE, bus_clock=clock("6")), "TcC")
    assert "83.4 ns short. Would mend it: a slower bus clock" in text


def test_the_bus_clock_is_refused_before_all_else() -> None:
    """Where the processor's own limits are broken, nothing after them can be believed."""
    texts = refusals(plan(replace(ROUTED_LIKE, bus_clock=clock("6"))))
    assert texts[0].startswith(("TcC", "TwCh", "TwCl"))


def test_BUSREQ_not_wired() -> None:
    """About 200 ns of a refresh run into the next access; wiring the line mends it."""
    text = only(replace(ROUTED_LIKE, wiring=wiring(7, busreq=False)), "end of a grant")
    assert "BUSREQ is not wired" in text
    assert "Would mend it: wire BUSREQ to the device, which rises earlier." in text


def test_a_strobe_passed_straight_through_is_not_generated() -> None:
    """Judged all the same, and refused with each reason."""
    text = only(replace(ROUTED_LIKE, strobes=GivenTicks("straight")), "strobe style straight")
    assert "unaligned reset" in text
    assert "refresh of our own" in text


def test_no_timer_and_an_unlimited_reset() -> None:
    """No row is refreshed in reset: never within the interval."""
    assert "standby own-timer" in only(replace(ROUTED_LIKE, standby="none"), "refresh:")


def test_two_banks_are_not_generated() -> None:
    """Said, not ignored."""
    bank = ROUTED_LIKE.banks[0]
    board = replace(ROUTED_LIKE, banks=(bank, Bank(1, bank.chip, 8, 0x8000, 16384)))
    assert "one bank is generated" in only(board, "2 banks")


def test_a_wait_longer_than_the_column_strobe_may_last() -> None:
    """20 us of wait on a chip whose tCAS maximum is 10 us."""
    board = replace(ROUTED_LIKE, at_worst=replace(ROUTED_LIKE.at_worst, wait_max_ps=ns(20_000) or 0))
    assert "too long. Would mend it: shorter waits" in only(board, "tCAS (")


# --- what the rest of the house gets -----------------------------------------------------------------------------


def test_why_no_wait_output_is_needed() -> None:
    """A plan that holds says how refresh and access keep apart."""
    notes = [note.text for note in LOOM_PLAN.notes if note.topic == "no wait output"]
    assert len(notes) == 1
    assert "over before the first access after end of a grant" in notes[0]


def test_the_short_reset_of_the_kiln_is_noted() -> None:
    """256 rows in 4 ms at 2.5 MHz leave no room for a reset that ends at the worst moment."""
    assert "short reset" in {note.topic for note in KILN_PLAN.notes}
    assert "short reset" not in {note.topic for note in LOOM_PLAN.notes}


def test_design_of_the_loom() -> None:
    """16 KiB at 0xC000: two address bits compared, both set."""
    found = design_of(LOOM, LOOM_PLAN.ticks)
    assert (found.window_bits, found.window_value, found.address_bits) == (2, 3, 16)
    assert (found.row_bits, found.column_bits, found.refresh_bits) == (7, 7, 7)
    assert (found.has_busreq, found.has_busack, found.has_reset, found.standby) == (True, True, True, True)


def test_design_of_the_kiln() -> None:
    """64 KiB is the whole space: nothing to compare; eight bits of refresh row."""
    found = design_of(KILN, KILN_PLAN.ticks)
    assert (found.window_bits, found.window_value, found.refresh_bits) == (0, 0, 8)


@pytest.mark.speed
def test_the_margin_table_is_quick() -> None:
    """Aim: the whole table within 0.3 s, ticks chosen within 2 s."""
    start = time.perf_counter()
    judge(ROUTED_LIKE, LOOM_PLAN.ticks, default_delays(ROUTED_LIKE))
    table = time.perf_counter() - start
    start = time.perf_counter()
    plan(ROUTED_LIKE)
    assert (table < 0.3, time.perf_counter() - start < 2.0) == (True, True)
