"""Levels and the original as text: worst first, within 100 columns, nothing silent."""

import json
from dataclasses import replace
from pathlib import Path

import pytest

from rowkeeper.contract import Levels, OriginalReport
from rowkeeper.reading import read_board, read_board_text
from rowkeeper.reading.board import Board
from rowkeeper.sheets.columns import WIDTH
from rowkeeper.sheets.level_tables import levels_text, net_names, signed_volts
from rowkeeper.sheets.original_tables import original_text
from rowkeeper.sheets.stamp import Stamp
from rowkeeper.sheets.verdict import plan_json
from rowkeeper.timing import default_delays, settle
from rowkeeper.timing.levels import levels_of
from rowkeeper.timing.original import delay_windows, original_report

BOARDS = Path(__file__).parents[2] / "boards"
SECTION = """
original:
  row_to_select:    {r: 330 ohm ± 5 %, c: 100 pF ± 10 %, input: LS}
  select_to_column: {r: 330 ohm ± 5 %, c: 68 pF ± 10 %, input: LS14, driver: CMOS}
"""


def board(section: str = SECTION) -> Board:
    text = (BOARDS / "loom-16k.yaml").read_text(encoding="utf-8").split("\noriginal:")[0]
    return read_board_text((text + section).encode(), "loom-16k.yaml", None)


def report(of: Board) -> OriginalReport:
    assert of.original is not None
    delays = (*delay_windows(of.original.row_to_select), *delay_windows(of.original.select_to_column))
    return OriginalReport(delays, ())


@pytest.mark.parametrize("name", ["loom-16k", "kiln-64k"])
def test_no_scrolling_sideways(name: str) -> None:
    """Every line fits a hundred columns."""
    lines = levels_text(levels_of(read_board(BOARDS / f"{name}.yaml"))).split("\n")
    assert max(map(len, lines)) <= WIDTH
    assert max(map(len, original_text(report(board())).split("\n"))) <= WIDTH


def test_worst_first() -> None:
    """The first row is the wire with no margin at all; alike nets share a line."""
    text = levels_text(levels_of(board("")))
    rows = text.split("\n")
    first = next(row for row in rows if row.startswith(" 0.00"))
    assert rows.index(first) == 4
    assert "data_in" in first
    assert "ma0 to ma6" in text


def test_failure_is_loud() -> None:
    """A wire below zero says FAILS."""
    levels = levels_of(board(""))
    broken = replace(levels.wires[0], net="x", high_margin_mv=-300)
    text = levels_text(replace(levels, wires=(broken,)))
    assert "-0.30" in text
    assert "FAILS" in text


def test_nothing_is_not_run() -> None:
    """Empty records say that nothing was judged."""
    text = levels_text(Levels((), (), (), ()))
    assert text.count("NOT RUN") == 2


def test_borrowed_constants_are_marked() -> None:
    """A person reads that the constants are another family's, and that the figure is not known."""
    text = levels_text(levels_of(board("")))
    assert text.count("(BORROWED)") == 2
    assert "is not known" in text


def test_net_names() -> None:
    """Runs of numbered nets are drawn together, others are listed."""
    assert net_names(["ras_n", "a0", "a1", "a2", "ma0", "ma2"]) == "ras_n, a0 to a2, ma0, ma2"


def test_volts_keep_every_millivolt() -> None:
    """Nothing is rounded."""
    assert [signed_volts(mv) for mv in (0, 40, -300, 3465, None)] == ["0.00", "+0.04", "-0.30", "+3.465", "?"]


def test_never_is_said() -> None:
    """A network that may never switch says so in its table and in a sentence; a figure from memory is marked."""
    text = original_text(report(board(SECTION.replace(", driver: CMOS", ""))))
    assert "NEVER\n" in text
    assert "NEVER in this corner: falling" in text
    assert "rests on a figure from memory" in original_text(report(board()))


def test_for_machines() -> None:
    """margins.json has levels and the original, in whole millivolts and picoseconds; without them its old form."""
    of = board()
    plan = settle(of, default_delays(of))
    stamp = Stamp("0", "loom-16k", "B", "0" * 64)
    assert set(json.loads(plan_json(stamp, plan))) == {"tool", "board", "plan"}
    whole = json.loads(plan_json(stamp, plan, levels_of(of), original_report(of, plan)))
    assert whole["levels"]["wires"][1]["high_margin_mv"] == 400
    stages = whole["original"]["delays"][0]["stages"]
    assert (stages[0]["earliest_ps"], stages[0]["latest_ps"]) == (3081, 48520)
    assert len(whole["original"]["limits"]) == 5
