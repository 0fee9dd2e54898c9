"""The order of work, from the first screw to the first run, with the figures of this board in it.

Takes a board; gives finished sentences in the order in which they are done. Must not know how they are shown.
"""

import re
from collections.abc import Iterator
from fractions import Fraction

from rowkeeper.reading.board import Bank, Board, Part
from rowkeeper.sheets.plain import net_label, one_line
from rowkeeper.sheets.quantities import decimal, volts

__all__ = ["order_of_work"]

_NEGATIVE = re.compile(r"(?:^|\s)[-\N{MINUS SIGN}]\s?\d")
_STROBES = ("ras_n", "cas_n", "we_n")
_DIGEST_SHOWN = 16


def order_of_work(board: Board, program_sha256: str = "") -> tuple[str, ...]:
    """Every step of this board."""
    return tuple(one_line(step) for step in _steps(board, program_sha256))


def _steps(board: Board, program_sha256: str) -> Iterator[str]:
    strobes = _meets(board, *_STROBES)
    yield (
        "Supplies off and measured off. Before any other work take the memory chips out; keep them under ESD control."
    )
    yield f"Programme the flash, read it back, compare: {_program(program_sha256)}."
    yield (
        f"Take out the parts to remove. Then measure that {strobes}, the memory addresses{_data_buffer(board)} have no"
        " other driver: no way to any part still on the board, nor to a supply but through a pull-up. A series resistor"
        " found on one of these lines: enter its ohms in the board file and run again before going on."
    )
    yield "Add parts, wire as in the pin table and the package tables, one tick per wire. Tie the unused inputs."
    yield "With supplies off, measure that no supply is shorted to ground or to another supply."
    yield from _negative_first(board)
    yield f"Still without memory chips: switch on and measure {_sockets(board)}; then 3.3 V and 1.2 V at the device."
    yield (
        f"Hold CRESET_B{_device_pin(board, 'CRESET_B')} low with a clip: {strobes} must stand at {_strobe_high(board)}"
        f" or more at the sockets{_enable_high(board)}. Switch off, open the link to 3.3 V, switch on with 3.3 V"
        " missing: measure the same again."
    )
    yield _configured(board)
    yield from _bus_clock(board)
    yield from _edges(board)
    yield "Supplies off and measured off. Fit the memory chips, notch to pin 1 mark."
    yield "Switch on. Test in the machine at full speed, with a pause longer than the refresh interval."


def _meets(board: Board, *names: str) -> str:
    """Nets with the places they meet: `/RAS (U10-U17.4), /CAS (U10-U17.15)`."""
    places = {net.name: net.meets for net in board.wiring.nets}
    return ", ".join(f"{net_label(name)} ({places[name]})" if name in places else net_label(name) for name in names)


def _data_buffer(board: Board) -> str:
    known = any(net.name == "read_n" for net in board.wiring.nets)
    return f" and the enable of the data buffer, {_meets(board, 'read_n')}," if known else ""


def _enable_high(board: Board) -> str:
    return f", and {_meets(board, 'read_n')} high, so that the data buffer is off" if _data_buffer(board) else ""


def _program(sha256: str) -> str:
    if sha256:
        return f"SHA-256 of program.bin begins {sha256[:_DIGEST_SHOWN]}"
    return "SHA-256 of program.bin as in manifest.json"


def _negative_first(board: Board) -> Iterator[str]:
    """The rule of three-supply chips, and how to see that it is kept."""
    supplies = tuple(dict.fromkeys(name for bank in board.banks for name in bank.chip.supplies))
    negative = [name for name in supplies if _NEGATIVE.search(name)]
    if len(supplies) < 2 or not negative:
        return
    others = ", ".join(name.split()[0] for name in supplies if name not in negative)
    names = ", ".join(negative)
    yield (
        f"Three-supply chips: {names} comes on FIRST and goes off LAST, every time. Scope it together with {others} at"
        " switch-on and at switch-off before a chip is fitted."
    )


def _sockets(board: Board) -> str:
    """Each supply at the socket pin that carries it."""
    return "; ".join(_socket(bank) for bank in board.banks)


def _socket(bank: Bank) -> str:
    figures = {name.split()[0]: " ".join(name.split()[1:]) for name in bank.chip.supplies} | {"VSS": "0 V"}
    pins = [f"pin {pin} {signal} {figures[signal]}" for pin, signal in bank.chip.pins.items() if signal in figures]
    listed = ", ".join(pins) or ", ".join(bank.chip.supplies)
    return f"at each socket{f' {bank.sockets}' if bank.sockets else ''}: {listed}"


def _device_pin(board: Board, name: str) -> str:
    found = (pin.number for pin in board.device.pins.values() if pin.name == name or pin.name.endswith(f"_{name}"))
    number = next(found, "")
    return f" (pin {number})" if number else ""


def _strobe_high(board: Board) -> str:
    asked = [bank.chip.strobe_levels.vih_min_mv for bank in board.banks]
    known = [millivolts for millivolts in asked if millivolts is not None]
    return volts(max(known)) if known else "the high level of the chip's sheet"


def _configured(board: Board) -> str:
    typical = _milliseconds(board.device.configuration_typical_ps)
    reset = _milliseconds(board.at_worst.power_on_reset_min_ps)
    return (
        f"Clip off. Two channels: CDONE{_device_pin(board, 'CDONE')} must be high well before"
        f" {_meets(board, 'reset_n')} rises, at every switch-on. Configuration takes {typical} typically, no maximum is"
        f" promised, and the board file says that RESET is held for {reset}; after CDONE the memory still wants its"
        " pause and warm-up."
    )


def _milliseconds(picoseconds: int) -> str:
    return f"{decimal(Fraction(picoseconds, 10**9))} ms"


def _bus_clock(board: Board) -> Iterator[str]:
    """The clock's half periods, which every bus figure is built on."""
    figures = board.grade.figures
    parts: list[str] = []
    for symbol, what in (("TwCh", "high"), ("TwCl", "low")):
        figure = figures.get(symbol)
        if figure is not None and figure.lo_ps is not None:
            parts.append(f"{what} for {_nanoseconds(figure.lo_ps)} or more ({symbol})")
    rise, fall = board.bus_clock.rise_max_ps, board.bus_clock.fall_max_ps
    if parts:
        yield (
            f"Measure the bus clock at the processor: {', '.join(parts)} of the {board.grade.name} grade; edges within"
            f" {_nanoseconds(max(rise, fall))}, as the board file says."
        )


def _nanoseconds(picoseconds: int) -> str:
    return f"{decimal(Fraction(picoseconds, 1000))} ns"


def _edges(board: Board) -> Iterator[str]:
    """Slow lines: what drives RESET and BUSREQ."""
    names = [name for name in ("reset_n", "busreq_n") if any(net.name == name for net in board.wiring.nets)]
    if names:
        yield (
            f"{_meets(board, *names)} must come from a gate or a Schmitt trigger, never straight from a resistor and"
            f" capacitor, and the processor and the translator must sit on that same node{_slowest(board)}. Scope it."
        )


def _slowest(board: Board) -> str:
    """The translator's own demand on edges, from its notes."""
    parts = [e.part for net in board.wiring.nets if net.name == "reset_n" for e in net.through if e.part is not None]
    said = next((_edge_note(part) for part in parts if _edge_note(part)), "")
    return f" ({said})" if said else ""


def _edge_note(part: Part) -> str:
    note = next((note for note in part.notes if "faster than" in note), "")
    return f"{part.name}: {note.rstrip('.')[0].lower()}{note.rstrip('.')[1:]}" if note else ""
