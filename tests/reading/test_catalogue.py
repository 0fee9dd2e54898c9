"""The shipped catalogue against tables transcribed apart from it, and what holds for every entry."""

from pathlib import Path

import pytest
import yaml

from rowkeeper.reading import catalogue
from rowkeeper.reading.board import BusGrade
from rowkeeper.reading.describe import KINDS, all_names, catalog_rows, figure_rows
from rowkeeper.reading.figures import Figure, Mark

HERE = Path(__file__).parent
SHEETS = yaml.safe_load((HERE / "data_sheets.yaml").read_text(encoding="utf-8"))
BUS = yaml.safe_load((HERE / "bus_sheets.yaml").read_text(encoding="utf-8"))
GRADES = ("2.5 MHz", "4 MHz", "6 MHz", "8 MHz")
COLUMNS = [(sheet, i, name) for sheet in SHEETS for i, name in enumerate(sheet["columns"])]
IDS = [name for _, _, name in COLUMNS]


def nanoseconds(figure: Figure) -> list[int | None]:
    return [None if end is None else end // 1000 for end in (figure.lo_ps, figure.hi_ps)]


@pytest.mark.parametrize(("sheet", "column", "name"), COLUMNS, ids=IDS)
def test_chip_agrees_with_its_sheet(sheet: dict, column: int, name: str) -> None:  # type: ignore[type-arg]
    """Every row of the sheet stands in the catalogue as printed (the documents are named in data_sheets.yaml)."""
    limits = catalogue.chip(name).limits
    for symbol, cells in sheet["rows"].items():
        if symbol not in sheet["kept"]:
            assert cells[column] == nanoseconds(limits[symbol]), symbol


@pytest.mark.parametrize(("sheet", "column", "name"), COLUMNS, ids=IDS)
def test_kept_figures_are_harder_than_the_sheet(sheet: dict, column: int, name: str) -> None:  # type: ignore[type-arg]
    """Where makers differ the largest minimum and the smallest maximum are kept, never anything easier."""
    limits = catalogue.chip(name).limits
    for symbol in sheet["kept"]:
        low, high = sheet["rows"][symbol][column]
        kept_low, kept_high = nanoseconds(limits[symbol])
        assert low is None or (kept_low is not None and kept_low >= low), symbol
        assert high is None or (kept_high is not None and kept_high <= high), symbol


@pytest.mark.parametrize(("sheet", "column", "name"), COLUMNS, ids=IDS)
def test_chip_has_no_row_beside_the_sheet(sheet: dict, column: int, name: str) -> None:  # type: ignore[type-arg]
    """Rows from other documents are few, named, and say where they come from."""
    extra = set(catalogue.chip(name).limits) - set(sheet["rows"])
    assert extra <= set(sheet["elsewhere"])
    assert all(catalogue.chip(name).limits[symbol].source.mark is Mark.COPY for symbol in extra), column


def test_every_chip_is_judged() -> None:
    """No chip is shipped without a transcribed sheet beside it."""
    assert sorted(IDS) == list(catalogue.chips())


@pytest.mark.parametrize("number", range(4), ids=GRADES)
def test_bus_figures_agree_with_the_sheets(number: int) -> None:
    """MK3880 technical manual pp. 79-81, Z8400/Z84C00 product specification pp. 37-39."""
    figures = catalogue.bus("m1-refresh").grades[GRADES[number]].figures
    for symbol, row in BUS["figures"].items():
        for end, cells in row.items():
            value = figures[symbol].lo_ps if end == "min" else figures[symbol].hi_ps
            assert cells[number] * 1000 == value, symbol
            assert figures[symbol].source.mark is Mark.SHEET


def on_the_printed_clock(grade: BusGrade, symbol: str, number: int) -> int:
    formula = grade.formulas[symbol]
    return sum(BUS["clock"][term][number] * 1000 for term in formula.terms) + formula.offset_ps


@pytest.mark.parametrize("number", range(4), ids=GRADES)
def test_bus_formulas_come_to_the_printed_values(number: int) -> None:
    """The value printed beside each formula, on the clock that the sheet's footnote names."""
    grade = catalogue.bus("m1-refresh").grades[GRADES[number]]
    for symbol, cells in BUS["printed"].items():
        assert cells[number] * 1000 == on_the_printed_clock(grade, symbol, number), symbol


def test_bus_publishes_no_shortest_delay() -> None:
    """No Td row gives a minimum; the earliest stays open and is not made up."""
    for grade in catalogue.bus("m1-refresh").grades.values():
        assert [s for s, figure in grade.figures.items() if s.startswith("Td") and figure.lo_ps is not None] == []


def test_the_two_boards_rest_on_no_memory_figure() -> None:
    """The figures that the 2.5 and 4 MHz memory cycles need are all from documents."""
    needed = [*BUS["figures"], *BUS["printed"]]
    for name in ("2.5 MHz", "4 MHz"):
        grade = catalogue.bus("m1-refresh").grades[name]
        rows = [grade.figures[s] if s in grade.figures else grade.formulas[s] for s in needed]
        assert [row.symbol for row in rows if row.source.mark is Mark.MEMORY] == []


def test_bus_traffic() -> None:
    """UM0080: 19 clocks between refreshes at worst in a row, 21 once; three clocks of reset."""
    traffic = catalogue.bus("m1-refresh").traffic
    assert (
        traffic.gap_clocks,
        traffic.sweep_clocks,
        traffic.gap_machine_cycles,
        traffic.reset_settle_clocks,
        traffic.reset_restart_clocks,
    ) == (21, 19, 5, 3, 2)


def test_every_assumption_is_a_sentence() -> None:
    """What is assumed of a legal bus can be printed as it stands."""
    assumptions = catalogue.bus("m1-refresh").assumptions
    expected = {"m1-before-mreq", "mreq-high", "mreq-low", "grant-silent", "reset-silent", "reset-length", "drought"}
    assert expected <= set(assumptions)
    assert all(text[0].isupper() and text.endswith(".") for text in assumptions.values())


@pytest.mark.parametrize("name", IDS)
def test_cells_rows_and_refresh_agree(name: str) -> None:
    """Rows times columns make the words (128 x 128 cells make 16,384); the refresh bits count the refresh rows."""
    chip = catalogue.chip(name)
    assert chip.words == (1 << chip.row_bits) * (1 << chip.column_bits)
    assert chip.refresh_rows == 1 << chip.refresh_row_bits
    assert chip.refresh_ps == chip.refresh_rows * 15_625_000
    assert len(chip.pins) == 16


def test_the_two_kinds_of_4164_are_told_apart() -> None:
    """128 rows in 2 ms (KM4164B) and 256 rows in 4 ms (HYB 4164)."""
    kinds = {
        n: (catalogue.chip(n).refresh_rows, catalogue.chip(n).refresh_ps) for n in catalogue.chips() if "4164" in n
    }
    for name, (rows, interval) in kinds.items():
        assert (rows, interval) == ((128, 2 * 10**9) if name.endswith("128row") else (256, 4 * 10**9))


def test_device_pins() -> None:
    """VQ100: 100 pins, 72 inputs and outputs of which four belong to the flash, eight with a global buffer."""
    pins = catalogue.device("ice40hx1k-vq100").pins.values()
    roles = [pin.role for pin in pins]
    assert len(roles) == 100
    assert roles.count("clock") == 8
    assert roles.count("clock") + roles.count("io") == 68
    assert all("GBIN" in pin.name for pin in pins if pin.role == "clock")


def test_device_figures() -> None:
    """DS1040 v3.4: tCO 5.41, LVCMOS33 adders 0.16 and 0.17, tSU from -0.08 down to -0.63 ns.

    An input pad is over before the clock has come its way (tSU below zero), and clock's way and output pad are tCO: so
    each pad alone, and one of each together, stay within tCO. The sheet counts without load: 15 pF into 50 ohm
    (0.4 V at 8 mA) take 0.7 x 50 x 15 = 525 ps more.
    """
    device = catalogue.device("ice40hx1k-vq100")
    loaded = 530
    assert device.input_pad.hi_ps == 5410 + 160
    assert device.pads_together is not None
    assert device.pads_together.hi_ps == 5410 + 160 + 170 + loaded
    assert device.output_pad.hi_ps == 5410 + 170 + loaded
    assert device.flip_flop_window.hi_ps == 630
    assert (device.input_pad.lo_ps, device.output_pad.lo_ps) == (None, None)
    assert device.before_routing_input.source.mark is Mark.PRACTICE


@pytest.mark.parametrize(
    ("name", "delay", "enable", "disable"),
    [
        ("SN74AHCT541", (1000, 9500), 12000, 12000),  # SCLS269P
        ("SN74AHCT244", (1000, 9500), 13000, 13000),  # SCLS228O
        ("SN74LVC245A", (1500, 6300), 8500, 7500),  # SCAS218T
        ("SN74LVC8T245", (500, 4400), 8100, 8200),  # SCES584B
        ("SN74LS244", (None, 18000), 30000, 25000),  # SDLS144D
        ("SN74LS245", (None, 12000), 40000, 28000),  # SDLS146B
    ],
)
def test_parts(name: str, delay: tuple[int | None, int], enable: int, disable: int) -> None:
    """Delays, enables and disables as the sheets give them."""
    part = catalogue.part(name)
    assert delay == (part.delay.lo_ps, part.delay.hi_ps)
    assert part.enable is not None
    assert part.disable is not None
    assert (enable, disable) == (part.enable.hi_ps, part.disable.hi_ps)


def test_every_figure_has_a_source() -> None:
    """A figure names its document, or says that it is from memory."""
    for name in all_names():
        for row in figure_rows(name):
            assert row.source
            assert row.mark == "from memory" or row.source != "from memory", (name, row.symbol)


def test_no_typical_value_is_a_limit() -> None:
    """The configuration time is typical only: it appears in words, with neither minimum nor maximum."""
    (row,) = [row for row in figure_rows("ice40hx1k-vq100") if row.symbol == "configuration"]
    assert (row.min, row.max) == ("", "")
    assert row.note == "typical 53 ms, no limit given"


def test_rows_of_the_catalogue() -> None:
    """Every name is listed once, under its kind."""
    listed = [row.name for kind in KINDS for row in catalog_rows(kind)]
    assert listed == list(all_names())
    assert len(set(listed)) == len(listed)


def test_figure_rows_show_the_sheet_as_printed() -> None:
    """Nanoseconds without trailing zeros, formulas as sums."""
    rows = {(row.symbol, row.grade): row for row in figure_rows("m1-refresh")}
    assert rows["TdCr(A)", "4 MHz"].max == "110"
    assert rows["TwMREQh", "4 MHz"].min == "TwCh + TfC - 20"
    assert rows["TdM1f(IORQf)", "2.5 MHz"].min == "2 TcC + TwCh + TfC - 80"
    assert {row.symbol: row.max for row in figure_rows("SN74LVC245A")}["delay"] == "6.3"
    assert {row.symbol: row.min for row in figure_rows("4116-15")}["tCRP"] == "-20"


@pytest.mark.parametrize("name", sorted(catalogue.parts()))
def test_pins_of_a_part_fill_its_package(name: str) -> None:
    """Channels and fixed pins together are pins 1 to the last, each once; only the single gate has none spare."""
    part = catalogue.part(name)
    assert part.pins is not None
    assert len(part.pins.channels) == part.channels
    pins = [pin for pair in part.pins.channels for pin in pair] + [pin.pin for pin in part.pins.fixed]
    assert sorted(map(int, pins)) == list(range(1, len(pins) + 1))
    assert len(pins) in (5, 20, 24)
