"""Strobe sequencer: the order of row strobe, column strobe, write enable and data buffer, by counted ticks.

Nothing relies on gate delay for order, and no strobe is ever cut short: whatever the request does, a strobe that has
begun runs its counted length. The states, and the tick at which each is left (entry is tick 0):

    IDLE     a refresh of our own that is due goes first, then the bus's request
    ACCESS   row strobe low; `mux` switches to the column; from `column` on a read or write may go ahead
    READ     column strobe low; after `row_hold` the row strobe rises
    WRITE    write enable low, `write_lead` later the column strobe; `row_hold` after that the row strobe rises
    HOLD     column strobe alone keeps the data out; ends with the request and, in a read, with RD, whichever is later;
             or at `column_cap`, for a due refresh, or for the bus's own refresh
    REST     precharge
    PREPARE  refresh row on the address outputs for `row_setup`
    REFRESH  row strobe low for `refresh_low`

RD may rise so late after MREQ that the refresh that follows a fetch comes before the column strobe has rested. That
refresh needs no address of the bus and begins with PREPARE, so it is taken from HOLD and REST as well.
"""

from enum import IntEnum

from amaranth.hdl import Module, Signal
from amaranth.lib.wiring import Component, In, Out

from rowkeeper.contract import TickTable

__all__ = ["Sequencer", "State"]


class State(IntEnum):
    """States of the sequencer."""

    IDLE = 0
    ACCESS = 1
    READ = 2
    WRITE = 3
    HOLD = 4
    REST = 5
    PREPARE = 6
    REFRESH = 7


