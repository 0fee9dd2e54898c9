"""Claims about the strobes: order, precharge, never cut, no column strobe in a refresh, early write, data.

Takes a Scene; every statement is over the pins, with the inputs free at every tick. Must not know the sequencer's
states except by the probes' names.
"""

from amaranth.hdl import Mux, Signal, Value

from rowkeeper.judging.claims.checker import Checker
from rowkeeper.judging.claims.scene import Seen, Stopwatch, Target
from rowkeeper.judging.claims.strobe_account import (
    account_column,
    account_rest,
    account_row,
    account_seen,
    account_write,
    limits,
)

__all__ = ["DataBuffer", "DataHeld", "EarlyWrite", "NeverCut", "NoColumnInRefresh", "Order", "Precharge"]


class _Timed(Checker):
    """A checker with a stopwatch on each strobe; `was_refresh`: the row strobe of the tick before was a refresh."""

    def watch(self) -> None:
        row_limit, column_limit, write_limit = limits(self)
        s = self.scene
        self.row = Stopwatch(self.m, s.row, row_limit, "row")
        self.column = Stopwatch(self.m, s.column, column_limit, "column")
        self.write = Stopwatch(self.m, s.write, write_limit, "write")
        self.is_refresh = s.probe("refreshing")
        self.was_refresh = Signal()
        self.m.d.sync += self.was_refresh.eq(self.is_refresh)

    def before(self, condition: Value, name: str) -> Signal:
        """Whether `condition` held in the tick before."""
        held = Signal(name=f"before_{name}")
        self.m.d.sync += held.eq(condition)
        return held


class Order(_Timed):
    """Exact distances between the edges of every strobe."""

    name = "order"
    sentence = (
        "Row strobe, column address, write enable, column strobe and the end of the row strobe follow one another at"
        " exactly their ticks, and a refresh strobe lasts exactly its ticks."
    )
    assertions = 13
    spoiled = "mux-late"

    def check(self) -> None:
        self.watch()
        self._switch()
        self._column_strobe()
        self._row_end()
        self._prompt()
        account_row(self, self.row)
        account_column(self, self.column)
        account_write(self, self.write)
        self.cover(self.column.over & self.write.over)

    def _switch(self) -> None:
        t = self.scene.design.ticks
        address = Stopwatch(self.m, self.scene.memory_address, 1, "address")
        moved = self.scene.row & address.changed
        self.must("switch_tick", ~moved | (~self.is_refresh & (self.row.lasted == t.mux)))

    def _column_strobe(self) -> None:
        s, t = self.scene, self.scene.design.ticks
        begins, write_begins = self.column.began, self.write.began
        self.must("column_after_row", ~begins | (s.row & ~self.is_refresh & (self.row.lasted >= t.column)))
        self.must("column_after_write", ~(begins & s.write) | (self.write.lasted == t.write_lead))
        self.must("write_then_column", ~(s.write & ~s.column) | (self.write.lasted < t.write_lead))
        self.must("write_after_row", ~write_begins | (s.row & (self.row.lasted >= t.column)))

    def _row_end(self) -> None:
        s, t = self.scene, self.scene.design.ticks
        self.must("row_ends", ~(s.column & s.row) | (self.column.lasted < t.row_hold))
        self.must("row_stays", ~(s.column & ~s.row) | (self.column.lasted >= t.row_hold))
        self.must("refresh_low", ~(self.row.over & self.was_refresh) | (self.row.ended == t.refresh_low))
        alone = self.row.over & ~self.was_refresh & ~s.column
        within = (self.row.ended >= t.row_end) & (self.row.ended <= t.give_up)
        self.must("row_only", ~alone | within)

    def _prompt(self) -> None:
        """What may come, comes at its first tick: a strobe one tick late is caught even where it is harmless."""
        s, t = self.scene, self.scene.design.ticks
        request, read, write = (Seen(self.m, s, line) for line in ("mreq", "rd", "wr"))
        account_seen(self, request, read, write)
        open_row = s.row & ~s.column & ~s.write & ~self.is_refresh
        may = open_row & (self.row.lasted >= t.column - 1) & request.second
        reads = self.before(may & read.second, "reads")
        writes = self.before(may & write.second & ~read.second, "writes")
        gone = self.before(s.column & ~s.row & ~request.second & ~(read.second & s.data), "gone")
        aborts = self.before(open_row & (self.row.lasted >= t.row_end - 1) & ~request.second, "aborts")
        self.must("read_prompt", ~reads | (self.column.began & s.data))
        self.must("write_prompt", ~writes | self.write.began)
        self.must("column_ends_prompt", ~gone | self.column.over)
        self.must("abort_prompt", ~aborts | self.row.over)


class Precharge(_Timed):
    """Rest between strobes."""

    name = "precharge"
    sentence = (
        "The row strobe is high for its precharge ticks before it falls again, and the column strobe for its own, or"
        " before a refresh for the ticks in which its row is set up."
    )
    assertions = 3
    spoiled = "precharge-short"

    def check(self) -> None:
        self.watch()
        s, t = self.scene, self.scene.design.ticks
        self.must("row_rest", ~self.row.began | (self.row.ended >= t.precharge))
        before_refresh = min(t.column_rest, t.row_setup)
        rested = self.column.lasted >= Mux(self.is_refresh, before_refresh, t.column_rest)
        self.must("column_rest", ~self.row.began | rested)
        self.must("column_high", ~self.row.began | ~s.column)
        account_rest(self, self.row, self.column)
        self.cover(self.row.began & (self.row.ended == t.precharge))


