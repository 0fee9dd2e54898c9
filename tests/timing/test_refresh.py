"""Refresh bounds and arbitration: drought, the timer's ticks, and the sums at the end of grant and reset."""

from dataclasses import replace
from fractions import Fraction

import pytest

from rowkeeper.contract import ArbitrationSum, TickTable
from rowkeeper.reading.board import Board
from rowkeeper.reading.figures import Mark
from rowkeeper.timing.arbitration import arbitration
from rowkeeper.timing.device import Facts, facts_of
from rowkeeper.timing.paths import default_delays
from rowkeeper.timing.refresh_bounds import (
    drought_of,
    least_bus_clock_hz,
    refresh_bounds,
    short_grant_clocks,
    timer_ticks,
)
from timing.hand_built import KILN, LOOM, wiring

TICKS = TickTable("counted", 3, 4, 6, 12, 1, 60, 200, 3, 17, 12, 400, 1490, 80, 20000, 8)
TICK_LO, TICK_HI = 9_999, 10_001
PERIOD_LO, PERIOD_HI = 249_975, 250_026
IN_LO, IN_HI = 2_500, 16_300
OWN_REFRESH = (3 + 17 + 12) * TICK_HI
EDGE = 12_000  # a driven edge of 10 ns/V, from 0.8 to 2.0 V


def facts(board: Board = LOOM, ticks: TickTable = TICKS) -> Facts:
    return facts_of(board, default_delays(board), ticks)


@pytest.mark.parametrize(("rows", "megahertz"), [(64, "0.608"), (128, "1.216"), (256, "2.432")])
def test_slowest_clock_whose_own_refreshes_are_enough(rows: int, megahertz: str) -> None:
    """Outside figures (published sheets): 19 clocks between refreshes, all rows in 2 ms."""
    assert Fraction(megahertz) * 10**6 == least_bus_clock_hz(rows, 2 * 10**9, 19)


def test_a_sweep_of_the_running_bus() -> None:
    """128 rows, 19 clocks of at most 250.026 ns apart: 0.608 ms of the 2 ms."""
    bounds = refresh_bounds(facts(), drought_of(facts(), 80, short_resets=False))
    assert 128 * 19 * PERIOD_HI == bounds.running_age_ps == 608_063_232


def test_grants_of_two_clocks_are_too_short_to_use() -> None:
    """BUSREQ low for one clock less TsBUSREQ leaves 200 ns; BUSACK is seen within 100 + 16.3 + 30."""
    assert short_grant_clocks(facts()) == 2
    assert short_grant_clocks(facts(KILN)) == 2


