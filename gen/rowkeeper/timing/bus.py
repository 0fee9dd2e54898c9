"""The m1-refresh bus on its clock: what it promises about every event of every kind of cycle.

Takes the AC table of the bus, the bus clock and waits; puts promises between events into a network. Events carry a
prefix that tells the first cycle ("") from the one that follows ("next "). Clock edges are "Cr1", "Cf1", "Cr2", and
so on. Must not know what listens on the bus.
"""

from dataclasses import dataclass
from typing import Literal

from rowkeeper.reading.board import BusGrade
from rowkeeper.reading.figures import Figure, Source
from rowkeeper.timing.bus_clock import BusClock
from rowkeeper.timing.network import SAME, UNPUBLISHED, Network, Promise

__all__ = ["CYCLES", "FOLLOWERS", "BusCycles", "CycleKind", "from_figure", "request_clock"]

CycleKind = Literal["opcode fetch", "refresh", "memory read", "memory write", "interrupt acknowledge"]

CYCLES: tuple[CycleKind, ...] = ("opcode fetch", "refresh", "memory read", "memory write", "interrupt acknowledge")
_STARTS: tuple[CycleKind, ...] = ("opcode fetch", "memory read", "memory write", "interrupt acknowledge")

# What a legal bus can let follow at once, after the shortest form of each cycle.
FOLLOWERS: dict[CycleKind, tuple[CycleKind, ...]] = {
    "opcode fetch": ("refresh",),
    "refresh": _STARTS,
    "memory read": _STARTS,
    "memory write": _STARTS,
    "interrupt acknowledge": ("refresh",),
}

_ACKNOWLEDGE_WAITS = 2  # UM0080: an interrupt acknowledge has two waits of its own


def request_clock(kind: CycleKind, waits: int) -> int:
    """The clock, counted from the cycle's first, at which whatever follows begins. A refresh counts from T3."""
    if kind == "opcode fetch":
        return 3 + waits
    if kind == "refresh":
        return 3
    if kind == "interrupt acknowledge":
        return 3 + _ACKNOWLEDGE_WAITS + waits
    return 4 + waits


def from_figure(figure: Figure, name: str = "") -> Promise:
    """A published delay; where no minimum is published the earliest is 0, and the term says so."""
    missing = figure.lo_ps is None
    lo = 0 if figure.lo_ps is None else figure.lo_ps
    return Promise(name or figure.symbol, lo, figure.hi_ps, figure.source, UNPUBLISHED if missing else None)


