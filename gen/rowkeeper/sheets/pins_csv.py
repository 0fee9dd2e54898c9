"""The pin list as comma-separated text: one row per package pin.

Takes `PinRow` records; gives text with a header, commas, CRLF line ends and every field quoted (RFC 4180). Pin ids
stay text. Must not know where a row came from.
"""

from collections.abc import Iterable

from rowkeeper.contract import PinRow
from rowkeeper.sheets.plain import one_line

__all__ = ["COLUMNS", "guarded", "pins_csv"]

COLUMNS = ("pin", "function", "net", "direction", "level", "meets", "through", "note")

# A spreadsheet takes a cell that starts with one of these for a formula, quoted or not; the wide forms count in some.
_FORMULA_STARTS = frozenset("=+-@|%\uff1d\uff0b\uff0d\uff20")


def guarded(text: str) -> str:
    """The text of one cell on one line, with an apostrophe before anything that a spreadsheet would compute."""
    line = one_line(text)
    return f"'{line}" if line[:1] in _FORMULA_STARTS else line


def pins_csv(rows: Iterable[PinRow]) -> str:
    """The whole file. Rows keep the order they are given in."""
    records = [COLUMNS, *(tuple(getattr(row, column) for column in COLUMNS) for row in rows)]
    return "".join(_record(fields) for fields in records)


def _record(fields: Iterable[str]) -> str:
    return ",".join('"' + guarded(field).replace('"', '""') + '"' for field in fields) + "\r\n"
