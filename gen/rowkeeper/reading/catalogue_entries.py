"""One catalogue file, typed: a memory chip table, a bus family, a device or a part.

Takes the tree of a file; gives the records of `board`, several for a chip table (one per grade). Must not know where
the file came from, nor who asks.
"""

from typing import Literal, TypeAlias, cast

from rowkeeper.reading.board import (
    BusFamily,
    BusGrade,
    BusTraffic,
    Chip,
    Device,
    DevicePin,
    FixedPin,
    LogicFamily,
    Part,
    PartPins,
)
from rowkeeper.reading.figure_table import Columns, read_figures, read_formulas, read_levels, read_source, read_sources
from rowkeeper.reading.figures import Figure, Mark, Source
from rowkeeper.reading.problems import Problems
from rowkeeper.reading.section import Section, one_of, read_listing, read_scalars
from rowkeeper.reading.tree import Block, Node, Scalar
from rowkeeper.reading.units import capacitance_ff, count, plain_text, time_ps, voltage_mv, yes_or_no

__all__ = ["Entry", "read_bus", "read_chips", "read_device", "read_parts"]

Entry: TypeAlias = Chip | BusFamily | Device | Part | LogicFamily

_ROLES = ("io", "clock", "supply", "ground", "config", "none")
_PIN_ROLE: TypeAlias = Literal["io", "clock", "supply", "ground", "config", "none"]


