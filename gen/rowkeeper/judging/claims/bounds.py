"""What a claim takes from the bus, in ticks of the device clock, as the logic's flip-flops see it.

Takes nothing; a record only. Must not know picoseconds.
"""

from dataclasses import dataclass

__all__ = ["Bounds"]


@dataclass(frozen=True, slots=True)
class Bounds:
    """Promises of a legal bus. Least figures are rounded down to whole ticks, less one for the sampling; most figures
    up, and one more.

    `request_low`, `request_high`: MREQ stays low or high at least this long; `request_period`: from one request to the
    next. `strobe`: in an access RD or WR is low beside MREQ at least this long; `strobe_period`: from then to the
    next request. `write_after`: from a request to its WR. `read_rest`: from the end of RD to the next request that is
    no refresh. `notice`: from the end of quiet (grant or reset about to end) to the next request, both as seen.
    `drought`: the longest time without a refresh request of the bus and without a quiet tick at which the sequencer is
    idle. `legal_gap`: what is claimed of the gap between refresh strobes on such a bus.
    """

    request_low_ticks: int
    request_high_ticks: int
    request_period_ticks: int
    strobe_ticks: int
    strobe_period_ticks: int
    write_after_ticks: int
    read_rest_ticks: int
    notice_ticks: int
    drought_ticks: int
    legal_gap_ticks: int
