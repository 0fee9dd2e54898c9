"""The packages between the device and the board, pin by pin: which channel carries which net.

Takes a board; gives a `PackageTable` per designator. Channels are used up in the order of the board file, so that the
same file gives the same wires. Must not know how a table is shown, nor levels or delays.
"""

import re
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from fractions import Fraction

from rowkeeper.reading.board import Board, Net, Part, PartPins, PathElement
from rowkeeper.reading.figures import Mark
from rowkeeper.sheets.plain import net_label, one_line
from rowkeeper.sheets.quantities import decimal

__all__ = ["Channel", "PackageTable", "package_tables"]

_PLACES = re.compile(r"([A-Z]+)([0-9]+)(?:-[A-Z]+([0-9]+))?\.(.+)")


@dataclass(frozen=True, slots=True)
class Channel:
    """One channel: where the wire comes from, the two pins, where it goes."""

    net: str
    source: str
    input_pin: str
    output_pin: str
    target: str


@dataclass(frozen=True, slots=True)
class PackageTable:
    """One package: its channels, its other pins with what each is tied to, and what is to know of it."""

    designator: str
    part: str
    channels: tuple[Channel, ...]
    fixed: tuple[str, ...]
    unused: str
    remark: str
    from_memory: bool = False


@dataclass(frozen=True, slots=True)
class _Stop:
    """A part on the way of a net, with the wire before it and behind it."""

    net: Net
    source: str
    target: str


def package_tables(board: Board) -> tuple[PackageTable, ...]:
    """Every package that a net passes through, by designator as the board file names them first."""
    packages: dict[str, tuple[Part, list[_Stop]]] = {}
    for net in board.wiring.nets:
        for index, element in enumerate(net.through):
            if element.part is not None and element.designator:
                stop = _Stop(net, *_ends(net, index, _taken(packages)))
                packages.setdefault(element.designator, (element.part, []))[1].append(stop)
    met = {place: net.name for net in board.wiring.nets for place in _places(net.meets)}
    tables = (_table(place, part, stops, met) for place, (part, stops) in packages.items())
    return tuple(sorted(tables, key=lambda table: (len(table.designator), table.designator)))


def _taken(packages: Mapping[str, tuple[Part, list[_Stop]]]) -> dict[str, int]:
    return {place: len(stops) for place, (_, stops) in packages.items()}


def _ends(net: Net, index: int, taken: Mapping[str, int]) -> tuple[str, str]:
    """What stands before and behind a part of the path: another part's pin, the device's pin, or the board."""
    device = f"pin {net.pin}"
    first, last = (net.meets, device) if net.side == "input" else (device if net.pin else net.meets, net.meets)
    before, after = list(net.through[:index]), list(net.through[index + 1 :])
    source = next((_output_of(e, taken) for e in reversed(before) if e.part is not None), first)
    target = next((_input_of(e, taken) for e in after if e.part is not None), last)
    ohms = _series(after)
    return one_line(source), one_line(f"{ohms} > {target}" if ohms else target)


def _series(elements: list[PathElement]) -> str:
    """The resistance in series before the next part."""
    milliohm = 0
    for element in elements:
        if element.part is not None:
            break
        milliohm += element.series_milliohm
    return f"{decimal(Fraction(milliohm, 1000))} ohm" if milliohm else ""


def _pair(element: PathElement, used: int) -> tuple[str, str]:
    pins = element.part.pins if element.part is not None else None
    return pins.channels[used] if pins is not None and used < len(pins.channels) else ("?", "?")


def _output_of(element: PathElement, taken: Mapping[str, int]) -> str:
    """The output of a part earlier on this path, whose channel was given last."""
    return f"{element.designator}.{_pair(element, taken.get(element.designator, 1) - 1)[1]}"


def _input_of(element: PathElement, taken: Mapping[str, int]) -> str:
    """The input of a part further on, whose channel is given next."""
    return f"{element.designator}.{_pair(element, taken.get(element.designator, 0))[0]}"


def _places(meets: str) -> Iterator[str]:
    """`U22-U23.1+19` as U22.1, U22.19, U23.1, U23.19."""
    match = _PLACES.fullmatch(meets)
    if match:
        for number in range(int(match[2]), int(match[3] or match[2]) + 1):
            for pin in match[4].split("+"):
                yield f"{match[1]}{number}.{pin}"


def _table(place: str, part: Part, stops: list[_Stop], met: Mapping[str, str]) -> PackageTable:
    name, pins = one_line(part.name), part.pins
    if pins is None:
        return PackageTable(place, name, (), (), "", "The catalogue has no pin table: take the pins from the sheet.")
    memory = pins.source.mark is Mark.MEMORY
    fixed = _fixed(place, pins, met)
    if any(stop.net.side == "path" for stop in stops):
        nets = " and ".join(dict.fromkeys(net_label(stop.net.name) for stop in stops))
        kept = f"{nets}: the channels stay as they are wired."
        return PackageTable(place, name, (), fixed, "", kept, memory)
    pairs = zip(stops, pins.channels, strict=False)
    channels = tuple(Channel(net_label(s.net.name), s.source, i, o, s.target) for s, (i, o) in pairs)
    return PackageTable(place, name, channels, fixed, _unused(pins, len(channels)), "", memory)


def _fixed(place: str, pins: PartPins, met: Mapping[str, str]) -> tuple[str, ...]:
    """Pins without a channel: the net that meets them where there is one, else what the catalogue says."""
    texts: list[str] = []
    for pin in pins.fixed:
        net = met.get(f"{place}.{pin.pin}")
        texts.append(one_line(f"{pin.pin} {pin.name}: {net_label(net) if net else pin.tie}"))
    return tuple(texts)


def _unused(pins: PartPins, used: int) -> str:
    """What to do with the inputs that no net took."""
    spare = [pin for pin, _ in pins.channels[used:]]
    if not spare:
        return ""
    if len(spare) == 1:
        return f"Tie 1 unused input (pin {spare[0]}) to GND, its output open."
    return f"Tie {len(spare)} unused inputs (pins {', '.join(spare)}) to GND, their outputs open."