def _picofarads(scalar: Scalar, problems: Problems) -> int:
    return -(-capacitance_ff(scalar, problems) // 1000)


def _texts(section: Section, key: str) -> tuple[str, ...]:
    node = section.node(key)
    return () if node is None else tuple(s.text for s in read_scalars(node, f"`{key}`", section.problems))


def _sub(section: Section, key: str, required: tuple[str, ...], optional: tuple[str, ...] = ()) -> Section | None:
    node = section.node(key)
    return None if node is None else Section(node, f"`{key}`", section.problems, required, optional)


def _number(section: Section | None, key: str) -> int:
    return 0 if section is None else section.take(key, count, 0)


def _columns(section: Section, sources: dict[str, Source]) -> Columns:
    names = _texts(section, "columns")
    cells = _texts(section, "column_sources")
    node = section.node("column_sources")
    if node is not None and len(cells) != len(names):
        section.problems.add(node.at, f"{len(cells)} sources for {len(names)} columns", "name one source per column")
    known = tuple(sources.get(cell, Source(Mark.MEMORY)) for cell in cells)
    defaults = known if len(known) == len(names) else (Source(Mark.MEMORY),) * len(names)
    return Columns(names, defaults, sources)


_CHIP_KEYS = (
    "kind", "title", "columns", "sources", "column_sources", "organisation", "refresh", "warm_up", "limits", "levels",
    "capacitance", "supplies", "pins", "pins_source",
)  # fmt: skip


def read_chips(root: Node, problems: Problems) -> tuple[Chip, ...]:
    """Every grade of a chip table."""
    file = Section(root, "a chip table", problems, _CHIP_KEYS, ("notes",))
    sources = read_sources(file.node("sources"), problems)
    columns = _columns(file, sources)
    tables = read_figures(file.node("limits"), columns, problems)
    shape = _sub(file, "organisation", ("words", "width", "row_bits", "column_bits"))
    refresh = _sub(file, "refresh", ("rows", "row_bits", "interval", "source"))
    warm_up = _sub(file, "warm_up", ("pause", "cycles", "source"))
    levels = _sub(file, "levels", ("strobes", "addresses", "output"))
    load = _sub(file, "capacitance", ("strobes", "addresses", "source"))
    read_source(file.node("pins_source"), sources, problems)
    if shape is None or refresh is None or warm_up is None or levels is None or load is None:
        return ()
    strobes, addresses, output = (
        read_levels(levels.node(key), f"`{key}`", sources, problems) for key in ("strobes", "addresses", "output")
    )
    chips = tuple(
        Chip(
            name=name,
            title=file.take("title", plain_text, ""),
            words=_number(shape, "words"),
            width=_number(shape, "width"),
            row_bits=_number(shape, "row_bits"),
            column_bits=_number(shape, "column_bits"),
            refresh_rows=_number(refresh, "rows"),
            refresh_row_bits=_number(refresh, "row_bits"),
            refresh_ps=refresh.take("interval", time_ps, 0),
            refresh_source=read_source(refresh.node("source"), sources, problems),
            pause_ps=warm_up.take("pause", time_ps, 0),
            warm_up_cycles=_number(warm_up, "cycles"),
            warm_up_source=read_source(warm_up.node("source"), sources, problems),
            limits=limits,
            strobe_levels=strobes,
            address_levels=addresses,
            output_levels=output,
            strobe_pf_max=load.take("strobes", _picofarads, 0),
            address_pf_max=load.take("addresses", _picofarads, 0),
            supplies=_texts(file, "supplies"),
            pins={str(i): signal for i, signal in enumerate(_texts(file, "pins"), start=1)},
            notes=_texts(file, "notes"),
        )
        for name, limits in zip(columns.names, tables, strict=True)
    )
    return chips if file.whole else ()


_BUS_KEYS = (
    "kind", "name", "title", "data_width", "address_bits", "refresh_row_bits", "supply", "columns", "sources",
    "column_sources", "figures", "formulas", "traffic", "assumptions", "levels", "source",
)  # fmt: skip
_TRAFFIC_KEYS = ("gap_clocks", "sweep_clocks", "gap_machine_cycles", "reset_settle_clocks", "reset_restart_clocks")


def _traffic(file: Section, sources: dict[str, Source]) -> BusTraffic:
    section = _sub(file, "traffic", (*_TRAFFIC_KEYS, "source"))
    numbers = [_number(section, key) for key in _TRAFFIC_KEYS]
    source = read_source(section.node("source") if section else None, sources, file.problems)
    gap, sweep, machine_cycles, settle, restart = numbers
    return BusTraffic(gap, sweep, machine_cycles, settle, restart, source)


def _sentences(node: Node | None, problems: Problems) -> dict[str, str]:
    if not isinstance(node, Block):
        if node is not None:
            problems.add(node.at, "`assumptions` must be a block of keys", "write `name: sentence`")
        return {}
    return {key.text: value.text for key, value in node.entries if isinstance(value, Scalar)}


def read_bus(root: Node, problems: Problems) -> tuple[BusFamily, ...]:
    """A bus family with every grade of its table."""
    file = Section(root, "a bus family", problems, _BUS_KEYS, ("notes",))
    sources = read_sources(file.node("sources"), problems)
    columns = _columns(file, sources)
    figures = read_figures(file.node("figures"), columns, problems)
    formulas = read_formulas(file.node("formulas"), columns, problems)
    supply = _sub(file, "supply", ("max",))
    levels = _sub(file, "levels", ("outputs", "inputs"))
    family = BusFamily(
        name=file.take("name", plain_text, ""),
        title=file.take("title", plain_text, ""),
        data_width=_number(file, "data_width"),
        address_bits=_number(file, "address_bits"),
        bus_refresh_row_bits=_number(file, "refresh_row_bits"),
        grades={
            name: BusGrade(name, rows, sums) for name, rows, sums in zip(columns.names, figures, formulas, strict=True)
        },
        traffic=_traffic(file, sources),
        assumptions=_sentences(file.node("assumptions"), problems),
        output_levels=read_levels(levels.node("outputs") if levels else None, "`outputs`", sources, problems),
        input_levels=read_levels(levels.node("inputs") if levels else None, "`inputs`", sources, problems),
        source=read_source(file.node("source"), sources, problems),
        supply_max_mv=supply.take("max", voltage_mv, 0) if supply else 0,
    )
    return (family,) if file.whole else ()


_DEVICE_KEYS = (
    "kind", "name", "title", "sources", "router", "package", "figures", "levels", "configuration", "supplies",
    "pins_source", "pins",
)  # fmt: skip
_DEVICE_FIGURES = ("input_pad", "output_pad", "before_routing_input", "before_routing_output", "flip_flop_window")


def _pin(node: Node, problems: Problems) -> DevicePin:
    section = Section(node, "a pin", problems, ("pin", "name", "role"), ("bank",))
    word = section.scalar("role")
    role = "none" if word is None else one_of(word, _ROLES, "pin role", problems) or "none"
    return DevicePin(
        number=section.take("pin", plain_text, ""),
        name=section.take("name", plain_text, ""),
        role=cast(_PIN_ROLE, role),
        bank=section.take("bank", plain_text, ""),
    )


def _pins(node: Node | None, expected: int, problems: Problems) -> dict[str, DevicePin]:
    """Every pin of the package, each once."""
    pins: dict[str, DevicePin] = {}
    if node is None:
        return pins
    for item in read_listing(node, "`pins`", problems):
        pin = _pin(item, problems)
        if pin.number in pins:
            problems.add(item.at, f"pin {pin.number} stands twice", "keep one of the two")
        pins[pin.number] = pin
    if len(pins) != expected:
        problems.add(node.at, f"{len(pins)} pins listed, the package has {expected}", "list every pin of the package")
    return pins


def _named_figures(file: Section, sources: dict[str, Source], names: tuple[str, ...]) -> dict[str, Figure]:
    """The `figures:` of a file with one column, each of the names required."""
    default = sources.get("sheet", Source(Mark.MEMORY))
    (figures,) = read_figures(file.node("figures"), Columns(("",), (default,), sources), file.problems)
    for name in names:
        if name not in figures and file.has("figures"):
            file.problems.add(file.at_key("figures"), f"the figure `{name}` is missing", f"add `{name}: {{max: ...}}`")
    return figures


def read_device(root: Node, problems: Problems) -> tuple[Device, ...]:
    """A programmable device in one package."""
    file = Section(root, "a device", problems, _DEVICE_KEYS, ("notes",))
    sources = read_sources(file.node("sources"), problems)
    figures = _named_figures(file, sources, _DEVICE_FIGURES)
    router = _sub(file, "router", ("family", "arguments", "cells"))
    package = _sub(file, "package", ("name", "pins"))
    setup = _sub(file, "configuration", ("typical", "volatile", "source"))
    if router is None or package is None or setup is None:
        return ()
    family = router.scalar("family")
    if family is not None:
        one_of(family, ("ice40",), "device family", problems)
    pins = _pins(file.node("pins"), _number(package, "pins"), problems)
    levels = read_levels(file.node("levels"), "`levels`", sources, problems)
    if not file.whole:
        return ()
    device = Device(
        name=file.take("name", plain_text, ""),
        title=file.take("title", plain_text, ""),
        family="ice40",
        router_arguments=_texts(router, "arguments"),
        package=package.take("name", plain_text, ""),
        package_pins=_number(package, "pins"),
        cells=_number(router, "cells"),
        pins=pins,
        **{name: figures[name] for name in _DEVICE_FIGURES},
        pads_together=figures.get("pads_together"),
        levels=levels,
        configuration_typical_ps=setup.take("typical", time_ps, 0),
        configuration_source=read_source(setup.node("source"), sources, problems),
        volatile=setup.take("volatile", yes_or_no, False),
        supplies=_texts(file, "supplies"),
        notes=_texts(file, "notes"),
        pins_source=read_source(file.node("pins_source"), sources, problems),
    )
    return (device,) if file.whole else ()


_PART_KEYS = (
    "kind", "name", "title", "role", "channels", "supply", "sources", "figures", "load", "levels", "capacitance",
)  # fmt: skip


def _fixed_pin(node: Node, problems: Problems) -> FixedPin:
    section = Section(node, "a fixed pin", problems, ("pin", "name", "tie"))
    pin, name, tie = (section.take(key, plain_text, "") for key in ("pin", "name", "tie"))
    return FixedPin(pin, name, tie)


def _part_pins(file: Section, sources: dict[str, Source]) -> PartPins | None:
    """The pin table of a part, where its file has one: every pin once, a channel for each that the part has."""
    section, problems = _sub(file, "pins", ("source", "inputs", "outputs", "fixed")), file.problems
    if section is None:
        return None
    inputs, outputs = _texts(section, "inputs"), _texts(section, "outputs")
    fixed = tuple(_fixed_pin(node, problems) for node in section.items("fixed"))
    channels = _number(file, "channels")
    if section.whole and not len(inputs) == len(outputs) == channels:
        problems.add(
            section.at,
            f"{len(inputs)} inputs and {len(outputs)} outputs for {channels} channels",
            "name a pair for each",
        )
    numbers = [*inputs, *outputs, *(pin.pin for pin in fixed)]
    twice = next((number for number in numbers if numbers.count(number) > 1), None)
    if twice is not None:
        problems.add(section.at, f"pin {twice} stands twice", "name every pin once")
    pairs = tuple(zip(inputs, outputs, strict=False))
    return PartPins(pairs, fixed, read_source(section.node("source"), sources, problems))


def read_parts(root: Node, problems: Problems) -> tuple[Part, ...]:
    """A buffer or translator."""
    file = Section(root, "a part", problems, _PART_KEYS, ("notes", "pins"))
    sources = read_sources(file.node("sources"), problems)
    figures = _named_figures(file, sources, ("delay",))
    supply = _sub(file, "supply", ("nominal", "max"))
    load = _sub(file, "load", ("rated", "source"), ("slope",))
    levels = _sub(file, "levels", ("inputs", "outputs"))
    inputs = _sub(file, "capacitance", ("inputs", "source"))
    word = file.scalar("role")
    role = None if word is None else one_of(word, ("buffer", "translator"), "role", problems)
    if supply is None or load is None or levels is None or inputs is None or not file.whole:
        return ()
    supply.take("max", voltage_mv, 0)
    read_source(inputs.node("source"), sources, problems)
    part = Part(
        name=file.take("name", plain_text, ""),
        title=file.take("title", plain_text, ""),
        kind="translator" if role == "translator" else "buffer",
        channels=_number(file, "channels"),
        supply_mv=supply.take("nominal", voltage_mv, 0),
        delay=figures["delay"],
        enable=figures.get("enable"),
        disable=figures.get("disable"),
        skew=figures.get("skew"),
        input_levels=read_levels(levels.node("inputs"), "`inputs`", sources, problems),
        output_levels=read_levels(levels.node("outputs"), "`outputs`", sources, problems),
        input_pf_max=inputs.take("inputs", _picofarads, 0),
        notes=_texts(file, "notes"),
        load_rated_pf=load.take("rated", _picofarads, 50),
        load_slope_ps=load.take("slope", time_ps, 0) if load.has("slope") else None,
        load_source=read_source(load.node("source"), sources, problems),
        pins=_part_pins(file, sources),
    )
    return (part,) if file.whole else ()
