"""Claims about refresh: rows in step, merged requests, warm-up.

Takes a Scene; statements over the pins, with the inputs free at every tick. Must not know picoseconds.
"""

from amaranth.hdl import Const, Mux, Signal

from rowkeeper.judging.claims.checker import Checker
from rowkeeper.judging.claims.scene import Seen, Turn, at_least, at_most
from rowkeeper.judging.claims.strobe_account import account_seen

__all__ = ["Merged", "RowSteps", "WarmUp"]


class RowSteps(Checker):
    """The counter neither skips nor repeats."""

    name = "row-steps"
    sentence = (
        "Refresh strobes refresh consecutive rows, one step per completed strobe, none skipped, through all rows."
    )
    assertions = 3
    spoiled = "row-skips"

    def check(self) -> None:
        s = self.scene
        bits = s.design.refresh_bits
        is_refresh = s.row & s.probe("refreshing")
        was_refresh = Signal()
        expected, now = Signal(bits, name="expected"), Signal(bits, name="expected_now")
        self.m.d.sync += [was_refresh.eq(is_refresh), expected.eq(now)]
        self.m.d.comb += now.eq(expected + (was_refresh & ~is_refresh))
        self.must("row", ~is_refresh | (s.memory_address[:bits] == now))
        upper = s.memory_address[bits:] == 0 if len(s.memory_address) > bits else Const(1)
        self.must("upper", ~is_refresh | upper)
        self.must("named", ~is_refresh | ~s.column)
        self.lemma("counter", s.probe("row") == now)
        self.cover(is_refresh & (now == 2))


class Merged(Checker):
    """A refresh request of the bus beside one of our own."""

    name = "merged"
    sentence = (
        "A bus refresh that is seen while a refresh is prepared or under way is merged into it and gets no strobe of"
        " its own; seen while both strobes are high it is served as soon as precharge allows, if the bus holds it."
    )
    assertions = 2
    spoiled = "served-forgotten"

    def check(self) -> None:
        s, t = self.scene, self.scene.design.ticks
        request = Seen(self.m, s, "mreq")
        account_seen(self, request)
        within = max(t.precharge, t.column_rest) + 2
        before = Signal(name="request_before")
        merged, merged_now = Signal(name="merged"), Signal(name="merged_now")
        own = s.any_of("preparing", "refreshing")
        begins = request.second & ~before
        self.m.d.sync += [before.eq(request.second), merged.eq(merged_now)]
        self.m.d.comb += merged_now.eq(request.second & (merged | (begins & own)))
        preparing_before = Signal(name="preparing_before")
        due_before = Signal(name="due_before")
        self.m.d.sync += [preparing_before.eq(s.probe("preparing")), due_before.eq(s.probe("due"))]
        starts = s.probe("preparing") & ~preparing_before
        self.must("no_second", ~(starts & merged) | due_before)
        # Waiting: begun in turn, and neither let go of by the bus nor granted away.
        turn = Turn(self.m, s, request)
        self.lemma("turn", turn.proper)
        waits, waits_now = Signal(name="waits"), Signal(name="waits_now")
        usable = request.second & ~s.probe("granted") & s.probe("ready") & ~own
        in_turn = begins & s.probe("refresh") & turn.now
        self.m.d.comb += waits_now.eq(usable & (waits | in_turn))
        waited = Signal(range(within + 2), name="waits_for")
        self.m.d.sync += [waits.eq(waits_now), waited.eq(Mux(waits_now, at_most(waited + 1, within + 1), 0))]
        self.must("served", ~waits_now | (waited < within))
        self._lemmas(request, before, merged_now, waits_now, waited, within)
        self.cover(merged_now & s.probe("refreshing"))

    def _lemmas(
        self, request: Seen, before: Signal, merged_now: Signal, waits_now: Signal, waited: Signal, within: int
    ) -> None:
        s, t = self.scene, self.scene.design.ticks
        rest, step = s.probe("rest"), s.probe("step")
        row_left, column_left = t.precharge - 2 - rest, t.column_rest - 2 - step
        left = at_least(Mux(row_left > column_left, row_left, column_left), 0) + 1
        self.lemma("before", before == s.probe("request_before"))
        self.lemma("merged_served", ~merged_now | s.probe("served"))
        self.lemma("merged_taken", ~merged_now | s.probe("taken"))
        self.lemma("waits_unserved", ~waits_now | (s.any_of("idle", "resting") & ~s.probe("served")))
        self.lemma("waits_refresh", ~waits_now | s.probe("refresh"))
        self.lemma("waits_rest", ~(waits_now & s.probe("resting")) | (waited + left < within))
        self.lemma("waits_idle", ~(waits_now & s.probe("idle")) | (waited < within))


class WarmUp(Checker):
    """Nothing before the memory is awake."""

    name = "warm-up"
    sentence = "No strobe falls before the pause is over, and no column strobe before the warm-up refreshes have ended."
    assertions = 3
    spoiled = "warm-up-skipped"

    def check(self) -> None:
        s, t = self.scene, self.scene.design.ticks
        uptime = Signal(range(t.pause + 1), name="uptime")
        self.m.d.sync += uptime.eq(at_most(uptime + 1, t.pause))
        before, ended, now = Signal(), Signal(range(t.warm_up_cycles + 1)), Signal(range(t.warm_up_cycles + 1))
        is_refresh = s.row & s.probe("refreshing")
        self.m.d.sync += [before.eq(is_refresh), ended.eq(now)]
        self.m.d.comb += now.eq(at_most(ended + (before & ~is_refresh), t.warm_up_cycles))
        self.must("pause", ~(s.row | s.column | s.write | s.data) | (uptime >= t.pause))
        self.must("refreshes_first", ~(s.column | s.write | s.data) | (now >= t.warm_up_cycles))
        self.must("row_alone", ~(s.row & ~s.probe("refreshing")) | (now >= t.warm_up_cycles))
        self.lemma("uptime", s.probe("waited") == uptime)
        self.lemma("done", s.probe("done") == now)
        self.cover(s.column)
