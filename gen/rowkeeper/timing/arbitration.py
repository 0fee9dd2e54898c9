"""Arbitration by notice: a refresh of our own that is under way is over before the next access can be taken.

Takes `Facts`; gives the sums for the end of a grant and of a reset. BUSREQ and RESET rise before the bus moves again;
that is the notice. A line that is not wired gives none. Must not know how ticks are chosen.
"""

from collections.abc import Collection

from rowkeeper.contract import ArbitrationSum, Note, Term
from rowkeeper.reading.figures import Figure, Mark, Source
from rowkeeper.timing.bus import from_figure
from rowkeeper.timing.device import SYNCHRONISER, Facts, counted
from rowkeeper.timing.margins import Judged, spare
from rowkeeper.timing.network import UNPUBLISHED, Promise

__all__ = ["arbitration", "arbitration_notes", "leaning_events", "own_refresh_can_be_seen", "spare_by_notice", "wired"]

# BUSREQ, BUSACK and RESET are driven edges: the translators' sheet asks 10 ns/V (SCAS218T), and two receivers may each
# switch anywhere from 0.8 to 2.0 V.
_EDGE = Term(
    "edge of the line, 0.8 to 2.0 V", 0, 12_000, 12_000, Source(Mark.PRACTICE, "a driven edge of 10 ns/V, no RC")
)
_SETUP = "set-up the bus asks of this line"
_GRANT = "end of a grant"
_SPANS = ("row_setup", "refresh_low", "precharge")


def wired(facts: Facts, net: str) -> bool:
    """Whether the board brings this bus line to the device."""
    return any(n.name == net and n.pin for n in facts.board.wiring.nets)


def own_refresh_can_be_seen(facts: Facts) -> bool:
    """Only a board with a timer of its own has anything to arbitrate."""
    return facts.board.standby == "own-timer"


def arbitration(facts: Facts) -> tuple[ArbitrationSum, ...]:
    """One sum for each way the bus can come back while a refresh of our own is under way."""
    if not own_refresh_can_be_seen(facts):
        return ()
    worst = facts.board.at_worst
    sums: list[ArbitrationSum] = []
    if worst.grant_max_ps != 0:
        sums.append(_end_of_grant(facts))
    if worst.reset_max_ps != 0:
        sums.append(_end_of_reset(facts))
    return tuple(sums)


def _term(promise: Promise, upper: bool, sign: int = 1) -> Term:
    end = promise.hi_ps if upper else promise.lo_ps
    source = promise.source if upper or promise.lo_source is None else promise.lo_source
    return Term(promise.name, promise.lo_ps, promise.hi_ps, sign * (end or 0), source)


def _needed(facts: Facts, net: str) -> list[Term]:
    """From the notice at its pin to the first edge at which an access may start."""
    path = [_term(p, upper=True) for p in facts.paths[net].slow]
    tick, wide = facts.tick_hi_ps, facts.aperture_ps
    seen = [
        Term("to the next device clock edge", 0, tick, tick, facts.tick_source),
        Term("aperture of the first flip-flop", -wide, wide, wide, facts.aperture.source),
        _term(counted(facts, plus=SYNCHRONISER - 1), upper=True),
    ]
    return [_EDGE, *path, *seen] + [_term(counted(facts, name), upper=True) for name in _SPANS]


def _request(facts: Facts) -> list[Term]:
    """From MREQ falling on the bus to the edge at which its strobe would start."""
    figure = facts.board.grade.figures.get("TdCf(MREQf)")
    wide = facts.aperture_ps
    delay = [] if figure is None else [_term(from_figure(figure), upper=False)]
    path = [_term(p, upper=False) for p in facts.paths["mreq_n"].fast]
    aperture = Term("aperture of the first flip-flop", -wide, wide, -wide, facts.aperture.source)
    return [*delay, *path, aperture, _term(counted(facts, plus=SYNCHRONISER), upper=False)]


def _clocks(facts: Facts, count: int) -> list[Term]:
    c = facts.clock
    period = Term(
        f"{count} bus clock periods", count * c.period_lo_ps, count * c.period_hi_ps, count * c.period_lo_ps,
        facts.clock_source,
    )  # fmt: skip
    high = Term("bus clock high, Cr to Cf", c.high_lo_ps, c.high_hi_ps, c.high_lo_ps, facts.clock_source)
    return [period, high]


