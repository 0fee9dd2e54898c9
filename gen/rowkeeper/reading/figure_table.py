"""Tables of a catalogue file: sources, figures per column, formulas, levels.

Takes nodes of the tree; gives `Source`, `Figure`, `BusFormula` and `IoLevels` records, one mapping per column. Must not
know whether the table is a chip's, a bus's or a part's.
"""

import re
from collections.abc import Mapping
from dataclasses import dataclass
from itertools import repeat

from rowkeeper.reading.board import BusFormula, IoLevels
from rowkeeper.reading.figures import Figure, Mark, Source
from rowkeeper.reading.problems import Problems, quoted
from rowkeeper.reading.section import Section, one_of, read_scalars
from rowkeeper.reading.tree import Block, Listing, Node, Scalar
from rowkeeper.reading.units import plain_text, signed_time_ps, voltage_mv

__all__ = ["CLOCK_TERMS", "Columns", "read_figures", "read_formulas", "read_levels", "read_source", "read_sources"]

MARKS = {
    "sheet": Mark.SHEET,
    "copy": Mark.COPY,
    "derived": Mark.DERIVED,
    "practice": Mark.PRACTICE,
    "memory": Mark.MEMORY,
}
CLOCK_TERMS = ("TcC", "TwCh", "TwCl", "TrC", "TfC")
_UNKNOWN = Source(Mark.MEMORY)


@dataclass(frozen=True, slots=True)
class Columns:
    """The columns of a table, the source each takes where a row names none, and all sources of the file."""

    names: tuple[str, ...]
    defaults: tuple[Source, ...]
    sources: Mapping[str, Source]


def read_source(node: Node | None, sources: Mapping[str, Source], problems: Problems) -> Source:
    """A source written out (`{mark, document, page}`), or the name of one of the file's sources."""
    if node is None:
        return _UNKNOWN
    if isinstance(node, Scalar):
        name = one_of(node, sources, "source of this file", problems)
        return _UNKNOWN if name is None else sources[name]
    section = Section(node, "a source", problems, ("mark",), ("document", "page"))
    word = section.scalar("mark")
    mark = None if word is None else one_of(word, MARKS, "mark", problems)
    if mark is None:
        return _UNKNOWN
    source = Source(MARKS[mark], section.take("document", plain_text, ""), section.take("page", plain_text, ""))
    if source.mark is not Mark.MEMORY and not source.document:
        problems.add(node.at, "this source names no document", "add `document:`, or write `mark: memory`")
    return source


def read_sources(node: Node | None, problems: Problems) -> dict[str, Source]:
    """The `sources:` block of a file."""
    if node is None:
        return {}
    if not isinstance(node, Block):
        problems.add(
            node.at, "`sources` must be a block of keys", "write `name: {mark: sheet, document: ..., page: ...}`"
        )
        return {}
    return {key.text: read_source(value, {}, problems) for key, value in node.entries}


def _per_column(node: Node | None, columns: Columns, what: str, problems: Problems) -> list[Scalar | None]:
    """One scalar per column; a single value stands for all; `none` and a missing row give None."""
    width = len(columns.names)
    if node is None:
        return [None] * width
    if isinstance(node, Scalar):
        cells = list(repeat(node, width))
    else:
        cells = list(read_scalars(node, what, problems))
        if len(cells) != width:
            problems.add(node.at, f"{what} has {len(cells)} values for {width} columns", "write one value per column")
            return [None] * width
    return [None if cell.text == "none" else cell for cell in cells]


def _row_sources(node: Node | None, columns: Columns, problems: Problems) -> list[Source]:
    if node is None:
        return list(columns.defaults)
    if isinstance(node, Listing):
        cells = _per_column(node, columns, "`source`", problems)
        return [read_source(cell, columns.sources, problems) for cell in cells]
    return [read_source(node, columns.sources, problems)] * len(columns.names)


def _time(cell: Scalar | None, problems: Problems) -> int | None:
    return None if cell is None else signed_time_ps(cell, problems)


