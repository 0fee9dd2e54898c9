"""Claims about a legal bus: each request served once at its tick, and the gap between refresh strobes.

Takes a Scene and Bounds; statements over the pins under the promises of the bus. Must not know picoseconds.
"""

from amaranth.hdl import Signal

from rowkeeper.judging.claims.legal_bus import LegalBus

__all__ = ["LegalBound", "Served"]


class Served(LegalBus):
    """Exactly one row strobe per request, one tick after the request is seen."""

    name = "served"
    sentence = (
        "On a bus that keeps its promises every access in our window gets exactly one row strobe, one tick after its"
        " request is seen, and every refresh request is taken up at that tick."
    )
    assertions = 3
    spoiled = "served-twice"

    def check(self) -> None:
        s = self.scene
        self.behave()
        begins = self.asked.began & s.probe("ready")
        ours, refresh = Signal(name="begins_ours"), Signal(name="begins_refresh")
        in_window = s.in_window(self.target.asked)
        self.m.d.sync += ours.eq(begins & ~s.probe("refresh") & in_window)
        self.m.d.sync += refresh.eq(begins & s.probe("refresh"))
        access = self.row.began & ~s.probe("refreshing")
        self.must("strobe", ~ours | access)
        self.must("once", ~access | ours)
        self.must("refresh", ~refresh | (s.probe("preparing") & (s.probe("step") == 0)))
        self.cover(begins & ~s.probe("refresh") & in_window)


class LegalBound(LegalBus):
    """K_legal."""

    name = "legal-bound"
    sentence = (
        "On a bus that keeps its promises the refresh at `forced` is never used, and the refresh strobe falls again"
        " within the legal gap."
    )
    assertions = 2
    spoiled = "standby-off"

    def check(self) -> None:
        s, t = self.scene, self.scene.design.ticks
        self.behave()
        self.must("not_forced", ~s.probe("ready") | (s.probe("age") < t.forced))
        self.must("gap", ~self.begun | (self.since < self.bounds.legal_gap_ticks))
        begins = self.asked.began & s.probe("ready") & ~s.probe("refresh")
        self.cover(self.falls & (self.since_before > t.standby) & s.probe("ready"), begins)
