"""Levels of every wire, what needs a part, what fails and what mends it; drives; synchronisers."""

from dataclasses import replace
from decimal import Decimal
from fractions import Fraction
from pathlib import Path

import pytest

from rowkeeper.contract import LevelMargin, Levels, Status
from rowkeeper.judging.level_verdict import level_findings
from rowkeeper.reading import catalogue, read_board
from rowkeeper.reading.board import Board, IoLevels, Net, PathElement
from rowkeeper.reading.figures import Mark, Source
from rowkeeper.timing.drive import series_range
from rowkeeper.timing.levels import NOISE_MARGIN_MV, End, level_refusals, levels_of, wire_margin
from rowkeeper.timing.metastability import CONSTANTS, mean_time_years, settling

BOARDS = Path(__file__).parents[2] / "boards"
SHEET = Source(Mark.SHEET, "a sheet")


def loom() -> Board:
    return read_board(BOARDS / "loom-16k.yaml")


def levels(vih: int | None = None, vil: int | None = None, voh: int | None = None, vol: int | None = None) -> IoLevels:
    return IoLevels(vih, vil, voh, vol, 7000, SHEET)


def high_margin(driver: IoLevels, receiver: IoLevels) -> int | None:
    return wire_margin("net", End("a", driver, 5000, "output"), End("b", receiver, 5000, "input")).high_margin_mv


def with_paths(board: Board, **paths: tuple[PathElement, ...]) -> Board:
    """The board with other parts on some nets, without asking the reader, who refuses some of it."""
    nets = tuple(replace(net, through=paths.get(net.name, net.through)) for net in board.wiring.nets)
    return replace(board, wiring=replace(board.wiring, nets=nets))


def part(name: str, designator: str = "U90") -> PathElement:
    return PathElement("part", catalogue.part(name), designator)


def wire(board: Board, net: str, receiver: str) -> LevelMargin:
    (found,) = (w for w in levels_of(board).wires if w.net == net and receiver in w.receiver)
    return found


def test_ttl_into_a_memory_address_has_no_margin() -> None:
    """VOH 2.4 V (Z8400, LS244 at 3 mA) against VIH 2.4 V (MK4116 addresses, HYB 4164): 0.00 V."""
    bus, chip = catalogue.bus("m1-refresh"), catalogue.chip("4116-15")
    assert high_margin(bus.output_levels, chip.address_levels) == 0
    data = wire(loom(), "data_in", "4116-15")
    assert (data.high_margin_mv, data.holds) == (0, True)
    assert "not promised" in data.note


def test_ttl_into_a_strobe_of_three_supplies_is_short() -> None:
    """SN74LS244 gives 2.4 V at 3 mA (SDLS144D), a 4116 strobe asks for 2.7 V (MK4116 sheet p. 2): -0.30 V."""
    board = with_paths(loom(), ras_n=(part("SN74LS244"),))
    found = wire(board, "ras_n", "strobe")
    assert (found.high_margin_mv, found.holds) == (-300, False)
    assert "AHCT" in found.mend
    (text,) = level_refusals(levels_of(board))
    assert "ras_n" in text
    assert "high 2.40 V against 2.70 V: -0.30 V" in text
    assert "Would mend it:" in text


def test_plain_ls_into_a_strobe_has_nothing_to_spare() -> None:
    """VOH 2.7 V of plain LS (SDLS025D) against VIHC 2.7 V: 0.00 V, typical parts alone make it work."""
    assert high_margin(levels(voh=2700), catalogue.chip("4116-15").strobe_levels) == 0


def test_device_straight_to_strobes() -> None:
    """VCCIO - 0.4 V at 3.14 V (DS1040) is 2.74 V: 0.04 V over 2.7 V, far below the noise margin; a buffer mends it."""
    device, chip = catalogue.device("ice40hx1k-vq100"), catalogue.chip("4116-15")
    assert high_margin(device.levels, chip.strobe_levels) == 40
    need = next(n for n in levels_of(loom()).needs if n.net == "ras_n")
    assert (need.straight_mv, need.direction) == (40, "3.3 V to 5 V")
    assert NOISE_MARGIN_MV > 40
    assert ("AHCT" in need.wanted, need.stands) == (True, "SN74AHCT541 U22")


def test_buffer_at_5_v_gives_a_strobe_its_margin() -> None:
    """SN74AHCT541 drives 3.8 V at 8 mA (SCLS269P): 1.1 V over 2.7 V."""
    assert wire(loom(), "ras_n", "strobe").high_margin_mv == 1100


