"""The assembly sheet: self-contained, well formed, complete, and closed to foreign text."""

import re
from collections.abc import Callable
from dataclasses import replace
from html.parser import HTMLParser
from xml.etree import ElementTree

import pytest

from rowkeeper.contract import PinRow
from rowkeeper.sheets.facts import HANDLING, NOT_PROVEN
from rowkeeper.sheets.sheet_html import sheet_html
from sheets import hostile
from sheets.records import DIGEST, FACTS, pin_rows

XHTML = "{http://www.w3.org/1999/xhtml}"
SVG = "{http://www.w3.org/2000/svg}"


def _tree(text: str) -> ElementTree.Element:
    return ElementTree.fromstring(text)


def _text(element: ElementTree.Element) -> str:
    return " ".join("".join(element.itertext()).split())


class _Reader(HTMLParser):
    """Collects tags and attributes as a browser would see them."""

    def __init__(self) -> None:
        super().__init__()
        self.tags: list[str] = []
        self.names: set[str] = set()
        self.values: list[str] = []

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.tags.append(tag)
        self.names |= {name for name, _ in attrs}
        self.values += [value or "" for _, value in attrs]


def _read(text: str) -> _Reader:
    reader = _Reader()
    reader.feed(text)
    reader.close()
    return reader


def test_golden(golden: Callable[[str, str], None]) -> None:
    """The whole sheet, byte for byte."""
    golden("sheet.html", sheet_html(FACTS))


def test_self_contained_without_scripts() -> None:
    """Nothing is loaded from anywhere and nothing runs."""
    text = sheet_html(FACTS)
    reader = _read(text)
    assert not {"script", "link", "img", "iframe", "object", "embed", "base", "form", "a"} & set(reader.tags)
    assert not {"src", "href", "xlink:href", "style", "action"} & reader.names
    assert not [name for name in reader.names if name.startswith("on")]
    assert not re.search(r"url\(|@import", text)
    spaces = {"http://www.w3.org/1999/xhtml", "http://www.w3.org/2000/svg"}
    assert spaces == set(re.findall(r"https?://[^\"]+", text))


def test_two_pages_each_with_the_whole_digest_at_its_foot() -> None:
    """A page that is torn off still says what it belongs to."""
    root = _tree(sheet_html(FACTS))
    pages = [e for e in root.iter(f"{XHTML}div") if e.get("class") == "page"]
    feet = [e for e in root.iter(f"{XHTML}div") if e.get("class") == "foot"]
    assert 2 == len(pages) == len(feet)
    assert [foot for foot in feet if DIGEST not in _text(foot)] == []


def test_head_names_the_board() -> None:
    """Board, revision, tool, short digest, verdict."""
    text = _text(_tree(sheet_html(FACTS)))
    wanted = (FACTS.board_name, "board revision B", "rowkeeper 0.1.0", "3f9a 0c51 d27b", FACTS.verdict)
    assert [part for part in wanted if part not in text] == []


def test_drawing_shows_top_view_pin_1_and_every_pin() -> None:
    """The words, the dot, a title for the drawing and for each of the hundred pins."""
    svg = next(_tree(sheet_html(FACTS)).iter(f"{SVG}svg"))
    texts = [_text(e) for e in svg.iter(f"{SVG}text")]
    assert [word for word in ("TOP VIEW", "PIN 1") if word not in texts] == []
    assert [str(pin) for pin in range(1, 101)] == [text for text in texts if text.isdecimal()]
    titles = [_text(e) for e in svg.iter(f"{SVG}title")]
    assert titles[0].startswith("Top view")
    assert len(titles) == 101
    assert "pin 20: /RAS, device → board" in titles
    assert len(list(svg.iter(f"{SVG}circle"))) == 1


def test_colours_are_black_and_white_only() -> None:
    """The sheet loses nothing on a black printer."""
    assert {"#000", "#fff"} == set(re.findall(r"#[0-9a-fA-F]{3,6}\b", sheet_html(FACTS)))


def test_active_low_has_an_overbar_in_the_drawing_and_a_slash_in_the_table() -> None:
    """RAS under a bar, /RAS in text."""
    root = _tree(sheet_html(FACTS))
    barred = {_text(e) for e in root.iter(f"{SVG}tspan") if e.get("text-decoration") == "overline"}
    assert {"RAS", "CAS", "WE", "MREQ", "M1", "RESET"} <= barred
    cells = {_text(e) for e in root.iter(f"{XHTML}td") if e.get("class") == "net"}
    assert {"/RAS", "/CAS", "MA0", "A15", "CLK"} <= cells


