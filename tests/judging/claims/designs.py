"""Two designs by hand, like the shipped boards', and the promises of their buses in ticks."""

from rowkeeper.contract import Design, TickTable
from rowkeeper.judging.claims.bounds import Bounds

LOOM = Design(
    "loom", 7, 7, 7, 16, 2, 3, True, True, True, True,
    TickTable("counted", 4, 4, 6, 12, 1, 60, 900, 3, 17, 12, 600, 1480, 79, 20000, 8),
)  # fmt: skip
KILN = Design(
    "kiln", 8, 8, 8, 16, 0, 0, True, True, True, True,
    TickTable("counted", 2, 2, 3, 6, 1, 40, 450, 4, 9, 7, 100, 730, 64, 10000, 8),
)  # fmt: skip
DESIGNS = {"loom": LOOM, "kiln": KILN}

_DROUGHT = {"loom": 600, "kiln": 300}


def bounds(design: Design) -> Bounds:
    """MREQ and strobe widths at 4 MHz against 100 MHz, and at 2.5 MHz against 50 MHz, rounded down."""
    t, drought = design.ticks, _DROUGHT[design.name]
    promised = {"loom": (20, 8, 38, 14, 37, 14), "kiln": (16, 6, 33, 13, 31, 12)}
    low, high, period, after, strobe, over = promised[design.name]
    return Bounds(
        request_low_ticks=low,
        request_high_ticks=high,
        request_period_ticks=period,
        strobe_ticks=13,
        strobe_period_ticks=strobe,
        read_rest_ticks=over,
        write_after_ticks=after,
        notice_ticks=t.row_setup + t.refresh_low + t.precharge,
        drought_ticks=drought,
        legal_gap_ticks=t.legal_gap(drought),
    )
