"""Margins worked by hand: each test adds up the promises from the sheets and compares picoseconds.

The board is the hand-built loom: 4 MHz, duty 48 to 52 %, 100 MHz +- 50 ppm, pads 1 to 10 ns in and 3 to 15 ns out,
SN74LVC245A 1.5 to 6.3 ns in, SN74AHCT541 1 to 9.5 ns and 12 ohm out, SN74LS244 18 ns for the data.
"""

from dataclasses import replace
from fractions import Fraction

import pytest

from rowkeeper.contract import Margin, TickTable
from rowkeeper.reading.board import Board
from rowkeeper.reading.figures import Figure, Mark, Source
from rowkeeper.timing.device import facts_of
from rowkeeper.timing.margins import derated_ambient, judged, margin_notes, worst_of
from rowkeeper.timing.paths import default_delays
from timing.hand_built import CHIP_4116_15, LOOM, clock

TICKS = TickTable("counted", 3, 4, 6, 12, 1, 60, 200, 3, 17, 12, 400, 1490, 80, 20000, 8)

TICK_LO, TICK_HI = 9_999, 10_001  # 10 ns +- 50 ppm, rounded outward
PERIOD = 249_975  # 250 ns at + 100 ppm, rounded down
HALF = 119_988  # 48 % of it
IN_LO, IN_HI = 1_500 + 1_000, 6_300 + 10_000  # translator and pad
STROBE_LO, STROBE_HI = 3_000 + 1_000, 15_000 + 9_500 + 1_853  # pad, buffer, 1.93 x 12 ohm x 80 pF, rounded up
ADDRESS_LO, ADDRESS_HI = 3_000 + 1_000, 15_000 + 9_500 + 927  # pad, buffer, 1.93 x 12 ohm x 40 pF, rounded up
SPREAD = STROBE_HI - STROBE_LO
SEEN_HI = IN_HI + TICK_HI + 2 * TICK_HI  # a line, latest: to the next edge, and two more
SEEN_LO = IN_LO + 2 * TICK_LO


def margins(board: Board = LOOM, ticks: TickTable = TICKS) -> tuple[Margin, ...]:
    return worst_of(judged(facts_of(board, default_delays(board), ticks), whole=True))


ALL = margins()


def margin(symbol: str, cycle: str, neighbour: str = "", sense: str = "min", word: str = "") -> Margin:
    """The one margin of that name; `word` tells apart two of one symbol."""
    found = [
        m
        for m in ALL
        if (m.symbol, m.cycle, m.neighbour, m.sense) == (symbol, cycle, neighbour, sense) and word in m.note
    ]
    assert len(found) == 1, [m.note for m in found]
    return found[0]


def test_tRAH() -> None:
    """Row strobe at its latest, address at its earliest, four ticks apart; 20 ns wanted."""
    assert 4 * TICK_LO + ADDRESS_LO - STROBE_HI - 20_000 == margin("tRAH", "opcode fetch").margin_ps == -2_357


def test_tASC() -> None:
    """Column address at its latest, column strobe at its earliest, two ticks apart; -10 ns wanted."""
    assert 2 * TICK_LO + STROBE_LO - ADDRESS_HI + 10_000 == margin("tASC", "opcode fetch").margin_ps == 8_571


def test_tRCD_counts_the_package_once() -> None:
    """Both strobes fall through one package: 1 ns of skew instead of 8.5 ns; pads and settling stay apart."""
    pads_and_settling = 3_000 - 15_000 - 1_853
    assert 6 * TICK_LO + pads_and_settling - 1_000 - 25_000 == margin("tRCD", "opcode fetch").margin_ps == 20_141


def test_tRCD_maximum_is_a_reference_point() -> None:
    """Beyond tRCD maximum the access is ruled by tCAC, so a negative one breaks nothing."""
    found = margin("tRCD", "opcode fetch", sense="max")
    assert (found.kind, found.margin_ps < 0) == ("reference", True)


