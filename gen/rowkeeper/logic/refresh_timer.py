"""Refresh timer: how long ago the last refresh strobe fell, and whether one of our own is due.

Two ages matter. From `standby` on, a refresh of our own is made as soon as the bus is quiet (reset held, or granted
away with no notice of its end). At `forced`, it is made whatever the bus does: a legal bus never lets it come to that.
"""

from amaranth.hdl import Module, Signal
from amaranth.lib.wiring import Component, In, Out

__all__ = ["RefreshTimer"]


class RefreshTimer(Component):
    """`age` saturates at `forced` ticks; `due` asks the sequencer for a refresh."""

    strobe_falls: Signal
    quiet: Signal
    due: Signal

    def __init__(self, standby: int, forced: int, own_refresh: bool) -> None:
        super().__init__({"strobe_falls": In(1), "quiet": In(1), "due": Out(1)})
        self._standby = standby
        self._forced = forced
        self._own = own_refresh
        self.age = Signal(range(forced + 1))
        self.wanted = Signal()

    def elaborate(self, platform: object) -> Module:
        m = Module()
        if not self._own:
            return m
        forced = Signal()
        m.d.comb += [forced.eq(self.age == self._forced), self.due.eq(forced | (self.wanted & self.quiet))]
        with m.If(self.strobe_falls):
            m.d.sync += [self.age.eq(0), self.wanted.eq(0)]
        with m.Elif(~forced):
            m.d.sync += self.age.eq(self.age + 1)
            with m.If(self.age == self._standby - 1):
                m.d.sync += self.wanted.eq(1)
        return m
