"""A legal bus: its promises as assumptions, and how far each request has come, as helpers.

Takes a Scene and Bounds; gives the base of the claims that need a legal bus. The helpers are two ranks (ticks at most
until the sequencer is idle, and until its strobes rest) against the time since the request ended, and the age of the
refresh against the drought. All of them are proved together, so no claim leans on another. Must not know picoseconds.
"""

from amaranth.hdl import Const, Module, Mux, Signal, Value

from rowkeeper.judging.claims.gaps import Gaps, remaining
from rowkeeper.judging.claims.scene import Scene, Seen, Stopwatch, Target, Turn, at_least, at_most
from rowkeeper.judging.claims.strobe_account import account_seen, limits

__all__ = ["LegalBus"]


def _larger(left: Value, right: Value) -> Value:
    return Mux(left > right, left, right)


def _ranks(m: Module, scene: Scene) -> tuple[Signal, Signal]:
    """Ticks at most until IDLE, and until IDLE or REST, with no request and nothing due."""
    t = scene.design.ticks
    step, rest = scene.probe("step"), scene.probe("rest")
    after_column = max(t.precharge - 3, t.column_rest - 2, 0) + 1
    after_row = max(t.precharge - 2, t.column_rest - 2, 0) + 1
    resting = at_least(_larger(t.precharge - 2 - rest, t.column_rest - 2 - step), 0) + 1
    held = at_least(_larger(t.precharge - 3 - rest, Const(t.column_rest - 2)), 0) + 1
    to_rest = {
        "access": at_least(t.row_end - 1 - step, 0) + 1,
        "reading": t.row_hold + 1 - step,
        "writing": t.write_lead + t.row_hold + 1 - step,
        "holding": Const(1),
        "preparing": t.row_setup + t.refresh_low - step,
        "refreshing": t.refresh_low - step,
    }
    then = {"access": after_row, "reading": after_column, "writing": after_column, "holding": held}
    then |= {"preparing": after_row, "refreshing": after_row}
    most = 2 * (t.row_end + t.write_lead + t.refresh_low + t.row_setup + t.rest)
    idle, rests = Signal(range(most), name="until_idle"), Signal(range(most), name="until_rest")
    with m.If(scene.probe("resting")):
        m.d.comb += idle.eq(resting)
    for name, value in to_rest.items():
        with m.If(scene.probe(name)):
            m.d.comb += [rests.eq(value), idle.eq(value + then[name])]
    return idle, rests


