"""Access or refresh: decided from the history of M1, not from RFSH.

RFSH may fall after the MREQ of its own refresh (Z8400 AC table: TdCr(RFSHf) against TdCf(MREQf)), so a level sampled
beside MREQ decides nothing. What is certain: an M1 pulse is followed by exactly one refresh request, and M1 is high
again before it. An interrupt acknowledge has no memory request inside its M1 pulse; its refresh follows all the same.
"""

from amaranth.hdl import Module, Mux, Signal
from amaranth.lib.wiring import Component, In, Out

__all__ = ["CycleKind"]


class CycleKind(Component):
    """`refresh` is valid while `request` is high, from its first tick on."""

    m1: Signal
    request: Signal
    refresh: Signal

    def __init__(self) -> None:
        super().__init__({"m1": In(1), "request": In(1), "refresh": Out(1)})
        self.owed = Signal()  # an M1 pulse began and its refresh has not come yet
        self.fetched = Signal()  # that pulse has had its opcode fetch
        self.held = Signal()  # the kind of the request under way
        self.m1_before = Signal()
        self.request_before = Signal()

    def elaborate(self, platform: object) -> Module:
        m = Module()
        begins = Signal()
        pulse = Signal()
        decided = Signal()
        m.d.comb += [
            begins.eq(self.request & ~self.request_before),
            pulse.eq(self.m1 & ~self.m1_before),
            decided.eq(self.owed & ~pulse & (~self.m1 | self.fetched)),
            self.refresh.eq(Mux(begins, decided, self.held)),
        ]
        m.d.sync += [self.m1_before.eq(self.m1), self.request_before.eq(self.request)]
        with m.If(pulse):
            m.d.sync += [self.owed.eq(1), self.fetched.eq(0)]
        with m.If(begins):
            m.d.sync += self.held.eq(decided)
            with m.If(decided):
                m.d.sync += self.owed.eq(0)
            with m.Elif(self.m1):
                m.d.sync += self.fetched.eq(1)
        return m
