"""Claim about the kind of a cycle: access or refresh, from the history of M1, beside an ideal model on the pins.

Takes a Scene; the model sees the lines before they are sampled, the logic sees each a tick late or not. Must not know
how the logic tells the kinds apart.
"""

from amaranth.hdl import Mux, Signal

from rowkeeper.judging.claims.checker import Checker
from rowkeeper.judging.claims.scene import Stopwatch

__all__ = ["Kind"]

_WIDTH = 3  # ticks: less than any bus and any clock of ours gives


class Kind(Checker):
    """The ideal model: the first request after the end of an M1 pulse is its refresh, all others are accesses."""

    name = "kind"
    sentence = (
        "A request inside an M1 pulse, or with no M1 pulse since the last refresh, is an access; the first request"
        " after an M1 pulse is its refresh."
    )
    assertions = 2
    assumptions = ("m1-before-mreq", "mreq-high", "mreq-low", "m1-width")
    spoiled = "kind-by-level"
    by_pdr = True

    def check(self) -> None:
        s = self.scene
        request = Stopwatch(self.m, s.raw_lines["mreq"], _WIDTH, "raw_request")
        m1 = Stopwatch(self.m, s.raw_lines["m1"], _WIDTH, "raw_m1")
        owed, owed_now, refresh = Signal(name="ideal_owed"), Signal(name="ideal_owed_now"), Signal(name="ideal_refresh")
        fetched = Signal(name="ideal_fetched")
        self.m.d.comb += owed_now.eq(owed | m1.began)
        after_pulse = owed_now & ~m1.level
        self.m.d.sync += owed.eq(Mux(request.began & after_pulse, 0, owed_now))
        self.m.d.sync += fetched.eq(m1.level & ((fetched & ~m1.began) | request.began))
        with self.m.If(request.began):
            self.m.d.sync += refresh.eq(after_pulse)
        self._assume(request, m1, fetched)
        seen, before = s.probe("mreq_second"), Signal(name="seen_before")
        kind_before = Signal(name="kind_before")
        self.m.d.sync += [before.eq(seen), kind_before.eq(s.probe("refresh"))]
        self.must("begins", ~(seen & ~before) | (s.probe("refresh") == refresh))
        self.must("stays", ~(seen & before) | (s.probe("refresh") == kind_before))
        self.cover(seen & ~before & refresh)

    def _assume(self, request: Stopwatch, m1: Stopwatch, fetched: Signal) -> None:
        began_before = Signal(name="request_began_before")
        self.m.d.sync += began_before.eq(request.began)
        self.assume("m1_before_mreq", ~(request.began & (m1.lasted < 1)))
        self.assume("m1_before_mreq_stays", ~(began_before & m1.changed))
        self.assume("m1_before_mreq_once", ~(request.began & fetched & m1.level & ~m1.began))
        self.assume("mreq_high", ~request.began | (request.ended >= _WIDTH))
        self.assume("mreq_low", ~request.over | (request.ended >= _WIDTH))
        self.assume("m1_width", ~m1.changed | (m1.ended >= _WIDTH))
