"""Address multiplexer: row, column, refresh row; its outputs are registers, frozen around strobes.

While `follow` is high the bus address is captured every tick and its row bits go out. When it drops, nothing the bus
does can move the outputs: they change only at `to_column` and at `to_refresh`.
"""

from amaranth.hdl import Module, Signal
from amaranth.lib.wiring import Component, In, Out

__all__ = ["AddressMultiplexer"]


class AddressMultiplexer(Component):
    """Low `row_bits` of the bus address are the row, the next `column_bits` the column, the rest the window."""

    bus_address: Signal
    refresh_row: Signal
    follow: Signal
    to_column: Signal
    to_refresh: Signal
    window: Signal
    memory_address: Signal

    def __init__(self, address_bits: int, window_bits: int, row_bits: int, column_bits: int, refresh_bits: int) -> None:
        super().__init__(
            {
                "bus_address": In(address_bits),
                "refresh_row": In(refresh_bits),
                "follow": In(1),
                "to_column": In(1),
                "to_refresh": In(1),
                "window": Out(window_bits),
                "memory_address": Out(max(row_bits, column_bits)),
            }
        )
        self.captured = Signal(address_bits)
        self._row_bits = row_bits
        self._column_bits = column_bits

    def elaborate(self, platform: object) -> Module:
        m = Module()
        m.d.comb += self.window.eq(self.captured[len(self.captured) - len(self.window) :])
        row = self.bus_address[: self._row_bits]
        column = self.captured[self._row_bits : self._row_bits + self._column_bits]
        with m.If(self.to_refresh):
            m.d.sync += self.memory_address.eq(self.refresh_row)
        with m.Elif(self.to_column):
            m.d.sync += self.memory_address.eq(column)
        with m.Elif(self.follow):
            m.d.sync += self.memory_address.eq(row)
        with m.If(self.follow):
            m.d.sync += self.captured.eq(self.bus_address)
        return m
