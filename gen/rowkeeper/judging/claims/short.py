"""The same design with short ticks: for covers and spoiled designs, whose traces are then a few dozen ticks long.

Takes a `contract.Design`; gives another. The proofs themselves are made with the real ticks.
"""

from dataclasses import replace

from rowkeeper.contract import Design, TickTable
from rowkeeper.judging.claims.bounds import Bounds

__all__ = ["shortened", "shortened_bounds"]

_DROUGHT = 32


def shortened(design: Design) -> Design:
    """Every tick as small as its rules allow, and three warm-up strobes."""
    ticks = TickTable(
        style=design.ticks.style,
        row_setup=2,
        mux=1,
        column=2,
        row_hold=3,
        write_lead=1,
        give_up=7,
        column_cap=12,
        column_rest=4,
        refresh_low=4,
        precharge=6,
        standby=16,
        forced=56,
        reset_settle=6,
        pause=6,
        warm_up_cycles=2,
    )
    return replace(design, ticks=ticks)


def shortened_bounds(design: Design) -> Bounds:
    """Promises of a bus that goes with the short ticks."""
    t = design.ticks
    return Bounds(
        request_low_ticks=t.row_end + 4,
        request_high_ticks=t.rest,
        request_period_ticks=t.row_end + t.rest + t.refresh_low + t.row_setup,
        strobe_ticks=t.column + 2,
        write_after_ticks=t.column + 1,
        read_rest_ticks=t.rest + 1,
        strobe_period_ticks=t.write_lead + t.row_hold + t.rest + 2,
        notice_ticks=t.row_setup + t.refresh_low + t.rest,
        drought_ticks=_DROUGHT,
        legal_gap_ticks=t.legal_gap(_DROUGHT),
    )
