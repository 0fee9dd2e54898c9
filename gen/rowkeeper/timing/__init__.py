"""Timing: every window, margin and term of a board, and the ticks that keep them.

Takes a typed board and the device's delays; gives a `Plan`. Pure functions on records. Must not know the generated
logic's components, files or tools.
"""

from rowkeeper.timing.paths import default_delays, net_windows
from rowkeeper.timing.plan import design_of, judge, settle
from rowkeeper.timing.refusals import refusals

__all__ = ["default_delays", "design_of", "judge", "net_windows", "refusals", "settle"]
