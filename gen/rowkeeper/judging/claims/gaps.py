"""Gaps between refresh strobes, and the claim about the longest gap under any input.

Takes a Scene and Bounds; statements over the pins. The bound rests on a rank: how many ticks at most until the refresh
strobe falls, from the sequencer's state. It is a helper, proved with the claim. Must not know picoseconds.
"""

from amaranth.hdl import Const, Module, Mux, Signal

from rowkeeper.judging.claims.checker import Checker
from rowkeeper.judging.claims.scene import Scene, at_least, at_most

__all__ = ["AnyBound", "Gaps", "remaining"]


def remaining(m: Module, scene: Scene) -> Signal:
    """Ticks at most until the next refresh strobe falls, if one is due from now on."""
    t = scene.design.ticks
    step, rest = scene.probe("step"), scene.probe("rest")
    from_idle = 1 + t.row_setup
    # In REST: the longer of what is left of the row strobe's rest and of the column strobe's, and the way out.
    row_left, column_left = t.precharge - 2 - rest, t.column_rest - 2 - step
    left = Mux(row_left > column_left, row_left, column_left)
    from_rest = at_least(left, 0) + 1 + from_idle
    # HOLD with a refresh due lasts one tick, in which the row strobe rests already.
    rest_of_column = max(t.precharge - 3, t.column_rest - 2, 0) + 1 + from_idle
    rest_of_row = max(t.precharge - 2, t.column_rest - 2, 0) + 1 + from_idle
    write = t.write_lead + t.row_hold + 1 + rest_of_column
    read = t.row_hold + 1 + rest_of_column
    before_end = at_least(t.row_end - 1 - step, 0) + 1
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


class Gaps(Checker):
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


class AnyBound(Gaps):
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
