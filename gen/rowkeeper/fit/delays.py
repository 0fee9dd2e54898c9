"""Delays of every net inside the device, from the router's own arcs.

Takes the router's delay file and the ports; gives a `NetDelay` per net and the slowest register to register path.
Must not know ticks or the board. Pads are not included: the router knows none.

All figures are counted from the clock as it arrives at the flip-flops. The way from the clock pin to them is the same
for the flip-flop that takes an input and the one that gives an output; the device clock keeps no step with the bus,
so that way cancels in every sum from pin to pin. What is left of it is the difference between flip-flops (skew).

The family has one set of figures, for its slow corner. So the longest paths count in full, and the shortest count as
nothing: no minimum is published.
"""

from collections import defaultdict
from collections.abc import Iterable, Mapping
from dataclasses import dataclass

from rowkeeper.contract import Delays, NetDelay, PortBit, Ports
from rowkeeper.fit.sdf import Arc, DelayFile, SdfError
from rowkeeper.reading.figures import Mark, Source, Window

__all__ = ["RoutedDelays", "routed_delays"]

_SOURCE = Source(Mark.ROUTED, "router's delay file, slow corner; no fast corner is published, so at least 0")
_CLOCK = "clk"


@dataclass(frozen=True, slots=True)
class RoutedDelays:
    """Delays per net, the clock's way from its pin to the flip-flops, and the slowest path between two of them.

    `slowest_ps`: the sum the clock period must be no shorter than.
    """

    delays: Delays
    clock_arrival: Window
    slowest_ps: int


def routed_delays(file: DelayFile, ports: Ports) -> RoutedDelays:
    """Walk every path once, in the order of the arcs."""
    walk = _Walk(file)
    arrivals = walk.clock_arrivals()
    first, last = min(arrivals.values()), max(arrivals.values())
    nets = {bit.net: _net(walk, bit, arrivals, first) for bit in ports.bits if bit.port != _CLOCK}
    slowest = walk.registers(arrivals)
    return RoutedDelays(Delays(nets, routed=True), Window(first, last), slowest)


def _net(walk: "_Walk", bit: PortBit, arrivals: Mapping[str, int], first_ps: int) -> NetDelay:
    pad = f"{bit.verilog}$sb_io"
    if bit.direction == "input":
        skew = max(arrivals.values()) - first_ps
        into = walk.into_registers({f"{pad}/D_IN_0": 0})
        return NetDelay(bit.net, "input", Window(-skew, into), _SOURCE)
    starts = {pin: arrivals[cell] - first_ps for pin, cell in walk.clock_pins.items()}
    longest = walk.longest(starts).get(f"{pad}/D_OUT_0")
    if longest is None:
        raise SdfError(f"the delay file holds no path to `{bit.net}`")
    return NetDelay(bit.net, "output", Window(0, longest), _SOURCE)


class _Walk:
    """Longest paths over wires and cells; the arcs form no loop, because clocks cut them."""

    def __init__(self, file: DelayFile) -> None:
        self._set_ups: dict[str, int] = defaultdict(int)
        for check in file.set_ups:
            self._set_ups[check.pin] = max(self._set_ups[check.pin], check.set_up_ps)
        clocked = {check.clock_pin for check in file.set_ups}
        self.clock_pins = {pin: pin.rsplit("/", 1)[0] for pin in sorted(clocked)}
        self._next: dict[str, list[Arc]] = defaultdict(list)
        for arc in (*file.wires, *file.through):
            self._next[arc.start].append(arc)
        self._order = _ordered(self._next)

    def longest(self, starts: Mapping[str, int], *, stop: Iterable[str] = ()) -> dict[str, int]:
        """The latest arrival at every pin that can be reached from `starts`, not going on from `stop`."""
        latest = dict(starts)
        stopped = set(stop)
        for pin in self._order:
            if pin not in latest or pin in stopped:
                continue
            for arc in self._next.get(pin, ()):
                latest[arc.end] = max(latest.get(arc.end, arc.hi_ps + latest[pin]), latest[pin] + arc.hi_ps)
        return latest

    def clock_arrivals(self) -> dict[str, int]:
        """When the clock reaches each flip-flop, counted from the clock pin."""
        latest = self.longest({f"{_CLOCK}$sb_io/D_IN_0": 0}, stop=self.clock_pins)
        return {cell: latest[pin] for pin, cell in self.clock_pins.items()}

    def into_registers(self, starts: Mapping[str, int]) -> int:
        """The longest way from `starts` into a flip-flop, set-up included; an input that goes nowhere gives 0."""
        latest = self.longest(starts, stop=self.clock_pins)
        return max((latest[pin] + set_up for pin, set_up in self._set_ups.items() if pin in latest), default=0)

    def registers(self, arrivals: Mapping[str, int]) -> int:
        """The longest way from one flip-flop to the next, set-up and clock arrivals included."""
        latest = self.longest({pin: arrivals[cell] for pin, cell in self.clock_pins.items()})
        ways = (
            latest[pin] + set_up - arrivals[pin.rsplit("/", 1)[0]]
            for pin, set_up in self._set_ups.items()
            if pin in latest
        )
        return max(ways, default=0)


def _ordered(arcs: Mapping[str, list[Arc]]) -> list[str]:
    """Pins in an order in which every arc goes forward."""
    waiting: dict[str, int] = defaultdict(int)
    for group in arcs.values():
        for arc in group:
            waiting[arc.end] += 1
    ready = sorted(pin for pin in arcs if waiting[pin] == 0)
    order: list[str] = []
    while ready:
        pin = ready.pop()
        order.append(pin)
        for arc in arcs.get(pin, ()):
            waiting[arc.end] -= 1
            if waiting[arc.end] == 0:
                ready.append(arc.end)
    if any(waiting.values()):
        raise SdfError("the delay file holds a loop of logic")
    return order
