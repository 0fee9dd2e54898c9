"""The board file, section by section.

Takes the tree of a board file and the catalogue; gives the typed parts of a `Board` (bus, memory, refresh, device,
strobes), or notes what is wrong with each. Whether the parts make sense together is the business of `sensible`. Must
not know ticks, logic or tools.
"""

from dataclasses import dataclass
from fractions import Fraction
from itertools import pairwise
from typing import Literal, cast

from rowkeeper.reading.board import Arrest, Bank, BusFamily, BusGrade, Chip, ClockSpec, Device, GivenTicks
from rowkeeper.reading.catalogue import Catalogue, Kind
from rowkeeper.reading.names import designator_range, title
from rowkeeper.reading.position import Position
from rowkeeper.reading.problems import Problems, listed, nearest, quoted
from rowkeeper.reading.section import Section, one_of, read_span
from rowkeeper.reading.tree import Block, Listing, Node, Scalar, places_of
from rowkeeper.reading.units import (
    address,
    count,
    frequency_hz,
    parts_per_million,
    share,
    size_bytes,
    time_or_unlimited_ps,
    time_ps,
    yes_or_no,
)

__all__ = [
    "BusPart",
    "Heading",
    "RefreshPart",
    "read_banks",
    "read_bus_part",
    "read_device_part",
    "read_heading",
    "read_refresh",
    "read_strobes",
    "unknown",
]

_TICKS = ("mux", "column", "row_end")
_NO_CLOCK = ClockSpec(Fraction(1), Fraction(0), Fraction(1, 2), Fraction(1, 2), 0, 0)


@dataclass(frozen=True, slots=True)
class Heading:
    """Name and revision of the board."""

    name: str
    revision: str


@dataclass(frozen=True, slots=True)
class BusPart:
    """The bus of this board: family, grade, clock, and what it may do to refresh."""

    family: BusFamily | None
    grade: BusGrade | None
    clock: ClockSpec
    at_worst: Arrest


@dataclass(frozen=True, slots=True)
class RefreshPart:
    """How this board is to be refreshed."""

    row_from: Literal["counter", "bus", "chip"]
    standby: Literal["none", "own-timer"]
    row_from_at: Position


def unknown(scalar: Scalar, what: str, names: tuple[str, ...], problems: Problems) -> None:
    """A name that the catalogue does not have: what begins like it, or the nearest, or all there is."""
    longer = [name for name in names if scalar.text and name.startswith(scalar.text)]
    guess = nearest(scalar.text, names)
    if longer:
        fix = f"write which one: {listed(longer)}"
    elif guess:
        fix = f"did you mean `{guess}`?"
    else:
        fix = f"the catalogue has {listed(names, 'and')}"
    problems.add(scalar.at, f"the catalogue has no {what} {quoted(scalar.text)}", fix)


def _known(scalar: Scalar | None, what: str, kind: Kind, catalogue: Catalogue, problems: Problems) -> str | None:
    if scalar is None:
        return None
    if scalar.text in catalogue.names(kind):
        return scalar.text
    unknown(scalar, what, catalogue.names(kind), problems)
    return None


def read_heading(node: Node, problems: Problems) -> Heading:
    """`board: {name, revision}`."""
    section = Section(node, "`board`", problems, ("name", "revision"))
    return Heading(section.take("name", title, ""), section.take("revision", title, ""))


def _bus_clock(node: Node | None, problems: Problems) -> ClockSpec:
    if node is None:
        return _NO_CLOCK
    section = Section(node, "`clock`", problems, ("frequency", "tolerance", "duty", "rise", "fall"))
    duty = read_span(section.node("duty"), "`duty`", problems, share)
    rise = read_span(section.node("rise"), "`rise`", problems, time_ps, ("max",))
    fall = read_span(section.node("fall"), "`fall`", problems, time_ps, ("max",))
    return ClockSpec(
        frequency_hz=section.take("frequency", frequency_hz, Fraction(1)),
        tolerance_ppm=section.take("tolerance", parts_per_million, Fraction(0)),
        duty_min=duty.low or Fraction(1, 2),
        duty_max=duty.high or Fraction(1, 2),
        rise_max_ps=rise.high or 0,
        fall_max_ps=fall.high or 0,
        at=node.at,
    )


def _longest(section: Section) -> int | None:
    """The time under `max`, None for unlimited."""
    scalar = section.scalar("max")
    return 0 if scalar is None else time_or_unlimited_ps(scalar, section.problems)


def _grant(node: Node | None, problems: Problems) -> tuple[int | None, Literal["silent", "none"]]:
    if node is None:
        return 0, "none"
    section = Section(node, "`grant`", problems, ("max",), ("master",))
    longest = _longest(section)
    word = section.scalar("master")
    if word is not None:
        one_of(word, ("silent",), "master", problems)
    elif longest != 0:
        problems.add(
            node.at,
            "`grant` does not say what the other master does to this memory",
            "add `master: silent` if it leaves this memory alone; no other kind can be kept refreshed yet",
        )
    return longest, "silent" if word is not None else "none"


def _reset(node: Node | None, problems: Problems) -> tuple[int | None, bool]:
    if node is None:
        return 0, False
    section = Section(node, "`reset`", problems, ("max", "aligned"))
    return _longest(section), section.take("aligned", yes_or_no, False)


def _at_worst(node: Node | None, problems: Problems) -> Arrest:
    if node is None:
        return Arrest(0, 0, "none", 0, False, 0, {})
    section = Section(node, "`at_worst`", problems, ("wait", "grant", "reset", "power_on_reset"))
    wait = read_span(section.node("wait"), "`wait`", problems, time_ps, ("max",))
    power = read_span(section.node("power_on_reset"), "`power_on_reset`", problems, time_ps, ("min",))
    grant_ps, master = _grant(section.node("grant"), problems)
    reset_ps, aligned = _reset(section.node("reset"), problems)
    return Arrest(wait.high or 0, grant_ps, master, reset_ps, aligned, power.low or 0, dict(places_of(node)))


