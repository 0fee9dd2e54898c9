"""Is this spec sensible: the parts of a board file against each other and against the catalogue.

Takes the typed parts; notes what cannot be, with both places where two disagree. What a device can do in time is judged
elsewhere. Must not know ticks, logic or tools.
"""

import re
from collections.abc import Iterator, Sequence

from rowkeeper.reading.board import Arrest, Bank, BusFamily, Device, Net
from rowkeeper.reading.position import Position
from rowkeeper.reading.problems import Problems, listed
from rowkeeper.reading.spec import RefreshPart

__all__ = [
    "check_arrests",
    "check_bank",
    "check_banks",
    "check_channels",
    "check_designators",
    "check_loads",
    "check_needed",
    "check_pins",
    "check_places",
    "check_refresh",
    "check_sockets",
]

_ROLE_WORDS = {
    "supply": "a supply pin",
    "ground": "a ground pin",
    "config": "a configuration pin",
    "none": "a pin that must stay open",
}
_MEMORY_SIGNALS = {"ras_n": "RAS", "cas_n": "CAS", "we_n": "WE", "data_in": "DIN", "data_out": "DOUT"}


# --- memory and refresh ------------------------------------------------------------------------------------------


def _size(number: int) -> str:
    return f"{number // 1024} KiB" if number and number % 1024 == 0 else f"{number} bytes"


def check_bank(bank: Bank, bus: BusFamily, problems: Problems) -> None:
    """Chips fill the data bus; the window holds exactly what the chips hold, on a multiple of its size."""
    chip = bank.chip
    if bank.chips * chip.width != bus.data_width:
        problems.add(
            bank.chips_at,
            f"{bank.chips} chips of {chip.width} bit make {bank.chips * chip.width} bits, the bus has {bus.data_width}",
            f"write `chips: {bus.data_width // chip.width}`",
        )
    held = chip.words * bus.data_width // 8
    if bank.size != held:
        relation = "larger" if bank.size > held else "smaller"
        problems.add(
            bank.size_at,
            f"a window of {_size(bank.size)} is {relation} than its chips, which hold {_size(held)}",
            f"write `size: {_size(held)}`",
        )
        return
    if bank.base % bank.size:
        problems.add(
            bank.base_at,
            f"the window base 0x{bank.base:04X} is not a multiple of its size, {_size(bank.size)}",
            f"the nearest below is 0x{bank.base - bank.base % bank.size:04X}",
        )
    elif bank.base + bank.size > 1 << bus.address_bits:
        problems.add(
            bank.base_at,
            f"the window ends beyond the {bus.address_bits} address bits of the bus",
            f"the last base is 0x{(1 << bus.address_bits) - bank.size:04X}",
        )


def check_banks(banks: Sequence[Bank], problems: Problems) -> None:
    """Banks do not overlap, have a number each, and there is one of them."""
    before = len(problems)
    for i, bank in enumerate(banks):
        for other in banks[:i]:
            if bank.base < other.base + other.size and other.base < bank.base + bank.size:
                problems.add(
                    bank.base_at,
                    f"bank {bank.number} overlaps bank {other.number} in line {other.base_at.line}",
                    "give every bank a window of its own",
                )
            if bank.number == other.number:
                problems.add(
                    bank.at,
                    f"bank {bank.number} stands twice: first in line {other.at.line}",
                    "number the banks from 0",
                )
    if len(banks) > 1 and len(problems) == before:
        problems.add(
            banks[1].at,
            "a second bank needs a second row strobe, which is not built yet",
            "describe one bank per board",
        )


