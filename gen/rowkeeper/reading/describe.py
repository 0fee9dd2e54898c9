"""The catalogue as plain rows of text, for listing.

Takes a kind or a name; gives rows that a table can show as they stand. Must not know how they are shown.
"""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass

from rowkeeper.reading import catalogue
from rowkeeper.reading.board import BusFamily, BusFormula, Chip, Device, LogicFamily, LogicLevel, Part
from rowkeeper.reading.catalogue import KINDS, Kind
from rowkeeper.reading.figures import Figure, Source

__all__ = ["KINDS", "CatalogRow", "FigureRow", "all_names", "catalog_rows", "figure_rows"]


@dataclass(frozen=True, slots=True)
class CatalogRow:
    """One entry of the catalogue."""

    name: str
    title: str
    detail: str


@dataclass(frozen=True, slots=True)
class FigureRow:
    """One figure. `grade` is empty where the entry has one column; `min` and `max` are empty where none is given."""

    symbol: str
    grade: str
    min: str
    max: str
    unit: str
    source: str
    mark: str
    note: str


def _number(picoseconds: int | None, per_unit: int) -> str:
    if picoseconds is None:
        return ""
    sign, (whole, rest) = "-" if picoseconds < 0 else "", divmod(abs(picoseconds), per_unit)
    digits = str(per_unit + rest)[1:].rstrip("0")
    return f"{sign}{whole}.{digits}" if digits else f"{sign}{whole}"


def _row(symbol: str, grade: str, low: str, high: str, unit: str, source: Source, note: str = "") -> FigureRow:
    return FigureRow(symbol, grade, low, high, unit, str(source), source.mark.value, note)


def _figure(figure: Figure, grade: str = "") -> FigureRow:
    low, high = _number(figure.lo_ps, 1000), _number(figure.hi_ps, 1000)
    return _row(figure.symbol, grade, low, high, "ns", figure.source, figure.note)


def _formula(formula: BusFormula, grade: str) -> FigureRow:
    terms = [f"{n} {t}" if (n := formula.terms.count(t)) > 1 else t for t in dict.fromkeys(formula.terms)]
    sign = "-" if formula.offset_ps < 0 else "+"
    text = " + ".join(terms) + (f" {sign} {_number(abs(formula.offset_ps), 1000)}" if formula.offset_ps else "")
    return _row(formula.symbol, grade, text, "", "ns", formula.source, formula.note)


def _chip_rows(chip: Chip) -> Iterator[FigureRow]:
    for figure in chip.limits.values():
        yield _figure(figure)
    yield _row("tREF", "", "", _number(chip.refresh_ps, 10**9), f"ms for {chip.refresh_rows} rows", chip.refresh_source)
    yield _row("pause", "", _number(chip.pause_ps, 10**6), "", "us", chip.warm_up_source, "after power-up")
    yield _row("first cycles", "", str(chip.warm_up_cycles), "", "", chip.warm_up_source, "after the pause")


def _bus_rows(bus: BusFamily) -> Iterator[FigureRow]:
    symbols = list(
        dict.fromkeys(symbol for grade in bus.grades.values() for symbol in (*grade.figures, *grade.formulas))
    )
    for symbol in symbols:
        for grade in bus.grades.values():
            if symbol in grade.figures:
                yield _figure(grade.figures[symbol], grade.name)
            if symbol in grade.formulas:
                yield _formula(grade.formulas[symbol], grade.name)
    traffic = bus.traffic
    yield _row("gap", "", "", str(traffic.gap_clocks), "clocks", traffic.source, "longest gap between two refreshes")
    yield _row("sweep", "", "", str(traffic.sweep_clocks), "clocks", traffic.source, "longest gap that can repeat")


def _device_rows(device: Device) -> Iterator[FigureRow]:
    for figure in (
        device.input_pad,
        device.output_pad,
        device.pads_together,
        device.before_routing_input,
        device.before_routing_output,
        device.flip_flop_window,
    ):
        if figure is not None:
            yield _figure(figure)
    typical = f"typical {_number(device.configuration_typical_ps, 10**9)} ms, no limit given"
    yield _row("configuration", "", "", "", "", device.configuration_source, typical)


def _part_rows(part: Part) -> Iterator[FigureRow]:
    for figure in (part.delay, part.enable, part.disable, part.skew):
        if figure is not None:
            yield _figure(figure)


def _level(level: LogicLevel) -> str:
    if level.of_supply:
        return f"{_number(int(level.of_supply * 1000), 10)} %"
    return f"{_number(level.millivolts, 1000)} V"


def _family_rows(family: LogicFamily) -> Iterator[FigureRow]:
    pairs = (
        ("input rising", family.rising, family.threshold_source),
        ("input falling", family.falling, family.threshold_source),
        ("output high", family.high, family.output_source),
        ("output low", family.low, family.output_source),
    )
    for symbol, (low, high), source in pairs:
        note = "of the supply" if low.of_supply or high.of_supply else ""
        yield _row(symbol, "", _level(low), _level(high), "", source, note)
    for symbol, (least, most) in (("output high", family.high_milliohm), ("output low", family.low_milliohm)):
        yield _row(symbol, "", _number(least, 1000), _number(most, 1000), "ohm", family.resistance_source)
    for symbol, current in (("input low sources", family.input_low_ua), ("input high sinks", family.input_high_ua)):
        yield _row(symbol, "", "", str(current), "uA", family.current_source)


def all_names() -> Mapping[str, Kind]:
    """Every name of the shipped catalogue, with its kind."""
    lists = {
        "chips": catalogue.chips(),
        "buses": catalogue.buses(),
        "devices": catalogue.devices(),
        "parts": catalogue.parts(),
        "families": catalogue.families(),
    }
    return {name: kind for kind in KINDS for name in lists[kind]}


def _catalog_row(kind: Kind, name: str) -> CatalogRow:
    if kind == "chips":
        chip = catalogue.chip(name)
        return CatalogRow(name, chip.title, f"{chip.refresh_rows} rows in {_number(chip.refresh_ps, 10**9)} ms")
    if kind == "buses":
        bus = catalogue.bus(name)
        return CatalogRow(name, bus.title, ", ".join(bus.grades))
    if kind == "devices":
        device = catalogue.device(name)
        return CatalogRow(name, device.title, f"{device.cells} cells, {device.package_pins} pins")
    if kind == "families":
        family = catalogue.family(name)
        return CatalogRow(name, family.title, "logic family" + (", Schmitt inputs" if family.schmitt else ""))
    part = catalogue.part(name)
    return CatalogRow(name, part.title, f"{part.kind}, {part.channels} channels")


def catalog_rows(kind: Kind) -> tuple[CatalogRow, ...]:
    """Every shipped entry of a kind, by name."""
    return tuple(_catalog_row(kind, name) for name, own in all_names().items() if own == kind)


def figure_rows(name: str) -> tuple[FigureRow, ...]:
    """Every figure of one entry, whatever its kind; KeyError if the catalogue has no such name."""
    kind = all_names()[name]
    if kind == "chips":
        return tuple(_chip_rows(catalogue.chip(name)))
    if kind == "buses":
        return tuple(_bus_rows(catalogue.bus(name)))
    if kind == "devices":
        return tuple(_device_rows(catalogue.device(name)))
    if kind == "families":
        return tuple(_family_rows(catalogue.family(name)))
    return tuple(_part_rows(catalogue.part(name)))