class LegalBus(Gaps):
    """A checker on a bus that keeps its promises."""

    assumptions = (
        "mreq-low",
        "mreq-high",
        "mreq-period",
        "strobe-length",
        "strobe-period",
        "write-after",
        "grant-silent",
        "reset-silent",
        "awake",
        "drought",
    )

    def behave(self) -> None:
        """State the assumptions and the helpers."""
        s, b = self.scene, self.bounds
        row_limit, _, _ = limits(self)
        self.row = Stopwatch(self.m, s.row, row_limit, "row")
        self.request = Seen(self.m, s, "mreq")
        self.read, self.write = Seen(self.m, s, "rd"), Seen(self.m, s, "wr")
        account_seen(self, self.request, self.read, self.write)
        longest = 2 * (b.request_period_ticks + b.request_low_ticks + row_limit)
        self.asked = Stopwatch(self.m, self.request.second, longest, "request")
        self.target = Target(self.m, s, self.request, self.row)
        for name, holds in self.target.proper.items():
            self.lemma(name, holds)
        self.measure(b.legal_gap_ticks + 1)
        self.measure_lemmas()
        self._assume_lines()
        self._assume_drought()
        self._between()
        self._while_asked()
        self._age()

    def _assume_lines(self) -> None:
        s, b, asked = self.scene, self.bounds, self.asked
        self.kind_before = Signal(name="kind_before")  # of the request under way, or of the last one
        with self.m.If(self.request.second):
            self.m.d.sync += self.kind_before.eq(s.probe("refresh"))
        self.assume("mreq_low", ~asked.over | (asked.ended >= b.request_low_ticks))
        self.assume("mreq_high", ~asked.began | (asked.ended >= b.request_high_ticks))
        begun_before = Signal(range(asked.limit + 1), name="begun_before_ticks")
        self.since_request = Signal(range(asked.limit + 1), name="since_request")
        self.m.d.comb += self.since_request.eq(Mux(asked.began, 0, begun_before))
        self.m.d.sync += begun_before.eq(at_most(self.since_request + 1, asked.limit))
        self.assume("mreq_period", ~asked.began | (begun_before >= b.request_period_ticks))
        self._assume_strobes()
        loud = Stopwatch(self.m, s.probe("quiet") | ~s.probe("ready"), b.notice_ticks + 2, "not_loud")
        self.since_quiet = Mux(loud.level, 0, loud.lasted + 1)
        self.assume("grant_silent", ~(self.request.second & s.probe("granted")))
        self.assume("reset_silent", ~(self.request.second & s.probe("quiet")))
        self.assume("reset_silent_notice", ~asked.began | (self.since_quiet >= b.notice_ticks))
        self.assume("awake", ~self.request.second | s.probe("ready"))

    def _assume_strobes(self) -> None:
        """RD or WR beside an access: it comes, stays for a while, and the next request is not soon after."""
        b, asked = self.bounds, self.asked
        request = self.request.second
        # `beside`: ticks with RD or WR in this request, up to the tick before.
        self.beside = Signal(range(asked.limit + 1), name="beside")
        self.strobe_before, strobe = Signal(name="strobe_before"), Signal(name="strobe")
        self.m.d.comb += strobe.eq(request & (self.read.second | self.write.second))
        self.m.d.sync += [
            self.strobe_before.eq(strobe),
            self.beside.eq(Mux(request, at_most(self.beside + strobe, asked.limit), 0)),
        ]
        strobe_ticks = Signal(range(asked.limit + 1), name="since_strobe_before")
        self.since_strobe = Signal(range(asked.limit + 1), name="since_strobe")
        self.m.d.comb += self.since_strobe.eq(Mux(strobe & (self.beside == 0), 0, strobe_ticks))
        self.m.d.sync += strobe_ticks.eq(at_most(self.since_strobe + 1, asked.limit))
        had_read, self.had_write = Signal(name="had_read"), Signal(name="had_write")
        read, write = self.read.second, self.write.second
        self.m.d.sync += had_read.eq(request & (had_read | read))
        self.m.d.sync += self.had_write.eq(request & (self.had_write | write))
        self.assume("strobe_length_one", ~request | ~((had_read | read) & (self.had_write | write)))
        self.assume("write_after", ~(request & write) | (asked.lasted >= b.write_after_ticks))
        self.lemma("had_write", ~(request & self.had_write) | (asked.lasted > b.write_after_ticks))
        self.lemma("had_strobe", ~request | ((self.beside != 0) == (had_read | self.had_write)))
        enough = self.beside >= b.strobe_ticks
        self.assume("strobe_length", ~asked.over | self.kind_before | enough)
        self.assume("strobe_length_stays", ~(request & self.strobe_before & ~strobe) | enough)
        self.assume("strobe_period", ~asked.began | (strobe_ticks >= b.strobe_period_ticks))
        self.lemma("beside_most", ~request | (self.beside <= asked.lasted))
        self.lemma("beside_none", ~asked.began | (self.beside == 0))
        self.lemma("beside_stays", ~request | (self.beside == 0) | enough | self.strobe_before)

    def _assume_drought(self) -> None:
        """Relief: a refresh request, or a quiet tick with the sequencer idle."""
        s, most = self.scene, self.bounds.drought_ticks
        asks = self.asked.began & s.probe("refresh")
        relief = (s.probe("quiet") & s.probe("idle")) | asks | ~s.probe("ready")
        self.dry, dry_now = Signal(range(most + 2), name="dry"), Signal(range(most + 2), name="dry_now")
        self.m.d.comb += dry_now.eq(Mux(relief, 0, self.dry))
        self.m.d.sync += self.dry.eq(at_most(dry_now + 1, most + 1))
        self.assume("drought", dry_now <= most)

    def _age(self) -> None:
        """While nothing is being done about it, age runs ahead of the drought by no more than `standby`."""
        s, t, most = self.scene, self.scene.design.ticks, self.bounds.drought_ticks
        age, ready = s.probe("age"), s.probe("ready")
        free = ready & ~s.any_of("preparing", "refreshing")
        last = t.standby + most + 2
        round_trip = t.refresh_low + t.rest + t.row_setup
        self.lemma("warming", ~(self.begun & ~ready) | (self.since + remaining(self.m, s) <= round_trip))
        self.lemma("dry", self.dry <= most + 1)
        self.lemma("age_free", ~free | (age <= t.standby + self.dry))
        self.lemma("age_preparing", ~(ready & s.probe("preparing")) | (age <= last + s.probe("step")))
        self.lemma("age_refreshing", ~(ready & s.probe("refreshing")) | (age < t.forced))

    def _between(self) -> None:
        """Idle again in time for the next request, after the bus's last one and after a refresh of our own."""
        s, b, asked = self.scene, self.bounds, self.asked
        self.lemma("before", asked.before == s.probe("request_before"))
        self.lemma("held", ~asked.before | (self.kind_before == s.probe("held")))
        self.until_idle, self.until_rest = idle, rests = _ranks(self.m, s)
        turn = Turn(self.m, s, self.request)
        self.lemma("turn", turn.proper)
        free = s.probe("ready") & ~self.request.second
        clocks = (
            (asked.lasted, b.request_high_ticks),
            (self.since_request, b.request_period_ticks),
            (self.since_strobe, b.strobe_period_ticks),
            (self.since_quiet, b.notice_ticks),
        )
        for name, rank, early in (("idle", idle, 0), ("rests", rests, 2)):
            in_time: Value = Const(0)
            for ticks, most in clocks:
                in_time = in_time | (rank + at_most(ticks, most - early) <= most - early)
            self.lemma(f"{name}_free", ~free | in_time)
        ended: Value = Const(1)
        for ticks, most in clocks:
            ended = ended & (ticks + 1 >= most)
        self.lemma("since_request", ~self.request.second | (self.since_request == asked.lasted))
        self.lemma("follows", ~(free & ended) | turn.follows)

    def _while_asked(self) -> None:
        """How far a request has come, from how long it has been there and RD or WR beside it."""
        s, t = self.scene, self.scene.design.ticks
        step, lasted, since_strobe = s.probe("step"), self.asked.lasted, self.since_strobe
        idle, rests = self.until_idle, self.until_rest
        under_way = self.request.second & s.probe("ready") & ~self.asked.began
        refresh, access = under_way & s.probe("refresh"), under_way & ~s.probe("refresh")
        after_row = max(t.precharge - 2, t.column_rest - 2, 0) + 1
        self.lemma(
            "refresh_idle", ~refresh | (idle == 0) | (idle + lasted <= t.row_setup + t.refresh_low + after_row + 1)
        )
        self.lemma("refresh_rests", ~refresh | (rests == 0) | (rests + lasted <= t.row_setup + t.refresh_low + 1))
        self.lemma("refresh_states", ~refresh | ~s.any_of("access", "reading", "writing", "holding"))
        self.lemma("access_states", ~access | ~s.any_of("preparing", "refreshing"))
        self.lemma("begin_idle", ~(self.asked.began & s.probe("ready")) | (s.probe("idle") & ~s.probe("served")))
        self.lemma("served", ~under_way | s.probe("served"))
        self.lemma("access", ~(access & s.probe("access")) | (lasted == step + 1))
        self.lemma("access_bare", ~(access & s.probe("access") & (step >= t.column)) | (self.beside == 0))
        write = Mux(s.write, t.write_lead, 0)
        for name, since in (("reading", step), ("writing", step), ("holding", step + t.row_hold + write)):
            # A write that comes after `column` is never ahead of its strobe.
            early = Const(0) if self.bounds.write_after_ticks >= t.column else Const(1)
            by_column = (lasted <= t.column + 1 + since) & (~s.write | early)
            on_time = (since_strobe <= since + 1) | by_column
            self.lemma(f"on_time_{name}", ~(access & s.probe(name)) | on_time)
        rested = (self.beside == 0) | (since_strobe <= s.probe("rest") + 1) | (s.probe("rest") >= t.precharge)
        self.lemma("on_time_resting", ~(access & s.probe("resting")) | rested)
