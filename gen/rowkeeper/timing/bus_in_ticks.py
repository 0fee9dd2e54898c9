"""The bus in ticks: the promises of a legal bus as the device's flip-flops see them.

Takes a board, delays and ticks; gives the figures that the claims assume, by name. Least figures are rounded down.
Must not know the claims.
"""

from collections.abc import Iterable, Mapping

from rowkeeper.contract import Delays, Plan
from rowkeeper.reading.board import Board
from rowkeeper.timing.arbitration import arbitration
from rowkeeper.timing.device import Facts, facts_of
from rowkeeper.timing.scenes import Scene, scenes

__all__ = ["bus_in_ticks"]


def bus_in_ticks(board: Board, delays: Delays, plan: Plan) -> Mapping[str, int]:
    """Widths of MREQ and of the strobes beside it, the notice before the bus comes back, drought and legal gap."""
    facts = facts_of(board, delays, plan.ticks)
    found = list(scenes(facts))
    accesses = [scene for scene in found if scene.neighbour != "refresh"]
    request = "next MREQf seen"
    strobes = ("RDf seen", "WRf seen")
    return {
        "request_low_ticks": _least(facts, found, ("MREQf seen", "MREQr seen")),
        "request_high_ticks": _least(facts, found, ("MREQr seen", request)),
        "request_period_ticks": _least(facts, found, ("MREQf seen", request)),
        "strobe_ticks": min(_least(facts, found, (strobe, "MREQr seen")) for strobe in strobes),
        "strobe_period_ticks": min(_least(facts, found, (strobe, request)) for strobe in strobes),
        "write_after_ticks": _least(facts, found, ("MREQf seen", "WRf seen")),
        "read_rest_ticks": _least(facts, accesses, ("RDr seen", request)),
        "notice_ticks": _notice(facts),
        "drought_ticks": plan.refresh.drought_ticks,
        "legal_gap_ticks": plan.refresh.legal_gap_ticks,
    }


def _least(facts: Facts, found: Iterable[Scene], pair: tuple[str, str]) -> int:
    """The least whole ticks from one event to the other, over every scene that has both."""
    windows = [scene.network.window(*pair).lo_ps for scene in found if scene.network.holds(*pair)]
    return min((least // facts.tick_hi_ps for least in windows if least is not None), default=0)


def _notice(facts: Facts) -> int:
    """From the end of quiet to the next request, both as seen: what a refresh needs, and what is left beside it."""
    t = facts.ticks
    spare = min((one.margin_ps // facts.tick_hi_ps for one in arbitration(facts)), default=0)
    return t.row_setup + t.refresh_low + t.precharge + spare
