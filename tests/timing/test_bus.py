"""The bus alone: widths and separations beside delays, formulas on the real clock, the processor's own limits."""

from dataclasses import replace
from fractions import Fraction

import pytest

from rowkeeper.reading.board import Board, BusGrade, GivenTicks
from rowkeeper.reading.figures import Figure, Mark, Source, Window
from rowkeeper.timing.bus import BusCycles, from_figure, request_clock
from rowkeeper.timing.bus_clock import bus_clock
from rowkeeper.timing.clock_limits import clock_margins, clock_notes
from rowkeeper.timing.network import Network
from rowkeeper.timing.paths import default_delays
from rowkeeper.timing.plan import settle
from timing.hand_built import CHIP_4116_15, GRADE_4MHZ, LOOM, Z8400, clock, formula, ns

BOARD = Source(Mark.BOARD, "board")


def fetch_then_refresh(grade: BusGrade, mhz: str, duty: str) -> Network:
    """One opcode fetch and its refresh on an exact clock."""
    network = Network()
    bus = BusCycles(network, grade, bus_clock(clock(mhz, 0, (duty, duty))), BOARD)
    bus.clocks(5)
    bus.begin("opcode fetch", 1)
    bus.finish("opcode fetch", 1, 0)
    bus.begin("refresh", 3, "next ")
    bus.between()
    return network


def test_MREQ_high_is_the_width_and_not_the_edges() -> None:
    """Outside figure: 110 ns at 4 MHz with TwCh 110 and TfC 20 (Z8400 product specification): 130 - 20."""
    network = fetch_then_refresh(GRADE_4MHZ, "4", "0.52")
    assert network.window("MREQr", "next MREQf").lo_ps == 110_000


def test_edges_alone_would_give_27_5() -> None:
    """Outside figure: 45 % of 250 is 112.5; MREQ may rise 85 after Cr and fall at once after Cf: 27.5."""
    grade = replace(GRADE_4MHZ, formulas={k: f for k, f in GRADE_4MHZ.formulas.items() if k != "TwMREQh"})
    network = fetch_then_refresh(grade, "4", "0.45")
    assert network.window("MREQr", "next MREQf").lo_ps == 27_500
    assert fetch_then_refresh(GRADE_4MHZ, "4", "0.45").window("MREQr", "next MREQf").lo_ps == 92_500


@pytest.mark.parametrize(
    ("mhz", "high_ns", "fall_ns", "width_ns"), [("4", 110, 20, 110), ("6", 65, 20, 65), ("8", 55, 10, 45)]
)
def test_published_strobe_high_times(mhz: str, high_ns: int, fall_ns: int, width_ns: int) -> None:
    """Outside figures: 110, 65 and 45 ns at 4, 6 and 8 MHz, TwCh + TfC - 20 (Z8400 product specification)."""
    period = Fraction(10**6) / Fraction(mhz)
    share = Fraction(high_ns + fall_ns) * 1000 / period
    exact = replace(clock(mhz, 0), duty_min=share, duty_max=share)
    least = bus_clock(exact).least(("TwCh", "TfC")) - 20_000
    assert width_ns * 1000 - least in (0, 1)  # 6 MHz: a period of 166666.67 ps is rounded outward


def test_the_real_clock_enters_the_formula() -> None:
    """Outside figures, component data 2.1: TfC 0 and 50 % give 105 ns; TfC 0 and TwCh at its least give 90 ns."""
    half = bus_clock(clock("4", 0, ("0.5", "0.5"), edges_ns=0))
    least = bus_clock(clock("4", 0, ("0.44", "0.56"), edges_ns=0))
    assert [c.least(("TwCh", "TfC")) - 20_000 for c in (half, least)] == [105_000, 90_000]


def test_a_width_alone_loses_its_slowest_edge() -> None:
    """TwCh is the phase less the fall; TcC is a period; both phases and their edges make one."""
    c = bus_clock(clock("4", 0, ("0.48", "0.52"), edges_ns=10))
    assert [c.least(terms) for terms in (("TwCh",), ("TwCh", "TfC"), ("TcC",), ("TwCh", "TfC", "TwCl", "TrC"))] == [
        110_000,
        120_000,
        250_000,
        240_000,
    ]


def test_windows_of_the_clock_are_rounded_outward() -> None:
    """100 ppm of 250 ns: 249975.0025 to 250025.0025 ps, of which 48 and 52 %."""
    c = bus_clock(clock("4"))
    assert (c.period_lo_ps, c.period_hi_ps) == (249_975, 250_026)
    assert (c.high_lo_ps, c.high_hi_ps) == (119_988, 130_014)


def test_the_same_edge_comes_again_after_one_period() -> None:
    """Uneven duty does not add up from clock to clock."""
    network = fetch_then_refresh(GRADE_4MHZ, "4", "0.5")
    assert Window(500_000, 500_000) == network.window("Cf1", "Cf3")


def test_a_figure_without_minimum_starts_at_nought() -> None:
    """A delay with a maximum only: 0 at the earliest, with a mark of its own."""
    made = from_figure(Figure("TdCr(A)", None, 110_000, Z8400))
    assert (made.lo_ps, made.hi_ps) == (0, 110_000)
    assert made.lo_source is not None
    assert Mark.UNPUBLISHED is made.lo_source.mark


