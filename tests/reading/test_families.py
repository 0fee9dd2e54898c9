"""Logic families of the catalogue against figures transcribed apart from it; overrides; refusals."""

from fractions import Fraction
from pathlib import Path

import pytest

from rowkeeper.reading import catalogue, read_board
from rowkeeper.reading.board import LogicLevel
from rowkeeper.reading.describe import figure_rows
from rowkeeper.reading.figures import Mark
from rowkeeper.reading.problems import Refused

BOARDS = Path(__file__).parents[2] / "boards"
FAMILY = Path(catalogue.__file__).parents[1] / "catalog" / "families" / "LS.yaml"
SECTION = """
original:
  row_to_select:    {r: 330 ohm ± 5 %, c: 100 pF ± 10 %, input: LS}
  select_to_column: {r: 330 ohm ± 5 %, c: 68 pF ± 10 %, input: LS}
"""

# Millivolts: rising min, max; falling min, max.
# LS: VIL 0.8, VIH 2.0 V (SDLS025D pp. 4-7). LS14: VT+ 1.4 to 1.9 V, VT- 0.5 to 1.0 V (DS006353).
# HCT: 0.8, 2.0 V (SCHS119B). AHCT: 0.8, 2.0 V (SCLS269P pp. 2-4).
THRESHOLDS = {
    "LS": (800, 2000, 800, 2000),
    "LS14": (1400, 1900, 500, 1000),
    "HCT": (800, 2000, 800, 2000),
    "AHCT": (800, 2000, 800, 2000),
}


@pytest.mark.parametrize("name", THRESHOLDS)
def test_thresholds_of_the_sheets(name: str) -> None:
    """Each family switches where its sheet says."""
    family = catalogue.family(name)
    assert tuple(level.millivolts for level in (*family.rising, *family.falling)) == THRESHOLDS[name]
    assert family.threshold_source.mark is Mark.SHEET


def test_cmos_is_a_share_of_the_supply() -> None:
    """30 and 70 % of 4.5 V and 5.5 V; no sheet stands behind it, and it says so."""
    low, high = catalogue.family("CMOS").rising
    assert (low.at(4500), high.at(5500)) == (1350, 3850)
    assert Mark.MEMORY in {source.mark for source in catalogue.family("CMOS").sources}


def test_input_current_of_ls() -> None:
    """IIL 0.4 mA and IIH 20 uA (SDLS025D)."""
    assert (catalogue.family("LS").input_low_ua, catalogue.family("LS").input_high_ua) == (400, 20)


@pytest.mark.parametrize("name", catalogue.families())
def test_every_range_is_in_order(name: str) -> None:
    """Lower ends lie below upper ends, and a low level below every threshold."""
    family = catalogue.family(name)
    for supply in (family.supply_min_mv, family.supply_max_mv):
        for low, high in (family.rising, family.falling, family.high, family.low):
            assert low.at(supply) <= high.at(supply)
        assert family.low[1].at(supply) <= family.falling[0].at(supply) <= family.rising[0].at(supply)
        assert family.rising[1].at(supply) < family.high[0].at(supply)
    assert family.high_milliohm[0] <= family.high_milliohm[1]
    assert family.low_milliohm[0] <= family.low_milliohm[1]


@pytest.mark.parametrize("name", catalogue.families())
def test_every_figure_is_listed_with_its_source(name: str) -> None:
    """Thresholds, outputs, resistances and currents, none without a source."""
    rows = figure_rows(name)
    assert len(rows) == 8
    assert all(row.source for row in rows)


def test_level_of_a_supply() -> None:
    """A level is millivolts or a share, exactly."""
    assert LogicLevel(800).at(5000) == 800
    assert LogicLevel(0, Fraction(7, 10)).at(5000) == 3500


def beside(folder: Path, text: str) -> Path:
    """The loom board with a section and a family of its own beside it."""
    board = (BOARDS / "loom-16k.yaml").read_text(encoding="utf-8").split("\noriginal:")[0]
    (folder / "families").mkdir()
    (folder / "families" / "LS.yaml").write_text(text, encoding="utf-8")
    path = folder / "loom-16k.yaml"
    path.write_text(board + SECTION, encoding="utf-8")
    return path


def test_family_beside_the_board(tmp_path: Path) -> None:
    """A file beside the board comes before ours, and the board says so."""
    text = FAMILY.read_text(encoding="utf-8").replace(
        "rising: {min: 0.8 V, max: 2.0 V}", "rising: {min: 1.2 V, max: 1.4 V}"
    )
    board = read_board(beside(tmp_path, text))
    assert board.original is not None
    assert board.original.row_to_select.input.rising[0].millivolts == 1200
    assert board.overrides == ("LS (families/LS.yaml)",)


@pytest.mark.parametrize(
    ("old", "new", "message"),
    [
        ("high: {min: 2.7 V, max: 3.4 V}", "high: {min: 2.7 V, max: 134 %}", "between 0 % and 100 %"),
        ("low: 0.4 mA", "low: 0.4", "this current has no unit"),
        ("schmitt: no", "schmitt: maybe", "neither yes nor no"),
        ("kind: family", "kind: part", "files of kind family"),
        ("supply: {min: 4.75 V, max: 5.25 V}\n", "", "lacks the key `supply`"),
    ],
)
def test_wrong_family_file(tmp_path: Path, old: str, new: str, message: str) -> None:
    """A mistake in a family file is refused in its place like any other."""
    text = FAMILY.read_text(encoding="utf-8")
    assert text.count(old) == 1
    with pytest.raises(Refused, match=message):
        read_board(beside(tmp_path, text.replace(old, new)))
