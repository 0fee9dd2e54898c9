"""Refresh: the longest a row can wait, on a legal bus and under any input, and the timer's ticks that keep it so.

Takes `Facts`; gives the drought of the bus in ticks, the timer's ticks, and bounds. Two bounds are kept apart.
`any`: the timer forces a refresh at `forced`, whatever the bus does. `legal`: a legal bus asks for a refresh, or is
quiet for us to make one, so often that the forced one is never used. Must not know the limits of strobes.
"""

from dataclasses import dataclass, replace
from fractions import Fraction

from rowkeeper.contract import RefreshBounds, Term, TickTable
from rowkeeper.reading.figures import Source
from rowkeeper.timing.device import SYNCHRONISER, Facts
from rowkeeper.timing.scenes import chips_of

__all__ = [
    "Drought",
    "TimerTicks",
    "drought_of",
    "least_bus_clock_hz",
    "refresh_bounds",
    "short_grant_clocks",
    "spare_by_service",
    "timer_ticks",
]

_GUARD = 4  # ticks kept free below the chip's interval
_SLACK = 4  # ticks by which the longest legal gap ends before a refresh is forced


def least_bus_clock_hz(rows: int, interval_ps: int, sweep_clocks: int) -> Fraction:
    """The slowest bus clock whose own refreshes, `sweep_clocks` apart, cover all rows in the interval."""
    return Fraction(rows * sweep_clocks * 10**12, interval_ps)


def _rows(facts: Facts) -> int:
    return max(chip.refresh_rows for chip in chips_of(facts))