def test_bus_lines_need_a_translator() -> None:
    """5.25 V from the bus on a pin that takes 3.6 V (DS1040): 1.65 V too much; LVC at 3.3 V takes it (SCAS218T)."""
    needs = {need.net: need for need in levels_of(loom()).needs}
    assert {"mreq_n", "a0", "a15", "ras_n", "ma6"} <= set(needs)
    assert (needs["mreq_n"].straight_over_mv, needs["mreq_n"].direction) == (1650, "5 V to 3.3 V")
    assert "LVC" in needs["mreq_n"].wanted
    assert "data_in" not in needs


def test_cmos_thresholds_are_not_satisfied_by_ttl() -> None:
    """Side B of SN74LVC8T245 at 5 V asks for 0.7 VCC, 3.5 V at 5 V and 3.85 V at 5.5 V (SCES584B); TTL gives 2.4 V."""
    inputs = catalogue.part("SN74LVC8T245-BA").input_levels
    assert inputs.vih_min_mv == Fraction(7, 10) * 5500 == 3850
    assert inputs.vil_max_mv == Fraction(3, 10) * 4500 == 1350
    found = wire(with_paths(loom(), mreq_n=(part("SN74LVC8T245-BA"),)), "mreq_n", "LVC8T245")
    assert (found.high_margin_mv, found.low_margin_mv) == (2400 - 3850, 1350 - 400)
    assert "CMOS thresholds are not satisfied by TTL levels" in found.mend


def test_pin_beyond_its_absolute_maximum() -> None:
    """A part at 5 V into the device: 5.5 V on 3.6 V."""
    found = wire(with_paths(loom(), mreq_n=(part("SN74AHCT541"),)), "mreq_n", "the device")
    assert (found.over_mv, found.holds) == (1900, False)
    assert "LVC" in found.mend


def test_enables_end_at_the_parts_they_meet() -> None:
    """read_n ends at the kept buffer, enable_n at both new ones, known by their designators."""
    found = [(w.net, w.receiver) for w in levels_of(loom()).wires if w.pin_class == "enable"]
    assert found == [
        ("read_n", "SN74LS244 U6"),
        ("enable_n", "SN74AHCT541 U22"),
        ("enable_n", "SN74AHCT541 U23"),
    ]


def test_every_wire_of_the_shipped_boards_holds() -> None:
    """Every net has its wires, and no shipped board fails one."""
    for path in sorted(BOARDS.glob("*.yaml")):
        board = read_board(path)
        found = levels_of(board)
        assert found.holds
        assert {net.name for net in board.wiring.nets} == {w.net for w in found.wires}
        assert level_refusals(found) == ()
        assert {f.status for f in level_findings(found)} == {Status.PASSED}


def test_unknown_is_not_passed() -> None:
    """A figure that no sheet gives makes no margin; a board without any judged wire is not run."""
    nothing = wire_margin("x", End("a", levels(), 5000, "output"), End("b", levels(), 5000, "input"))
    assert (nothing.high_margin_mv, nothing.low_margin_mv) == (None, None)
    assert "not judged" in nothing.note
    (finding,) = level_findings(Levels((nothing,), (), (), ()))
    assert finding.status is Status.NOT_RUN


def test_open_drain_needs_a_pull_up() -> None:
    """The parts list names a pull-up for read_n; without it the wire fails, whatever its low level."""
    board = with_paths(loom(), read_n=(part("SN74LVC1G07"),))
    found = wire(board, "read_n", "LS244")
    assert (found.high_margin_mv, found.low_margin_mv, found.pulled_up) == (None, 250, True)
    assert found.holds
    without = wire(replace(board, wiring=replace(board.wiring, add=("U20, the device",))), "read_n", "LS244")
    assert (without.pulled_up, without.holds) == (False, False)
    assert "pull-up" in without.mend


def test_pull_up_of_another_net_does_not_count() -> None:
    """`thread_n` and `read_n2` are not `read_n`."""
    board = with_paths(loom(), read_n=(part("SN74LVC1G07"),))
    lines = ("pull-up 4.7 kohm to +5 V on thread_n and read_n2",)
    assert wire(replace(board, wiring=replace(board.wiring, add=lines)), "read_n", "LS244").pulled_up is False


def test_half_known_wire_did_not_run() -> None:
    """A level that one of the sheets does not give is neither passed nor failed."""
    half = wire_margin("x", End("a", levels(vol=400), 5000, "output"), End("b", levels(2000, 800), 5000, "input"))
    findings = level_findings(Levels((half,), (), (), ()))
    assert [f.name for f in findings if f.status is Status.NOT_RUN] == ["x: a to b"]


