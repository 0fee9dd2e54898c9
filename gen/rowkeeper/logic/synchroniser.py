"""Two flip-flops in a row for a bus line that knows nothing of our clock.

Takes an active-low line; gives it twice, active high: after the first and after the second flip-flop.
"""

from amaranth.hdl import Module, Signal
from amaranth.lib.wiring import Component, In, Out

__all__ = ["Synchroniser"]


class Synchroniser(Component):
    """`first` may still be settling when it is read; `second` has had one whole period to settle.

    Only freezing the address reads `first`: early by one tick, so that the address stands before the row strobe.
    """

    line_n: Signal
    first: Signal
    second: Signal

    def __init__(self) -> None:
        super().__init__({"line_n": In(1, init=1), "first": Out(1), "second": Out(1)})

    def elaborate(self, platform: object) -> Module:
        m = Module()
        m.d.sync += [self.first.eq(~self.line_n), self.second.eq(self.first)]
        return m
