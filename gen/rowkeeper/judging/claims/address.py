"""Claims about the address: still around each strobe, right, and in the window.

Takes a Scene; statements over the pins, inputs free at every tick. Must not know how the address is registered.
"""

from amaranth.hdl import Mux, Value

from rowkeeper.judging.claims.checker import Checker
from rowkeeper.judging.claims.scene import Seen, Stopwatch, Target
from rowkeeper.judging.claims.strobe_account import account_column, account_row, account_seen, limits

__all__ = ["AddressStill", "Hit"]


class AddressStill(Checker):
    """The memory address is a register that moves only where nothing looks."""

    name = "address-still"
    sentence = (
        "The memory address stands before the row strobe falls, until the column address takes its place at its tick,"
        " and around the column strobe; leaving an access, aborted or stuck, never moves it beside a strobe."
    )
    assertions = 5
    spoiled = "address-follows"

    def check(self) -> None:
        s, t = self.scene, self.scene.design.ticks
        row_limit, column_limit, _ = limits(self)
        self.row = Stopwatch(self.m, s.row, row_limit, "row")
        self.column = Stopwatch(self.m, s.column, column_limit, "column")
        apart = t.column - t.mux
        self.address = address = Stopwatch(self.m, s.memory_address, max(apart, t.row_setup, 2) + 1, "address")
        access = self.row.began & ~s.probe("refreshing")
        refresh = self.row.began & s.probe("refreshing")
        at_switch = s.row & ~s.column & ~s.probe("refreshing") & (self.row.lasted == t.mux)
        self.must("before_row", ~access | (address.lasted >= 2))
        self.must("before_refresh", ~refresh | (address.lasted >= t.row_setup))
        self.must("under_row", ~(s.row | self.row.changed) | ~address.changed | at_switch)
        self.must("before_column", ~self.column.began | (address.lasted >= apart))
        ends_late = self.column.over & s.probe("preparing")  # the refresh row goes out as the column strobe rises
        self.must("under_column", ~(s.column | (self.column.changed & ~ends_late)) | ~address.changed)
        self._lemmas(apart)
        self.cover(self.row.over & ~s.column & (self.row.ended == t.give_up))

    def _lemmas(self, apart: int) -> None:
        s, t = self.scene, self.scene.design.ticks
        step, lasted = s.probe("step"), self.address.lasted
        request = Seen(self.m, s, "mreq")
        account_seen(self, request)
        account_row(self, self.row)
        account_column(self, self.column)
        self.lemma("asked", ~(s.any_of("idle", "resting") & request.second & ~s.probe("served")) | (lasted >= 1))
        since_switch = ~s.probe("access") | (step < t.mux) | (lasted >= _least(step - t.mux, apart))
        self.lemma("since_switch", since_switch)
        self.lemma("since_column", ~s.any_of("reading", "writing", "holding") | (lasted >= apart))
        self.lemma("since_row", ~s.probe("preparing") | (lasted >= step))


def _least(value: Value, limit: int) -> Value:
    return Mux(value < limit, value, limit)


class Hit(Checker):
    """An access goes to the cell that the bus asked for, and to no other memory's."""

    name = "hit"
    sentence = (
        "A row strobe that is no refresh comes only for a request inside our window, with the row and then the column"
        " of the address that stood on the bus when the request was seen."
    )
    assertions = 4
    spoiled = "served-forgotten"

    def check(self) -> None:
        s, t = self.scene, self.scene.design.ticks
        row_limit, _, _ = limits(self)
        self.row = Stopwatch(self.m, s.row, row_limit, "row")
        request = Seen(self.m, s, "mreq")
        account_seen(self, request)
        target = Target(self.m, s, request, self.row)
        access = self.row.began & ~s.probe("refreshing")
        open_row = s.row & ~s.probe("refreshing")
        early = open_row & (self.row.lasted < t.mux)
        self.must("in_window", ~access | s.in_window(target.asked))
        self.must("row_address", ~early | (s.memory_address == s.row_part(target.of_access)))
        self.must("column_address", ~(open_row & ~early) | (s.memory_address == s.column_part(target.of_access)))
        self.must("held_address", ~s.column | (s.memory_address == s.column_part(target.of_access)))
        self._lemmas(target)
        self.cover(s.column & (s.memory_address == 5))

    def _lemmas(self, target: Target) -> None:
        s, t = self.scene, self.scene.design.ticks
        account_row(self, self.row)
        for name, holds in target.proper.items():
            self.lemma(name, holds)
        switched = s.any_of("reading", "writing", "holding") | (s.probe("access") & (s.probe("step") >= t.mux))
        early = s.probe("access") & (s.probe("step") < t.mux)
        self.lemma("switched", ~switched | (s.memory_address == s.column_part(target.of_access)))
        self.lemma("early", ~early | (s.memory_address == s.row_part(target.of_access)))
