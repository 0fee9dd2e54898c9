"""Warm-up: after configuration a pause, then refresh strobes back to back, then the memory may be used."""

from amaranth.hdl import Module, Signal
from amaranth.lib.wiring import Component, In, Out

__all__ = ["WarmUp"]


class WarmUp(Component):
    """`due` asks for a refresh once the pause is over and until `cycles` strobes have ended; then `ready`."""

    strobe_ends: Signal
    due: Signal
    ready: Signal

    def __init__(self, pause: int, cycles: int) -> None:
        super().__init__({"strobe_ends": In(1), "due": Out(1), "ready": Out(1)})
        self._pause = pause
        self._cycles = cycles
        self.waited = Signal(range(pause + 1))
        self.rested = Signal()
        self.done = Signal(range(cycles + 1))

    def elaborate(self, platform: object) -> Module:
        m = Module()
        m.d.comb += self.due.eq(self.rested & ~self.ready)
        with m.If(~self.rested):
            m.d.sync += self.waited.eq(self.waited + 1)
            with m.If(self.waited == self._pause - 1):
                m.d.sync += self.rested.eq(1)
        with m.If(self.strobe_ends & ~self.ready):
            m.d.sync += self.done.eq(self.done + 1)
            with m.If(self.done == self._cycles - 1):
                m.d.sync += self.ready.eq(1)
        return m
