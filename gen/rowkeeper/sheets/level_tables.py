"""Levels, drives and synchronisers for a terminal.

Takes `Levels`; gives text of at most 100 columns, volts as the sheets write them. Nets that are alike share a line.
Must not know how a level was found.
"""

import re
from collections.abc import Callable, Hashable, Iterable, Sequence
from fractions import Fraction
from typing import TypeVar

from rowkeeper.contract import Drive, LevelMargin, LevelNeed, Levels, Settling
from rowkeeper.reading.figures import Source
from rowkeeper.sheets.columns import paragraph, table
from rowkeeper.sheets.plain import one_line
from rowkeeper.sheets.quantities import decimal, frequency, nanoseconds
from rowkeeper.sheets.tables import MEMORY_MARK, lines_text, source_text

__all__ = ["levels_text", "net_names", "signed_volts"]

T = TypeVar("T")
_NUMBERED = re.compile(r"([a-z_]+)([0-9]+)")


def levels_text(levels: Levels) -> str:
    """Wires worst first, what needs a part, what the outputs drive, and the synchronisers."""
    sources = _Sources()
    blocks = (_wires(levels.wires, sources), _needs(levels.needs), _drives(levels.drives), _settling(levels.settling))
    wires, *rest = blocks
    return lines_text(wires, sources.lines(), *rest)


class _Sources:
    """Numbers the documents in the order of their first use."""

    def __init__(self) -> None:
        self._numbers: dict[str, int] = {}

    def number(self, source: Source) -> str:
        return f"[{self._numbers.setdefault(source_text(source), len(self._numbers) + 1)}]"

    def lines(self) -> list[str]:
        listed = [
            line for text, number in self._numbers.items() for line in paragraph(text, f"[{number}] ".rjust(5), "     ")
        ]
        return ["Sources of the levels:", *listed] if listed else []


def _volts(millivolts: int | None) -> str:
    return "" if millivolts is None else decimal(Fraction(millivolts, 1000), 2)


def signed_volts(millivolts: int | None) -> str:
    """A margin in volts with its sign; nothing to add to a plain zero."""
    if millivolts is None:
        return "?"
    return f"+{_volts(millivolts)}" if millivolts > 0 else _volts(millivolts)


def net_names(nets: Sequence[str]) -> str:
    """`a0 to a15`, `ras_n, cas_n`: runs of numbered nets drawn together."""
    runs: list[list[str]] = []
    for net in nets:
        match = _NUMBERED.fullmatch(net)
        last = _NUMBERED.fullmatch(runs[-1][-1]) if runs else None
        follows = match and last and match[1] == last[1] and int(match[2]) == int(last[2]) + 1
        if follows:
            runs[-1].append(net)
        else:
            runs.append([net])
    return ", ".join(run[0] if len(run) == 1 else f"{run[0]} to {run[-1]}" for run in runs)


def _alike(records: Iterable[T], key: Callable[[T], Hashable]) -> list[list[T]]:
    """Records with the same key together, in the order of their first."""
    groups: dict[Hashable, list[T]] = {}
    for record in records:
        groups.setdefault(key(record), []).append(record)
    return list(groups.values())


def _without_place(name: str) -> str:
    """Two packages of one part are alike: the designator is left out."""
    return re.sub(r" [A-Z]{1,3}[0-9]+$", "", name)


def _wire_key(wire: LevelMargin) -> Hashable:
    ends = _without_place(wire.driver), _without_place(wire.receiver), wire.pin_class
    return ends, wire.voh_mv, wire.vih_mv, wire.vol_mv, wire.vil_mv, wire.highest_mv, wire.limit_mv


def _worst(wire: LevelMargin) -> int:
    known = [m for m in (wire.high_margin_mv, wire.low_margin_mv) if m is not None]
    return min([*known, -wire.over_mv] if wire.over_mv else known, default=10**9)


def _wires(wires: Sequence[LevelMargin], sources: _Sources) -> list[str]:
    if not wires:
        return ["Levels: NOT RUN, no net has a driver and a receiver."]
    groups = _alike(sorted(wires, key=_worst), _wire_key)
    rows = [_wire_row(group, wires, sources) for group in groups]
    headings = ("high", "low", "VOH - VIH", "VIL - VOL", "pin / most", "nets", "from", "to", "source")
    notes = dict.fromkeys(f"{group[0].net}: {group[0].note}" for group in groups if group[0].note)
    head = paragraph(
        "Levels at the worst supply of both sides, in V; below zero it fails. Pin / most: highest on the pin, its "
        "absolute maximum."
    )
    mark = [f"{MEMORY_MARK} rests on a figure from memory."] if any(wire.from_memory for wire in wires) else []
    return [
        *head,
        *table(headings, rows, right=(0, 1)),
        *mark,
        *(line for note in notes for line in paragraph(note, "- ", "  ")),
    ]


