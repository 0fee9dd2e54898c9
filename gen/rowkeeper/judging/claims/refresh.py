"""Claims about refresh: rows in step, merged requests, the longest gap under any input and on a legal bus, warm-up.

Takes a Scene and Bounds; statements over the pins. The bounds on the gap rest on a rank: how many ticks at most until
the refresh strobe falls, from the sequencer's state. It is a helper, proved with the claim. Must not know picoseconds.
"""

from amaranth.hdl import Const, Module, Mux, Signal, Value

from rowkeeper.judging.claims.checker import Checker
from rowkeeper.judging.claims.scene import Scene, Seen, Turn, at_most
from rowkeeper.judging.claims.strobe_account import account_seen

__all__ = ["AnyBound", "LegalBound", "Merged", "RowSteps", "WarmUp", "remaining"]


def _at_least(value: Value, least: int) -> Value:
    return Mux(value > least, value, least)


def remaining(m: Module, scene: Scene) -> Signal:
    """Ticks at most until the next refresh strobe falls, if one is due from now on."""
    t = scene.design.ticks
    step, rest = scene.probe("step"), scene.probe("rest")
    from_idle = 1 + t.row_setup
    # In REST: the longer of what is left of the row strobe's rest and of the column strobe's, and the way out.
    row_left, column_left = t.precharge - 2 - rest, t.column_rest - 2 - step
    left = Mux(row_left > column_left, row_left, column_left)
    from_rest = _at_least(left, 0) + 1 + from_idle
    # HOLD with a refresh due lasts one tick, in which the row strobe rests already.
    rest_of_column = max(t.precharge - 3, t.column_rest - 2, 0) + 1 + from_idle
    rest_of_row = max(t.precharge - 2, t.column_rest - 2, 0) + 1 + from_idle
    write = t.write_lead + t.row_hold + 1 + rest_of_column
    read = t.row_hold + 1 + rest_of_column
    before_end = _at_least(t.row_end - 1 - step, 0) + 1
    by_state = {
        "idle": Const(from_idle),
        "access": before_end + max(write, rest_of_row),
        "reading": read - step,
        "writing": write - step,
        "holding": Const(1 + rest_of_column),
        "resting": from_rest,
        "preparing": t.row_setup - step,
        "refreshing": t.refresh_low - step + rest_of_row,
    }
    rank = Signal(range(t.refresh_low + t.row_end + write + rest_of_row + 2), name="rank")
    for name, value in by_state.items():
        with m.If(scene.probe(name)):
            m.d.comb += rank.eq(value)
    return rank


class _Gaps(Checker):
    """A checker that measures the gaps between falls of the refresh strobe."""

    def measure(self, limit: int) -> None:
        s = self.scene
        self.falls = Signal(name="refresh_falls")
        before = Signal(name="refresh_before")
        self.since_before = Signal(range(limit + 2), name="since_before")
        self.since = Signal(range(limit + 2), name="since")  # ticks since the last fall: 0 in the tick of the fall
        self.begun = Signal(name="begun")  # there has been one
        begun_before = Signal(name="begun_before")
        self.m.d.comb += self.falls.eq(s.row & s.probe("refreshing") & ~before)
        self.m.d.comb += self.since.eq(Mux(self.falls, 0, self.since_before))
        self.m.d.comb += self.begun.eq(begun_before | self.falls)
        self.m.d.sync += [before.eq(s.row & s.probe("refreshing")), begun_before.eq(self.begun)]
        self.m.d.sync += self.since_before.eq(Mux(self.since > limit, limit + 1, self.since + 1))

    def measure_lemmas(self) -> None:
        s, t = self.scene, self.scene.design.ticks
        self.lemma("age", ~self.begun | (s.probe("age") == at_most(self.since, t.forced)))
        self.lemma("begun_ready", ~s.probe("ready") | self.begun)
        self.lemma("begun_done", (s.probe("done") == 0) | self.begun)
        self.lemma("begun_refresh", ~s.probe("refreshing") | self.begun)
        # Before the first refresh strobe has ended there is nothing but the way to it.
        self.lemma("begun_rest", ~(self.begun & (s.probe("done") == 0)) | s.probe("refreshing"))


class AnyBound(_Gaps):
    """K_any."""

    name = "any-bound"
    sentence = (
        "From the first warm-up strobe on, and whatever the bus does, the refresh strobe falls again within `forced` +"
        " `service` ticks of its last fall."
    )
    assertions = 1
    spoiled = "forced-off"

    def check(self) -> None:
        t = self.scene.design.ticks
        most = t.forced + t.service
        self.measure(most + 1)
        rank = remaining(self.m, self.scene)
        # A gap is one tick longer than `since` is in the tick before the fall.
        self.must("gap", ~self.begun | (self.since < most))
        self.measure_lemmas()
        driven = (self.since >= t.forced) | ~self.scene.probe("ready")
        self.lemma("rank", ~(self.begun & driven) | (self.since + rank <= most))
        self.cover(self.falls & (self.since_before > t.forced + 1))


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
        left = _at_least(Mux(row_left > column_left, row_left, column_left), 0) + 1
        self.lemma("before", before == s.probe("request_before"))
        self.lemma("merged_served", ~merged_now | s.probe("served"))
        self.lemma("waits_unserved", ~waits_now | (s.any_of("idle", "resting") & ~s.probe("served")))
        self.lemma("waits_refresh", ~waits_now | s.probe("refresh"))
        self.lemma("waits_rest", ~(waits_now & s.probe("resting")) | (waited + left < within))
        self.lemma("waits_idle", ~(waits_now & s.probe("idle")) | (waited < within))


