"""Traces as wave files.

Takes the outputs of a harness tick by tick; gives VCD text (IEEE 1364, clause 18) without date or tool. Must not know
what is being claimed.
"""

import re
from collections.abc import Mapping, Sequence

__all__ = ["as_words", "vcd_text"]

_BIT = re.compile(r"(.*)\[(\d+)\]$")


def as_words(values: Mapping[str, bool]) -> dict[str, tuple[int, int]]:
    """Bits `x[0]`, `x[1]`, ... put together: name to width and value."""
    words: dict[str, tuple[int, int]] = {}
    for name, bit in values.items():
        match = _BIT.match(name)
        if match is None:
            words[name] = (1, int(bit))
        else:
            width, value = words.get(match.group(1), (0, 0))
            index = int(match.group(2))
            words[match.group(1)] = (max(width, index + 1), value | int(bit) << index)
    return words


def vcd_text(ticks: Sequence[Mapping[str, bool]], scope: str) -> str:
    """A VCD whose time unit is one tick of the device clock (written as 1 ns)."""
    rows = [as_words(tick) for tick in ticks]
    names = sorted(rows[0])
    codes = {name: _code(index) for index, name in enumerate(names)}
    lines = ["$comment one time unit is one tick of the device clock $end", "$timescale 1 ns $end"]
    lines.append(f"$scope module {scope} $end")
    for name in names:
        width = rows[0][name][0]
        span = f" [{width - 1}:0]" if width > 1 else ""
        lines.append(f"$var wire {width} {codes[name]} {name}{span} $end")
    lines += ["$upscope $end", "$enddefinitions $end"]
    before: dict[str, tuple[int, int]] = {}
    for tick, row in enumerate(rows):
        changed = [name for name in names if before.get(name) != row[name]]
        lines.append(f"#{tick}")
        lines += [_change(row[name], codes[name]) for name in changed]
        before = row
    lines.append(f"#{len(rows)}")
    return "\n".join(lines) + "\n"


def _change(word: tuple[int, int], code: str) -> str:
    width, value = word
    return f"{value}{code}" if width == 1 else f"b{value:b} {code}"


def _code(index: int) -> str:
    """Printable short name, base 94."""
    found = ""
    while True:
        index, digit = divmod(index, 94)
        found += chr(33 + digit)
        if index == 0:
            return found