def test_tRAS() -> None:
    """A rising and a falling delay of one path are two unknowns: eighteen ticks less the path's spread."""
    assert 18 * TICK_LO - SPREAD - 150_000 == margin("tRAS", "opcode fetch").margin_ps == 7_629


def test_tRAS_maximum() -> None:
    """Whatever the bus does: given up at 60, write enable a tick before the column strobe, 12 of hold."""
    expected = 10_000_000 - (60 + 1 + 12) * TICK_HI - SPREAD
    assert expected == margin("tRAS", "any access", sense="max").margin_ps


def test_tCAS_maximum() -> None:
    """Whatever the bus does, the column strobe is capped at 200 ticks."""
    assert margin("tCAS", "any access", sense="max").margin_ps == 10_000_000 - 200 * TICK_HI - SPREAD


def test_tRSH() -> None:
    """Twelve ticks of hold less the spread; 100 ns wanted."""
    assert 12 * TICK_LO - SPREAD - 100_000 == margin("tRSH", "opcode fetch").margin_ps == -2_365


def test_tCAC_of_a_fetch() -> None:
    """Cf of T1 to Cr of T3, less MREQ, synchroniser, six ticks, chip and buffer; TsD(Cr) 35 ns wanted."""
    bus = HALF + PERIOD - 85_000
    access = SEEN_HI + 6 * TICK_HI + STROBE_HI + 100_000 + 18_000
    assert bus - access - 35_000 == margin("tCAC", "opcode fetch").margin_ps == -699


def test_tRAC_of_a_fetch() -> None:
    """The same from the row strobe: no column tick, 150 ns."""
    bus = HALF + PERIOD - 85_000
    assert bus - SEEN_HI - STROBE_HI - 168_000 - 35_000 == margin("tRAC", "opcode fetch").margin_ps == 9_307


def test_tCAC_of_a_read_has_half_a_clock_more() -> None:
    """Cf of T1 to Cf of T3 is two periods; TsD(Cf) 50 ns wanted."""
    access = SEEN_HI + 6 * TICK_HI + STROBE_HI + 118_000
    assert 2 * PERIOD - 85_000 - access - 50_000 == margin("tCAC", "memory read").margin_ps


def test_the_data_buffer_drives_in_time() -> None:
    """read_n follows RD or the column tick; the later of both is MREQ and six ticks here; enable 30 ns."""
    enable = SEEN_HI + 6 * TICK_HI + 15_000 + 9_500 + 30_000
    assert HALF + PERIOD - 85_000 - enable - 35_000 == margin("TsD(Cr)", "opcode fetch").margin_ps


def test_kind_of_a_fetch() -> None:
    """M1 falls at most 100 ns after Cr, MREQ at least half a clock after it; translators and pads differ at worst."""
    assert HALF + IN_LO - 100_000 - IN_HI == margin("kind", "opcode fetch", word="M1").margin_ps == 6_188


def test_address_captured() -> None:
    """TdA(MREQf) = TwCh + TfC - 65 on the real clock, less the difference of the input paths."""
    found = margin("address-captured", "opcode fetch", word="before")
    assert HALF - 65_000 + IN_LO - IN_HI == found.margin_ps == 41_188


def test_tASR_comes_from_the_address_that_stood_before() -> None:
    """The row leaves with the first clock edge after the address came, TdA(MREQf) before MREQ."""
    row = HALF - 65_000 - IN_HI - TICK_HI - ADDRESS_HI
    assert row + SEEN_LO + STROBE_LO == margin("tASR", "opcode fetch").margin_ps


def test_tASR_of_a_refresh() -> None:
    """The refresh row stands three ticks before the strobe."""
    assert 3 * TICK_LO + STROBE_LO - ADDRESS_HI == margin("tASR", "refresh").margin_ps == 8_570


