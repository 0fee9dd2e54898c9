"""Window decode: is this address ours?"""

from amaranth.hdl import Module, Signal
from amaranth.lib.wiring import Component, In, Out

__all__ = ["WindowDecode"]


class WindowDecode(Component):
    """Compares the high bits of the captured address with `window_value`; no bits: all of it is ours."""

    address: Signal
    hit: Signal

    def __init__(self, window_bits: int, window_value: int) -> None:
        super().__init__({"address": In(window_bits), "hit": Out(1)})
        self._value = window_value
        self._any = window_bits == 0

    def elaborate(self, platform: object) -> Module:
        m = Module()
        m.d.comb += self.hit.eq(1 if self._any else self.address == self._value)
        return m
