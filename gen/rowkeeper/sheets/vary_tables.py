"""What-if tables for a terminal: worst limit and margin for each value, and how far the board can go.

Takes points and ends that timing gives, as plain values; gives text of at most 100 columns. Must not know how a value
was judged.
"""

from collections.abc import Mapping, Sequence
from fractions import Fraction
from typing import Protocol

from rowkeeper.sheets.columns import paragraph, table
from rowkeeper.sheets.quantities import frequency, nanoseconds, signed_nanoseconds, time_text
from rowkeeper.sheets.stamp import Stamp
from rowkeeper.sheets.tables import lines_text
from rowkeeper.sheets.verdict import Json, json_text

__all__ = ["PointFacts", "ReachFacts", "VariationFacts", "limit_text", "reach_text", "variation_json", "variation_text"]

Limit = tuple[str, str]


class PointFacts(Protocol):
    """One value of the varied thing."""

    @property
    def label(self) -> str: ...
    @property
    def position(self) -> Fraction: ...
    @property
    def holds(self) -> bool: ...
    @property
    def margins_ps(self) -> Mapping[Limit, int]: ...
    @property
    def worst(self) -> Limit: ...
    @property
    def where(self) -> str: ...
    @property
    def inside(self) -> Limit: ...
    @property
    def own(self) -> bool: ...


class VariationFacts(Protocol):
    """All values, in order."""

    @property
    def what(self) -> str: ...
    @property
    def unit(self) -> str: ...
    @property
    def points(self) -> Sequence[PointFacts]: ...


class ReachFacts(Protocol):
    """The ends that were found."""

    @property
    def least_clock_hz(self) -> Fraction | None: ...
    @property
    def clock_step_hz(self) -> int: ...
    @property
    def most_wait_ps(self) -> int | None: ...
    @property
    def wait_open(self) -> bool: ...
    @property
    def most_grant_ps(self) -> int | None: ...
    @property
    def grant_open(self) -> bool: ...
    @property
    def slower_chip(self) -> str: ...
    @property
    def slower_chip_limit(self) -> Limit | None: ...
    @property
    def slower_chip_margin_ps(self) -> int | None: ...
    @property
    def slower_chip_holds(self) -> bool: ...


def limit_text(limit: Limit) -> str:
    """`tRP min`; a maximum is told apart, because a limit can have both."""
    return " ".join(limit)


def variation_text(variation: VariationFacts) -> str:
    """A row for each value: does timing hold, the worst limit, and the worst apart from the bus clock's own limits."""
    rows = [_row(point) for point in variation.points]
    headings = (variation.what, "holds", "margin", "worst limit", "where", "margin", "apart from the clock")
    key = "Margins in ns. Each value is planned anew, before routing; * marks the board file's own."
    return lines_text(table(headings, rows, right=(2, 5)), paragraph(key))


def _row(point: PointFacts) -> tuple[str, ...]:
    return (
        f"{point.label} *" if point.own else point.label,
        "yes" if point.holds else "no",
        signed_nanoseconds(point.margins_ps[point.worst]),
        limit_text(point.worst),
        point.where,
        signed_nanoseconds(point.margins_ps[point.inside]),
        limit_text(point.inside),
    )


def reach_text(reach: ReachFacts) -> str:
    """The ends as sentences."""
    lines = [_clock(reach), _wait(reach), _grant(reach), _slower(reach)]
    title = "How far it can go, one thing changed at a time:"
    return lines_text([title, *(line for text in lines for line in paragraph(text, "- ", "  "))])


_NOT_NOW = "not asked: the board does not hold as it stands"


def _clock(reach: ReachFacts) -> str:
    if reach.least_clock_hz is None:
        return f"slowest bus clock: {_NOT_NOW}"
    least, step = frequency(reach.least_clock_hz), frequency(reach.clock_step_hz)
    return f"slowest bus clock: {least} (in steps of {step})"


def _wait(reach: ReachFacts) -> str:
    if reach.most_wait_ps is None:
        return f"longest wait: {_NOT_NOW}"
    more = ", and more was not tried" if reach.wait_open else ""
    return f"longest wait: {time_text(reach.most_wait_ps)}{more}"


def _grant(reach: ReachFacts) -> str:
    if reach.grant_open:
        return "longest grant: unlimited"
    if reach.most_grant_ps is None:
        return f"longest grant: {_NOT_NOW}"
    return f"longest grant: {time_text(reach.most_grant_ps)}"


def _slower(reach: ReachFacts) -> str:
    if not reach.slower_chip or reach.slower_chip_limit is None or reach.slower_chip_margin_ps is None:
        return "next slower grade of chip: none in the catalogue"
    limit, margin = limit_text(reach.slower_chip_limit), reach.slower_chip_margin_ps
    if reach.slower_chip_holds:
        return f"next slower grade of chip: {reach.slower_chip} holds, {nanoseconds(margin)} ns to spare in {limit}"
    short = f"{nanoseconds(-margin)} ns short in {limit}" if margin < 0 else "not by its margins but by its refresh"
    return f"next slower grade of chip: {reach.slower_chip} does not hold, {short}"


def variation_json(stamp: Stamp, variation: VariationFacts, reach: ReachFacts) -> str:
    """The same for machines: whole picoseconds, frequencies as exact text."""
    points: list[Json] = [
        {
            "value": point.label,
            "own": point.own,
            "holds": point.holds,
            "worst": limit_text(point.worst),
            "where": point.where,
            "worst_apart_from_the_clock": limit_text(point.inside),
            "margins_ps": {limit_text(limit): point.margins_ps[limit] for limit in sorted(point.margins_ps)},
        }
        for point in variation.points
    ]
    ends: dict[str, Json] = {
        "least_clock": None if reach.least_clock_hz is None else frequency(reach.least_clock_hz),
        "most_wait_ps": reach.most_wait_ps,
        "wait_open": reach.wait_open,
        "most_grant_ps": reach.most_grant_ps,
        "grant_open": reach.grant_open,
        "slower_chip": reach.slower_chip or None,
        "slower_chip_holds": reach.slower_chip_holds,
        "slower_chip_margin_ps": reach.slower_chip_margin_ps,
    }
    origin: dict[str, Json] = {"board": {"slug": stamp.board, "revision": stamp.revision, "digest": stamp.digest}}
    return json_text(origin | {"what": variation.what, "points": points, "reach": ends})