def _end_of_grant(facts: Facts) -> ArbitrationSum:
    """BUSREQ is taken high at a Cr; the next T1 begins a clock later. Else BUSACK rises half a clock before T1."""
    figures = facts.board.grade.figures
    event = _GRANT
    if wired(facts, "busreq_n"):
        return _with_notice(facts, event, "BUSREQ rising", "busreq_n", 1, figures.get("TsBUSREQ"))
    if not wired(facts, "busack_n"):
        return _without_notice(facts, event, "nothing (neither BUSREQ nor BUSACK is wired)", "busreq_n")
    rises = figures.get("TdCf(BUSACKr)")
    c = facts.clock
    available = [Term("bus clock period", c.period_lo_ps, c.period_hi_ps, c.period_lo_ps, facts.clock_source)]
    if rises is not None:
        available.append(_term(from_figure(rises), upper=True, sign=-1))
    return _sum(event, "BUSACK rising (BUSREQ is not wired)", available + _request(facts), _needed(facts, "busack_n"))


def _end_of_reset(facts: Facts) -> ArbitrationSum:
    """RESET is taken high at a Cr; after the restart clocks comes the T1 of a fetch."""
    event = "end of reset"
    if not wired(facts, "reset_n"):
        return _without_notice(facts, event, "nothing (RESET is not wired)", "reset_n")
    clocks = facts.board.bus.traffic.reset_restart_clocks
    setup = facts.board.grade.figures.get("TsRESET") if facts.board.at_worst.reset_aligned else None
    return _with_notice(facts, event, "RESET rising", "reset_n", clocks, setup)


def _with_notice(facts: Facts, event: str, notice: str, net: str, clocks: int, asked: Figure | None) -> ArbitrationSum:
    """Without the bus's own set-up where that is enough; else with it, and said so."""
    available, needed = [*_clocks(facts, clocks), *_request(facts)], _needed(facts, net)
    plain = _sum(event, notice, available, needed)
    if plain.margin_ps >= 0 or asked is None or not asked.lo_ps:
        return plain
    setup = Term(_SETUP, asked.lo_ps, None, asked.lo_ps, asked.source)
    return _sum(event, f"{notice}, at its set-up time or earlier", [setup, *available], needed)


def _without_notice(facts: Facts, event: str, notice: str, net: str) -> ArbitrationSum:
    """Nothing tells the device that the bus comes back: it learns of it from MREQ itself."""
    nothing = Term("no notice", 0, 0, 0, UNPUBLISHED)
    return _sum(event, notice, [nothing, *_request(facts)], _needed(facts, net))


def _sum(event: str, notice: str, available: list[Term], needed: list[Term]) -> ArbitrationSum:
    margin = sum(t.used_ps for t in available) - sum(t.used_ps for t in needed)
    return ArbitrationSum(event, notice, tuple(available), tuple(needed), margin)


def spare_by_notice(facts: Facts, leaning: Collection[str] = ()) -> list[Judged]:
    """What each sum leaves when the bus's own set-up is not counted; it is counted for the events in `leaning`."""
    per_tick = dict.fromkeys(_SPANS, -facts.tick_hi_ps)
    found: list[Judged] = []
    for one in arbitration(facts):
        left = one.margin_ps - sum(t.used_ps for t in one.available if t.name == _SETUP)
        if one.event in leaning:
            left += _setup_ps(facts, one.event)
        found.append(spare("arbitration", one.event, left, per_tick, facts.tick_source))
    return found


def leaning_events(facts: Facts) -> frozenset[str]:
    """Events whose sum holds with the bus's own set-up and not without it."""
    plain = {one.events[0]: one.margin.margin_ps for one in spare_by_notice(facts)}
    return frozenset(event for event, left in plain.items() if left < 0 <= left + _setup_ps(facts, event))


def _setup_ps(facts: Facts, event: str) -> int:
    net, symbol = ("busreq_n", "TsBUSREQ") if event == _GRANT else ("reset_n", "TsRESET")
    figure = facts.board.grade.figures.get(symbol)
    asked = wired(facts, net) and (event == _GRANT or facts.board.at_worst.reset_aligned)
    return (figure.lo_ps or 0) if asked and figure is not None else 0


def arbitration_notes(facts: Facts, sums: tuple[ArbitrationSum, ...], forced_unused: bool) -> list[Note]:
    """Why the bus need not wait for a refresh."""
    if not own_refresh_can_be_seen(facts):
        return [Note("no wait output", "there is no refresh of our own: the bus's refresh and its accesses take turns")]
    if any(one.margin_ps < 0 for one in sums) or not forced_unused:
        return []
    ends = " and ".join(f"{one.event} ({one.margin_ps / 1000:.1f} ns to spare)" for one in sums)
    text = (
        "a refresh of our own starts only while the bus is granted away or held in reset, "
        f"and is over before the first access after {ends or 'either'}; "
        "a legal bus never lets the timer come to its forced refresh"
    )
    return [Note("no wait output", text)]
