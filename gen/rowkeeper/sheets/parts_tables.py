"""Tables of the catalogue for a terminal.

Takes the plain rows that reading gives of its catalogue; gives text of at most 100 columns. Must not know what a part
is.
"""

from collections.abc import Iterable, Mapping, Sequence
from typing import TypeVar

from rowkeeper.reading.describe import CatalogRow, FigureRow
from rowkeeper.reading.figures import Mark
from rowkeeper.sheets.columns import paragraph, table
from rowkeeper.sheets.tables import MEMORY_MARK, lines_text

__all__ = ["catalogue_text", "figures_text"]

_HEADINGS = ("symbol", "grade", "min", "max", "unit", "source", "note")
Name = TypeVar("Name", bound=str)
_RIGHT = frozenset({"min", "max"})


def catalogue_text(kinds: Mapping[Name, Iterable[CatalogRow]]) -> str:
    """Every kind of part with the names, titles and chief figures in the catalogue."""
    return lines_text(*(_kind(kind, list(rows)) for kind, rows in kinds.items()))


def _kind(kind: str, rows: Sequence[CatalogRow]) -> list[str]:
    if not rows:
        return [*paragraph(kind), "none"]
    return [*paragraph(kind), *table(("name", "what it is", "detail"), [(r.name, r.title, r.detail) for r in rows])]


def figures_text(title: str, rows: Iterable[FigureRow], notes: Iterable[str] = ()) -> str:
    """The figures of one part with their sources as numbered lines, then its notes."""
    listed = list(rows)
    numbers = {origin: number for number, origin in enumerate(dict.fromkeys(map(_origin, listed)), 1)}
    cells = [_cells(row, numbers[_origin(row)]) for row in listed]
    shown = [column for column in range(len(_HEADINGS)) if any(row[column] for row in cells)]
    heads = [_HEADINGS[column] for column in shown]
    right = [place for place, head in enumerate(heads) if head in _RIGHT]
    body = table(heads, [[row[column] for column in shown] for row in cells], right) if cells else ["no figure"]
    sources = [line for origin, n in numbers.items() for line in paragraph(origin, f"[{n}] ".rjust(5), " " * 5)]
    remarks = [line for note in notes for line in paragraph(note, "- ", "  ")]
    return lines_text(paragraph(title), body, _memory(listed), sources, remarks)


def _origin(row: FigureRow) -> str:
    """A source with how far it can be trusted, where that is more than its name says."""
    return row.source if row.mark in (Mark.SHEET.value, row.source) else f"{row.source} ({row.mark})"


def _cells(row: FigureRow, number: int) -> tuple[str, ...]:
    mark = f" {MEMORY_MARK}" if row.mark == Mark.MEMORY.value else ""
    return (row.symbol + mark, row.grade, row.min, row.max, row.unit, f"[{number}]", row.note)


def _memory(rows: Iterable[FigureRow]) -> list[str]:
    known = all(row.mark != Mark.MEMORY.value for row in rows)
    return [] if known else [f"{MEMORY_MARK} from memory, confirmed in no document at hand"]