def test_tASR_is_kept_whatever_the_bus_does() -> None:
    """The address outputs stand still with the first flip-flop, two ticks before the row strobe; 0 ns wanted."""
    found = margin("tASR", "any access")
    assert 2 * TICK_LO + STROBE_LO - ADDRESS_HI - 0 == found.margin_ps == -1_429
    assert (found.kind, found.sense) == ("hard", "min")


def test_no_tick_mends_the_address_before_any_row_strobe() -> None:
    """The two ticks are those of the synchroniser: a table with every tick of an access longer leaves them."""
    longer = replace(TICKS, row_setup=9, mux=8, column=12, row_hold=20, precharge=20, refresh_low=25)
    found = [m.margin_ps for m in margins(ticks=longer) if (m.symbol, m.cycle) == ("tASR", "any access")]
    assert [2 * TICK_LO + STROBE_LO - ADDRESS_HI] == found == [-1_429]


def test_a_slower_device_clock_gives_the_address_before_any_row_strobe_more() -> None:
    """50 MHz instead of 100: 20 ns - 50 ppm is 19.999 ns, and there are two of them."""
    slower = margins(replace(LOOM, device_clock=clock("50", ppm=50)))
    found = [m.margin_ps for m in slower if (m.symbol, m.cycle) == ("tASR", "any access")]
    assert [2 * 19_999 + STROBE_LO - ADDRESS_HI] == found == [18_571]


def test_tRAS_of_a_refresh() -> None:
    """Seventeen ticks less the spread."""
    assert 17 * TICK_LO - SPREAD - 150_000 == margin("tRAS", "refresh").margin_ps == -2_370


def test_tRP_is_kept_whatever_the_bus_does() -> None:
    """Twelve ticks of precharge less the spread; 100 ns wanted."""
    assert margin("tRP", "any access", "whatever the bus does").margin_ps == 12 * TICK_LO - SPREAD - 100_000


def test_tRP_between_a_fetch_and_its_refresh() -> None:
    """Two periods from MREQ to MREQ; the row strobe ended at tick 18 and falls again row_setup after its time."""
    between = 2 * PERIOD - 85_000
    strobes = between - SEEN_HI - 18 * TICK_HI - STROBE_HI + SEEN_LO + 3 * TICK_LO + STROBE_LO
    assert strobes - 100_000 == margin("tRP", "opcode fetch", "refresh").margin_ps


def test_ready_for_the_refresh_after_a_fetch() -> None:
    """Row strobe up at 18 and rested for 12, before the refresh may be taken."""
    rested = 2 * PERIOD - 85_000 + SEEN_LO - SEEN_HI - 18 * TICK_HI
    assert rested - 12 * TICK_HI == margin("ready", "opcode fetch", "refresh", word="row").margin_ps == 91_115


def test_the_grant_is_known_to_be_over() -> None:
    """BUSACK rises at most 90 ns after Cf, MREQ falls a period after that Cf at the earliest."""
    found = margin("grant over", "own refresh", "memory read after a grant")
    assert PERIOD - 90_000 + IN_LO - IN_HI == found.margin_ps == 146_175


def test_ready_for_the_first_cycle_after_a_grant() -> None:
    """The arbitration's sum, which has the edge of the line on top; TsBUSREQ 50 ns is what the bus must keep."""
    available = 50_000 + PERIOD + HALF + SEEN_LO
    begun = IN_HI + TICK_HI + TICK_HI
    found = margin("ready", "own refresh", "opcode fetch after a grant", word="row strobe")
    assert available - begun - (3 + 17 + 12) * TICK_HI == found.margin_ps


def test_ready_for_the_first_fetch_after_a_reset() -> None:
    """Two clocks of restart, and no set-up to count on."""
    available = 2 * PERIOD + HALF + SEEN_LO
    begun = IN_HI + TICK_HI + TICK_HI
    found = margin("ready", "own refresh", "opcode fetch after a reset", word="row strobe")
    assert available - begun - (3 + 17 + 12) * TICK_HI == found.margin_ps