def _wire_row(group: Sequence[LevelMargin], wires: Sequence[LevelMargin], sources: _Sources) -> tuple[str, ...]:
    wire = group[0]
    names = {one.net for one in group}
    ordered = list(dict.fromkeys(one.net for one in wires if one.net in names))
    fails = "" if wire.holds else " FAILS"
    return (
        signed_volts(wire.high_margin_mv) + (MEMORY_MARK if wire.from_memory else ""),
        signed_volts(wire.low_margin_mv),
        _pair(wire.voh_mv, wire.vih_mv),
        _pair(wire.vil_mv, wire.vol_mv),
        f"{_volts(wire.highest_mv) or '?'} / {_volts(wire.limit_mv) or '?'}",
        net_names(ordered) + fails,
        _without_place(wire.driver),
        _without_place(wire.receiver),
        " ".join(dict.fromkeys(sources.number(source) for source in (wire.driver_source, wire.receiver_source))),
    )


def _pair(one: int | None, other: int | None) -> str:
    return f"{_volts(one) or '?'} - {_volts(other) or '?'}"


def _needs(needs: Sequence[LevelNeed]) -> list[str]:
    if not needs:
        return ["No net needs a translator or buffer: both ends fit."]
    groups = _alike(needs, lambda n: (n.direction, n.straight_mv, n.straight_over_mv, n.wanted, _parts(n.stands)))
    rows = [
        (
            net_names([need.net for need in group]),
            group[0].direction,
            _straight(group[0]),
            group[0].wanted,
            _parts(group[0].stands) or "NOTHING",
        )
        for group in groups
    ]
    headings = ("nets", "direction", "joined straight", "family that fits", "there is")
    return ["Nets that need a part between, because their ends do not fit:", *table(headings, rows)]


def _parts(stands: str) -> str:
    """The parts without their designators."""
    return ", ".join(_without_place(part) for part in stands.split(", ")) if stands else ""


def _straight(need: LevelNeed) -> str:
    if need.straight_over_mv:
        return f"{_volts(need.straight_over_mv)} V too much on the pin"
    return f"{signed_volts(need.straight_mv)} V of margin"


def _drives(drives: Sequence[Drive]) -> list[str]:
    if not drives:
        return []
    groups = _alike(drives, _drive_key)
    rows = [
        (
            net_names([drive.net for drive in group]),
            str(group[0].inputs),
            f"{decimal(Fraction(group[0].load_ff, 1000))}",
            _volts(group[0].swing_mv),
            _ohm(group[0].series_milliohm),
            _current(group[0]),
            f"{_ohm(group[0].series_lo_milliohm)} to {_ohm(group[0].series_hi_milliohm)}",
            group[0].note,
        )
        for group in groups
    ]
    headings = ("nets", "inputs", "pF", "swing, V", "series, ohm", "edge, mA", "try, ohm", "note")
    source = drives[0].source
    key = paragraph(
        f"Edge: swing over series resistance at most, times the lines that move together. Try: a range for a scope, "
        f"not a result ({source_text(source)})."
    )
    return ["What the outputs drive:", *table(headings, rows, right=(1, 2, 3, 4)), *key]


def _drive_key(drive: Drive) -> Hashable:
    return drive.inputs, drive.load_ff, drive.swing_mv, drive.series_milliohm, drive.together, drive.note


def _ohm(milliohm: int) -> str:
    return decimal(Fraction(milliohm, 1000))


def _current(drive: Drive) -> str:
    if drive.edge_ua is None:
        return "not bounded"
    one = -(-drive.edge_ua // 1000)
    return f"{one}" if drive.together == 1 else f"{drive.together} x {one}"


def _settling(estimates: Sequence[Settling]) -> list[str]:
    if not estimates:
        return ["Metastability: NOT RUN, no constants."]
    rows = [
        (
            one.constants + (" (BORROWED)" if one.borrowed else ""),
            str(one.c1_fs) if one.c1_fs < 10**6 else f"{one.c1_fs // 10**6} x 10^6",
            decimal(Fraction(one.c2_per_us, 1000), 3),
            frequency(one.clock_hz),
            frequency(one.data_hz),
            nanoseconds(one.resolve_ps),
            one_line(one.years),
            source_text(one.source),
        )
        for one in estimates
    ]
    headings = ("constants of", "C1, fs", "C2, 1/ns", "fclk", "fdata", "dt, ns", "years", "source")
    lines = ["Metastability of one bus line, MTBF = exp(C2 x dt) / (fclk x fdata x C1):", *table(headings, rows)]
    if any(one.borrowed for one in estimates):
        lines += paragraph(
            "BORROWED: no constants of this device are published in a document at hand. Those of two other families "
            "span a scale and decide nothing: the time between failures of this board is not known."
        )
    return lines