class LegalBound(_Gaps):
    """K_legal."""

    name = "legal-bound"
    sentence = (
        "On a bus that keeps its promises the refresh at `forced` is never used, and the refresh strobe falls again"
        " within the legal gap."
    )
    assertions = 2
    assumptions = ("drought", "mreq-low", "grant-silent")
    spoiled = "standby-off"

    def check(self) -> None:
        s, t, b = self.scene, self.scene.design.ticks, self.bounds
        self.measure(b.legal_gap_ticks + 1)
        self.measure_lemmas()
        self.must("not_forced", ~s.probe("ready") | (s.probe("age") < t.forced))
        self.must("gap", ~self.begun | (self.since < b.legal_gap_ticks))
        self._assume()
        self._lemmas()
        self.cover(self.falls & (self.since_before > t.standby) & s.probe("ready"))

    def _assume(self) -> None:
        s, b = self.scene, self.bounds
        request = Seen(self.m, s, "mreq")
        account_seen(self, request)
        granted_before, before = Signal(name="granted_before"), Signal(name="request_before")
        self.turn = turn = Turn(self.m, s, request)
        self.lemma("turn", turn.proper)
        self.m.d.sync += [granted_before.eq(s.probe("granted")), before.eq(request.second)]
        begins = request.second & ~before
        asks = begins & s.probe("refresh") & turn.now & ~s.probe("granted")
        relief = (s.probe("quiet") & s.probe("idle")) | asks | ~s.probe("ready")
        self.dry, self.dry_now = Signal(range(b.drought_ticks + 2)), Signal(range(b.drought_ticks + 2))
        self.m.d.comb += self.dry_now.eq(Mux(relief, 0, self.dry))
        self.m.d.sync += self.dry.eq(at_most(self.dry_now + 1, b.drought_ticks + 1))
        self.assume("drought", self.dry_now <= b.drought_ticks)
        lasts = Signal(range(b.request_low_ticks + 2), name="request_lasts")
        self.m.d.sync += lasts.eq(Mux(request.second, at_most(lasts + 1, b.request_low_ticks), 0))
        self.assume("mreq_low", ~(before & ~request.second) | (lasts >= b.request_low_ticks))
        self.assume("grant_silent", ~(before & request.second) | ~s.probe("granted") | granted_before)
        # What has been asked for in turn and is not served yet.
        self.waits, waits_before = Signal(name="waits"), Signal(name="waits_before")
        self.m.d.comb += self.waits.eq((asks | waits_before) & ~s.any_of("preparing", "refreshing"))
        self.m.d.sync += waits_before.eq(self.waits & s.probe("ready"))
        self.request, self.before, self.lasts = request, before, lasts
        self.waits_before = waits_before

    def _lemmas(self) -> None:
        """While nothing is being done about it, age runs ahead of the drought by no more than `standby`."""
        s, t, b = self.scene, self.scene.design.ticks, self.bounds
        age, ready, waits = s.probe("age"), s.probe("ready"), self.waits
        rank = remaining(self.m, s)
        for name, turn, ticks in (("follows", self.turn.follows, 1), ("now", self.turn.now, 2)):
            rests = (s.probe("rest") >= ticks) & (s.probe("step") >= max(min(ticks, t.column_rest - 2), 0))
            self.lemma(f"rest_{name}", ~(turn & s.probe("resting")) | rests)
        self.lemma("before", self.before == s.probe("request_before"))
        round_trip = t.refresh_low + max(t.precharge, t.column_rest) + t.row_setup
        self.lemma("warming", ~(self.begun & ~ready) | (self.since + rank <= round_trip))
        own = s.any_of("preparing", "refreshing")
        idle = s.any_of("idle", "resting")
        free = ready & ~waits & ~own
        self.lemma("dry", self.dry <= b.drought_ticks + 1)
        self.lemma("free", ~free | (age <= t.standby + self.dry))
        most = b.legal_gap_ticks
        self.lemma("driven", ~(ready & (waits | own) & ~s.probe("refreshing")) | (age + rank <= most))
        self.lemma("waits_turn", ~waits | (idle & ~s.probe("served") & s.probe("refresh") & self.request.second))
        self.lemma("waits_granted", ~waits | ~s.probe("granted"))
        self.lemma("waits_long", ~waits | (self.lasts + rank <= b.request_low_ticks + t.row_setup))


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
