"""Quiet bus: when no access can begin, and fair notice before one can again.

Grant: from BUSACK falling until BUSREQ rises, which comes before BUSACK rises. BUSREQ may fall again, for the next
grant, while BUSACK is still on its way up: a grant that has begun to end stays ended. Reset: from the moment RESET has
been low for `reset_settle` ticks until it rises. The bus's reset goes nowhere else: it clears no counter and no state.
"""

from amaranth.hdl import Const, Module, Signal
from amaranth.lib.wiring import Component, In, Out

__all__ = ["QuietBus"]


class QuietBus(Component):
    """`quiet`: a refresh of our own may start. `granted`: memory requests on the bus are not the processor's."""

    reset: Signal
    busreq: Signal
    busack: Signal
    quiet: Signal
    granted: Signal

    def __init__(self, reset_settle: int, has_busreq: bool) -> None:
        super().__init__({"reset": In(1), "busreq": In(1), "busack": In(1), "quiet": Out(1), "granted": Out(1)})
        self._settle = reset_settle
        self._has_busreq = has_busreq
        self.held = Signal(range(reset_settle + 1))
        self.ending = Signal()  # BUSREQ has risen in this grant

    def elaborate(self, platform: object) -> Module:
        m = Module()
        settled = Signal()
        asked = self.busreq if self._has_busreq else Const(1)
        m.d.comb += [
            settled.eq(self.held == self._settle),
            self.quiet.eq((self.reset & settled) | (self.busack & asked & ~self.ending)),
            self.granted.eq(self.busack),
        ]
        m.d.sync += self.ending.eq(self.busack & (self.ending | ~asked))
        with m.If(~self.reset):
            m.d.sync += self.held.eq(0)
        with m.Elif(~settled):
            m.d.sync += self.held.eq(self.held + 1)
        return m