class NeverCut(_Timed):
    """No strobe shorter or longer than its limits."""

    name = "never-cut"
    sentence = "No strobe is ever cut short or left on, whatever the bus does."
    assertions = 6
    spoiled = "row-cut"

    def check(self) -> None:
        self.watch()
        t = self.scene.design.ticks
        least = min(t.row_end, t.refresh_low)
        most = max(t.give_up + t.write_lead + t.row_hold, t.refresh_low)
        self.must("row_least", ~self.row.over | (self.row.ended >= least))
        self.must("row_most", ~self.scene.row | (self.row.lasted < most))
        self.must("column_least", ~self.column.over | (self.column.ended > t.row_hold))
        self.must("column_most", ~self.scene.column | (self.column.lasted < t.column_cap))
        self.must("write_least", ~self.write.over | (self.write.ended > t.write_lead + t.row_hold))
        self.must("write_most", ~self.scene.write | (self.write.lasted < t.column_cap + t.write_lead))
        account_row(self, self.row)
        account_column(self, self.column)
        account_write(self, self.write)
        self.cover(self.row.over & ~self.was_refresh & ~self.scene.column)


class NoColumnInRefresh(_Timed):
    """A refresh is a row strobe alone."""

    name = "no-column-in-refresh"
    sentence = "During a refresh strobe, and the ticks that prepare it, no column strobe, write enable or data output."
    assertions = 3
    spoiled = "column-in-refresh"

    def check(self) -> None:
        self.watch()
        s = self.scene
        during = s.any_of("refreshing", "preparing")
        self.must("column", ~during | ~s.column)
        self.must("write", ~during | ~s.write)
        self.must("data", ~during | ~s.data)
        self.cover(self.is_refresh & s.row)


class EarlyWrite(_Timed):
    """Write enable surrounds the column strobe of a write."""

    name = "early-write"
    sentence = (
        "In a write, write enable falls before the column strobe and stays low until it rises; it never falls beside a"
        " column strobe, and never is low in a read."
    )
    assertions = 5
    spoiled = "write-late"

    def check(self) -> None:
        self.watch()
        s, t = self.scene, self.scene.design.ticks
        column_before = self.before(s.column, "column")
        self.must("falls_first", ~self.write.began | ~(s.column | column_before))
        self.must("leads", ~(self.column.began & s.write) | (self.write.lasted >= t.write_lead))
        self.must("stays", ~self.write.over | self.column.over)
        self.must("or_reads", ~self.column.began | (s.write ^ s.data))
        self.must("never_both", ~(s.write & s.data))
        account_column(self, self.column)
        account_write(self, self.write)
        self.cover(self.write.over)


class DataBuffer(_Timed):
    """The data-out buffer drives the bus only for a read of ours."""

    name = "data-buffer"
    sentence = (
        "The data buffer drives the bus exactly beside the column strobe of a read that the bus asked for in our"
        " window."
    )
    assertions = 5
    spoiled = "buffer-always"

    def check(self) -> None:
        self.watch()
        s = self.scene
        request, read = Seen(self.m, s, "mreq"), Seen(self.m, s, "rd")
        account_seen(self, request, read)
        data = Stopwatch(self.m, s.data, 1, "data")
        target = Target(self.m, s, request, self.row)
        asked = self.before(request.second & read.second, "asked")
        self.must("beside_column", ~s.data | (s.column & ~s.write))
        self.must("begins", ~data.began | (self.column.began & asked))
        self.must("ends", ~data.over | self.column.over)
        self.must("reads", ~(s.column & ~s.write) | s.data)
        self.must("ours", ~s.data | s.in_window(target.of_access))
        for name, holds in target.proper.items():
            self.lemma(name, holds)
        self.cover(data.over)


class DataHeld(_Timed):
    """Data is not taken away from a bus that still reads."""

    name = "data-held"
    sentence = (
        "The data of a read stays on the bus until MREQ and RD have both been seen high, unless the cap of the column"
        " strobe or a refresh ends it."
    )
    assertions = 1
    spoiled = "data-cut"

    def check(self) -> None:
        self.watch()
        s = self.scene
        request, read = Seen(self.m, s, "mreq"), Seen(self.m, s, "rd")
        account_seen(self, request, read)
        data = Stopwatch(self.m, s.data, 1, "data")
        over = self.before(~request.second & ~read.second, "over")
        refresh = self.before(s.probe("due"), "due") | s.probe("preparing")
        capped = self.column.ended >= s.design.ticks.column_cap
        self.must("held", ~data.over | over | refresh | capped)
        account_column(self, self.column)
        late = Signal(name="read_late")
        self.m.d.sync += late.eq(s.data & (late | (~request.second & read.second)))
        self.cover(data.over & late & over)
