"""The pin table: what every pin of the package is for on this board.

Takes a board and the ports of the logic; gives a `PinRow` per package pin, in the order of the package. Must not know
timing, or how a row is shown.
"""

from collections.abc import Iterable
from fractions import Fraction

from rowkeeper.contract import PinRow, PortBit, Ports
from rowkeeper.reading.board import Board, Device, DevicePin, IoLevels, Net, PathElement

__all__ = ["path_text", "pin_rows"]

# What a pin without a net is for: direction and note, by role.
_WITHOUT_NET = {
    "io": ("open", "leave open"),
    "clock": ("open", "leave open"),
    "supply": ("supply", "100 nF to ground close by"),
    "ground": ("ground", ""),
    "none": ("open", "leave open"),
}
_CONFIGURATION = {
    "CDONE": "high when configured; 10 kohm pull-up, a lamp only through a transistor",
    "CRESET_B": "10 kohm pull-up; low starts configuration again",
    "SDO": "to the flash's data in",
    "SDI": "to the flash's data out",
    "SCK": "to the flash's clock",
    "SS": "to the flash's select, 10 kohm pull-up",
}


def pin_rows(board: Board, ports: Ports) -> tuple[PinRow, ...]:
    """One row per package pin. The board's pins have passed the checks of `constraints`."""
    nets = {net.pin: net for net in board.wiring.nets if net.pin}
    bits = {bit.net: bit for bit in ports.bits}
    pins = sorted(board.device.pins.values(), key=_pin_order)
    return tuple(_row(board, pin, nets.get(pin.number), bits) for pin in pins)


def _pin_order(pin: DevicePin) -> tuple[int, int, str]:
    """Numbers as numbers; pins of grid packages after them, as text."""
    return (0, int(pin.number), "") if pin.number.isdecimal() else (1, 0, pin.number)


def _row(board: Board, pin: DevicePin, net: Net | None, bits: dict[str, PortBit]) -> PinRow:
    device = board.device
    if net is not None and net.name in bits:
        direction = bits[net.name].direction
        level = _level(device.levels, direction, *_other_end(board, net))
        note = f"drives the whole logic, {pin.name.rsplit('_', 1)[-1]}" if net.name == "clk" else ""
        return PinRow(pin.number, pin.name, net.name, direction, level, net.meets, path_text(net.through), note)
    if pin.role == "config":
        return PinRow(pin.number, pin.name, "", "config", "", "", "", _configuration_note(pin.name))
    use, note = _WITHOUT_NET[pin.role]
    level = _supply(device, pin) if pin.role == "supply" else "0 V" if pin.role == "ground" else ""
    return PinRow(pin.number, pin.name, "", use, level, "", "", note)


def _level(levels: IoLevels, direction: str, other: str, beyond: IoLevels | None) -> str:
    """High and low at both ends: the device's pin, and who drives it or whom it drives in the end."""
    pin, far = (_asked, _given) if direction == "input" else (_given, _asked)
    parts = [pin(levels), far(beyond, other) if beyond is not None else ""]
    return "; ".join(part for part in parts if part)


def _asked(levels: IoLevels, who: str = "") -> str:
    return _both(f"{who} asks", levels.vih_min_mv, levels.vil_max_mv)


def _given(levels: IoLevels, who: str = "") -> str:
    return _both(f"{who} gives", levels.voh_min_mv, levels.vol_max_mv)


def _both(what: str, high: int | None, low: int | None) -> str:
    if high is None or low is None:
        return ""
    return f"{what} {_decimal(high, 1000)} / {_volts(low)}".strip()


def _other_end(board: Board, net: Net) -> tuple[str, IoLevels | None]:
    """Who stands at the end of the net that is not the device."""
    if net.name == "clk":
        return "", None
    if net.side == "input":
        return "bus", board.bus.output_levels
    strobe = net.name in ("ras_n", "cas_n", "we_n")
    if not strobe and not net.name.startswith("ma"):
        return _enabled(board, net)
    chip = board.banks[0].chip if board.banks else None
    if chip is None:
        return "", None
    return "chip", chip.strobe_levels if strobe else chip.address_levels


def _enabled(board: Board, net: Net) -> tuple[str, IoLevels | None]:
    """The part whose enable this net meets, where the board file has that part on a net."""
    place = net.meets.partition(".")[0].partition("-")[0]
    elements = (element for other in board.wiring.nets for element in other.through)
    part = next((e.part for e in elements if e.part is not None and e.designator == place), None)
    return (place, part.input_levels) if part is not None else ("", None)


def _supply(device: Device, pin: DevicePin) -> str:
    """The catalogue's line for this supply: by its own name, or by the first of a `VCCIO_0 to VCCIO_3` run."""
    stem = pin.name.rstrip("0123456789")
    lines = [line for line in device.supplies if pin.name in line.split()]
    lines += [line for line in device.supplies if stem.endswith("_") and stem in line]
    words = lines[0].split() if lines else []
    volts = next((i for i, word in enumerate(words) if word[0].isdecimal()), len(words))
    return " ".join(words[volts:])


def _configuration_note(name: str) -> str:
    return next((note for key, note in _CONFIGURATION.items() if name == key or name.endswith(f"_{key}")), "")


def path_text(path: Iterable[PathElement]) -> str:
    """What a net passes through, in order from driver to receiver."""
    return ", ".join(_element(element) for element in path)


def _element(element: PathElement) -> str:
    if element.kind == "part" and element.part is not None:
        name = f"{element.designator} {element.part.name}".strip()
        return f"{name} at {_volts(element.part.supply_mv)}"
    if element.kind == "series":
        return f"{_decimal(element.series_milliohm, 1000)} ohm"
    if element.kind == "load":
        return f"load {_decimal(element.load_ff, 1000)} pF"
    return "plain wire"


def _volts(millivolts: int) -> str:
    return f"{_decimal(millivolts, 1000)} V"


def _decimal(value: int, scale: int) -> str:
    """A whole number of thousandths as decimal text, without trailing zeros."""
    share = Fraction(value, scale)
    whole, rest = divmod(share, 1)
    digits = f"{int(rest * scale):0{len(str(scale)) - 1}d}".rstrip("0")
    return f"{int(whole)}.{digits}" if digits else str(int(whole))