def check_refresh(refresh: RefreshPart, banks: Sequence[Bank], bus: BusFamily, problems: Problems) -> None:
    """The source of the refresh row can reach every row of the chips."""
    for bank in banks:
        chip = bank.chip
        if refresh.row_from == "bus" and chip.refresh_row_bits > bus.bus_refresh_row_bits:
            problems.add(
                refresh.row_from_at,
                f"{chip.name} refreshes {chip.refresh_rows} rows, {chip.refresh_row_bits} bits; the refresh address of "
                f"{bus.name} has {bus.bus_refresh_row_bits}, so {chip.refresh_rows - (1 << bus.bus_refresh_row_bits)} "
                "rows would never be refreshed",
                "write `row_from: counter`",
            )
        elif refresh.row_from == "bus":
            problems.add(
                refresh.row_from_at, "a refresh row taken from the bus is not built yet", "write `row_from: counter`"
            )
        elif refresh.row_from == "chip":
            problems.add(
                refresh.row_from_at, f"{chip.name} has no refresh counter of its own", "write `row_from: counter`"
            )


# --- wiring ------------------------------------------------------------------------------------------------------


def check_needed(nets: Sequence[Net], needed: Sequence[str], at: Position, problems: Problems) -> None:
    """Every net that the board needs stands in the wiring."""
    present = {net.name for net in nets}
    missing = [name for name in needed if name not in present]
    if missing:
        nouns = "net is" if len(missing) == 1 else "nets are"
        problems.add(at, f"{len(missing)} {nouns} missing: {listed(missing, 'and')}", "wire each, with its path")


def check_arrests(nets: Sequence[Net], arrest: Arrest, at: Position, problems: Problems) -> None:
    """What can hold the bus off must be seen by the device."""
    present = {net.name for net in nets}
    if arrest.grant_max_ps != 0 and "busack_n" not in present:
        problems.add(
            arrest.at.get("grant.max", at),
            "the bus may be granted away, but busack_n is not wired: nothing would refresh meanwhile",
            "wire busack_n, or write `grant: {max: 0 ns}`",
        )
    if arrest.reset_max_ps != 0 and "reset_n" not in present:
        problems.add(
            arrest.at.get("reset.max", at),
            "the bus may be held in reset, but reset_n is not wired: nothing would refresh meanwhile",
            "wire reset_n, or write `reset: {max: 0 ns, aligned: no}`",
        )


def check_pins(nets: Sequence[Net], device: Device, problems: Problems) -> None:
    """Every net has a pin of its own that can do the job."""
    taken: dict[str, Net] = {}
    clocks = [pin.number for pin in device.pins.values() if pin.role == "clock"]
    for net in nets:
        if not net.pin:
            continue
        pin = device.pins.get(net.pin)
        if pin is None:
            problems.add(
                net.pin_at, f"{device.name} has no pin {net.pin}", f"its pins run from 1 to {device.package_pins}"
            )
            continue
        first = taken.setdefault(net.pin, net)
        if pin.role in _ROLE_WORDS:
            problems.add(
                net.pin_at, f"pin {net.pin} ({pin.name}) is {_ROLE_WORDS[pin.role]}", "choose an input and output pin"
            )
        elif first is not net:
            problems.add(
                net.pin_at,
                f"pin {net.pin} is used twice: by {net.name}, and by {first.name} in line {first.pin_at.line}",
                "give each net a pin of its own",
            )
        elif net.name == "clk" and pin.role != "clock":
            problems.add(net.pin_at, f"pin {net.pin} ({pin.name}) cannot take a clock", f"use pin {listed(clocks)}")


_REFERENCE = re.compile(r"([A-Z]+)([0-9]+)(?:-[A-Z]+([0-9]+))?\.(.+)")


def _places(meets: str) -> Iterator[str]:
    """`U22-U23.1+19` as U22.1, U22.19, U23.1, U23.19."""
    match = _REFERENCE.fullmatch(meets)
    if match:
        for number in range(int(match[2]), int(match[3] or match[2]) + 1):
            for pin in match[4].split("+"):
                yield f"{match[1]}{number}.{pin}"


def check_places(nets: Sequence[Net], problems: Problems) -> None:
    """No two nets meet one pin on the board."""
    taken: dict[str, Net] = {}
    noted: set[tuple[str, str]] = set()
    for net in nets:
        for place in _places(net.meets):
            first = taken.setdefault(place, net)
            if first is not net and (first.name, net.name) not in noted:
                noted.add((first.name, net.name))
                problems.add(
                    net.meets_at,
                    f"{net.name} meets {place}, and so does {first.name} in line {first.at.line}",
                    "let one pin of the board carry one net",
                )