def test_failed_wire_is_a_failed_finding() -> None:
    """The verdict counts it, whatever the timing says."""
    findings = level_findings(levels_of(with_paths(loom(), ras_n=(part("SN74LS244"),))))
    assert [f.name for f in findings if f.status is Status.FAILED] == ["strobe levels"]


def test_memory_taints() -> None:
    """A level from memory marks the wire."""
    doubtful = IoLevels(None, None, 3000, None, None, Source(Mark.MEMORY))
    found = wire_margin("x", End("a", doubtful, 5000, "output"), End("b", levels(vih=2000), 5000, "input"))
    assert found.from_memory


# --- drives ------------------------------------------------------------------------------------------------------


def test_edge_current_is_bounded_by_the_resistor() -> None:
    """5.5 V over 33 ohm are 166.7 mA at most, over 22 ohm 250 mA; seven address lines may move together."""
    series = PathElement("series", series_milliohm=33_000), PathElement("load", load_ff=90_000)
    board = with_paths(loom(), ras_n=(part("SN74AHCT541"), *series), cas_n=(part("SN74AHCT541"), *series[1:]))
    drives = {drive.net: drive for drive in levels_of(board).drives}
    assert (drives["ras_n"].inputs, drives["ras_n"].load_ff, drives["ras_n"].edge_ua) == (8, 90_000, 166_667)
    assert (drives["ma0"].together, drives["ras_n"].together) == (7, 1)
    assert drives["cas_n"].edge_ua is None


def test_series_range_is_a_range() -> None:
    """R = Z0 - Rout (common practice): 50 - 30 to 90 - 20 ohm, so 22 to 68 ohm of the usual values."""
    assert series_range() == (22_000, 68_000)


# --- synchronisers -----------------------------------------------------------------------------------------------

BIPOLAR, FLASH = CONSTANTS
MHZ = 10**6


@pytest.mark.parametrize(("resolve_ps", "seconds"), [(40_000, Decimal("3.1e9")), (30_000, Decimal("2.1e5"))])
def test_bipolar_constants(resolve_ps: int, seconds: Decimal) -> None:
    """SRPS017 p. 17, C1 = 9.15e-7 s and C2 = 0.959 /ns, at 16 MHz and 1 MHz: 99 years with 40 ns, 2.5 days with 30."""
    years = mean_time_years(BIPOLAR, Fraction(16 * MHZ), Fraction(MHZ), resolve_ps)
    assert abs(years * 31_557_600 / seconds - 1) < Decimal("0.03")


def test_flash_constants() -> None:
    """AC312: 100 MHz, 12.5 MHz and 2.96 ns make about a year (0.94 with the constants as printed)."""
    years = mean_time_years(FLASH, Fraction(100 * MHZ), Fraction(25 * MHZ, 2), 2960)
    assert Decimal("0.9") < years < Decimal("1.1")


def test_borrowed_constants_say_so() -> None:
    """No constants of the device are published: every estimate is marked, and the two differ by more than 10^20."""
    found = settling(loom())
    assert [one.borrowed for one in found] == [True, True]
    assert found[0].resolve_ps == 9999 - 630 - 3300
    slow, fast = (Decimal(one.years) for one in found)
    assert fast > slow * Decimal(10) ** 20


def test_more_time_to_decide_never_harms() -> None:
    """MTBF grows with dt and falls with each rate."""
    base = mean_time_years(FLASH, Fraction(100 * MHZ), Fraction(MHZ), 3000)
    assert base < mean_time_years(FLASH, Fraction(100 * MHZ), Fraction(MHZ), 3001)
    assert base > mean_time_years(FLASH, Fraction(101 * MHZ), Fraction(MHZ), 3000)
    assert base > mean_time_years(FLASH, Fraction(100 * MHZ), Fraction(2 * MHZ), 3000)


def test_net_without_a_driver_of_the_catalogue() -> None:
    """The oscillator is held against the pin by its supply alone, 5 % high."""
    clk = wire(loom(), "clk", "the device")
    assert (clk.highest_mv, clk.limit_mv, clk.high_margin_mv) == (3465, 3600, None)
    board = loom()
    bare = Net("clk", "input", "15", "Y1.3", ())
    nets = tuple(bare if net.name == "clk" else net for net in board.wiring.nets)
    assert all(w.net != "clk" for w in levels_of(replace(board, wiring=replace(board.wiring, nets=nets))).wires)
