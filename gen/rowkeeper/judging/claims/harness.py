"""One claim's harness: the design under test, free inputs, the sampling of asynchronous lines, the checker.

Takes a `contract.Design`, the RTLIL text of the design's probe view and a checker class; gives RTLIL text of a module
that instantiates `SUBJECT`. Every output that starts with `claim_` or `lemma_` is asserted. Must not know solvers.

The clock is quantised to ticks. Each asynchronous line has a free bit `late`: a flip-flop that was just settling when
its line moved may take the old value for one tick more. Inputs are free at every tick unless a claim assumes more.
"""

import re
from collections.abc import Mapping
from dataclasses import dataclass

from amaranth.back import rtlil
from amaranth.hdl import Assert, Assume, ClockDomain, Elaboratable, Instance, Module, Mux, Signal

from rowkeeper.contract import Design
from rowkeeper.judging.claims.bounds import Bounds
from rowkeeper.judging.claims.checker import Checker
from rowkeeper.judging.claims.scene import Scene

__all__ = ["HARNESS", "SUBJECT", "Port", "harness_text", "module_ports"]

HARNESS = "rowkeeper_harness"
SUBJECT = "rowkeeper_subject"
_LOGIC = "rowkeeper_logic"
_STROBES = {"row": "ras_n", "column": "cas_n", "write": "we_n", "data": "read_n"}
_WIRE = re.compile(r"^ +wire (.*)$", re.MULTILINE)
_PORT = re.compile(r"\b(input|output) \d+")


@dataclass(frozen=True, slots=True)
class Port:
    """One port of an RTLIL module."""

    name: str
    direction: str
    width: int


def module_ports(rtlil_text: str, module: str = _LOGIC) -> tuple[Port, ...]:
    """Ports of one module of an RTLIL text, in text order."""
    body = re.search(rf"^module \\{re.escape(module)}\n(.*?)^end$", rtlil_text, re.MULTILINE | re.DOTALL)
    if body is None:
        raise ValueError(f"no module {module} in the RTLIL text")
    found = []
    for wire in _WIRE.findall(body.group(1)):
        options, _, name = wire.rpartition("\\")
        direction, width = _PORT.search(options), re.search(r"\bwidth (\d+)", options)
        if direction:
            found.append(Port(name, direction.group(1), int(width.group(1)) if width else 1))
    return tuple(found)


def harness_text(design: Design, probe_rtlil: str, claim: type[Checker], bounds: Bounds) -> str:
    """RTLIL of the harness; the design under test is an instance of `SUBJECT` and not part of the text."""
    harness = _Harness(design, module_ports(probe_rtlil), claim, bounds)
    return str(rtlil.convert(harness, name=HARNESS, ports=harness.ports(), emit_src=False))


class _Statements(Elaboratable):
    """The assertions of one kind, in a module of their own so that they can be counted."""

    def __init__(self, signals: Mapping[str, Signal]) -> None:
        self.signals = signals

    def elaborate(self, platform: object) -> Module:
        m = Module()
        m.d.comb += [Assert(signal) for signal in self.signals.values()]
        return m


class _Harness(Elaboratable):
    def __init__(self, design: Design, ports: tuple[Port, ...], claim: type[Checker], bounds: Bounds) -> None:
        self.design = design
        self.claim = claim
        self.bounds = bounds
        self.clock = ClockDomain("sync", reset_less=True)
        self.clock.clk.name = "clk"
        self.lines = [p.name for p in ports if p.direction == "input" and p.name not in ("clk", "a")]
        self.raw = {name: Signal(name=name) for name in self.lines}
        self.late = {name: Signal(name=f"late_{name}") for name in self.lines}
        self.address = Signal(design.address_bits, name="a")
        self.pins = {p.name: Signal(p.width, name=p.name) for p in ports if p.direction == "output"}
        # The checker states its signals when it is built, so building is elaborating.
        self.module = Module()
        self._build()

    def ports(self) -> list[Signal]:
        c = self.checker
        inputs = [self.clock.clk, *self.raw.values(), *self.late.values(), self.address]
        outputs = [*self.pins.values(), *self.sampled.values()]
        return [*inputs, *outputs, *c.musts.values(), *c.lemmas.values(), *c.assumed.values(), c.covered, c.allowed]

    def elaborate(self, platform: object) -> Module:
        return self.module

    def _build(self) -> None:
        m = self.module
        m.domains.sync = self.clock
        self.sampled = {}
        for name in self.lines:
            before = Signal(name=f"before_{name}", init=1)
            self.sampled[name] = Signal(name=f"sampled_{name}")
            m.d.sync += before.eq(self.raw[name])
            m.d.comb += self.sampled[name].eq(Mux(self.late[name], before, self.raw[name]))
        connections = {f"o_{name}": signal for name, signal in self.pins.items()}
        connections |= {f"i_{name}": signal for name, signal in self.sampled.items()}
        m.submodules.subject = Instance(SUBJECT, i_clk=self.clock.clk, i_a=self.address, **connections)
        self.checker = self.claim(m, self._scene(m), self.bounds)
        for name, signal in self.pins.items():
            if name.startswith("helper_") and not self.claim.by_pdr:
                self.checker.lemma(name, signal)
        m.submodules.claim = _Statements(self.checker.musts)
        m.submodules.lemma = _Statements(self.checker.lemmas)
        m.d.comb += [Assume(signal) for signal in self.checker.assumed.values()]

    def _scene(self, m: Module) -> Scene:
        strobes = {name: Signal(name=name) for name in _STROBES}
        m.d.comb += [strobes[name].eq(~self.pins[pin]) for name, pin in _STROBES.items()]
        return Scene(
            design=self.design,
            memory_address=self.pins["ma"],
            bus_address=self.address,
            lines={n.removesuffix("_n"): self._positive(m, n, s, "on") for n, s in self.sampled.items()},
            raw_lines={n.removesuffix("_n"): self._positive(m, n, s, "raw") for n, s in self.raw.items()},
            probes={n: s for n, s in self.pins.items() if n.startswith("probe_")},
            **strobes,
        )

    def _positive(self, m: Module, name: str, signal: Signal, kind: str) -> Signal:
        positive = Signal(name=f"{kind}_{name.removesuffix('_n')}")
        m.d.comb += positive.eq(~signal)
        return positive
