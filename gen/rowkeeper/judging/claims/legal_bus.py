"""A legal bus: its promises as assumptions, and how far each request has come, as helpers.

Takes a Scene and Bounds; gives the base of the claims that need a legal bus. The helpers are ranks (ticks at most until
an access can be taken and its address followed, and until a refresh can) against the time since the request ended, and
the age of the refresh against the drought. All of them are proved together, so no claim leans on another. Must not know
picoseconds.
"""

from dataclasses import dataclass

from amaranth.hdl import Const, Module, Mux, Signal, Value

from rowkeeper.judging.claims.gaps import Gaps, remaining
from rowkeeper.judging.claims.scene import Scene, Seen, Stopwatch, Target, Turn, at_least, at_most
from rowkeeper.judging.claims.strobe_account import account_seen, limits

__all__ = ["LegalBus"]

_Clock = tuple[Value | Signal, int]  # ticks since something, and how many there are at least before the next request


def _larger(left: Value, right: Value) -> Value:
    return Mux(left > right, left, right)


@dataclass(frozen=True, slots=True)
class _Ranks:
    """Ticks at most until IDLE; until IDLE or REST; until one of them or HOLD; and until precharge is over as well.

    With no request and nothing due. In HOLD, one tick after RD is seen high: how long that takes, the bus promises.
    """

    idle: Signal
    rests: Signal
    holds: Signal
    turn: Signal


def _ranks(m: Module, scene: Scene, read: Value) -> _Ranks:
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
        "holding": Const(1) + (scene.data & read),
        "preparing": t.row_setup + t.refresh_low - step,
        "refreshing": t.refresh_low - step,
    }
    then = {"access": after_row, "reading": after_column, "writing": after_column, "holding": held}
    then |= {"preparing": after_row, "refreshing": after_row}
    most = 2 * (t.row_end + t.write_lead + t.refresh_low + t.row_setup + t.rest)
    ranks = _Ranks(*(Signal(range(most), name=f"until_{name}") for name in ("idle", "rest", "hold", "turn")))
    with m.If(scene.probe("resting")):
        m.d.comb += ranks.idle.eq(resting)
    with m.If(scene.any_of("resting", "holding")):
        m.d.comb += ranks.turn.eq(at_least(t.precharge - 1 - rest, 0))
    for name, value in to_rest.items():
        with m.If(scene.probe(name)):
            m.d.comb += [ranks.rests.eq(value), ranks.idle.eq(value + then[name])]
            if name != "holding":
                to_hold = value - 1 if name in ("reading", "writing") else value
                m.d.comb += [ranks.holds.eq(to_hold), ranks.turn.eq(to_hold + t.precharge - 1)]
    return ranks


class LegalBus(Gaps):
    """A checker on a bus that keeps its promises."""

    assumptions = (
        "mreq-low",
        "mreq-high",
        "mreq-period",
        "strobe-length",
        "strobe-period",
        "write-after",
        "read-over",
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
        # Ticks since our data stood on the bus beside a low RD.
        read_before = Signal(range(b.read_rest_ticks + 1), name="since_read_before")
        self.since_read = Mux(self.scene.data & read, 0, read_before)
        self.m.d.sync += read_before.eq(at_most(self.since_read + 1, b.read_rest_ticks))
        accesses = asked.began & ~self.scene.probe("refresh")
        self.assume("read_over", ~accesses | (self.since_read >= b.read_rest_ticks))
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
        self.ranks = ranks = _ranks(self.m, s, self.read.second)
        turn = Turn(self.m, s, self.request)
        self.lemma("turn", turn.proper)
        any_request: tuple[_Clock, ...] = (
            (asked.lasted, b.request_high_ticks),
            (self.since_request, b.request_period_ticks),
            (self.since_strobe, b.strobe_period_ticks),
            (self.since_quiet, b.notice_ticks),
        )
        access: tuple[_Clock, ...] = (*any_request, (self.since_read, b.read_rest_ticks))
        self._in_time("turn", ranks.turn, any_request, 0)
        self._in_time("holds", ranks.holds, any_request, 2)
        self._in_time("idle", ranks.idle, access, 0)
        self._in_time("rests", ranks.rests, access, 2)
        self.lemma("since_request", ~self.request.second | (self.since_request == asked.lasted))
        self.lemma("taken", ~self._ended(any_request) | ~s.probe("taken"))
        self.lemma("follows", ~self._ended(access) | turn.follows)

    def _free(self) -> Value:
        return self.scene.probe("ready") & ~self.request.second

    def _in_time(self, name: str, rank: Value, clocks: tuple[_Clock, ...], early: int) -> None:
        """One of the promises at least leaves the rank its time, and `early` ticks more."""
        in_time: Value = Const(0)
        for ticks, most in clocks:
            in_time = in_time | (rank + at_most(ticks, most - early) <= most - early)
        self.lemma(f"{name}_free", ~self._free() | in_time)

    def _ended(self, clocks: tuple[_Clock, ...]) -> Value:
        """No request, and the next tick may bring one."""
        ended: Value = self._free()
        for ticks, most in clocks:
            ended = ended & (ticks + 1 >= most)
        return ended

    def _while_asked(self) -> None:
        """How far a request has come, from how long it has been there and RD or WR beside it."""
        s, t = self.scene, self.scene.design.ticks
        step, lasted, since_strobe = s.probe("step"), self.asked.lasted, self.since_strobe
        idle, rests = self.ranks.idle, self.ranks.rests
        under_way = self.request.second & s.probe("ready") & ~self.asked.began
        refresh, access = under_way & s.probe("refresh"), under_way & ~s.probe("refresh")
        after_row = max(t.precharge - 2, t.column_rest - 2, 0) + 1
        self.lemma(
            "refresh_idle", ~refresh | (idle == 0) | (idle + lasted <= t.row_setup + t.refresh_low + after_row + 1)
        )
        self.lemma("refresh_rests", ~refresh | (rests == 0) | (rests + lasted <= t.row_setup + t.refresh_low + 1))
        self.lemma("refresh_states", ~refresh | ~s.any_of("access", "reading", "writing", "holding"))
        self.lemma("access_states", ~access | ~s.any_of("preparing", "refreshing"))
        begins = self.asked.began & s.probe("ready")
        may_turn = s.any_of("idle", "resting", "holding") & ~s.probe("taken") & (s.probe("rest") >= t.precharge - 1)
        may_start = s.probe("idle") & ~s.probe("served")
        self.lemma("begin_idle", ~begins | Mux(s.probe("refresh"), may_turn, may_start))
        self.lemma("served", ~under_way | (s.probe("served") & s.probe("taken")))
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