def test_drought_of_the_loom() -> None:
    """21 clocks, five grants of two, a reset seen and settled, one request early and the next late."""
    found = drought_of(facts(), 80, short_resets=False)
    reset = (80 + 3) * TICK_HI + IN_HI
    jitter = 85_000 + (IN_HI - IN_LO) + TICK_HI
    total = (21 + 10) * PERIOD_HI + reset + jitter
    assert -(-total // TICK_LO) + 1 == found.ticks


def test_a_short_reset_adds_its_restart() -> None:
    """One clock to be seen, two of restart, three to the refresh of the fetch: six more clocks."""
    longer, plain = (drought_of(facts(), 80, short_resets=s) for s in (True, False))
    assert sum(t.used_ps for t in longer.terms) - sum(t.used_ps for t in plain.terms) == 6 * PERIOD_HI


def test_waits_count_in_every_cycle_of_the_gap() -> None:
    """A wait of 300 ns makes two clocks of wait in each of five cycles."""
    waiting = replace(LOOM, at_worst=replace(LOOM.at_worst, wait_max_ps=300_000))
    more, less = (drought_of(facts(b), 80, short_resets=False) for b in (waiting, LOOM))
    assert sum(t.used_ps for t in more.terms) - sum(t.used_ps for t in less.terms) == 10 * PERIOD_HI


def test_a_bus_without_grant_or_reset_is_its_gap() -> None:
    """Nothing but the longest gap and the jitter of two requests."""
    still = replace(LOOM, at_worst=replace(LOOM.at_worst, grant_max_ps=0, reset_max_ps=0))
    names = [t.name for t in drought_of(facts(still), 80, short_resets=True).terms]
    assert names[0] == "longest gap, 21 clocks"
    assert len(names) == 3


def test_forced_leaves_room_for_its_service() -> None:
    """2 ms over 128 rows is 1562 ticks at their longest, less service and guard; the sum is never late."""
    ticks = timer_ticks(facts()).ticks
    assert 2 * 10**9 // (128 * TICK_HI) - ticks.service - 4 == ticks.forced
    bounds = refresh_bounds(facts(ticks=ticks), drought_of(facts(), ticks.reset_settle, short_resets=True))
    assert bounds.any_age_ps == 128 * (ticks.forced + ticks.service) * TICK_HI <= bounds.interval_ps


def test_a_legal_bus_never_comes_to_the_forced_refresh() -> None:
    """The longest legal gap ends before `forced`, and standby is as long as that allows."""
    found = timer_ticks(facts())
    gap = found.ticks.legal_gap(found.drought.ticks)
    assert found.ticks.forced - gap == 4


def test_the_pause_is_the_chip_s() -> None:
    """200 us in ticks of at least 9.999 ns."""
    assert timer_ticks(facts()).ticks.pause == -(-200_000_000 // TICK_LO)


def test_reset_is_believed_after_the_bus_has_settled() -> None:
    """Three clocks, and what the request may be seen later than the reset."""
    early_and_late = 2 * (IN_HI - IN_LO + TICK_HI)
    assert -(-(3 * PERIOD_HI + early_and_late) // TICK_LO) + 1 == timer_ticks(facts()).ticks.reset_settle


def test_without_a_timer_an_unlimited_reset_never_fits() -> None:
    """No refresh for as long as someone leans on the button."""
    bare = facts(replace(LOOM, standby="none"))
    bounds = refresh_bounds(bare, drought_of(bare, 80, short_resets=False))
    assert bounds.any_age_ps > bounds.interval_ps


def test_without_a_timer_a_bus_that_never_stops_fits() -> None:
    """21 clocks at most between its own refreshes: 0.7 ms."""
    still = replace(LOOM, standby="none", at_worst=replace(LOOM.at_worst, grant_max_ps=0, reset_max_ps=0))
    bounds = refresh_bounds(facts(still), drought_of(facts(still), 80, short_resets=False))
    assert bounds.any_age_ps <= bounds.interval_ps


# --- arbitration -------------------------------------------------------------------------------------------------


def sums(board: Board) -> dict[str, ArbitrationSum]:
    return {one.event: one for one in arbitration(facts(board))}


def test_end_of_grant_needs_no_set_up() -> None:
    """From the Cr that takes BUSREQ: a clock, half a clock, MREQ; against a refresh begun at the last moment."""
    available = PERIOD_LO + 119_988 + IN_LO + 2 * TICK_LO
    needed = EDGE + IN_HI + TICK_HI + TICK_HI + OWN_REFRESH
    found = sums(LOOM)["end of a grant"]
    assert (available - needed, "BUSREQ rising") == (found.margin_ps, found.notice)
    assert found.margin_ps == 24_127


def test_end_of_grant_takes_the_set_up_where_it_must_and_says_so() -> None:
    """A longer refresh eats what was left; TsBUSREQ 50 ns is a demand of the bus and may be counted."""
    slow = facts(ticks=replace(TICKS, refresh_low=24))
    found = {one.event: one for one in arbitration(slow)}["end of a grant"]
    available = PERIOD_LO + 119_988 + IN_LO + 2 * TICK_LO
    plain = available - EDGE - IN_HI - 2 * TICK_HI - OWN_REFRESH - 7 * TICK_HI
    assert plain < 0
    assert plain + 50_000 == found.margin_ps == 4_120
    assert "set-up" in found.notice


def test_the_edge_of_the_line_alone_can_ask_for_the_set_up() -> None:
    """Three ticks more of refresh fit a line that switches at once, and not one that takes 12 ns over it."""
    slow = facts(ticks=replace(TICKS, refresh_low=20))
    found = {one.event: one for one in arbitration(slow)}["end of a grant"]
    at_once = PERIOD_LO + 119_988 + IN_LO + 2 * TICK_LO - IN_HI - 2 * TICK_HI - OWN_REFRESH - 3 * TICK_HI
    assert at_once == 6_124
    assert at_once - EDGE + 50_000 == found.margin_ps == 44_124
    assert "set-up" in found.notice


def test_the_edge_of_the_line_is_needed_first() -> None:
    """10 ns/V is what the translators' sheet asks (SCAS218T); two receivers of one line switch up to 1.2 V apart."""
    without_busreq = replace(LOOM, wiring=wiring(7, busreq=False))
    found = [*sums(LOOM).values(), *sums(without_busreq).values()]
    edges = [(one.needed[0].lo_ps, one.needed[0].hi_ps, one.needed[0].used_ps) for one in found]
    assert edges == [(0, 10 * (2_000 - 800), EDGE)] * 4
    assert all(one.needed[0].name == "edge of the line, 0.8 to 2.0 V" for one in found)
    assert all(one.needed[0].source.mark is Mark.PRACTICE for one in found)


def test_the_edge_of_the_line_is_counted_once() -> None:
    """MREQ is judged at its fastest, so no edge of its own is added to what is available."""
    for one in sums(LOOM).values():
        assert [t.name for t in (*one.available, *one.needed) if "edge of the line" in t.name] == [one.needed[0].name]


def test_end_of_grant_without_BUSREQ_fails() -> None:
    """BUSACK rises 90 ns after Cf, MREQ falls a clock after that Cf: far too late."""
    found = sums(replace(LOOM, wiring=wiring(7, busreq=False)))["end of a grant"]
    available = PERIOD_LO - 90_000 + IN_LO + 2 * TICK_LO
    assert available - EDGE - IN_HI - 2 * TICK_HI - OWN_REFRESH == found.margin_ps == -185_861
    assert "BUSREQ is not wired" in found.notice


def test_end_of_reset() -> None:
    """Two restart clocks more than a grant has one, and no set-up for a reset that keeps no step."""
    available = 2 * PERIOD_LO + 119_988 + IN_LO + 2 * TICK_LO
    found = sums(LOOM)["end of reset"]
    assert available - EDGE - IN_HI - 2 * TICK_HI - OWN_REFRESH == found.margin_ps == 274_102
    assert all("set-up" not in term.name for term in found.available)


def test_an_unwired_reset_gives_no_notice() -> None:
    """Then the device learns from MREQ itself, and a whole refresh is in the way."""
    blind = replace(LOOM, wiring=replace(LOOM.wiring, nets=tuple(n for n in LOOM.wiring.nets if n.name != "reset_n")))
    assert sums(blind)["end of reset"].margin_ps < -250_000


def test_sums_are_their_terms() -> None:
    """What is printed adds up."""
    for one in sums(LOOM).values():
        assert one.margin_ps == sum(t.used_ps for t in one.available) - sum(t.used_ps for t in one.needed)


def test_a_board_without_a_timer_has_nothing_to_arbitrate() -> None:
    """No refresh of our own, no sum."""
    assert sums(replace(LOOM, standby="none")) == {}


def test_a_bus_that_never_grants_has_one_sum() -> None:
    """Only what can happen is summed up."""
    assert {"end of reset"} == set(sums(replace(LOOM, at_worst=replace(LOOM.at_worst, grant_max_ps=0))))
