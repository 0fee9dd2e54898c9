"""What a claim takes from the bus, in ticks of the device clock, as the logic's flip-flops see it.

Takes nothing; a record only. Must not know picoseconds.
"""

from dataclasses import dataclass

__all__ = ["Bounds"]


@dataclass(frozen=True, slots=True)
class Bounds:
    """Promises of a legal bus. Least figures are rounded down to whole ticks, less one for the sampling; most figures
    up, and one more.

    `request_low`: MREQ stays low at least this long; `request_high`: high after an access; `refresh_high`: high after a
    refresh. `strobe`: RD or WR is low beside MREQ at least this long before MREQ rises. `notice`: from the end of
    quiet (grant or reset about to end) to the next request, both as seen. `drought`: the longest time without a
    refresh request of the bus and without a quiet tick at which the sequencer is idle. `legal_gap`: what is claimed
    of the gap between refresh strobes on such a bus.
    """

    request_low_ticks: int
    request_high_ticks: int
    refresh_high_ticks: int
    strobe_ticks: int
    notice_ticks: int
    drought_ticks: int
    legal_gap_ticks: int
