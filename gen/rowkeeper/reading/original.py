"""The `original` section of a board file: what stands on the board now, to compare with.

Takes the node of the section and the catalogue; gives `Original`, or notes what is wrong with it. A part without its
tolerance has no guaranteed window, so a missing tolerance is a mistake, never zero. Must not know what the windows are.
"""

import re
from collections.abc import Callable
from dataclasses import dataclass
from fractions import Fraction
from typing import Literal, cast

from rowkeeper.reading.board import LogicFamily, Original, RcDelay
from rowkeeper.reading.catalogue import Catalogue
from rowkeeper.reading.position import Position
from rowkeeper.reading.problems import Problems, quoted
from rowkeeper.reading.section import Section, one_of, read_span
from rowkeeper.reading.spec import unknown
from rowkeeper.reading.tree import Node, Scalar
from rowkeeper.reading.units import SHARE, capacitance_ff, exact, resistance_milliohm, time_ps

__all__ = ["read_original"]

_WITH_TOLERANCE = re.compile(r"(?P<value>.*?\S) ?(?P<sign>±|\+/-) ?(?P<tolerance>\S.*)")
_WIDEST = Fraction(1, 2)
_LARGEST_MILLIOHM = 100_000 * 1000
_LARGEST_FF = 1_000_000 * 1000
_EDGES = ("rising", "falling", "both")


@dataclass(frozen=True, slots=True)
class _Toleranced:
    """A value in the unit it is kept in, and its tolerance as a share of one."""

    value: int
    tolerance: Fraction


_NOTHING = _Toleranced(0, Fraction(0))


def _shifted(scalar: Scalar, text: str, offset: int) -> Scalar:
    """A piece of a value with its own place."""
    at = scalar.at
    column = at.column + offset + (1 if scalar.quoted else 0)
    return Scalar(text, Position(at.file, at.line, column, text))


def _tolerance(scalar: Scalar, problems: Problems) -> Fraction:
    value = exact(scalar, SHARE, problems)
    if value is not None and not 0 <= value <= _WIDEST:
        problems.add(scalar.at, "the tolerance of a part lies between 0 % and 50 %", "write for example `5 %`")
    return value or Fraction(0)


def _toleranced(
    convert: Callable[[Scalar, Problems], int], largest: int, example: str, beyond: str
) -> Callable[[Scalar, Problems], _Toleranced]:
    """A converter for `330 ohm ± 5 %`."""

    def read(scalar: Scalar, problems: Problems) -> _Toleranced:
        match = _WITH_TOLERANCE.fullmatch(scalar.text)
        if match is None:
            problems.add(scalar.at, f"{quoted(scalar.text)} has no tolerance", f"write for example `{example}`")
            return _NOTHING
        before = len(problems)
        value = convert(_shifted(scalar, match["value"], 0), problems)
        tolerance = _tolerance(_shifted(scalar, match["tolerance"], match.start("tolerance")), problems)
        if len(problems) == before and not 0 < value <= largest:
            problems.add(scalar.at, f"{match['value']} makes no delay: {beyond}", f"write for example `{example}`")
        return _Toleranced(value, tolerance)

    return read


_RESISTANCE = _toleranced(
    resistance_milliohm, _LARGEST_MILLIOHM, "330 ohm ± 5 %", "a delay network has more than 0 ohm and at most 100 kohm"
)
_CAPACITANCE = _toleranced(
    capacitance_ff, _LARGEST_FF, "100 pF ± 10 %", "a delay network has more than 0 pF and at most 1000000 pF"
)


def _family(section: Section, key: str, catalogue: Catalogue, problems: Problems) -> LogicFamily | None:
    scalar = section.scalar(key)
    if scalar is None:
        return None
    family = catalogue.family(scalar.text)
    if family is None:
        unknown(scalar, "logic family", catalogue.names("families"), problems)
    return family


def _delay(
    section: Section, name: Literal["row_to_select", "select_to_column"], catalogue: Catalogue, problems: Problems
) -> RcDelay | None:
    node = section.node(name)
    if node is None:
        return None
    entry = Section(node, f"`{name}`", problems, ("r", "c", "input"), ("driver", "edge", "gate"))
    resistance = entry.take("r", _RESISTANCE, _NOTHING)
    capacitance = entry.take("c", _CAPACITANCE, _NOTHING)
    family = _family(entry, "input", catalogue, problems)
    driver = _family(entry, "driver", catalogue, problems) if entry.has("driver") else family
    word = entry.scalar("edge")
    edge = "both" if word is None else one_of(word, _EDGES, "edge", problems)
    gate = read_span(entry.node("gate"), "`gate`", problems, time_ps)
    if family is None or driver is None or not entry.whole:
        return None
    return RcDelay(
        name,
        resistance.value,
        resistance.tolerance,
        capacitance.value,
        capacitance.tolerance,
        family,
        driver,
        cast(Literal["rising", "falling", "both"], edge),
        gate.low or 0,
        gate.high or 0,
        node.at,
    )


def read_original(node: Node, catalogue: Catalogue, problems: Problems) -> Original | None:
    """`original: {row_to_select, select_to_column, multiplexer}`; None after a problem."""
    section = Section(node, "`original`", problems, ("row_to_select", "select_to_column"), ("multiplexer",))
    select = _delay(section, "row_to_select", catalogue, problems)
    column = _delay(section, "select_to_column", catalogue, problems)
    multiplexer = read_span(section.node("multiplexer"), "`multiplexer`", problems, time_ps)
    if select is None or column is None:
        return None
    return Original(select, column, multiplexer.low or 0, multiplexer.high, node.at)
