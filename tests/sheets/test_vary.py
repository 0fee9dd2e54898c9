"""What-if tables and picture: within 100 columns, readable without colour, nothing from outside, equal bytes."""

import json
from dataclasses import dataclass, replace
from fractions import Fraction
from xml.etree import ElementTree

import pytest

from rowkeeper.sheets.columns import WIDTH
from rowkeeper.sheets.vary_picture import vary_svg
from rowkeeper.sheets.vary_tables import reach_text, variation_json, variation_text
from sheets.records import STAMP

SVG = "{http://www.w3.org/2000/svg}"
Limit = tuple[str, str]


@dataclass(frozen=True)
class P:
    label: str
    position: Fraction
    holds: bool
    margins_ps: dict[Limit, int]
    worst: Limit
    where: str
    inside: Limit
    own: bool


@dataclass(frozen=True)
class V:
    what: str
    unit: str
    points: tuple[P, ...]


@dataclass(frozen=True)
class R:
    least_clock_hz: Fraction | None = Fraction(2_400_000)
    clock_step_hz: int = 50_000
    most_wait_ps: int | None = 1_600_000
    wait_open: bool = False
    most_grant_ps: int | None = None
    grant_open: bool = True
    slower_chip: str = "4116-20"
    slower_chip_limit: Limit | None = ("tRP", "min")
    slower_chip_margin_ps: int | None = -10_000
    slower_chip_holds: bool = False


def point(mhz: int, trp_ps: int, own: bool = False) -> P:
    margins = {("tRP", "min"): trp_ps, ("TcC", "min"): trp_ps + 5_000, ("tRAS", "max"): 9_000_000}
    return P(f"{mhz} MHz", Fraction(mhz), trp_ps >= 0, margins, ("tRP", "min"), "memory read, then opcode fetch",
             ("tRP", "min"), own)  # fmt: skip


FOUND = V("bus clock", "MHz", (point(2, 60_000), point(4, 10_000, True), point(6, -30_000), point(8, -2_000_000)))


def test_the_table_fits_the_terminal() -> None:
    """A row for each value, holds in a word, the board's own marked."""
    text = variation_text(FOUND)
    assert max(map(len, text.splitlines())) <= WIDTH
    rows = [line.split() for line in text.splitlines() if " MHz " in line]
    assert [row[:4] for row in rows[:2]] == [["2", "MHz", "yes", "+60.0"], ["4", "MHz", "*", "yes"]]
    assert "-2000.0" in text


@pytest.mark.parametrize(
    ("found", "sentence"),
    [
        (R(), "4116-20 does not hold, 10.0 ns short in tRP min"),
        (R(slower_chip_holds=True, slower_chip_margin_ps=2_500), "4116-20 holds, 2.5 ns to spare in tRP min"),
        (R(slower_chip=""), "next slower grade of chip: none in the catalogue"),
        (R(least_clock_hz=None), "slowest bus clock: not asked: the board does not hold as it stands"),
        (R(), "longest grant: unlimited"),
        (R(grant_open=False, most_grant_ps=5_000_000), "longest grant: 5.0 us"),
        (R(wait_open=True), "longest wait: 1.6 us, and more was not tried"),
    ],
)
def test_the_ends_are_sentences(found: R, sentence: str) -> None:
    """What was not tried is said."""
    assert sentence in reach_text(found)


def test_the_picture_needs_no_colour_and_nothing_from_outside() -> None:
    """Every limit has a dash pattern of its own and its name beside it; no script, no link, no image."""
    text = vary_svg(STAMP, FOUND)
    root = ElementTree.fromstring(text)
    assert f"{SVG}title" in [child.tag for child in root]
    for word in ("http:", "https:", "href", "<script", "<image", "url("):
        allowed = text.count("http://www.w3.org/2000/svg") if word == "http:" else text.count("url(#")
        assert text.count(word) == (allowed if word in ("http:", "url(") else 0)
    lines = [g for g in root.iter(f"{SVG}g") if g.find(f"{SVG}title") is not None]
    dashes = [path.get("stroke-dasharray") for g in lines for path in g.iter(f"{SVG}path")]
    assert (len(lines), len(set(dashes))) == (3, 3)
    shown = {element.text for element in root.iter(f"{SVG}text")}
    assert {"tRP min", "TcC min", "tRAS max", "worst: tRP min", "this board"} <= shown


def test_the_picture_tells_its_story_in_words() -> None:
    """For who cannot see it: which values hold, and the worst limit of each."""
    about = ElementTree.fromstring(vary_svg(STAMP, FOUND)).findtext(f"{SVG}desc") or ""
    assert about.startswith("Timing holds at 2 MHz, 4 MHz. ")
    assert "6 MHz: tRP min -30.0 ns" in about


def test_foreign_text_stays_text() -> None:
    """A name with markup in it is shown, not obeyed."""
    bad = replace(FOUND, what="<script>alert(1)</script>&\x1b[31m")
    assert "<script" not in vary_svg(replace(STAMP, board='"><b>'), bad)
    ElementTree.fromstring(vary_svg(replace(STAMP, board='"><b>'), bad))


def test_one_value_is_enough() -> None:
    """A picture of a single chip has no span to divide by."""
    ElementTree.fromstring(vary_svg(STAMP, V("chip", "", (replace(point(2, 5_000), position=Fraction(0)),))))


def test_the_same_for_machines() -> None:
    """Whole picoseconds, worst limit by name."""
    data = json.loads(variation_json(STAMP, FOUND, R()))
    assert [p["margins_ps"]["tRP min"] for p in data["points"]] == [60_000, 10_000, -30_000, -2_000_000]
    assert (data["reach"]["least_clock"], data["reach"]["most_grant_ps"]) == ("2.4 MHz", None)
