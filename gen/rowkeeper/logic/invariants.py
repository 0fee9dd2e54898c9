"""Probe view: the replacement with its registers shown, and what is always true among them.

Takes a `contract.Design`; gives RTLIL text whose top has the ports of the shipped logic and, beside them, `probe_...`
outputs (the state of the registers, in words) and `helper_...` outputs (each 1 in every reachable state). Helpers
make the claims inductive; they are proved together with each claim, never assumed. Must not know the claims.
"""

from collections.abc import Mapping

from amaranth.back import rtlil
from amaranth.hdl import Fragment, Module, Mux, Signal, Value
from amaranth.lib.wiring import Component

from rowkeeper.contract import Design
from rowkeeper.logic.emit import TOP
from rowkeeper.logic.replacement import Replacement
from rowkeeper.logic.sequencer import State

__all__ = ["ProbeView", "probe_text", "view_text"]

_STATES = {
    "idle": State.IDLE,
    "access": State.ACCESS,
    "reading": State.READ,
    "writing": State.WRITE,
    "holding": State.HOLD,
    "resting": State.REST,
    "preparing": State.PREPARE,
    "refreshing": State.REFRESH,
}


def probe_text(design: Design) -> str:
    """RTLIL of the probe view, top module named as the shipped one."""
    return view_text(ProbeView(design))


def view_text(top: "ProbeView") -> str:
    """RTLIL of any probe view."""
    ports = [top.clock.clk, *(getattr(top, name) for name in top.signature.members), *top.shown]
    return str(rtlil.convert(top, name=TOP, ports=ports, emit_src=False))


class ProbeView(Replacement):
    """The replacement itself, elaborated by the same code, with more outputs. `parts` take the place of its own."""

    def __init__(self, design: Design, parts: Mapping[str, Component] | None = None) -> None:
        super().__init__(design)
        for name, part in (parts or {}).items():
            Fragment.get(getattr(self, name), None)  # Amaranth warns of a component that was never elaborated
            setattr(self, name, part)
        self._values = self._registers() | {f"helper_{name}": value for name, value in self._invariants().items()}
        self.shown = [
            Signal(1 if name.startswith("helper") else len(value), name=name) for name, value in self._values.items()
        ]

    def elaborate(self, platform: object) -> Module:
        m = super().elaborate(platform)
        m.d.comb += [signal.eq(value) for signal, value in zip(self.shown, self._values.values(), strict=True)]
        return m

    def _in(self, *names: str) -> Value:
        found: Value = self.sequencer.state == _STATES[names[0]]
        for name in names[1:]:
            found = found | (self.sequencer.state == _STATES[name])
        return found

    def _registers(self) -> dict[str, Value]:
        s, w, k = self.sequencer, self.warm_up, self.cycle_kind
        shown: dict[str, Value] = {name: self._in(name) for name in _STATES}
        shown |= {"step": s.step, "rest": s.rest, "served": s.served, "taken": s.taken}
        shown |= {"due": s.due, "granted": s.granted}
        shown |= {"refresh": k.refresh, "owed": k.owed, "fetched": k.fetched, "held": k.held}
        shown |= {"waited": w.waited, "rested": w.rested, "done": w.done, "ready": w.ready}
        shown |= {"age": self.refresh_timer.age, "quiet": self.quiet_bus.quiet, "follow": s.follow}
        shown |= {"row": self.row_counter.row, "captured": self.address_multiplexer.captured}
        shown |= {"m1_before": k.m1_before, "request_before": k.request_before}
        for name, line in self.lines.items():
            plain = name.removesuffix("_n")
            shown |= {f"{plain}_first": line.first, f"{plain}_second": line.second}
        return {f"probe_{name}": value for name, value in shown.items()}

    def _invariants(self) -> dict[str, Value]:
        return self._strobe_invariants() | self._step_invariants() | self._rest_invariants() | self._other_invariants()

    def _strobe_invariants(self) -> dict[str, Value]:
        """Each strobe register is a function of state and step; in HOLD the kind of access is all that is left."""
        s, t = self.sequencer, self.design.ticks
        column = self._in("reading", "holding") | (self._in("writing") & (s.step >= t.write_lead))
        return {
            "row": s.row_strobe == self._in("access", "reading", "writing", "refreshing"),
            "column": s.column_strobe == column,
            "write": Mux(self._in("holding"), 1, s.write_enable == self._in("writing")),
            "data": s.data_out == (self._in("reading") | (self._in("holding") & ~s.write_enable)),
        }

    def _step_invariants(self) -> dict[str, Value]:
        s, t = self.sequencer, self.design.ticks
        last = {
            "idle": 0,
            "access": t.give_up - 1,
            "reading": t.row_hold - 1,
            "writing": t.write_lead + t.row_hold - 1,
            "holding": max(t.column_cap - t.row_hold - 1, 0),
            "resting": max(t.precharge, t.column_rest),
            "preparing": t.row_setup - 1,
            "refreshing": t.refresh_low - 1,
        }
        return {f"step_{name}": ~self._in(name) | (s.step <= most) for name, most in last.items()}

    def _rest_invariants(self) -> dict[str, Value]:
        """`rest` counts from the rise of the row strobe, or from power-up."""
        s, w, t = self.sequencer, self.warm_up, self.design.ticks
        least = Mux(s.step < t.precharge, s.step, t.precharge)
        pause = Mux(w.waited < t.precharge, w.waited, t.precharge)
        return {
            "rest_most": s.rest <= t.precharge,
            "rest_pause": w.rested | (s.rest == pause),
            "rest_low": ~s.row_strobe | (s.step == 0) | (s.rest == 0),
            "rest_hold": ~self._in("holding") | (s.rest == least),
            "rest_rest": ~self._in("resting") | (s.rest >= least),
            "rest_early": ~self._in("resting") | (s.rest <= t.precharge - 2) | (s.step < t.column_rest - 1),
            "rest_idle": ~(w.rested & self._in("idle")) | (s.rest >= t.precharge - 1),
            "rest_prepare": ~self._in("preparing") | (s.rest == t.precharge),
        }

    def _other_invariants(self) -> dict[str, Value]:
        s, w, r, t = self.sequencer, self.warm_up, self.refresh_timer, self.design.ticks
        mux = self.address_multiplexer
        found = {
            "pause": w.rested == (w.waited >= t.pause),
            "pause_most": w.waited <= t.pause,
            "pause_idle": w.rested | (self._in("idle") & (w.done == 0) & (self.row_counter.row == 0)),
            "warm_ready": w.ready == (w.done >= t.warm_up_cycles),
            "warm_most": w.done <= t.warm_up_cycles,
            "warm_states": w.ready | self._in("idle", "preparing", "refreshing", "resting"),
            "busy_served": ~self._in("access", "reading", "writing", "holding", "preparing", "refreshing") | s.served,
            "busy_taken": ~self._in("access", "reading", "writing", "preparing", "refreshing") | s.taken,
            "taken": s.served | ~s.taken,
            "refresh_row": ~self._in("preparing", "refreshing") | (mux.memory_address == self.row_counter.row),
            "quiet_settled": self.quiet_bus.held <= t.reset_settle,
        }
        if self.design.standby:
            found |= {
                "age_most": r.age <= t.forced,
                "age_wanted": r.wanted == (r.age >= t.standby),
                "age_refresh": ~self._in("refreshing") | (r.age == s.step),
            }
        return found