def test_a_published_minimum_is_kept() -> None:
    """A delay with both ends keeps both, from one source."""
    made = from_figure(Figure("delay", 1_500, 6_300, Z8400))
    assert (made.lo_ps, made.lo_source) == (1_500, None)


def test_waits_lengthen_a_fetch() -> None:
    """Two waits put the data and the refresh two clocks later."""
    assert [
        request_clock("opcode fetch", 0),
        request_clock("opcode fetch", 2),
        request_clock("memory read", 0),
        request_clock("memory write", 2),
        request_clock("interrupt acknowledge", 0),
    ] == [3, 5, 4, 6, 5]


# --- the processor's own limits ----------------------------------------------------------------------------------


def limit(board: Board, symbol: str, sense: str = "min") -> tuple[str, int]:
    found = [m for m in clock_margins(board) if (m.symbol, m.sense) == (symbol, sense)]
    assert len(found) == 1
    return found[0].kind, found[0].margin_ps


def test_a_clock_at_its_rated_frequency_is_met() -> None:
    """TcC is judged on the nominal period: nothing to spare, nothing broken, and the tolerance is noted."""
    assert limit(LOOM, "TcC") == ("hard", 0)
    assert "25 ps shorter" in clock_notes(LOOM)[0].text


def test_a_clock_that_is_too_fast_is_refused_first() -> None:
    """5 MHz on a 4 MHz grade: 50 ns short of TcC."""
    assert limit(replace(LOOM, bus_clock=clock("5")), "TcC") == ("hard", -50_000)


def test_an_uneven_clock_is_refused() -> None:
    """42 % of 250 ns, less an edge of 10 ns, is 95 ns high: 15 short of TwCh 110."""
    assert limit(replace(LOOM, bus_clock=clock("4", 100, ("0.42", "0.52"))), "TwCh") == ("hard", -15_000)


def test_a_low_phase_that_is_too_short_is_refused() -> None:
    """58 % high leaves 105 ns low, less an edge of 10: 15 short of TwCl 110."""
    assert limit(replace(LOOM, bus_clock=clock("4", 100, ("0.48", "0.58"))), "TwCl") == ("hard", -15_000)


def test_slow_edges_are_refused() -> None:
    """40 ns of edge where the processor allows 30."""
    board = replace(LOOM, bus_clock=clock("2", 100, edges_ns=40))
    assert [limit(board, symbol, "max") for symbol in ("TrC", "TfC")] == [("hard", -10_000)] * 2


# --- the strobe passed straight through --------------------------------------------------------------------------


def straight(mhz: str, high_ns: int, fall_ns: int, tRP_ns: int, grade: BusGrade) -> tuple[int, int]:
    """tRP between a fetch and its refresh: what the bus's own terms leave, and the margin with the path's."""
    share = Fraction((high_ns + fall_ns) * 1000) / (Fraction(10**6) / Fraction(mhz))
    chip = replace(CHIP_4116_15, limits={**CHIP_4116_15.limits, "tRP": Figure("tRP", ns(tRP_ns), None, Z8400)})
    board = replace(
        LOOM,
        grade=grade,
        bus_clock=replace(clock(mhz, 0), duty_min=share, duty_max=share),
        banks=(replace(LOOM.banks[0], chip=chip),),
        strobes=GivenTicks(style="straight"),
    )
    plan = settle(board, default_delays(board))
    found = next(m for m in plan.margins if m.symbol == "tRP" and m.cycle == "opcode fetch")
    bus = sum(t.used_ps for t in found.terms if t.source == Z8400)
    return bus - found.required_ps, found.margin_ps


def test_a_200_ns_chip_straight_through_misses_by_10_ns() -> None:
    """Outside figure: tRP 120 against TwMREQh 110 at 4 MHz, on the bus's terms; the path's spread comes on top."""
    bus, whole = straight("4", 110, 20, 120, GRADE_4MHZ)
    assert bus == -10_000
    # MREQ rises fast and falls slowly through translator 1.5..6.3, pads 1..10 and 3..15, buffer 1..9.5, settling
    assert bus - (6_300 - 1_500) - (10_000 - 1_000) - (15_000 - 3_000) - (9_500 - 1_000) - 1_853 == whole


def test_a_150_ns_chip_straight_through_passes_on_the_bus_terms() -> None:
    """Outside figure: tRP 100 against TwMREQh 110 at 4 MHz."""
    assert straight("4", 110, 20, 100, GRADE_4MHZ)[0] == 10_000


def test_precharge_of_the_slower_bus() -> None:
    """Outside figure: TwCh + TfC - 30 = 170 at 2.5 MHz with TwCh 180 and TfC 20: 50 more than a 200 ns chip asks."""
    grade = replace(
        GRADE_4MHZ, formulas={**GRADE_4MHZ.formulas, "TwMREQh": formula("TwMREQh", ("TwCh", "TfC"), -30, Z8400)}
    )
    assert straight("2.5", 180, 20, 120, grade)[0] == 50_000
