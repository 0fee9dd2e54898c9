"""The router's delay file: every arc of the placed and routed design, in exact picoseconds.

Takes the text of an SDF file as the router writes it; gives arcs and set-up figures. Must not know which
arc is a pin or a register of the logic.
"""

import re
from collections.abc import Iterator
from dataclasses import dataclass
from decimal import ROUND_CEILING, ROUND_FLOOR, Decimal

__all__ = ["Arc", "DelayFile", "SdfError", "SetUp", "read_sdf"]

_TRIPLE = r"\((-?[\d.]+):(-?[\d.]+):(-?[\d.]+)\)"
_INSTANCE = re.compile(r"\(INSTANCE ?(.*)\)")
_WIRE = re.compile(rf"\(INTERCONNECT (\S+) (\S+) {_TRIPLE} {_TRIPLE}\)")
_THROUGH = re.compile(rf"\(IOPATH (\S+) (\S+) {_TRIPLE} {_TRIPLE}\)")
_CHECK = re.compile(rf"\(SETUPHOLD \((?:pos|neg)edge (\S+)\) \(posedge (\S+)\) {_TRIPLE} {_TRIPLE}\)")


class SdfError(Exception):
    """The file is not what the router is known to write: our own gap."""


@dataclass(frozen=True, slots=True)
class Arc:
    """A delay from one cell pin (`cell/PIN`) to another, over both edges: shortest and longest."""

    start: str
    end: str
    lo_ps: int
    hi_ps: int


@dataclass(frozen=True, slots=True)
class SetUp:
    """A data pin must be steady this long before the rising edge at the clock pin."""

    pin: str
    clock_pin: str
    set_up_ps: int


@dataclass(frozen=True, slots=True)
class DelayFile:
    """Arcs of wires, arcs through cells, and set-up figures."""

    wires: tuple[Arc, ...]
    through: tuple[Arc, ...]
    set_ups: tuple[SetUp, ...]


def read_sdf(text: str) -> DelayFile:
    """Read every arc; a line that speaks of a delay and is not understood is an error, never skipped."""
    if "(TIMESCALE 1ps)" not in text:
        raise SdfError("the delay file is not in picoseconds")
    wires, through, set_ups = [], [], []
    for cell, line in _lines(text):
        if match := _WIRE.fullmatch(line):
            wires.append(Arc(_plain(match[1]), _plain(match[2]), *_span(match.groups()[2:])))
        elif match := _THROUGH.fullmatch(line):
            through.append(Arc(f"{cell}/{match[1]}", f"{cell}/{match[2]}", *_span(match.groups()[2:])))
        elif match := _CHECK.fullmatch(line):
            set_ups.append(SetUp(f"{cell}/{match[1]}", f"{cell}/{match[2]}", _span(match.groups()[2:5])[1]))
        elif re.match(r"\((INTERCONNECT|IOPATH|SETUPHOLD|SETUP|HOLD|RECREM|WIDTH|PORT|DEVICE)\b", line):
            raise SdfError(f"not understood in the delay file: {line}")
    return DelayFile(tuple(wires), tuple(through), tuple(set_ups))


def _lines(text: str) -> Iterator[tuple[str, str]]:
    """Each line together with the instance it belongs to."""
    cell = ""
    for line in map(str.strip, text.splitlines()):
        if match := _INSTANCE.fullmatch(line):
            cell = _plain(match[1].strip())
        yield cell, line


def _plain(name: str) -> str:
    return re.sub(r"\\(.)", r"\1", name)


def _span(figures: tuple[str, ...]) -> tuple[int, int]:
    """Shortest and longest of min:typ:max figures, rounded outwards to whole picoseconds."""
    values = [Decimal(figure) for figure in figures]
    return int(min(values).to_integral_value(ROUND_FLOOR)), int(max(values).to_integral_value(ROUND_CEILING))
