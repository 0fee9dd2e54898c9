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
    """The pins of one function that the device itself fixes: a supply, ground, a configuration pin."""

    function: str
    level: str
    pins: str
    note: str


def sheet_html(facts: SheetFacts) -> str:
    """The whole sheet."""
    rows = facts.pins
    page = (
        _environment()
        .get_template("sheet.html.j2")
        .render(
            facts=facts,
            view=package_view(rows),
            wired=[_wired(row) for row in rows if kind_of(row) in ("in", "out")],
            fixed=_fixed(row for row in rows if kind_of(row) == "fixed"),
            open_pins=_spans([one_line(row.pin) for row in rows if kind_of(row) == "open"]),
        )
    )
    return _BEFORE_UNIT.sub(_FIXED_SPACE, page)


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
    groups: dict[tuple[str, str, str], list[str]] = {}
    for row in rows:
        key = (one_line(row.function), one_line(row.level or row.meets), one_line(row.note))
        groups.setdefault(key, []).append(one_line(row.pin))
    return [FixedPins(function, level, _spans(pins), note) for (function, level, note), pins in groups.items()]


def _spans(pins: list[str]) -> str:
    """Pin ids as text, runs of three or more numbers drawn together: `1, 2, 7 to 9`."""
    runs: list[list[str]] = []
    for pin in pins:
        if runs and pin.isdecimal() and runs[-1][-1].isdecimal() and int(pin) == int(runs[-1][-1]) + 1:
            runs[-1].append(pin)
        else:
            runs.append([pin])
    return ", ".join(f"{run[0]} to {run[-1]}" if len(run) > 2 else ", ".join(run) for run in runs)
