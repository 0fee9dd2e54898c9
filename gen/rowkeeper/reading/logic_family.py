"""A logic family of the catalogue, typed.

Takes the tree of a family file; gives `LogicFamily`: what an output drives and where an input switches, as ranges.
Must not know what network stands between the two.
"""

from fractions import Fraction

from rowkeeper.reading.board import LogicFamily, LogicLevel
from rowkeeper.reading.figure_table import read_source, read_sources
from rowkeeper.reading.figures import Source
from rowkeeper.reading.problems import Problems
from rowkeeper.reading.section import Section, read_scalars
from rowkeeper.reading.tree import Node, Scalar
from rowkeeper.reading.units import (
    SHARE,
    current_ua,
    exact,
    plain_text,
    resistance_milliohm,
    time_ps,
    voltage_mv,
    yes_or_no,
)

__all__ = ["read_families"]

_KEYS = (
    *("kind", "name", "title", "sources", "supply"),
    *("thresholds", "outputs", "resistance", "input_current", "schmitt"),
)
_NOTHING = LogicLevel()


def _level(scalar: Scalar, problems: Problems) -> LogicLevel:
    """`2.0 V`, or `70 %` of the supply."""
    if not scalar.text.endswith("%"):
        return LogicLevel(millivolts=voltage_mv(scalar, problems))
    share = exact(scalar, SHARE, problems)
    if share is not None and not 0 <= share <= 1:
        problems.add(scalar.at, "a level lies between 0 % and 100 % of the supply", "write for example `70 %`")
    return LogicLevel(of_supply=share or Fraction(0))


class _Reader:
    """One family file: blocks of pairs, each block with its source."""

    def __init__(self, file: Section, problems: Problems) -> None:
        self._file = file
        self._problems = problems
        self._sources = read_sources(file.node("sources"), problems)

    def block(self, key: str, names: tuple[str, ...], optional: tuple[str, ...] = ()) -> Section | None:
        node = self._file.node(key)
        return None if node is None else Section(node, f"`{key}`", self._problems, names, optional)

    def source(self, block: Section) -> Source:
        return read_source(block.node("source"), self._sources, self._problems)

    def levels(self, block: Section, key: str) -> tuple[LogicLevel, LogicLevel]:
        span = self._span(block, key)
        if span is None:
            return _NOTHING, _NOTHING
        return span.take("min", _level, _NOTHING), span.take("max", _level, _NOTHING)

    def resistance(self, block: Section, key: str) -> tuple[int, int]:
        span = self._span(block, key)
        if span is None:
            return 0, 0
        return span.take("min", resistance_milliohm, 0), span.take("max", resistance_milliohm, 0)

    def _span(self, block: Section, key: str) -> Section | None:
        node = block.node(key)
        return None if node is None else Section(node, f"`{key}`", self._problems, ("min", "max"))


def _nominal(file: Section, problems: Problems) -> tuple[LogicLevel, LogicLevel, LogicLevel] | None:
    """Threshold, high and low of a usual part."""
    node = file.node("nominal")
    if node is None:
        return None
    section = Section(node, "`nominal`", problems, ("threshold", "high", "low"))
    threshold, high, low = (section.take(key, _level, _NOTHING) for key in ("threshold", "high", "low"))
    return threshold, high, low


def read_families(root: Node, problems: Problems) -> tuple[LogicFamily, ...]:
    """One logic family."""
    file = Section(root, "a logic family", problems, _KEYS, ("nominal", "slowest_edge", "notes"))
    reader = _Reader(file, problems)
    supply = reader.block("supply", ("min", "max"))
    thresholds = reader.block("thresholds", ("rising", "falling", "source"))
    outputs = reader.block("outputs", ("high", "low", "source"))
    resistance = reader.block("resistance", ("high", "low", "source"))
    current = reader.block("input_current", ("low", "high", "source"))
    if supply is None or thresholds is None or outputs is None or resistance is None or current is None:
        return ()
    notes = file.node("notes")
    family = LogicFamily(
        name=file.take("name", plain_text, ""),
        title=file.take("title", plain_text, ""),
        supply_min_mv=supply.take("min", voltage_mv, 0),
        supply_max_mv=supply.take("max", voltage_mv, 0),
        rising=reader.levels(thresholds, "rising"),
        falling=reader.levels(thresholds, "falling"),
        high=reader.levels(outputs, "high"),
        low=reader.levels(outputs, "low"),
        high_milliohm=reader.resistance(resistance, "high"),
        low_milliohm=reader.resistance(resistance, "low"),
        input_low_ua=current.take("low", current_ua, 0),
        input_high_ua=current.take("high", current_ua, 0),
        slowest_edge_ps_per_v=file.take("slowest_edge", time_ps, 0) if file.has("slowest_edge") else None,
        schmitt=file.take("schmitt", yes_or_no, False),
        nominal=_nominal(file, problems),
        threshold_source=reader.source(thresholds),
        output_source=reader.source(outputs),
        resistance_source=reader.source(resistance),
        current_source=reader.source(current),
        notes=() if notes is None else tuple(s.text for s in read_scalars(notes, "`notes`", problems)),
    )
    return (family,) if file.whole else ()
