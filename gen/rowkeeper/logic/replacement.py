"""The whole replacement: every part wired together, active low at the ports only."""

from amaranth.hdl import ClockDomain, Const, Module, Signal
from amaranth.lib.wiring import Component, In, Out

from rowkeeper.contract import Design, PortBit, Ports
from rowkeeper.logic.address_multiplexer import AddressMultiplexer
from rowkeeper.logic.cycle_kind import CycleKind
from rowkeeper.logic.quiet_bus import QuietBus
from rowkeeper.logic.refresh_timer import RefreshTimer
from rowkeeper.logic.row_counter import RowCounter
from rowkeeper.logic.sequencer import Sequencer
from rowkeeper.logic.synchroniser import Synchroniser
from rowkeeper.logic.warm_up import WarmUp
from rowkeeper.logic.window_decode import WindowDecode

__all__ = ["Replacement", "ports_of"]

_STROBES = ("ras_n", "cas_n", "we_n", "read_n", "enable_n")


def _lines(design: Design) -> tuple[str, ...]:
    """Bus lines that are wired, in port order."""
    lines = ["mreq_n", "m1_n", "rd_n", "wr_n"]
    lines += ["busreq_n"] if design.has_busreq else []
    lines += ["busack_n"] if design.has_busack else []
    lines += ["reset_n"] if design.has_reset else []
    return tuple(lines)


def ports_of(design: Design) -> Ports:
    """Every bit of the top module: clk, bus lines, address in; strobes, memory address out."""
    bits = [PortBit("clk", None, "clk", "input")]
    bits += [PortBit(name, None, name, "input") for name in _lines(design)]
    bits += [PortBit("a", i, f"a{i}", "input") for i in range(design.address_bits)]
    bits += [PortBit(name, None, name, "output") for name in _STROBES]
    width = max(design.row_bits, design.column_bits)
    bits += [PortBit("ma", i, f"ma{i}", "output") for i in range(width)]
    return Ports(tuple(bits))


class Replacement(Component):
    """Top module. `read_n` enables the board's data-out buffer, `enable_n` the 5 V strobe and address buffers."""

    def __init__(self, design: Design) -> None:
        self.design = design
        width = max(design.row_bits, design.column_bits)
        super().__init__(
            {name: In(1, init=1) for name in _lines(design)}
            | {"a": In(design.address_bits)}
            | {name: Out(1, init=1) for name in _STROBES}
            | {"ma": Out(width)}
        )
        t = design.ticks
        self.clock = ClockDomain("sync", reset_less=True)
        self.clock.clk.name = "clk"
        self.lines = {name: Synchroniser() for name in _lines(design)}
        self.cycle_kind = CycleKind()
        self.window_decode = WindowDecode(design.window_bits, design.window_value)
        self.address_multiplexer = AddressMultiplexer(
            design.address_bits, design.window_bits, design.row_bits, design.column_bits, design.refresh_bits
        )
        self.row_counter = RowCounter(design.refresh_bits)
        self.refresh_timer = RefreshTimer(t.standby, t.forced, design.standby)
        self.quiet_bus = QuietBus(t.reset_settle, design.has_busreq)
        self.warm_up = WarmUp(t.pause, t.warm_up_cycles)
        self.sequencer = Sequencer(t)

        for name, part in self._parts().items():
            for member in part.signature.members:
                # One name in the whole design: the part, then its port.
                getattr(part, member).name = f"{name}_{member}"

    def _parts(self) -> dict[str, Component]:
        parts: dict[str, Component] = {f"sync_{name.removesuffix('_n')}": line for name, line in self.lines.items()}
        names = ("cycle_kind", "window_decode", "address_multiplexer", "row_counter", "refresh_timer")
        return parts | {name: getattr(self, name) for name in (*names, "quiet_bus", "warm_up", "sequencer")}

    def elaborate(self, platform: object) -> Module:
        m = Module()
        m.domains.sync = self.clock
        for name, line in self.lines.items():
            m.d.comb += line.line_n.eq(getattr(self, name))
        for name, part in self._parts().items():
            m.submodules[name] = part
        self._wire_requests(m)
        self._wire_refresh(m)
        self._wire_outputs(m)
        return m

    def _line(self, name: str) -> Signal | Const:
        """A synchronised bus line, active high; a line that is not wired is never asserted."""
        return self.lines[name].second if name in self.lines else Const(0)

    def _wire_requests(self, m: Module) -> None:
        s, kind, mux = self.sequencer, self.cycle_kind, self.address_multiplexer
        m.d.comb += [
            kind.m1.eq(self._line("m1_n")),
            kind.request.eq(self._line("mreq_n")),
            s.request_first.eq(self.lines["mreq_n"].first),
            s.request.eq(self._line("mreq_n")),
            s.refresh.eq(kind.refresh),
            s.read.eq(self._line("rd_n")),
            s.write.eq(self._line("wr_n")),
            mux.bus_address.eq(self.a),
            mux.follow.eq(s.follow),
            mux.to_column.eq(s.to_column),
            mux.to_refresh.eq(s.to_refresh),
            self.window_decode.address.eq(mux.window),
            s.hit.eq(self.window_decode.hit),
        ]

    def _wire_refresh(self, m: Module) -> None:
        s, timer, warm, quiet = self.sequencer, self.refresh_timer, self.warm_up, self.quiet_bus
        m.d.comb += [
            quiet.reset.eq(self._line("reset_n")),
            quiet.busreq.eq(self._line("busreq_n")),
            quiet.busack.eq(self._line("busack_n")),
            timer.quiet.eq(quiet.quiet),
            timer.strobe_falls.eq(s.refresh_falls),
            warm.strobe_ends.eq(s.refresh_ends),
            s.granted.eq(quiet.granted),
            s.ready.eq(warm.ready),
            s.due.eq(warm.due | (timer.due & warm.ready)),
            self.row_counter.step.eq(s.refresh_ends),
            self.address_multiplexer.refresh_row.eq(self.row_counter.row),
        ]

    def _wire_outputs(self, m: Module) -> None:
        s = self.sequencer
        started = Signal()
        m.d.sync += started.eq(1)
        m.d.comb += [
            self.ras_n.eq(~s.row_strobe),
            self.cas_n.eq(~s.column_strobe),
            self.we_n.eq(~s.write_enable),
            self.read_n.eq(~s.data_out),
            self.enable_n.eq(~started),
            self.ma.eq(self.address_multiplexer.memory_address),
        ]