def read_bus_part(node: Node, catalogue: Catalogue, problems: Problems) -> BusPart:
    """`bus: {family, grade, clock, at_worst}`."""
    section = Section(node, "`bus`", problems, ("family", "grade", "clock", "at_worst"))
    name = _known(section.scalar("family"), "bus family", "buses", catalogue, problems)
    family = None if name is None else catalogue.bus(name)
    word = section.scalar("grade")
    grade = None
    if family is not None and word is not None:
        grade_name = one_of(word, family.grades, f"grade of {family.name}", problems)
        grade = None if grade_name is None else family.grades[grade_name]
    clock = _bus_clock(section.node("clock"), problems)
    return BusPart(family, grade, clock, _at_worst(section.node("at_worst"), problems))


def _bank(node: Node, catalogue: Catalogue, problems: Problems) -> Bank | None:
    section = Section(node, "a bank", problems, ("bank", "chip", "chips", "sockets", "window"))
    name = _known(section.scalar("chip"), "chip", "chips", catalogue, problems)
    chip: Chip | None = None if name is None else catalogue.chip(name)
    number = section.take("bank", count, 0)
    chips = section.take("chips", count, 0)
    sockets = section.take("sockets", designator_range, ("", 0))
    if section.whole and sockets[1] != chips:
        problems.add(
            section.at_key("sockets"),
            f"{sockets[0]} are {sockets[1]} places for {chips} chips",
            "let the range hold as many designators as there are chips",
        )
    window = Section(section.node("window") or Block((), node.at), "`window`", problems, ("base", "size"))
    base, size = window.take("base", address, 0), window.take("size", size_bytes, 0)
    if chip is None or not section.whole:
        return None
    places = (section.at_key("chips"), window.at_key("base"), window.at_key("size"))
    return Bank(number, chip, chips, base, size, node.at, sockets[0], *places)


def read_banks(section: Section, catalogue: Catalogue, problems: Problems) -> tuple[Bank, ...]:
    """`memory:`, a list of banks."""
    items = section.items("memory")
    if isinstance(node := section.node("memory"), Listing) and not node.items:
        problems.add(section.at_key("memory"), "`memory` lists no bank", "add one bank")
    banks = [_bank(item, catalogue, problems) for item in items]
    return tuple(bank for bank in banks if bank is not None)


def read_refresh(node: Node, problems: Problems) -> RefreshPart:
    """`refresh: {row_from, standby}`."""
    section = Section(node, "`refresh`", problems, ("row_from", "standby"))
    row, standby = section.scalar("row_from"), section.scalar("standby")
    rows = None if row is None else one_of(row, ("counter", "bus", "chip"), "source of the refresh row", problems)
    idle = None if standby is None else one_of(standby, ("none", "own-timer"), "standby refresh", problems)
    return RefreshPart(
        cast(Literal["counter", "bus", "chip"], rows or "counter"),
        cast(Literal["none", "own-timer"], idle or "none"),
        section.at_key("row_from"),
    )


def read_device_part(node: Node, catalogue: Catalogue, problems: Problems) -> tuple[Device | None, ClockSpec]:
    """`device: {part, clock}`."""
    section = Section(node, "`device`", problems, ("part", "clock"))
    name = _known(section.scalar("part"), "device", "devices", catalogue, problems)
    device = None if name is None else catalogue.device(name)
    clock_node = section.node("clock")
    if clock_node is None:
        return device, _NO_CLOCK
    clock = Section(clock_node, "`clock`", problems, ("frequency", "tolerance"))
    half = Fraction(1, 2)
    spec = ClockSpec(
        clock.take("frequency", frequency_hz, Fraction(1)),
        clock.take("tolerance", parts_per_million, Fraction(0)),
        half,
        half,
        0,
        0,
        clock_node.at,
    )
    return device, spec


def _tick(scalar: Scalar, problems: Problems) -> int | None:
    if scalar.text == "auto":
        return None
    ticks = count(scalar, problems)
    if not 0 < ticks <= 10_000 and scalar.text.isdigit():
        problems.add(scalar.at, f"{quoted(scalar.text)} ticks make no strobe", "write a tick from 1, or `auto`")
    return ticks


def read_strobes(node: Node, problems: Problems) -> GivenTicks:
    """`strobes: auto`, or the ticks given by hand."""
    if isinstance(node, Scalar):
        if node.text != "auto":
            problems.add(
                node.at, f"{quoted(node.text)} is neither `auto` nor a block of ticks", "write `strobes: auto`"
            )
        return GivenTicks(at=node.at)
    section = Section(node, "`strobes`", problems, (), ("style", *_TICKS))
    word = section.scalar("style")
    style = None
    if word is not None and word.text != "auto":
        style = one_of(word, ("counted", "straight"), "strobe style", problems)
    mux, column, row_end = ticks = tuple(section.take(key, _tick, None) for key in _TICKS)
    _check_tick_order(section, ticks, problems)
    return GivenTicks(cast(Literal["counted", "straight"] | None, style), mux, column, row_end, node.at)


def _check_tick_order(section: Section, ticks: tuple[int | None, ...], problems: Problems) -> None:
    """Select, column strobe, end of the row strobe come in this order."""
    given = [(key, tick) for key, tick in zip(_TICKS, ticks, strict=True) if tick]
    for (early, first), (late, second) in pairwise(given):
        if first >= second:
            problems.add(
                section.at_key(late),
                f"`{late}` at tick {second} is not after `{early}` at tick {first}",
                f"let `{early}` come before `{late}`",
            )
