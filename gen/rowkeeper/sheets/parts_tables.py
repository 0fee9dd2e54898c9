"""Tables of the catalogue for a terminal.

Takes rows of text: symbol, min, max, unit, source, mark; gives text of at most 100 columns. Must not know what a
part is.
"""

from collections.abc import Iterable, Sequence

from rowkeeper.sheets.columns import paragraph, table
from rowkeeper.sheets.tables import lines_text

__all__ = ["FIGURE_HEADINGS", "catalogue_text", "figures_text"]

FIGURE_HEADINGS = ("symbol", "min", "max", "unit", "source", "mark")


def catalogue_text(kinds: Sequence[tuple[str, Sequence[tuple[str, str]]]]) -> str:
    """Every kind of part with the names and titles in the catalogue."""
    return lines_text(*([kind, *table(("name", "what it is"), rows)] for kind, rows in kinds))


def figures_text(title: str, rows: Iterable[Sequence[str]], notes: Iterable[str] = ()) -> str:
    """The figures of one part with their sources, then its notes."""
    listed = list(rows)
    body = table(FIGURE_HEADINGS, listed, right=(1, 2)) if listed else ["no figure in the catalogue"]
    remarks = [line for note in notes for line in paragraph(note, "- ", "  ")]
    return lines_text([*paragraph(title), "", *body], remarks)
