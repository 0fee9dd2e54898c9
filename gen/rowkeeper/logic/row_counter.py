"""Row counter: the next row to refresh. One step per completed refresh strobe, never reset."""

from amaranth.hdl import Module, Signal
from amaranth.lib.wiring import Component, In, Out

__all__ = ["RowCounter"]


class RowCounter(Component):
    """Counts modulo 2 ** `refresh_bits`."""

    step: Signal
    row: Signal

    def __init__(self, refresh_bits: int) -> None:
        super().__init__({"step": In(1), "row": Out(refresh_bits)})

    def elaborate(self, platform: object) -> Module:
        m = Module()
        with m.If(self.step):
            m.d.sync += self.row.eq(self.row + 1)
        return m
