"""The assembly sheet as one self-contained page to print.

Takes `SheetFacts`; gives HTML that is also well-formed XML, with its style and drawing inside, without scripts or
references to anything outside. Must not know where a fact came from.
"""

import re
from collections.abc import Iterable
from dataclasses import dataclass

from jinja2 import Environment, PackageLoader, StrictUndefined

from rowkeeper.contract import PinRow
from rowkeeper.sheets.facts import SheetFacts
from rowkeeper.sheets.package_view import direction_word, kind_of, package_view
from rowkeeper.sheets.plain import net_label, one_line

__all__ = ["sheet_html"]

_BEFORE_UNIT = re.compile(r"(?<=\d) (?=(?:[mk]?V|[numk]?s|[pnu]F|[kM]?ohm|[kMG]?Hz|[KM]iB|ppm|%)\b)")
_LETTERS_A_LINE = 46  # of a text column of the second page
_TEXT_COLUMNS = 3
_FIXED_SPACE = "\N{NO-BREAK SPACE}"


@dataclass(frozen=True, slots=True)
class WiredPin:
    """One line of the pin table."""

    pin: str
    net: str
    direction: str
    level: str
    meets: str
    through: str
    note: str


@dataclass(frozen=True, slots=True)
class FixedPins:
    """Pins that the device itself fixes and that want the same: supplies of one level, ground, a configuration pin."""

    functions: tuple[tuple[str, str], ...]  # function and its pins
    remark: str


def sheet_html(facts: SheetFacts) -> str:
    """The whole sheet."""
    rows = facts.pins
    wired = [_wired(row) for row in rows if kind_of(row) in ("in", "out")]
    fixed = _fixed(row for row in rows if kind_of(row) == "fixed")
    template = _environment().get_template("sheet.html.j2")
    page = template.render(
        facts=facts,
        view=package_view(rows),
        wired=wired,
        fixed=fixed,
        pages=_pages(facts, len(wired) + len(facts.paths), len(fixed)),
        open_pins=_spans([one_line(row.pin) for row in rows if kind_of(row) == "open"]),
    )
    return _BEFORE_UNIT.sub(_FIXED_SPACE, page)


def _pages(facts: SheetFacts, rows: int, fixed: int) -> int:
    """Two pages, or three where the texts would run over the foot of the second. Tenths of a millimetre, measured."""
    room = 2570 - 35 * rows - 14 * (fixed + 1) - _packages_height(facts)
    texts = (facts.order, facts.chips, facts.assumed, (*facts.open_items, *facts.not_proven), facts.notes)
    lines = sum(-(-len(item) // _LETTERS_A_LINE) for items in texts for item in items)
    spaces = sum(len(items) for items in texts)
    needed = (29 * lines + 4 * spaces + 60 * len(texts)) // _TEXT_COLUMNS
    return 2 if needed <= room else 3


def _packages_height(facts: SheetFacts) -> int:
    """What the tables of the packages take, in tenths of a millimetre."""
    lines = sum(len(package.channels) + 7 for package in facts.packages)
    return 32 * lines // _TEXT_COLUMNS


def _environment() -> Environment:
    return Environment(
        loader=PackageLoader("rowkeeper.sheets", "templates"),
        undefined=StrictUndefined,
        autoescape=True,
        trim_blocks=True,
        lstrip_blocks=True,
        keep_trailing_newline=True,
    )


def _wired(row: PinRow) -> WiredPin:
    texts = (row.level, row.meets, row.through, row.note)
    return WiredPin(one_line(row.pin), net_label(row.net), direction_word(row), *map(one_line, texts))


def _fixed(rows: Iterable[PinRow]) -> list[FixedPins]:
    groups: dict[str, dict[str, list[str]]] = {}
    for row in rows:
        remark = "; ".join(one_line(text) for text in (row.level, row.meets, row.through, row.note) if text)
        groups.setdefault(remark, {}).setdefault(one_line(row.function), []).append(one_line(row.pin))
    return [
        FixedPins(tuple((function, _spans(pins)) for function, pins in functions.items()), remark)
        for remark, functions in groups.items()
    ]


def _spans(pins: list[str]) -> str:
    """Pin ids as text, runs of three or more numbers drawn together: `1, 2, 7 to 9`."""
    runs: list[list[str]] = []
    for pin in pins:
        if runs and pin.isdecimal() and runs[-1][-1].isdecimal() and int(pin) == int(runs[-1][-1]) + 1:
            runs[-1].append(pin)
        else:
            runs.append([pin])
    return ", ".join(f"{run[0]} to {run[-1]}" if len(run) > 2 else ", ".join(run) for run in runs)
