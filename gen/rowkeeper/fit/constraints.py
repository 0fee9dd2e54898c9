"""The constraint file: which net is on which pin, checked here because routers check it weakly.

Takes a board and the ports of the logic; gives `Constraint` records, or every refusal as a sentence with its place;
then the file's text, and the text read back. Must not know what a net is for, except that `clk` is the clock.
"""

import difflib
import re
from collections import Counter
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from fractions import Fraction

from rowkeeper.contract import Constraint, PortBit, Ports
from rowkeeper.reading.board import Board, Device, DevicePin, Net
from rowkeeper.reading.position import Position

__all__ = ["Refusal", "constraint_text", "constraints_of", "megahertz", "read_back", "refusals"]

_CLOCK = "clk"
_PLAIN_NAME = re.compile(r"[a-z][a-z0-9_]*")
_NO_PULL_UP_BANK = "3"  # the pad cell's own text: its PULLUP is for banks 0, 1 and 2, ignored in bank 3 (a copy)
_WORDS = {
    "supply": "a supply pin",
    "ground": "a ground pin",
    "config": "kept for configuration from the flash",
    "none": "to be left open",
}


@dataclass(frozen=True, slots=True)
class Refusal:
    """One thing wrong with the wiring, where it stands and what would mend it."""

    at: Position
    text: str


def refusals(board: Board, ports: Ports, pull_ups: frozenset[str] = frozenset()) -> tuple[Refusal, ...]:
    """Everything wrong with the pins of this board, in the order of the wiring; nothing wrong: empty."""
    device, nets = board.device, [net for net in board.wiring.nets if net.side != "path"]
    bits = {bit.net: bit for bit in ports.bits}
    found = [
        *_package(device),
        *(r for net in nets for r in _net(net, bits, device)),
        *_doubled(nets),
        *_missing(nets, bits),
        *(r for net in nets if net.name in pull_ups for r in _pull_up(net, device)),
        *_unknown_pull_ups(nets, pull_ups),
    ]
    return tuple(found)


def _package(device: Device) -> Iterator[Refusal]:
    """The catalogue's own table must hold every pin of the package once."""
    expected = {str(number) for number in range(1, device.package_pins + 1)}
    if set(device.pins) != expected or any(number != pin.number for number, pin in device.pins.items()):
        text = f"{device.name}: the pin table does not hold pins 1 to {device.package_pins} exactly once"
        yield Refusal(Position("", 0, 0), text)


def _net(net: Net, bits: Mapping[str, PortBit], device: Device) -> Iterator[Refusal]:
    """One net: known to the logic, in the right direction, on a pin that may carry it."""
    bit = bits.get(net.name)
    if bit is None:
        yield Refusal(net.at, f"`{net.name}` is not a net of the logic{_nearest(net.name, bits)}")
        return
    if bit.direction != net.side:
        yield Refusal(net.at, f"`{net.name}` is an {bit.direction} of the device, but is wired as an {net.side}")
    pin = device.pins.get(net.pin)
    if pin is None:
        yield Refusal(net.pin_at, f"`{net.name}`: {device.package} has no pin {net.pin or '(none given)'}")
    elif pin.role not in ("io", "clock"):
        yield Refusal(net.pin_at, f"`{net.name}`: pin {pin.number} ({pin.name}) is {_WORDS[pin.role]}")
    elif net.name == _CLOCK and pin.role != "clock":
        yield Refusal(net.pin_at, f"`{_CLOCK}`: pin {pin.number} feeds no global buffer; {_clock_pins(device)} do")


def _clock_pins(device: Device) -> str:
    return ", ".join(pin.number for pin in device.pins.values() if pin.role == "clock")


def _doubled(nets: list[Net]) -> Iterator[Refusal]:
    """No net twice, no pin twice; both places are named."""
    first_name: dict[str, Net] = {}
    first_pin: dict[str, Net] = {}
    for net in nets:
        if net.name in first_name:
            yield Refusal(net.at, f"`{net.name}` is wired twice, first at {first_name[net.name].at}")
        elif net.pin in first_pin:
            other = first_pin[net.pin]
            yield Refusal(net.pin_at, f"`{net.name}`: pin {net.pin} already carries `{other.name}`, at {other.pin_at}")
        first_name.setdefault(net.name, net)
        first_pin.setdefault(net.pin, net)