def _interval_ps(facts: Facts) -> int:
    """The shortest interval for the largest number of rows."""
    rows = _rows(facts)
    return min(chip.refresh_ps * rows // chip.refresh_rows for chip in chips_of(facts))


def _spread(facts: Facts, net: str) -> int:
    """Between a line seen as early and as late as can be: path, sampling and aperture."""
    path = facts.paths[net]
    return path.hi_ps - path.lo_ps + facts.tick_hi_ps + 2 * facts.aperture_ps


def short_grant_clocks(facts: Facts) -> int:
    """The longest grant, in clocks, that may be too short to hold one tick at which a refresh of ours could start.

    The bus floats at Cr0 and BUSACK falls; BUSREQ is seen high at Cr k, and T1 comes at Cr k+1. BUSREQ was still low
    TsBUSREQ before Cr k-1. The device must see BUSACK low while it sees BUSREQ low, with its strobes at rest.
    """
    figures, tick = facts.board.grade.figures, facts.tick_hi_ps
    falls = figures["TdCr(BUSACKf)"].hi_ps or 0 if "TdCr(BUSACKf)" in figures else 0
    setup = figures["TsBUSREQ"].lo_ps or 0 if "TsBUSREQ" in figures else 0
    seen = falls + facts.paths["busack_n"].hi_ps + facts.aperture_ps + (SYNCHRONISER + 1) * tick
    start = max(seen, _at_rest(facts))
    k = 1
    while (k - 1) * facts.clock.period_lo_ps - setup + facts.paths["busreq_n"].lo_ps - facts.aperture_ps < start:
        k += 1
    return k


def _at_rest(facts: Facts) -> int:
    """When the strobes of the last cycle rest, counted from the Cr at which the bus floats."""
    t, c, tick = facts.ticks, facts.clock, facts.tick_hi_ps
    figures = facts.board.grade.figures
    late = max((figures[s].hi_ps or 0) for s in ("TdCf(MREQf)", "TdCf(MREQr)") if s in figures)
    seen = late + facts.paths["mreq_n"].hi_ps + facts.aperture_ps + (SYNCHRONISER + 1) * tick
    access = max(seen, _read_over(facts)) - c.low_lo_ps + max(t.column_rest, t.precharge) * tick
    refresh = seen - c.low_lo_ps - c.period_lo_ps + (t.row_setup + t.refresh_low + t.precharge) * tick
    return max(access, refresh)


def _read_over(facts: Facts) -> int:
    """When the end of RD is seen at the latest, counted as in `_at_rest` from the Cf that ends a read."""
    figure = facts.board.grade.figures.get("TdCf(RDr)")
    late = 0 if figure is None else figure.hi_ps or 0
    return late + facts.paths["rd_n"].hi_ps + facts.aperture_ps + (SYNCHRONISER + 1) * facts.tick_hi_ps


@dataclass(frozen=True, slots=True)
class Drought:
    """The longest time a legal bus neither asks for a refresh nor is quiet: terms, and in ticks rounded up."""

    terms: tuple[Term, ...]
    ticks: int
    short_resets: bool  # also covers a reset that ends just before the device has seen the bus quiet


def drought_of(facts: Facts, reset_settle: int, short_resets: bool) -> Drought:
    """Longest gap of the cycle table, with waits, with grants too short to use, and with a reset at its end."""
    traffic, worst, period = facts.board.bus.traffic, facts.board.at_worst, facts.clock.period_hi_ps
    parts: list[tuple[str, int, Source]] = [
        (f"longest gap, {traffic.gap_clocks} clocks", traffic.gap_clocks * period, traffic.source)
    ]
    waits = -(-worst.wait_max_ps // facts.clock.period_lo_ps)
    cycles = traffic.gap_machine_cycles
    if waits:
        parts.append((f"{waits} waits in each of {cycles} cycles", waits * cycles * period, facts.clock_source))
    if worst.grant_max_ps != 0 and facts.board.standby == "own-timer":
        short = short_grant_clocks(facts)
        if worst.grant_max_ps is not None:
            short = min(short, -(-worst.grant_max_ps // facts.clock.period_lo_ps))
        name = f"grants of {short} clocks after each of {cycles} cycles, too short to use"
        parts.append((name, short * cycles * period, facts.clock_source))
    if worst.reset_max_ps != 0 and facts.board.standby == "own-timer":
        parts += _reset_terms(facts, reset_settle, short_resets)
    figure = facts.board.grade.figures.get("TdCf(MREQf)")
    if figure is not None and figure.hi_ps is not None:
        parts.append(("TdCf(MREQf), once early and once late", figure.hi_ps, figure.source))
    parts.append(("the same line seen early and late", _spread(facts, "mreq_n"), facts.tick_source))
    terms = tuple(Term(name, 0, ps, ps, source) for name, ps, source in parts)
    return Drought(terms, -(-sum(t.used_ps for t in terms) // facts.tick_lo_ps) + 1, short_resets)


def _reset_terms(facts: Facts, reset_settle: int, short_resets: bool) -> list[tuple[str, int, Source]]:
    """A reset strikes just before the refresh: the device waits until it is sure of it."""
    settle = (reset_settle + SYNCHRONISER + 1) * facts.tick_hi_ps + facts.paths["reset_n"].hi_ps
    parts = [(f"reset seen and settled, {reset_settle} ticks", settle, facts.tick_source)]
    if short_resets:
        # One clock until RESET is seen high, the restart, and two and a half clocks of the fetch before its refresh.
        clocks = facts.board.bus.traffic.reset_restart_clocks + 4
        name = f"a reset that ends just before that: {clocks} clocks to the next refresh"
        parts.append((name, clocks * facts.clock.period_hi_ps, facts.board.bus.traffic.source))
    return parts


@dataclass(frozen=True, slots=True)
class TimerTicks:
    """The timer's ticks; `spare_ticks`: by how much `standby` is above its least, below 0 where it does not fit."""

    ticks: TickTable
    drought: Drought
    spare_ticks: int


def _least_standby(ticks: TickTable) -> int:
    """A refresh of our own is over before the next is wanted."""
    return ticks.row_setup + ticks.refresh_low + ticks.precharge + SYNCHRONISER + 1


def spare_by_service(facts: Facts) -> int:
    """Ticks by which `standby` is longer than it must be, once forced refresh, service and drought have had theirs."""
    return timer_ticks(facts).spare_ticks if facts.board.standby == "own-timer" else 0


def timer_ticks(facts: Facts) -> TimerTicks:
    """`forced` as late as the interval allows, `standby` as late as leaves the forced refresh unused."""
    t = facts.ticks
    shortest = facts.tick_lo_ps
    settle_ps = facts.board.bus.traffic.reset_settle_clocks * facts.clock.period_hi_ps
    reset_settle = -(-(settle_ps + _spread(facts, "mreq_n") + _spread(facts, "reset_n")) // shortest) + 1
    pause = max(-(-chip.pause_ps // shortest) for chip in chips_of(facts))
    cycles = max(chip.warm_up_cycles for chip in chips_of(facts))
    per_row = _interval_ps(facts) // (_rows(facts) * facts.tick_hi_ps)
    forced = per_row - t.service - _GUARD
    least = _least_standby(t)
    for short_resets in (True, False):
        drought = drought_of(facts, reset_settle, short_resets)
        standby = forced - _SLACK - replace(t, standby=0).legal_gap(drought.ticks)
        if standby >= least:
            break
    table = replace(
        t,
        forced=max(forced, 1),
        standby=max(standby, 1),
        reset_settle=reset_settle,
        pause=max(pause, 1),
        warm_up_cycles=cycles,
    )
    return TimerTicks(table, drought, standby - least)


def refresh_bounds(facts: Facts, drought: Drought) -> RefreshBounds:
    """Gaps in ticks and ages in picoseconds for these ticks. Without a timer, grants and resets count whole."""
    t, rows = facts.ticks, _rows(facts)
    running = rows * facts.board.bus.traffic.sweep_clocks * facts.clock.period_hi_ps
    if facts.board.standby == "own-timer":
        legal = t.legal_gap(drought.ticks)
        most = t.forced + t.service
        return RefreshBounds(
            drought.ticks, legal, most, rows, _interval_ps(facts), running,
            rows * legal * facts.tick_hi_ps, rows * most * facts.tick_hi_ps, drought.terms,
        )  # fmt: skip
    idle, terms = _without_timer(facts, drought)
    age = rows * drought.ticks * facts.tick_hi_ps + idle
    gap = drought.ticks + -(-idle // facts.tick_lo_ps)
    return RefreshBounds(drought.ticks, gap, gap, rows, _interval_ps(facts), running, age, age, terms)


def _without_timer(facts: Facts, drought: Drought) -> tuple[int, tuple[Term, ...]]:
    """Grant and reset at their longest; unlimited ones count as ten thousand intervals, which never fits."""
    worst, endless = facts.board.at_worst, 10_000 * _interval_ps(facts)
    spans = (("longest grant", worst.grant_max_ps), ("longest reset", worst.reset_max_ps))
    terms = list(drought.terms)
    total = 0
    for name, span in spans:
        ps = endless if span is None else span
        if ps:
            terms.append(Term(name if span is not None else f"{name}: unlimited", 0, span, ps, facts.clock_source))
            total += ps
    return total, tuple(terms)
