"""What a checker sees: the pins of the design under test, the bus lines as sampled, and the probes of its registers.

Takes a `contract.Design` and signals; gives named views, active high, and small observers built from flip-flops of
their own. Claims speak of pins only; probes serve the helper assertions, and to tell which of two names (access or
refresh) a row strobe is given, where both names are then held to their own rules. Must not know the logic.
"""

from collections.abc import Mapping
from dataclasses import dataclass

from amaranth.hdl import Module, Mux, Signal, Value

from rowkeeper.contract import Design

__all__ = ["Scene", "Seen", "Stopwatch", "Target", "Turn", "at_least", "at_most"]


def at_most(value: Value | Signal, limit: int) -> Value:
    """`value`, cut off at `limit`."""
    return Mux(value < limit, value, limit)


def at_least(value: Value | Signal, least: int) -> Value:
    """`value`, raised to `least`."""
    return Mux(value > least, value, least)


@dataclass(frozen=True, slots=True)
class Scene:
    """Strobes active high; `lines` are the bus lines active high as sampled by the first flip-flops."""

    design: Design
    row: Signal
    column: Signal
    write: Signal
    data: Signal
    memory_address: Signal
    bus_address: Signal
    lines: Mapping[str, Signal]
    raw_lines: Mapping[str, Signal]
    probes: Mapping[str, Signal]

    def probe(self, name: str) -> Signal:
        return self.probes[f"probe_{name}"]

    def any_of(self, *names: str) -> Value:
        """Whether one of these probes is 1."""
        found: Value = self.probe(names[0])
        for name in names[1:]:
            found = found | self.probe(name)
        return found

    def row_part(self, address: Signal | Value) -> Value:
        return address[: self.design.row_bits]

    def column_part(self, address: Signal | Value) -> Value:
        return address[self.design.row_bits : self.design.row_bits + self.design.column_bits]

    def in_window(self, address: Signal | Value) -> Value | int:
        d = self.design
        return 1 if d.window_bits == 0 else address[d.address_bits - d.window_bits :] == d.window_value


class Stopwatch:
    """How long a level has lasted, in ticks, cut off at `limit`.

    `lasted` is 0 in the tick of a change. `ended`, read in the tick of a change, is how long the other level lasted.
    """

    def __init__(self, m: Module, level: Value | Signal, limit: int, name: str) -> None:
        width = len(Value.cast(level))
        self.level = level
        self.before = Signal(width, name=f"{name}_before")
        self.ended = Signal(range(limit + 1), name=f"{name}_ended")
        self.lasted = Signal(range(limit + 1), name=f"{name}_lasted")
        self.changed = Signal(name=f"{name}_changed")
        self.limit = limit
        m.d.comb += self.changed.eq(level != self.before)
        m.d.comb += self.lasted.eq(Mux(self.changed, 0, self.ended))
        m.d.sync += self.before.eq(level)
        m.d.sync += self.ended.eq(Mux(self.lasted >= limit, limit, self.lasted + 1))

    @property
    def began(self) -> Value:
        return self.changed & self.level

    @property
    def over(self) -> Value:
        return self.changed & self.before


class Seen:
    """A bus line as the logic may know it: after one flip-flop, and after two."""

    def __init__(self, m: Module, scene: Scene, line: str) -> None:
        self.line = line
        self.first = Signal(name=f"seen_{line}_first")
        self.second = Signal(name=f"seen_{line}_second")
        m.d.sync += [self.first.eq(scene.lines[line]), self.second.eq(self.first)]
        self.agrees = (self.first == scene.probe(f"{line}_first")) & (self.second == scene.probe(f"{line}_second"))


class Turn:
    """Whether a request that is seen now came in its turn: MREQ was seen high, and both strobes were high.

    `now` is read in the tick in which the request is seen. `proper`: a helper; what comes in turn is not served yet.
    """

    def __init__(self, m: Module, scene: Scene, request: "Seen") -> None:
        self.follows = Signal(name="turn_follows")
        self.now = Signal(name="turn_now")
        rests = ~scene.row & ~scene.column & ~scene.probe("preparing")
        m.d.sync += self.follows.eq(rests & ~request.first & ~request.second)
        m.d.sync += self.now.eq(self.follows & rests)
        unserved = ~((self.follows | self.now) & rests) | ~scene.probe("served")
        self.proper = unserved & ~(self.follows & request.second)


class Target:
    """The address an access is about: what stood on the bus when its request was seen.

    `asked` follows the bus while MREQ is seen high; `of_access` is `asked` as it was when the row strobe fell.
    """

    def __init__(self, m: Module, scene: Scene, request: "Seen", row: Stopwatch) -> None:
        bits = scene.design.address_bits
        self.asked, self.of_access = Signal(bits, name="asked"), Signal(bits, name="of_access")
        kept = Signal(bits, name="target_kept")
        with m.If(~request.first & ~request.second):
            m.d.sync += self.asked.eq(scene.bus_address)
        m.d.sync += kept.eq(self.of_access)
        m.d.comb += self.of_access.eq(Mux(row.began & ~scene.probe("refreshing"), self.asked, kept))
        fresh = scene.any_of("idle", "resting") & ~scene.probe("served")
        self.busy = scene.any_of("access", "reading", "writing", "holding")
        self.proper = {
            "fresh": ~fresh | (scene.probe("captured") == self.asked),
            "fresh_row": ~fresh | (scene.memory_address == scene.row_part(self.asked)),
            "busy": ~self.busy | (scene.probe("captured") == self.of_access),
            "window": ~self.busy | scene.in_window(self.of_access),
        }
