"""What the sheet says of a board: supplies decide the order of work, the verdict decides whether to fit."""

from dataclasses import replace

from rowkeeper.contract import Finding, Note, Status, Verdict
from rowkeeper.reading.board import Board, IoLevels, Net, PathElement
from rowkeeper.sheets.facts import NOT_PROVEN, PathRow, SheetFacts, board_stamp, sheet_facts
from rowkeeper.sheets.stamp import Stamp
from sheets.boards import BOARD, BUFFER, CHIP
from sheets.records import DIGEST, MIXED, NOTES, PASSED, pin_rows


def _facts(board: Board = BOARD, verdict: Verdict = PASSED) -> SheetFacts:
    return sheet_facts(board, "0.1.0", pin_rows(), verdict, NOTES)


def test_head() -> None:
    """What the board is, from the board file and the catalogue."""
    assert _facts().summary == (
        ("Memory", "8 × 4116-15, 16 KiB from 0xC000, 128 rows to refresh"),
        ("Bus", "8-bit bus with M1, MREQ and RFSH (UM0080), 4 MHz grade, clocked at 4 MHz"),
        ("Device", "iCE40 HX1K in VQ100, 100 MHz clock"),
    )


def test_stamp_of_a_board() -> None:
    """Slug, not name: a slug cannot hold anything strange."""
    assert board_stamp(BOARD, "0.1.0") == Stamp("0.1.0", "loom-16k", "B", DIGEST)


def test_package_is_said_once() -> None:
    """A title that already names the package is left alone."""
    titled = replace(BOARD, device=replace(BOARD.device, title="iCE40 HX1K in VQ100"))
    assert (_facts().device, _facts(titled).device) == ("iCE40 HX1K in VQ100", "iCE40 HX1K in VQ100")


def test_notes_of_a_chip_are_joined() -> None:
    """One entry per chip that has something to say."""
    assert _facts().chips == ("4116-15: VBB must never be above VSS while VDD is up. Pin 8 is +12 V.",)


def test_data_path() -> None:
    """A net without a pin: what it meets and what it passes."""
    path = (
        PathElement("part", part=BUFFER, designator="U6"),
        PathElement("series", series_milliohm=33_000),
        PathElement("load", load_ff=45_500),
        PathElement("direct"),
    )
    nets = (Net("data_out", "path", "", "U10-U17.14", path), Net("clk", "input", "15", "Y1.3", ()))
    facts = _facts(replace(BOARD, wiring=replace(BOARD.wiring, nets=nets)))
    through = "U6 SN74LS244 at 5.0 V, 33 ohm, load 45.5 pF, plain wire"
    assert facts.paths == (PathRow("DATA_OUT", "U10-U17.14", through),)


def test_parts_are_one_line_each() -> None:
    """Remove, keep and add, as the board file has them."""
    facts = _facts()
    assert (facts.remove, facts.keep, facts.add) == (("U1, U2", "U3"), ("U19",), ("U31 (AHCT541)",))


def test_three_supply_chips_want_the_negative_one_first() -> None:
    """Common practice with three-supply parts: the substrate bias is first on and last off."""
    order = _facts().order
    (step,) = [step for step in order if "FIRST" in step]
    assert step.startswith("Three-supply chips: VBB -4.5 to -5.5 V comes on FIRST and goes off LAST, every time.")
    assert "together with VDD, VCC" in step
    assert order.index(step) < min(place for place, text in enumerate(order) if "switch on and measure" in text)


def test_single_supply_chips_have_no_such_step() -> None:
    """A rule that does not apply is not printed."""
    chip = replace(CHIP, supplies=("+5 V",))
    board = replace(BOARD, banks=(replace(BOARD.banks[0], chip=chip),))
    assert [step for step in _facts(board).order if "FIRST" in step] == []


def test_chips_are_out_for_the_first_power_up() -> None:
    """They are fitted after the rails were measured, with supplies off."""
    order = _facts().order
    measured = next(place for place, text in enumerate(order) if "without memory chips: switch on" in text)
    fitted = next(place for place, text in enumerate(order) if "Fit the memory chips" in text)
    assert measured < fitted
    assert order[fitted].startswith("Supplies off and measured off.")


def test_assumptions_of_the_bus_are_listed() -> None:
    """Their sentences come with the bus family."""
    assert _facts().assumed == ("RESET stays low for at least three bus clocks.",)


def test_notes_of_the_run_are_kept_apart_from_what_is_never_proven() -> None:
    """A derating is something to know; ringing is something that nobody has looked at."""
    facts = _facts()
    assert facts.not_proven == NOT_PROVEN
    assert facts.notes[-1] == "AHCT541: no minimum delay is published: the earliest is taken as 0"


def test_notes_are_cut_to_what_a_sheet_has_room_for() -> None:
    """One entry per topic, ended at a word, with the number of the others."""
    notes = [Note("derating", "tRC " * 100), Note("derating", "x"), Note("other", "short")]
    first, second = sheet_facts(BOARD, "0.1.0", pin_rows(), PASSED, notes).notes
    assert first.endswith("tRC tRC ... (1 more of this kind)")
    assert len(first) < 250
    assert second == "other: short"


def test_notes_end_with_a_sentence() -> None:
    """What does not fit is left out from a sentence's end on, or from a semicolon; margins.txt has the whole."""
    notes = [Note("one", "It is so. " + "word " * 60), Note("two", "a clause; " + "word " * 60)]
    notes += [Note("list", "one, two, " + "three " * 60)]
    expected = ("one: It is so.", "two: a clause.", "list: one, two and more.")
    assert expected == sheet_facts(BOARD, "0.1.0", pin_rows(), PASSED, notes).notes


def test_data_line_without_margin_is_to_know() -> None:
    """2.4 V promised by the bus (Z8400 specification), 2.4 V asked by the chips (MK4116 sheet, p. 2)."""
    levels = IoLevels(2400, 800, 2400, 400, 5250, BOARD.bus.source)
    chip = replace(CHIP, address_levels=levels)
    nets = (Net("data_in", "path", "", "U10-U17.2", (PathElement("direct", rail_mv=5000),)),)
    board = replace(
        BOARD,
        bus=replace(BOARD.bus, output_levels=levels),
        banks=(replace(BOARD.banks[0], chip=chip),),
        wiring=replace(BOARD.wiring, nets=nets),
    )
    assert _facts(board).notes[0] == (
        "data in: the bus promises a high of 2.4 V and the chips ask for 2.4 V: no margin by the book. Measure it."
    )
    assert not _facts().notes[0].startswith("data in")


def test_what_did_not_run_is_on_the_sheet() -> None:
    """Nothing that failed or was left out is forgotten."""
    facts = _facts(verdict=MIXED)
    assert not facts.passed
    assert facts.open_items == (
        "failed: margin tRP min: worst of 3 situations: memory write, before opcode fetch",
        "not run: claim precharge kept (netlist): the prover gave up after 200 s",
        "not run: bench march, all max (logic, icarus): iverilog is not installed",
    )


def test_a_long_list_of_open_items_ends_with_their_number() -> None:
    """The sheet stays two pages; the verdict file has them all."""
    lost = tuple(Finding("bench", f"run {number}", Status.NOT_RUN) for number in range(20))
    items = _facts(verdict=Verdict(Status.NOT_RUN, lost)).open_items
    assert items[0] == "not run: bench run 0"
    assert items[-1] == "and 12 more in verdict.json"
