"""Paths of nets: board, pads and fabric in order, settling, load, skew, and the worst of a group."""

import math
from dataclasses import replace

import pytest

from rowkeeper.contract import Delays, NetDelay
from rowkeeper.reading.board import Board, Net, PathElement
from rowkeeper.reading.figures import Figure, Mark, Source, Window
from rowkeeper.timing import default_delays, net_windows
from rowkeeper.timing.network import Network
from rowkeeper.timing.paths import group_path, net_path, part_of, skew_between, travel
from timing.hand_built import AHCT541, HYB4164, LOOM, LS244, LVC245, device

ROUTED = Source(Mark.ROUTED)


def with_nets(*nets: Net) -> Board:
    return replace(LOOM, wiring=replace(LOOM.wiring, nets=nets))


def routed(**windows: tuple[int, int]) -> Delays:
    return Delays({n: NetDelay(n, "output", Window(*w), ROUTED) for n, w in windows.items()}, routed=True)


def test_windows_from_end_to_end() -> None:
    """Translator, pad and fabric in; fabric, pad, buffer and settling out; the data path has no device in it."""
    windows = net_windows(LOOM, default_delays(LOOM))
    assert windows["mreq_n"] == Window(1_500 + 1_000, 6_300 + 10_000)
    assert windows["ras_n"] == Window(3_000 + 1_000, 15_000 + 9_500 + 1_853)
    assert windows["data_out"] == Window(0, 18_000)
    assert windows["data_in"] == Window(0, 0)


def test_every_net_has_a_window() -> None:
    """The bench asks for all of them by name."""
    assert set(net_windows(LOOM, default_delays(LOOM))) == {net.name for net in LOOM.wiring.nets}


def test_terms_come_in_the_order_of_travel() -> None:
    """What a reader follows with a finger on the board."""
    net = next(n for n in LOOM.wiring.nets if n.name == "cas_n")
    names = [p.name for p in net_path(LOOM, default_delays(LOOM), net).slow]
    assert names == ["cas_n: before routing", "cas_n: pad", "cas_n: SN74AHCT541 U5", "cas_n: settling"]


def test_routed_delays_take_the_place_of_the_planned_ones() -> None:
    """Pads stay: the router knows none of them."""
    net = next(n for n in LOOM.wiring.nets if n.name == "cas_n")
    path = net_path(LOOM, routed(cas_n=(200, 2_600)), net)
    assert (path.lo_ps, path.hi_ps) == (200 + 3_000 + 1_000, 2_600 + 15_000 + 9_500 + 1_853)
    assert path.slow[0].name == "cas_n: routed"


def test_settling_is_resistance_times_load() -> None:
    """12 ohm into 80 pF: 0.96 ns, 1.93 times that, rounded up."""
    net = Net(
        "ma0", "output", "1", "U1", (PathElement("series", series_milliohm=12_000), PathElement("load", load_ff=80_000))
    )
    path = net_path(with_nets(net), Delays({}, routed=False), net)
    assert path.hi_ps - 15_000 == 1_853


@pytest.mark.parametrize(
    ("ohm", "picofarad", "settling_ps"),
    [
        (12, 40, 927),  # 1.93 x 480 = 926.4
        (10, 50, 965),  # 1.93 x 500 = 965 and nothing to round
        (22, 90, 3_822),  # 1.93 x 1980 = 3821.4
        (33, 80, 5_096),  # 1.93 x 2640 = 5095.2
    ],
)
def test_settling_grows_with_both(ohm: int, picofarad: int, settling_ps: int) -> None:
    """1.93 R C for any pair, rounded up; it may be over at once."""
    elements = (
        PathElement("series", series_milliohm=ohm * 1000), PathElement("load", load_ff=picofarad * 1000)
    )  # fmt: skip
    net = Net("ma0", "output", "1", "U1", elements)
    path = net_path(with_nets(net), Delays({}, routed=False), net)
    assert (path.lo_ps, path.hi_ps) == (3_000, 15_000 + settling_ps)