def check_sockets(nets: Sequence[Net], bank: Bank, problems: Problems) -> None:
    """A net of the memory ends at the pin of that name on every chip."""
    pin_of = {signal: number for number, signal in bank.chip.pins.items()}
    for net in nets:
        signal = _MEMORY_SIGNALS.get(net.name) or (f"A{net.name[2:]}" if net.name.startswith("ma") else "")
        pin = pin_of.get(signal)
        if pin is not None and net.meets and net.meets != f"{bank.sockets}.{pin}":
            problems.add(
                net.meets_at,
                f"net {net.name} meets {net.meets}, but {signal} of {bank.chip.name} is pin {pin} of {bank.sockets}",
                f"write `meets: {bank.sockets}.{pin}`",
            )


def check_designators(nets: Sequence[Net], bank: Bank, problems: Problems) -> None:
    """A part of a path does not sit where a memory chip sits."""
    sockets = {place.partition(".")[0] for place in _places(f"{bank.sockets}.1")}
    noted: set[str] = set()
    for net in nets:
        for element in net.through:
            if element.part is not None and element.designator in sockets - noted:
                noted.add(element.designator)
                problems.add(
                    element.at,
                    f"{element.designator} is {element.part.name} here, but one of the memory chips {bank.sockets} "
                    f"in line {bank.at.line}",
                    "give the part a designator of its own",
                )


def _channels(number: int) -> str:
    return "one channel" if number == 1 else f"{number} channels"


def check_channels(nets: Sequence[Net], data_width: int, problems: Problems) -> None:
    """A package is one part, and carries no more nets than it has channels."""
    parts: dict[str, tuple[str, Position]] = {}
    used: dict[str, int] = {}
    for net in nets:
        for element in net.through:
            if element.part is None or not element.designator:
                continue
            name, place = element.part.name, element.designator
            first, first_at = parts.setdefault(place, (name, element.at))
            if first != name:
                problems.add(
                    element.at,
                    f"{place} is {name} here, but {first} in line {first_at.line}",
                    "name one of the two",
                )
                continue
            before = used.get(place, 0)
            used[place] = before + (data_width if net.side == "path" else 1)
            if before <= element.part.channels < used[place]:
                problems.add(
                    element.at,
                    f"{place} carries more than the {_channels(element.part.channels)} that {name} has",
                    "use a second package",
                )


def _check_rating(net: Net, problems: Problems) -> None:
    """The last part on a net is rated for the load behind it, or its sheet tells what more load costs."""
    load = next((element for element in net.through if element.kind == "load"), None)
    part = next((element.part for element in reversed(net.through) if element.part is not None), None)
    if load is None or part is None or part.load_slope_ps is not None:
        return
    if load.load_ff > part.load_rated_pf * 1000:
        problems.add(
            load.at,
            f"the delay of {part.name} is given for {part.load_rated_pf} pF; its sheet does not tell what more costs",
            "lighten the net, or take a part whose delay is known at this load",
        )


def check_loads(nets: Sequence[Net], bank: Bank, problems: Problems) -> None:
    """An output names its load, and at least that of the chip inputs on it."""
    for net in nets:
        _check_rating(net, problems)
        if net.side != "output" or not net.through:
            continue
        load = next((element for element in net.through if element.kind == "load"), None)
        if load is None:
            problems.add(net.at, f"net {net.name} has no load", "add `{load: 90 pF}`: the inputs on it and the wiring")
            continue
        strobe = net.name in ("ras_n", "cas_n", "we_n")
        each = bank.chip.strobe_pf_max if strobe else bank.chip.address_pf_max if net.name.startswith("ma") else 0
        least = each * bank.chips
        if load.load_ff < least * 1000:
            problems.add(
                load.at,
                f"the {bank.chips} chip inputs on net {net.name} are {least} pF already, at {each} pF each",
                f"write `load: {least + 10} pF`, or what you measured if it is more",
            )