class Sequencer(Component):
    """All inputs but `request_first` are synchronised. Outputs are registers, active high."""

    request_first: Signal
    request: Signal
    refresh: Signal
    read: Signal
    write: Signal
    hit: Signal
    granted: Signal
    ready: Signal
    due: Signal
    row_strobe: Signal
    column_strobe: Signal
    write_enable: Signal
    data_out: Signal
    follow: Signal
    to_column: Signal
    to_refresh: Signal
    refresh_falls: Signal
    refresh_ends: Signal

    def __init__(self, ticks: TickTable) -> None:
        super().__init__(
            {name: In(1) for name in ("request_first", "request", "refresh", "read", "write", "hit", "granted")}
            | {name: In(1) for name in ("ready", "due")}
            | {name: Out(1) for name in ("row_strobe", "column_strobe", "write_enable", "data_out")}
            | {name: Out(1) for name in ("follow", "to_column", "to_refresh", "refresh_falls", "refresh_ends")}
        )
        self.ticks = ticks
        longest = max(ticks.give_up, ticks.column_cap, ticks.refresh_low, ticks.row_hold + ticks.write_lead)
        self.state = Signal(State)
        self.step = Signal(range(longest + 1))  # ticks since the state was entered
        self.rest = Signal(range(ticks.precharge + 1))  # ticks since the row strobe rose, at most `precharge`
        self.served = Signal()  # the request on the bus has had what it gets, or came when its address was not captured
        self.taken = Signal()  # the last request has had what it gets, and has not been seen to end
        self.turn = Signal()  # a refresh of the bus may begin

    def elaborate(self, platform: object) -> Module:
        m = Module()
        self._count(m)
        self._requests(m)
        with m.Switch(self.state):
            with m.Case(State.IDLE):
                self._idle(m)
            with m.Case(State.ACCESS):
                self._access(m)
            with m.Case(State.READ):
                self._read(m)
            with m.Case(State.WRITE):
                self._write(m)
            with m.Case(State.HOLD):
                self._hold(m)
            with m.Case(State.REST):
                self._rest(m)
            with m.Case(State.PREPARE):
                self._prepare(m)
            with m.Case(State.REFRESH):
                self._refresh(m)
        return m

    def _enter(self, m: Module, state: State) -> None:
        m.d.sync += [self.state.eq(state), self.step.eq(0)]

    def _count(self, m: Module) -> None:
        m.d.sync += self.step.eq(self.step + 1)
        with m.If(self.row_strobe):
            m.d.sync += self.rest.eq(0)
        with m.Elif(self.rest != self.ticks.precharge):
            m.d.sync += self.rest.eq(self.rest + 1)

    def _requests(self, m: Module) -> None:
        """An access is fresh only after its address was captured; what arrives out of turn is left alone."""
        between = (self.state == State.IDLE) | (self.state == State.REST)
        silent = ~self.request_first & ~self.request
        m.d.comb += self.follow.eq(between & silent)
        with m.If(self.follow):
            m.d.sync += self.served.eq(0)
        with m.Elif(self.request & (self.granted | ~self.ready)):
            m.d.sync += self.served.eq(1)
        with m.If((between | (self.state == State.HOLD)) & silent):
            m.d.sync += self.taken.eq(0)
        with m.Elif(self.request & (self.granted | ~self.ready)):
            m.d.sync += self.taken.eq(1)
        rested = self.rest >= self.ticks.precharge - 1
        m.d.comb += self.turn.eq(self.request & self.refresh & ~self.taken & ~self.granted & self.ready & rested)

    def _idle(self, m: Module) -> None:
        m.d.sync += self.step.eq(0)
        fresh = self.request & ~self.refresh & ~self.served & ~self.granted & self.ready
        with m.If(self.due | self.turn):
            self._begin_refresh(m)
        with m.Elif(fresh):
            m.d.sync += [self.served.eq(1), self.taken.eq(1)]
            with m.If(self.hit):
                self._enter(m, State.ACCESS)
                m.d.sync += self.row_strobe.eq(1)

    def _begin_refresh(self, m: Module) -> None:
        """Until the address is followed again, no request is fresh: a bus refresh that arrives meanwhile is merged into
        this one, and an access would find the refresh row and an old column on the address outputs.
        """
        self._enter(m, State.PREPARE)
        m.d.sync += [self.served.eq(1), self.taken.eq(1)]
        m.d.comb += self.to_refresh.eq(1)

    def _end_column(self, m: Module) -> None:
        m.d.sync += [self.column_strobe.eq(0), self.write_enable.eq(0), self.data_out.eq(0)]

    def _access(self, m: Module) -> None:
        t = self.ticks
        m.d.comb += self.to_column.eq(self.step == t.mux - 1)
        may_start = (self.step >= t.column - 1) & self.request
        may_end = (self.step >= t.row_end - 1) & (~self.request | self.due)
        with m.If(may_start & self.read):
            self._enter(m, State.READ)
            m.d.sync += [self.column_strobe.eq(1), self.data_out.eq(1)]
        with m.Elif(may_start & self.write):
            self._enter(m, State.WRITE)
            m.d.sync += self.write_enable.eq(1)
        with m.Elif(may_end | (self.step >= t.give_up - 1)):
            self._enter(m, State.REST)
            m.d.sync += self.row_strobe.eq(0)

    def _read(self, m: Module) -> None:
        with m.If(self.step == self.ticks.row_hold - 1):
            self._enter(m, State.HOLD)
            m.d.sync += self.row_strobe.eq(0)

    def _write(self, m: Module) -> None:
        t = self.ticks
        with m.If(self.step == t.write_lead - 1):
            m.d.sync += self.column_strobe.eq(1)
        with m.If(self.step == t.write_lead + t.row_hold - 1):
            self._enter(m, State.HOLD)
            m.d.sync += self.row_strobe.eq(0)

    def _hold(self, m: Module) -> None:
        t = self.ticks
        capped = self.step >= t.column_cap - t.row_hold - 1
        over = ~self.request & ~(self.read & self.data_out)
        with m.If(self.turn):
            self._begin_refresh(m)
            self._end_column(m)
        with m.Elif(over | self.due | capped):
            self._enter(m, State.REST)
            self._end_column(m)

    def _rest(self, m: Module) -> None:
        t = self.ticks
        with m.If(self.step == t.column_rest - 2):
            m.d.sync += self.step.eq(self.step)
        with m.If(self.turn):
            self._begin_refresh(m)
        with m.Elif((self.rest >= t.precharge - 2) & (self.step >= t.column_rest - 2)):
            self._enter(m, State.IDLE)

    def _prepare(self, m: Module) -> None:
        with m.If(self.step == self.ticks.row_setup - 1):
            self._enter(m, State.REFRESH)
            m.d.sync += self.row_strobe.eq(1)
            m.d.comb += self.refresh_falls.eq(1)

    def _refresh(self, m: Module) -> None:
        with m.If(self.step == self.ticks.refresh_low - 1):
            self._enter(m, State.REST)
            m.d.sync += self.row_strobe.eq(0)
            m.d.comb += self.refresh_ends.eq(1)