@dataclass(slots=True)
class BusCycles:
    """Adds clocks and cycles to `network`."""

    network: Network
    grade: BusGrade
    clock: BusClock
    board_source: Source

    def clocks(self, count: int) -> None:
        """Edges of clocks 1 to `count`. The same edge comes again after one period; phases keep their windows."""
        c, net = self.clock, self.network
        source = self.board_source
        period = Promise("bus clock period", c.period_lo_ps, c.period_hi_ps, source)
        high = Promise("bus clock high, Cr to Cf", c.high_lo_ps, c.high_hi_ps, source)
        low = Promise("bus clock low, Cf to Cr", c.low_lo_ps, c.low_hi_ps, source)
        for n in range(1, count + 1):
            net.promise(f"Cr{n}", f"Cf{n}", high)
            if n < count:
                net.promise(f"Cf{n}", f"Cr{n + 1}", low)
                net.promise(f"Cr{n}", f"Cr{n + 1}", period)
                net.promise(f"Cf{n}", f"Cf{n + 1}", period)

    def delay(self, edge: str, event: str, symbol: str) -> None:
        """An AC table delay from a clock edge."""
        figure = self.grade.figures.get(symbol)
        if figure is not None:
            self.network.promise(edge, event, from_figure(figure))

    def at_least(self, earlier: str, later: str, symbol: str) -> None:
        """A width or separation of the AC table: a minimum, as a formula on the real clock or as a figure."""
        formula = self.grade.formulas.get(symbol)
        if formula is not None:
            least = self.clock.least(formula.terms) + formula.offset_ps
            self.network.promise(earlier, later, Promise(symbol, least, None, formula.source))
            return
        figure = self.grade.figures.get(symbol)
        if figure is not None and figure.lo_ps is not None:
            self.network.promise(earlier, later, Promise(symbol, figure.lo_ps, None, figure.source))

    def begin(self, kind: CycleKind, n: int, prefix: str = "") -> None:
        """What a cycle that begins with clock `n` does up to its request. A refresh begins with T3."""
        if kind == "refresh":
            self.delay(f"Cf{n}", f"{prefix}MREQf", "TdCf(MREQf)")
            return
        self.delay(f"Cr{n}", f"{prefix}A", "TdCr(A)")
        if kind in ("opcode fetch", "interrupt acknowledge"):
            self.delay(f"Cr{n}", f"{prefix}M1f", "TdCr(M1f)")
        if kind == "interrupt acknowledge":
            return
        self.delay(f"Cf{n}", f"{prefix}MREQf", "TdCf(MREQf)")
        self.at_least(f"{prefix}A", f"{prefix}MREQf", "TdA(MREQf)")
        if kind == "memory write":
            self.delay(f"Cf{n}", f"{prefix}D", "TdCf(D)")
            self.delay(f"Cf{n + 1}", f"{prefix}WRf", "TdCf(WRf)")
            self.at_least(f"{prefix}D", f"{prefix}WRf", "TdD(WRf)")
        else:
            self.delay(f"Cf{n}", f"{prefix}RDf", "TdCf(RDf)")

    def finish(self, kind: CycleKind, n: int, waits: int) -> None:
        """How a first cycle that began with clock `n` ends."""
        if kind == "refresh":
            self.delay(f"Cf{n + 1}", "MREQr", "TdCf(MREQr)")
        elif kind == "opcode fetch":
            self._finish_fetch(n + 2 + waits)
        elif kind == "interrupt acknowledge":
            self.delay(f"Cr{n + 2 + _ACKNOWLEDGE_WAITS + waits}", "M1r", "TdCr(M1r)")
            return
        else:
            self._finish_data(kind, n + 2 + waits)
        self.at_least("MREQf", "MREQr", "TwMREQl")

    def _finish_fetch(self, third: int) -> None:
        """Opcode fetch: data is taken at Cr of T3, and the refresh address follows at once."""
        edge = f"Cr{third}"
        for event, symbol in (("MREQr", "TdCr(MREQr)"), ("RDr", "TdCr(RDr)"), ("M1r", "TdCr(M1r)")):
            self.delay(edge, event, symbol)
        self.delay(edge, "A ends", "TdCr(A)")
        self.same(edge, "sample")

    def _finish_data(self, kind: CycleKind, third: int) -> None:
        """Memory read or write: data is taken at Cf of T3; address and data stay past the strobes."""
        edge = f"Cf{third}"
        self.delay(edge, "MREQr", "TdCf(MREQr)")
        self.delay(f"Cr{third + 1}", "A ends", "TdCr(A)")
        self.at_least("MREQr", "A ends", "TdCTr(A)")
        if kind == "memory write":
            self.delay(edge, "WRr", "TdCf(WRr)")
            self.at_least("WRf", "WRr", "TwWR")
            self.at_least("WRr", "A ends", "TdCTr(A)")
            self.at_least("WRr", "D ends", "TdWRr(D)")
            return
        self.delay(edge, "RDr", "TdCf(RDr)")
        self.at_least("RDr", "A ends", "TdCTr(A)")
        self.same(edge, "sample")

    def same(self, event: str, name: str) -> None:
        """Another name for an event."""
        self.network.promise(event, name, SAME)

    def between(self) -> None:
        """MREQ stays high between two strobes."""
        if self.network.holds("MREQr", "next MREQf"):
            self.at_least("MREQr", "next MREQf", "TwMREQh")