def read_figures(node: Node | None, columns: Columns, problems: Problems) -> list[dict[str, Figure]]:
    """`symbol: {min: ..., max: ..., source: ..., note: ...}`, as one mapping from symbol to figure per column."""
    tables: list[dict[str, Figure]] = [{} for _ in columns.names]
    if node is None:
        return tables
    if not isinstance(node, Block):
        problems.add(node.at, "a table must be a block of keys", "write `tRC: {min: 375 ns}`")
        return tables
    for key, value in node.entries:
        row = Section(value, key.text, problems, (), ("min", "max", "source", "note"))
        lows = _per_column(row.node("min"), columns, f"{key.text} min", problems)
        highs = _per_column(row.node("max"), columns, f"{key.text} max", problems)
        sources = _row_sources(row.node("source"), columns, problems)
        notes = [cell.text if cell else "" for cell in _per_column(row.node("note"), columns, "`note`", problems)]
        if not row.has("min") and not row.has("max"):
            problems.add(value.at, f"{key.text} has neither min nor max", "a typical value is not a limit: give one")
        for table, low, high, source, note in zip(tables, lows, highs, sources, notes, strict=True):
            if low is not None or high is not None:
                figure = Figure(key.text, _time(low, problems), _time(high, problems), source, note)
                _check_order(figure, low, high, problems)
                table[key.text] = figure
    return tables


def _check_order(figure: Figure, low: Scalar | None, high: Scalar | None, problems: Problems) -> None:
    if low is None or high is None or figure.lo_ps is None or figure.hi_ps is None:
        return
    if figure.lo_ps > figure.hi_ps:
        problems.add(low.at, f"{figure.symbol}: min {low.text} is over max {high.text}", "exchange the two")


_TERM = re.compile(r"(?:([1-9]) )?(TcC|TwCh|TwCl|TrC|TfC)")
_SUM = re.compile(r"(?P<terms>[A-Za-z0-9 +]+?)(?: (?P<sign>[+-]) (?P<offset>[0-9.]+ [a-z]+))?")


def _formula(symbol: str, cell: Scalar, source: Source, note: str, problems: Problems) -> BusFormula:
    """`2 TcC + TwCh + TfC - 80 ns` as a list of terms and an offset."""
    terms: list[str] = []
    match = _SUM.fullmatch(cell.text)
    for part in match["terms"].split(" + ") if match else ["?"]:
        term = _TERM.fullmatch(part)
        if term is None:
            problems.add(cell.at, f"{quoted(cell.text)} is not a sum of clock terms", "write `TwCh + TfC - 65 ns`")
            return BusFormula(symbol, (), 0, source, note)
        terms += [term[2]] * int(term[1] or "1")
    offset = 0
    if match and match["offset"]:
        offset = signed_time_ps(Scalar(match["offset"], cell.at), problems)
        offset = -offset if match["sign"] == "-" else offset
    return BusFormula(symbol, tuple(terms), offset, source, note)


def read_formulas(node: Node | None, columns: Columns, problems: Problems) -> list[dict[str, BusFormula]]:
    """`symbol: {sum: [...], source: ..., note: ...}`, as one mapping from symbol to formula per column."""
    tables: list[dict[str, BusFormula]] = [{} for _ in columns.names]
    if node is None:
        return tables
    if not isinstance(node, Block):
        problems.add(node.at, "`formulas` must be a block of keys", "write `TwMREQl: {sum: TcC - 30 ns}`")
        return tables
    for key, value in node.entries:
        row = Section(value, key.text, problems, ("sum",), ("source", "note"))
        sums = _per_column(row.node("sum"), columns, f"{key.text} sum", problems)
        sources = _row_sources(row.node("source"), columns, problems)
        note = row.take("note", plain_text, "")
        for table, cell, source in zip(tables, sums, sources, strict=True):
            if cell is not None:
                table[key.text] = _formula(key.text, cell, source, note, problems)
    return tables


def read_levels(node: Node | None, what: str, sources: Mapping[str, Source], problems: Problems) -> IoLevels:
    """Levels of one pin class; a voltage that the sheet does not give is left out."""
    if node is None:
        return IoLevels(None, None, None, None, None, _UNKNOWN)
    names = ("vih_min", "vil_max", "voh_min", "vol_max", "abs_max")
    section = Section(node, what, problems, ("source",), names)
    cells = [section.scalar(name) for name in names]
    vih, vil, voh, vol, most = (None if cell is None else voltage_mv(cell, problems) for cell in cells)
    return IoLevels(vih, vil, voh, vol, most, read_source(section.node("source"), sources, problems))