def _missing(nets: list[Net], bits: Mapping[str, PortBit]) -> Iterator[Refusal]:
    wired = {net.name for net in nets}
    for name, bit in bits.items():
        if name not in wired:
            near = nets[-1].at if nets else Position("", 0, 0)
            yield Refusal(near, f"`{name}`, an {bit.direction} of the logic, is on no pin")


def _pull_up(net: Net, device: Device) -> Iterator[Refusal]:
    pin = device.pins.get(net.pin)
    if pin is not None and pin.bank == _NO_PULL_UP_BANK:
        yield Refusal(net.pin_at, f"`{net.name}`: pin {pin.number} is in bank {pin.bank}, which has no pull-ups")


def _unknown_pull_ups(nets: list[Net], pull_ups: frozenset[str]) -> Iterator[Refusal]:
    for name in sorted(pull_ups - {net.name for net in nets}):
        yield Refusal(Position("", 0, 0), f"a pull-up is asked for `{name}`, which is on no pin")


def _nearest(name: str, known: Mapping[str, object]) -> str:
    close = difflib.get_close_matches(name, list(known), 1)
    return f"; did you mean `{close[0]}`?" if close else ""


def constraints_of(board: Board, ports: Ports, pull_ups: frozenset[str] = frozenset()) -> tuple[Constraint, ...]:
    """One constraint per port bit, in port order, of a board that has no refusals."""
    pins = {net.name: net.pin for net in board.wiring.nets if net.side != "path"}
    return tuple(Constraint(bit, pins[bit.net], bit.net in pull_ups) for bit in ports.bits)


def megahertz(frequency_hz: Fraction, tolerance_ppm: Fraction = Fraction(0)) -> str:
    """Decimal megahertz of a clock at its fastest, rounded up to a hertz: the router must not be asked for less."""
    hertz = frequency_hz * (1 + tolerance_ppm / 1_000_000)
    whole = -(-hertz.numerator // hertz.denominator)
    return f"{whole // 1_000_000}.{whole % 1_000_000:06d}"


def constraint_text(board: Board, constraints: tuple[Constraint, ...]) -> str:
    """The file for the router: `set_io` per port bit and the clock's frequency."""
    clock = board.device_clock
    lines = [f"# {board.slug}: pins of the {board.device.name}", f"# specification {board.digest}"]
    for constraint in constraints:
        if not _PLAIN_NAME.fullmatch(constraint.port.port):
            raise ValueError(f"not a plain port name: {constraint.port.port!r}")
        pull = "-pullup yes " if constraint.pull_up else ""
        lines.append(f"set_io {pull}{constraint.port.verilog} {constraint.pin}")
    lines.append(f"set_frequency {_CLOCK} {megahertz(clock.frequency_hz, clock.tolerance_ppm)}")
    return "\n".join([*lines, ""])


def read_back(text: str, ports: Ports, device: Device) -> tuple[Constraint, ...]:
    """What a constraint file says, with a strictness the router lacks. Raises ValueError with the line at fault."""
    bits = {bit.verilog: bit for bit in ports.bits}
    found: dict[str, Constraint] = {}
    for line in text.splitlines():
        if not line or line.startswith("#") or re.fullmatch(rf"set_frequency {_CLOCK} \d+\.\d{{6}}", line):
            continue
        match = re.fullmatch(r"set_io (-pullup yes )?(\S+) (\S+)", line)
        if match is None or match[2] not in bits or match[3] not in device.pins or match[2] in found:
            raise ValueError(f"not a constraint of this design: {line!r}")
        found[match[2]] = Constraint(bits[match[2]], match[3], bool(match[1]))
    twice = [pin for pin, uses in Counter(c.pin for c in found.values()).items() if uses > 1]
    if twice or set(found) != set(bits):
        raise ValueError(f"pins used twice: {twice}; ports without a pin: {sorted(set(bits) - set(found))}")
    return tuple(found[bit.verilog] for bit in ports.bits)


def free_pins(device: Device, constraints: tuple[Constraint, ...]) -> tuple[DevicePin, ...]:
    """Pins that could carry a net and carry none."""
    used = {constraint.pin for constraint in constraints}
    return tuple(p for p in device.pins.values() if p.role in ("io", "clock") and p.number not in used)