def test_settling_reaches_the_levels_a_memory_sheet_counts_from() -> None:
    """A fall from 5.5 V to 0.8 V takes ln(5.5 / 0.8) R C: 1.93 covers it, to the next hundredth.

    The rise to 2.7 V is the shorter way: from 0 V towards 4.4 V it takes ln(4.4 / 1.7) R C.
    """
    fall, rise = math.log(5.5 / 0.8), math.log(4.4 / (4.4 - 2.7))
    assert 1.92 < fall < 1.93
    assert rise < 0.96 < fall


def test_settling_says_what_it_was_worked_out_from() -> None:
    """Resistance, load and the file they stand in; derived, so no typical figure and none from memory."""
    net = next(n for n in LOOM.wiring.nets if n.name == "ras_n")
    last = net_path(LOOM, default_delays(LOOM), net).slow[-1]
    assert last.source == Source(Mark.DERIVED, "1.93 R C of 12 ohm and 80 pF in loom-16k.yaml")


def test_a_load_without_resistance_settles_at_once() -> None:
    """The buffer's own figure holds its rated load."""
    net = Net("ma0", "output", "1", "U1", (PathElement("load", load_ff=50_000),))
    assert net_path(with_nets(net), Delays({}, routed=False), net).hi_ps == 15_000


def test_a_load_beyond_the_rated_one_costs_what_the_sheet_lets_be_worked_out() -> None:
    """86 ps for each picofarad beyond 50."""
    part = replace(AHCT541, load_slope_ps=86, load_rated_pf=50, load_source=HYB4164)
    net = Net("ma0", "output", "1", "U1", (PathElement("part", part=part), PathElement("load", load_ff=80_000)))
    assert net_path(with_nets(net), Delays({}, routed=False), net).hi_ps == 15_000 + 9_500 + 30 * 86


def test_two_parts_in_a_row_add_up() -> None:
    """Each part is a term of its own."""
    net = Net("mreq_n", "input", "1", "J1", (PathElement("part", part=LS244), PathElement("part", part=LVC245)))
    path = net_path(with_nets(net), Delays({}, routed=False), net)
    assert (path.lo_ps, path.hi_ps) == (1_500 + 1_000, 18_000 + 6_300 + 10_000)


def test_a_group_is_as_fast_as_its_fastest_and_as_slow_as_its_slowest() -> None:
    """Seven address lines differ once they are routed."""
    delays = routed(**{f"ma{i}": (100 * i, 2_000 + 100 * i) for i in range(7)})
    path = group_path(LOOM, delays, "ma")
    assert (path.lo_ps, path.hi_ps) == (0 + 4_000, 2_600 + 15_000 + 9_500 + 927)
    network = Network()
    travel(network, "edge", "chip", path)
    assert network.window("edge", "chip") == Window(4_000, 2_600 + 15_000 + 9_500 + 927)


def test_a_group_is_not_taken_for_another() -> None:
    """`a` is a0, a1, ...; it is neither `ma0` nor `a_strobe`."""
    net = Net("a_strobe", "input", "1", "J1", ())
    assert group_path(with_nets(net), Delays({}, routed=False), "a").hi_ps == 0


def test_skew_holds_within_one_package_only() -> None:
    """Strobes share U5; addresses leave through U6."""
    within, across = skew_between(LOOM, "ras_n", "cas_n"), skew_between(LOOM, "ras_n", "ma0")
    assert within == Figure("skew", None, 1_000, Source(Mark.SHEET, "SN74AHCT541"))
    assert across is None


def test_skew_needs_a_designator() -> None:
    """Two unnamed buffers of one type are two packages."""
    nets = tuple(Net(n, "output", "1", "U1", (PathElement("part", part=AHCT541),)) for n in ("ras_n", "cas_n"))
    assert skew_between(with_nets(*nets), "ras_n", "cas_n") is None


def test_the_data_buffer_is_found() -> None:
    """Its enable and disable times belong to the net the data leaves by."""
    assert part_of(LOOM, "data_out") is LS244
    assert part_of(LOOM, "data_in") is None


def test_planned_delays_are_the_fabric_without_pads() -> None:
    """Every net with a pin, the device's own figure, and not marked as routed."""
    board = replace(LOOM, device=replace(device(), before_routing_input=Figure("f", 0, 2_000, ROUTED)))
    delays = default_delays(board)
    assert delays.routed is False
    assert delays.nets["mreq_n"].window == Window(0, 2_000)
    assert "data_out" not in delays.nets