def test_pin_table_has_every_wired_pin_once_with_a_box() -> None:
    """A row per wire, and a box to tick."""
    rows = next(_tree(sheet_html(FACTS)).iter(f"{XHTML}tbody"))
    pins = [_text(row[0]) for row in rows if _text(row[0]) != "–"]
    assert [row.pin for row in pin_rows() if row.direction in ("input", "output")] == pins
    assert all(len(list(row.iter(f"{XHTML}span"))) == 1 for row in rows)


def test_every_pin_of_the_package_is_accounted_for() -> None:
    """Supplies and open pins stand below the table."""
    text = _text(_tree(sheet_html(FACTS)))
    assert "VCC 11, 35, 61, 92: 1.2 V; 100 nF close by" in text
    assert "CDONE 43; CRESET_B 44;" in text
    assert "leave open 3, 7, 9, 12," in text


def test_the_data_path_is_in_the_table() -> None:
    """A net that does not touch the device is still a wire to check."""
    rows = next(_tree(sheet_html(FACTS)).iter(f"{XHTML}tbody"))
    expected = "DATA_OUT does not touch the device U5 to U12, pin 14 U19 SN74LS244 at 5.0 V, load 45 pF"
    assert expected == " ".join(filter(None, map(_text, rows[-1][1:])))


def test_long_texts_get_a_page_of_their_own() -> None:
    """A third page with its own foot, rather than lines below the foot of the second."""
    facts = replace(FACTS, not_proven=NOT_PROVEN * 12)
    root = _tree(sheet_html(facts))
    feet = [_text(e) for e in root.iter(f"{XHTML}div") if e.get("class") == "foot"]
    assert [foot[-11:] for foot in feet] == ["page 1 of 3", "page 2 of 3", "page 3 of 3"]
    assert [foot for foot in feet if DIGEST not in foot] == []
    assert _text(root).count("Metastability beyond two flip-flops.") == 12


def test_cautions_and_limits_are_printed() -> None:
    """Whole sentences: handling, order, what is assumed, what is not proven."""
    text = _text(_tree(sheet_html(FACTS)))
    wanted = (
        *HANDLING,
        *FACTS.order,
        *FACTS.chips,
        *FACTS.assumed,
        *NOT_PROVEN,
        *FACTS.remove,
        *FACTS.keep,
        *FACTS.add,
    )
    assert [part for part in wanted if part not in text] == []


def test_a_sheet_that_did_not_pass_says_do_not_fit() -> None:
    """In words, not by colour, with what failed or did not run."""
    facts = replace(FACTS, passed=False, verdict="NOT RUN: 1 of 2", open_items=("not run: bench march",))
    text = _text(_tree(sheet_html(facts)))
    assert "DO NOT FIT. NOT RUN: 1 of 2" in text
    assert "not run: bench march" in text
    assert "DO NOT FIT" not in sheet_html(FACTS)


@pytest.mark.parametrize("text", hostile.ALL)
def test_foreign_text_stays_text(text: str) -> None:
    """Whatever a board file says, the tags of the page are those of the template."""
    row = PinRow("1", text, text, "in", text, text, text, text)
    wired = (row, *pin_rows()[1:])
    plain = replace(FACTS, pins=(PinRow("1", "x", "x", "in", "x", "x", "x", "x"), *pin_rows()[1:]))
    facts = replace(FACTS, board_name=text, revision=text, slug=text, device=text, package=text, pins=wired)
    facts = replace(facts, remove=(text,), keep=(text,), add=(text,), summary=((text, text),), assumed=(text,))
    plain = replace(plain, remove=("x",), keep=("x",), add=("x",), summary=(("x", "x"),), assumed=("x",))
    expected, actual = _read(sheet_html(plain)), _read(sheet_html(facts))
    assert expected.tags == actual.tags
    assert expected.names == actual.names


def test_no_leftover_of_the_template() -> None:
    """Every placeholder was filled."""
    assert not re.search(r"\{\{|\}\}|\{%|%\}|None|Undefined", sheet_html(FACTS))