def test_tRC_between_a_fetch_and_its_refresh() -> None:
    """Falling edge to falling edge of one path: its delay counts for nothing."""
    between = 2 * PERIOD - 85_000 + SEEN_LO - SEEN_HI
    assert between + 3 * TICK_LO - 375_000 == margin("tRC", "opcode fetch", "refresh").margin_ps == 46_142


def test_tRC_shorter_than_the_rated_cycle_is_derated() -> None:
    """MK4116 note 9: 361.142 ns is 2.769 MHz; 70 - 9.0 x (2.769 - 2.66) = 69.0 degrees, a note and no violation."""
    found = margin("tRC", "refresh", "opcode fetch")
    assert 2 * PERIOD - 85_000 + SEEN_LO - SEEN_HI - 3 * TICK_HI == found.earliest_ps == 361_142
    assert (found.kind, found.margin_ps) == ("reference", 361_142 - 375_000)
    assert "ambient at most 69.0 degrees C" in found.note


@pytest.mark.parametrize(("cycle_ps", "degrees"), [(320_000, "65.8"), (330_000, "66.6"), (260_000, "59.3")])
def test_derating_follows_the_note(cycle_ps: int, degrees: str) -> None:
    """Outside figures: component data 1.1 works 320, 330 and 260 ns out as 65.8, 66.7 (rounded down 66.6), 59.3."""
    value = derated_ambient(cycle_ps)
    assert Fraction(degrees) == Fraction(value.numerator * 10 // value.denominator, 10)


def test_a_cycle_shorter_than_its_parts_is_broken() -> None:
    """tRAS 150 + tRP 100 + 2 x 5 of transition: below 260 ns no cooling helps."""
    short = replace(TICKS, refresh_low=15, precharge=7)
    found = [m for m in margins(ticks=short) if m.symbol == "tRC" and m.neighbour == "own refresh"]
    assert [(m.kind, m.margin_ps) for m in found] == [("hard", (15 + 7 + 3) * TICK_LO - 375_000)]


def test_tDS_of_an_early_write() -> None:
    """Data comes 150 ns after Cf of T1 and WR not before Cf of T2: that is more than TdD(WRf) = TcC - 170 promises.

    The column strobe follows WR by two ticks and the lead.
    """
    strobe = SEEN_LO + TICK_LO + STROBE_LO
    assert max(PERIOD - 150_000, PERIOD - 170_000) + strobe == margin("tDS", "memory write").margin_ps == 136_472


def test_tDH_of_an_early_write() -> None:
    """WR low for TcC - 30, data TwCl + TrC - 70 longer; the column strobe at its latest."""
    stays = PERIOD - 30_000 + HALF - 70_000
    assert stays - SEEN_HI - TICK_HI - STROBE_HI - 45_000 == margin("tDH", "memory write").margin_ps == 142_306


def test_tWCS_of_an_early_write() -> None:
    """Write enable leads by a tick, both through one package; -20 ns wanted."""
    pads_and_settling = 3_000 - 15_000 - 1_853
    assert TICK_LO + pads_and_settling - 1_000 + 20_000 == margin("tWCS", "memory write").margin_ps == 15_146


def test_data_stays_until_it_is_taken() -> None:
    """The buffer lets go two ticks after MREQ is seen high at the earliest; no minimum is published on the way."""
    assert IN_LO + 2 * TICK_LO + 3_000 + 1_000 == margin("ThD", "memory read").margin_ps == 26_498


@pytest.mark.parametrize("cycle", ["opcode fetch", "memory read"])
def test_data_stays_until_RD_has_risen(cycle: str) -> None:
    """However late RD rises after MREQ, the buffer lets go two ticks after it is seen high; ThD is 0 ns."""
    found = margin("ThD(RDr)", cycle)
    assert IN_LO + 2 * TICK_LO + 3_000 + 1_000 - 0 == found.margin_ps == 26_498
    assert found.kind == "hard"


def test_the_refresh_after_a_fetch_waits_for_no_late_RD() -> None:
    """RD rises at most 85 ns after Cr of T3 and MREQ falls half a clock after it; both are seen within a tick.

    So the column strobe is over when the refresh is taken, and needs no rest before it.
    """
    found = margin("ready", "opcode fetch", "refresh", word="column strobe over")
    assert HALF - 85_000 + SEEN_LO - SEEN_HI == found.margin_ps == 11_183


def test_the_column_strobe_rests_before_a_refresh_while_the_row_is_set_up() -> None:
    """Whatever the bus does: three ticks of row set-up less the spread; -20 ns wanted."""
    assert margin("tCRP", "any access", "refresh").margin_ps == 3 * TICK_LO - SPREAD + 20_000


def test_turnaround_before_a_write() -> None:
    """The buffer floats 25 ns after read_n; the processor may drive from the next Cf on."""
    off = 85_000 + SEEN_HI + 15_000 + 9_500 + 25_000
    assert PERIOD - off == margin("turnaround", "memory read", "memory write").margin_ps == 69_172


def test_an_unpublished_minimum_is_nought_and_said_once() -> None:
    """Where a family publishes no minimum delay the earliest is 0, and one note lists them all."""
    facts = facts_of(LOOM, default_delays(LOOM), TICKS)
    notes = [note for note in margin_notes(facts, ALL) if note.topic == "no minimum published"]
    assert len(notes) == 1
    assert "TdCf(MREQf)" in notes[0].text
    assert "SN74LS244" in notes[0].text


def test_limits_the_sheet_lacks_are_listed() -> None:
    """A 4116 sheet has no tRRH: that is said, not left out."""
    facts = facts_of(LOOM, default_delays(LOOM), TICKS)
    texts = [note.text for note in margin_notes(facts, ALL) if note.topic == "not in this sheet"]
    assert texts == ["4116-15: tRRH"]


def test_a_figure_from_memory_taints_what_rests_on_it() -> None:
    """Each margin that uses an unconfirmed figure says so, and no other."""
    limits = {**CHIP_4116_15.limits, "tCAC": Figure("tCAC", None, 100_000, Source(Mark.MEMORY))}
    bank = replace(LOOM.banks[0], chip=replace(CHIP_4116_15, limits=limits))
    tainted = {m.symbol for m in margins(replace(LOOM, banks=(bank,))) if m.from_memory}
    assert {"tCAC"} == tainted


def test_every_margin_is_the_sum_of_its_terms() -> None:
    """What a person adds up on a calculator is the end of the window that the margin was taken from."""
    for m in ALL:
        end = m.earliest_ps if m.sense == "min" else m.latest_ps
        assert end == sum(t.used_ps for t in m.terms), m
        assert m.margin_ps == (sum(t.used_ps for t in m.terms) - m.required_ps) * (1 if m.sense == "min" else -1)


def test_windows_have_two_ends() -> None:
    """Whole judging gives the end that does not decide as well, on its own side."""
    both = [m for m in ALL if m.earliest_ps is not None and m.latest_ps is not None]
    assert len(both) > 50
    assert all(m.earliest_ps <= m.latest_ps for m in both)  # type: ignore[operator]


def test_a_slower_bus_clock_helps_the_access_by_its_longer_half_and_period() -> None:
    """3.5 MHz instead of 4: Cf of T1 to Cr of T3 grows from 369.963 to 422.814 ns."""
    slower = replace(LOOM, bus_clock=clock("3.5"))
    found = [m for m in margins(slower) if m.symbol == "tCAC" and m.cycle == "opcode fetch"]
    # 10**12 / 3.5 MHz / 1.0001 = 285685.7 -> 285685, of which 48 % is 137129.1 -> 137129
    assert [m.margin_ps for m in found] == [285_685 + 137_129 - PERIOD - HALF - 699]
