"""The pin list reads back in any program that knows the dialect, and computes nothing."""

import csv
import io
from collections.abc import Callable

import pytest
from hypothesis import given
from hypothesis import strategies as st

from rowkeeper.contract import PinRow
from rowkeeper.sheets.pins_csv import COLUMNS, guarded, pins_csv
from sheets import hostile
from sheets.records import pin_rows


def _read(text: str) -> list[list[str]]:
    return list(csv.reader(io.StringIO(text, newline=""), strict=True))


def test_golden(golden: Callable[[str, str], None]) -> None:
    """The whole file, byte for byte."""
    golden("pins.csv", pins_csv(pin_rows()))


def test_one_row_per_pin_after_the_header() -> None:
    """A hundred pins give a hundred and one records, in pin order, ids as text."""
    records = _read(pins_csv(pin_rows()))
    assert [list(COLUMNS)] == records[:1]
    assert [str(pin) for pin in range(1, 101)] == [record[0] for record in records[1:]]


def test_dialect() -> None:
    """CRLF after every record, and every field quoted (RFC 4180)."""
    text = pins_csv(pin_rows())
    lines = text.split("\r\n")
    assert lines.pop() == ""
    assert "\n" not in "".join(lines)
    assert all(line.startswith('"') and line.endswith('"') and line.count('","') == 7 for line in lines)


@given(st.lists(st.text(), min_size=8, max_size=8))
def test_any_text_reads_back_as_one_record(texts: list[str]) -> None:
    """Quotes, commas and line ends in a field never make another field or record, and never a formula."""
    records = _read(pins_csv([PinRow(*texts)]))
    assert [guarded(text) for text in texts] == records[1]
    assert len(records) == 2
    assert not [cell for cell in records[1] if cell[:1] in ("=", "+", "-", "@")]


@pytest.mark.parametrize("text", ["=1+1", "+1", "-5 V", "@SUM(A1)", " =1", "\t=1", "\uff1d1", hostile.FORMULA])
def test_formulas_are_guarded(text: str) -> None:
    """An apostrophe makes the spreadsheet show the text."""
    assert guarded(text)[0] == "'"
    assert guarded("U5.4") == "U5.4"
