"""Levels along every net, from the driver through each part to the receiver, by the book.

Takes typed nets, chip, bus and device; notes a net on which a level or an absolute maximum is not met, with the volts.
Must not know how a net got into the file, nor delays.
"""

from dataclasses import dataclass

from rowkeeper.reading.board import BusFamily, Chip, Device, IoLevels, Net
from rowkeeper.reading.problems import Problems

__all__ = ["check_levels"]

# Transistor-transistor logic is designed to it; less of it between a 3.3 V device and a memory input asks for a buffer.
_NOISE_MARGIN_MV = 400
_DEVICE_RAIL_MV = 3300
_CMOS_VIH_MV = 3000  # no input with TTL thresholds asks for so much, nor a strobe of three supplies
_BUS_RAIL_MV = 5000
_ON_MEMORY_STROBES = ("ras_n", "cas_n", "we_n")


@dataclass(frozen=True, slots=True)
class _End:
    """One end of a wire: who it is in a sentence, its levels, the highest voltage it drives."""

    name: str
    levels: IoLevels
    highest_mv: int | None = None
    is_device: bool = False
    is_memory: bool = False


def _volts(millivolts: int) -> str:
    text = f"{millivolts / 1000:.2f}".rstrip("0")
    return f"{text.rstrip('.')} V"


def _driver(net: Net, chip: Chip, bus: BusFamily, device: Device) -> _End | None:
    """Who drives the net; None for the device clock, whose oscillator is no catalogue part."""
    if net.name == "clk":
        return None
    if net.side == "output":
        return _End("the device", device.levels, device.levels.abs_max_mv, is_device=True)
    if net.name == "data_out":
        return _End("the memory chip", chip.output_levels, chip.output_levels.abs_max_mv, is_memory=True)
    return _End("the bus", bus.output_levels, bus.supply_max_mv)


def _receiver(net: Net, chip: Chip, bus: BusFamily, device: Device) -> _End | None:
    """Who receives the net; None for enables, which end at a part of the board that is not in the file."""
    if net.side == "input":
        return _End("the device", device.levels, is_device=True)
    if net.name in _ON_MEMORY_STROBES:
        return _End("the memory chip's strobe input", chip.strobe_levels, is_memory=True)
    if net.name.startswith("ma") or net.name == "data_in":
        return _End("the memory chip's input", chip.address_levels, is_memory=True)
    if net.name == "data_out":
        return _End("the bus", bus.input_levels)
    return None


def _fix(driver: _End, receiver: _End) -> str:
    if receiver.is_device:
        return "put a translator in front of the device, for example `{translator: SN74LVC245A, designator: U24}`"
    asks = receiver.levels.vih_min_mv
    if asks is not None and asks > _CMOS_VIH_MV and not driver.is_device:
        return "take a part with TTL thresholds, for example SN74LVC245A: a TTL level does not satisfy CMOS thresholds"
    if driver.is_device:
        return "put a 5 V buffer behind the device, for example `{buffer: SN74AHCT541, designator: U22}`"
    return "put a part between the two that fits both"


def _check_wire(net: Net, driver: _End, receiver: _End, problems: Problems) -> None:
    """One wire: high level, low level, absolute maximum."""
    d, r = driver.levels, receiver.levels
    fix = _fix(driver, receiver)
    most = driver.highest_mv
    if most is not None and r.abs_max_mv is not None and most > r.abs_max_mv:
        problems.add(
            net.at,
            f"net {net.name}: {driver.name} may drive {_volts(most)}, "
            f"{receiver.name} takes {_volts(r.abs_max_mv)} at most",
            fix,
        )
        return
    needed = _NOISE_MARGIN_MV if driver.is_device and receiver.is_memory else 0
    beyond = f" and a margin of {_volts(needed)}" if needed else ""
    if d.voh_min_mv is not None and r.vih_min_mv is not None and d.voh_min_mv < r.vih_min_mv + needed:
        problems.add(
            net.at,
            f"net {net.name}: {driver.name} gives a high of {_volts(d.voh_min_mv)}, "
            f"{receiver.name} asks for {_volts(r.vih_min_mv)}{beyond}",
            fix,
        )
    if d.vol_max_mv is not None and r.vil_max_mv is not None and d.vol_max_mv > r.vil_max_mv:
        problems.add(
            net.at,
            f"net {net.name}: {driver.name} gives a low of {_volts(d.vol_max_mv)}, "
            f"{receiver.name} asks for {_volts(r.vil_max_mv)} or less",
            fix,
        )


def _check_oscillator(net: Net, device: Device, problems: Problems) -> None:
    """The wire from the oscillator names its supply, which the device must take."""
    rail = _rail(net)
    most = device.levels.abs_max_mv
    if most is not None and rail > most:
        problems.add(
            net.at,
            f"net {net.name}: the oscillator drives {_volts(rail)}, the device takes {_volts(most)} at most",
            "use an oscillator for 3.3 V, or put a translator in front of the device",
        )


def _rail(net: Net) -> int:
    """The supply of the wire at the driver, 0 where the path begins with a part."""
    first = net.through[0]
    return first.rail_mv if first.kind == "direct" else 0


def _check_rail(net: Net, problems: Problems) -> None:
    """A plain wire at the driver names the driver's own supply: 3.3 V from the device, 5 V from bus and memory."""
    expected = _DEVICE_RAIL_MV if net.side == "output" else _BUS_RAIL_MV
    rail = _rail(net)
    if rail and rail != expected:
        who = "the device" if net.side == "output" else "the other end"
        problems.add(
            net.through[0].at,
            f"net {net.name} is a plain wire at {_volts(rail)}, but {who} drives it from {_volts(expected)}",
            f"write `direct: {_volts(expected)}`, or put a part between the two supplies",
        )


def check_levels(net: Net, chip: Chip, bus: BusFamily, device: Device, problems: Problems) -> None:
    """Every wire of one net. A net without its path was refused already."""
    if not net.through:
        return
    before = len(problems)
    driver = _driver(net, chip, bus, device)
    if driver is None:
        _check_oscillator(net, device, problems)
    for element in net.through:
        if element.part is None:
            continue
        part = element.part
        name = f"{part.name} {element.designator}".strip()
        if driver is not None:
            _check_wire(net, driver, _End(name, part.input_levels), problems)
        driver = _End(name, part.output_levels, part.output_levels.abs_max_mv)
    receiver = _receiver(net, chip, bus, device)
    if driver is not None and receiver is not None:
        _check_wire(net, driver, receiver, problems)
    if net.name != "clk" and len(problems) == before:
        _check_rail(net, problems)
