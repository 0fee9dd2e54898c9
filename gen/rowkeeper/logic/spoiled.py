"""Deliberately wrong variants of the logic: each lacks one safeguard, and one claim at least must fail on it.

Takes a `contract.Design`; gives RTLIL text of the probe view by name. Proofs that cannot fail prove nothing: these are
never shipped. Must not know the claims.
"""

from collections.abc import Callable, Mapping
from dataclasses import replace

from amaranth.hdl import Module
from amaranth.lib.wiring import Component

from rowkeeper.contract import Design, TickTable
from rowkeeper.logic.cycle_kind import CycleKind
from rowkeeper.logic.invariants import ProbeView, view_text
from rowkeeper.logic.refresh_timer import RefreshTimer
from rowkeeper.logic.row_counter import RowCounter
from rowkeeper.logic.sequencer import Sequencer, State
from rowkeeper.logic.warm_up import WarmUp

__all__ = ["variants"]


def variants(design: Design) -> Mapping[str, str]:
    """Every wrong variant of this design, RTLIL text by name."""
    t = design.ticks
    parts: dict[str, dict[str, Component]] = {
        "mux-late": {"sequencer": Sequencer(replace(t, mux=t.mux + 1))},
        "precharge-short": {"sequencer": Sequencer(replace(t, precharge=t.precharge - 1))},
        "row-skips": {"row_counter": _SkippingCounter(design.refresh_bits)},
        "forced-off": {"refresh_timer": _NeverForced(t.standby, t.forced, design.standby)},
        "standby-off": {"refresh_timer": _OnlyForced(t.standby, t.forced, design.standby)},
        "warm-up-skipped": {"warm_up": WarmUp(t.pause, t.warm_up_cycles - 1)},
        "kind-by-level": {"cycle_kind": _KindByLevel()},
    }
    parts |= {name: {"sequencer": _SpoiledSequencer(t, change)} for name, change in _CHANGES.items()}
    return {name: view_text(ProbeView(design, changed)) for name, changed in sorted(parts.items())}


def _row_cut(s: Sequencer, m: Module) -> None:
    """An access that is aborted takes its row strobe along."""
    with m.If((s.state == State.ACCESS) & ~s.request):
        m.d.sync += [s.state.eq(State.REST), s.step.eq(0), s.row_strobe.eq(0)]


def _column_in_refresh(s: Sequencer, m: Module) -> None:
    with m.If(s.state == State.REFRESH):
        m.d.sync += s.column_strobe.eq(s.step == 1)


def _write_late(s: Sequencer, m: Module) -> None:
    """Write enable comes one tick after the column strobe."""
    with m.If(s.state == State.ACCESS):
        m.d.sync += s.write_enable.eq(0)
    with m.If((s.state == State.WRITE) & (s.step == s.ticks.write_lead)):
        m.d.sync += s.write_enable.eq(1)


def _buffer_always(s: Sequencer, m: Module) -> None:
    """The data buffer drives in a write too."""
    with m.If((s.state == State.WRITE) & (s.step == s.ticks.write_lead - 1)):
        m.d.sync += s.data_out.eq(1)


def _data_cut(s: Sequencer, m: Module) -> None:
    """Data goes with MREQ, whether RD has risen or not."""
    with m.If((s.state == State.HOLD) & ~s.request):
        m.d.sync += [s.state.eq(State.REST), s.step.eq(0), s.column_strobe.eq(0), s.data_out.eq(0)]


def _address_follows(s: Sequencer, m: Module) -> None:
    """The address follows the bus whenever no request is there, a strobe of ours or not."""
    m.d.comb += s.follow.eq(~s.request_first & ~s.request)


def _served_forgotten(s: Sequencer, m: Module) -> None:
    """After a refresh, a request that came meanwhile passes for a fresh one."""
    with m.If(s.refresh_ends):
        m.d.sync += [s.served.eq(0), s.taken.eq(0)]


def _served_twice(s: Sequencer, m: Module) -> None:
    """A request that outlasts its access passes for a fresh one."""
    with m.If(s.state == State.REST):
        m.d.sync += s.served.eq(0)


_CHANGES: Mapping[str, Callable[[Sequencer, Module], None]] = {
    "row-cut": _row_cut,
    "column-in-refresh": _column_in_refresh,
    "write-late": _write_late,
    "buffer-always": _buffer_always,
    "data-cut": _data_cut,
    "address-follows": _address_follows,
    "served-forgotten": _served_forgotten,
    "served-twice": _served_twice,
}


class _SpoiledSequencer(Sequencer):
    """The sequencer with statements added that override its own."""

    def __init__(self, ticks: TickTable, change: Callable[[Sequencer, Module], None]) -> None:
        super().__init__(ticks)
        self._change = change

    def elaborate(self, platform: object) -> Module:
        m = super().elaborate(platform)
        self._change(self, m)
        return m


class _SkippingCounter(RowCounter):
    """Skips every other row."""

    def elaborate(self, platform: object) -> Module:
        m = super().elaborate(platform)
        with m.If(self.step):
            m.d.sync += self.row.eq(self.row + 2)
        return m


class _NeverForced(RefreshTimer):
    """A busy bus starves it."""

    def elaborate(self, platform: object) -> Module:
        m = super().elaborate(platform)
        m.d.comb += self.due.eq(self.wanted & self.quiet)
        return m


class _OnlyForced(RefreshTimer):
    """It lets every quiet moment pass."""

    def elaborate(self, platform: object) -> Module:
        m = super().elaborate(platform)
        m.d.comb += self.due.eq(self.age == self._forced)
        return m


class _KindByLevel(CycleKind):
    """Takes every request without M1 for a refresh."""

    def elaborate(self, platform: object) -> Module:
        m = super().elaborate(platform)
        m.d.comb += self.refresh.eq(~self.m1)
        return m
