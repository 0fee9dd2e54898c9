"""Tables of plain text that never need scrolling sideways.

Takes headings and rows of text; gives lines of at most `WIDTH` columns. Cells that do not fit are wrapped, never cut.
Must not know what the cells mean.
"""

import unicodedata
from collections.abc import Iterable, Sequence

from rowkeeper.sheets.plain import one_line

__all__ = ["WIDTH", "paragraph", "shown_width", "table", "wrapped"]

WIDTH = 100
_GAP = "  "
_LEAST = 4  # no column is made narrower than this, whatever has to share the line
_BLANK = "\N{NO-BREAK SPACE}"  # a blank that wrapping leaves alone


def shown_width(text: str) -> int:
    """Columns that a terminal gives to the text: two for a wide letter, none for a combining mark."""
    return sum(_letter_width(letter) for letter in text)


def _letter_width(letter: str) -> int:
    if unicodedata.category(letter) in ("Mn", "Me"):
        return 0
    return 2 if unicodedata.east_asian_width(letter) in ("W", "F") else 1


def wrapped(text: str, width: int) -> list[str]:
    """The words of the text in lines of at most `width` columns; a word longer than a line is broken."""
    lines = [""]
    for word in text.split(" "):
        longer = f"{lines[-1]} {word}" if lines[-1] else word
        if shown_width(longer) <= width:
            lines[-1] = longer
            continue
        pieces = _pieces(word, width)
        lines = [*lines, *pieces] if lines[-1] else [*lines[:-1], *pieces]
    return lines


def _pieces(word: str, width: int) -> list[str]:
    pieces = [""]
    for letter in word:
        if shown_width(pieces[-1] + letter) > width:
            pieces.append("")
        pieces[-1] += letter
    return pieces


def paragraph(text: str, indent: str = "", hanging: str | None = None) -> list[str]:
    """The text as lines within `WIDTH`; the first after `indent`, the rest after `hanging`."""
    rest = indent if hanging is None else hanging
    lines = wrapped(one_line(text), WIDTH - max(shown_width(indent), shown_width(rest)))
    return [(rest if number else indent) + line for number, line in enumerate(lines)]


def table(headings: Sequence[str], rows: Iterable[Sequence[str]], right: Iterable[int] = ()) -> list[str]:
    """A table with a rule under its headings. In the columns `right` numbers stand point under point.

    Every row has as many cells as there are headings.
    """
    grid = [[one_line(cell) for cell in row] for row in rows]
    tails = {column: _tails([row[column] for row in grid]) for column in frozenset(right)}
    filled = [[_filled(cell, tails.get(column)) for column, cell in enumerate(row)] for row in grid]
    heads = [one_line(heading) for heading in headings]
    widths = _widths([heads, *filled])
    printed = [_row(cells, widths, frozenset(tails)) for cells in (heads, *filled)]
    rule = _GAP.join("-" * width for width in widths)
    return [*printed[0], rule, *(line for lines in printed[1:] for line in lines)]


def _tails(cells: Iterable[str]) -> int:
    """The most columns that any cell takes from its decimal point on."""
    return max((len(cell) - cell.index(".") for cell in cells if "." in cell), default=0)


def _filled(cell: str, tail: int | None) -> str:
    """The cell with blanks behind it that bring its decimal point, or its end, to the place of the others."""
    if tail is None or not cell:
        return cell
    own = len(cell) - cell.index(".") if "." in cell else 0
    return cell + _BLANK * (tail - own)


def _widths(grid: Sequence[Sequence[str]]) -> list[int]:
    """Natural widths; where they do not fit, the widest column gives way, down to its longest word if that helps."""
    columns = [[row[column] for row in grid] for column in range(len(grid[0]))]
    widths = [max(1, *map(shown_width, cells)) for cells in columns]
    words = [max(map(shown_width, " ".join(cells).split(" "))) for cells in columns]
    room = WIDTH - len(_GAP) * (len(widths) - 1)
    return _squeezed(_squeezed(widths, words, room), [_LEAST] * len(widths), room)


def _squeezed(widths: Sequence[int], floors: Sequence[int], room: int) -> list[int]:
    """Widths made smaller until they fit, the widest first, none below its floor."""
    fitted = list(widths)
    while sum(fitted) > room:
        yielding = [column for column, width in enumerate(fitted) if width > floors[column]]
        if not yielding:
            break
        fitted[max(yielding, key=lambda column: fitted[column])] -= 1
    return fitted


def _row(cells: Sequence[str], widths: Sequence[int], rights: frozenset[int]) -> list[str]:
    columns = [wrapped(cell, width) for cell, width in zip(cells, widths, strict=True)]
    height = max(len(lines) for lines in columns)
    printed = []
    for number in range(height):
        parts = [
            _set(lines[number] if number < len(lines) else "", width, column in rights)
            for column, (lines, width) in enumerate(zip(columns, widths, strict=True))
        ]
        printed.append(_GAP.join(parts).replace(_BLANK, " ").rstrip())
    return printed


def _set(text: str, width: int, to_the_right: bool) -> str:
    space = " " * (width - shown_width(text))
    return space + text if to_the_right else text + space
