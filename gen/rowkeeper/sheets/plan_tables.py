"""The rest of a plan for a terminal: ticks, arbitration sums, refresh bounds, notes, and the whole plan.

Takes the records that timing gives; gives text of at most 100 columns. Must not know how a tick was chosen.
"""

from collections.abc import Iterable

from rowkeeper.contract import ArbitrationSum, Note, Plan, RefreshBounds, TickTable
from rowkeeper.sheets.columns import paragraph, table
from rowkeeper.sheets.quantities import nanoseconds, time_text
from rowkeeper.sheets.tables import lines_text, margin_text, term_row

__all__ = ["arbitration_text", "notes_text", "plan_text", "refresh_text", "ticks_text"]


def arbitration_text(sums: Iterable[ArbitrationSum]) -> str:
    """For each event: the time that its notice gives, the time that a refresh needs, and what is to spare."""
    blocks = [_arbitration(total) for total in sums]
    return lines_text(*blocks) if blocks else "No event of this bus ends a time of our own refresh.\n"


def _arbitration(total: ArbitrationSum) -> list[str]:
    verdict = "no wait output is needed" if total.margin_ps >= 0 else "FAILS: a refresh of our own is not over in time"
    given_ps, needed_ps = (sum(term.used_ps for term in terms) for terms in (total.available, total.needed))
    rows = [
        *map(term_row, total.available),
        ("=", nanoseconds(given_ps), "available", ""),
        *map(term_row, total.needed),
        ("=", nanoseconds(needed_ps), "needed", ""),
        ("=", nanoseconds(total.margin_ps), f"to spare: {verdict}", ""),
    ]
    title = paragraph(f"{total.event} (notice: {total.notice})", hanging="    ")
    return [*title, *table(("", "ns", "what", "source"), rows, right=(1,))]


def refresh_text(bounds: RefreshBounds) -> str:
    """The worst age of a row in each state of the bus, against the chip's interval."""
    limit = time_text(bounds.interval_ps)
    ages = (
        ("the bus runs", None, bounds.running_age_ps),
        ("any legal bus: reset, grant, silence", bounds.legal_gap_ticks, bounds.legal_age_ps),
        ("any input whatever", bounds.any_gap_ticks, bounds.any_age_ps),
    )
    rows = [
        (what, "" if gap is None else f"{gap}", time_text(age_ps), limit, _spare(bounds.interval_ps - age_ps))
        for what, gap, age_ps in ages
    ]
    title = paragraph(f"Age of the oldest of {bounds.rows} rows; longest drought {bounds.drought_ticks} ticks")
    terms = table(("", "ns", "what", "source"), map(term_row, bounds.terms), right=(1,)) if bounds.terms else []
    headings = ("when", "gap ticks", "age", "allowed", "to spare")
    return lines_text([*title, *table(headings, rows, right=(1, 2, 3, 4))], terms)


def _spare(spare_ps: int) -> str:
    return time_text(spare_ps) if spare_ps >= 0 else f"FAILS {time_text(spare_ps)}"


def ticks_text(ticks: TickTable, tick_lo_ps: int, tick_hi_ps: int) -> str:
    """The tick table as two columns."""
    names = [name for name in ticks.__dataclass_fields__ if name != "style"]
    rows = [(name.replace("_", " "), str(getattr(ticks, name))) for name in names]
    lo, hi = time_text(tick_lo_ps), time_text(tick_hi_ps)
    length = lo if lo == hi else f"{lo} to {hi}"
    return lines_text([f"Strobes {ticks.style}; one tick is {length}.", *table(("ticks", "count"), rows, right=(1,))])


def notes_text(notes: Iterable[Note]) -> str:
    """What a person should know that is no failure."""
    lines = [line for note in notes for line in paragraph(f"{note.topic}: {note.text}", "- ", "  ")]
    return lines_text(["To know:", *lines]) if lines else ""


def plan_text(plan: Plan, every: bool = False) -> str:
    """The whole of a plan: ticks, margins, arbitration, refresh, notes."""
    basis = "Delays of the device are the routed ones." if plan.routed else "BEFORE ROUTING: device delays are assumed."
    parts = (
        ticks_text(plan.ticks, plan.tick_lo_ps, plan.tick_hi_ps),
        margin_text(plan.margins, every),
        arbitration_text(plan.arbitration),
        refresh_text(plan.refresh),
        notes_text(plan.notes),
        basis + "\n",
    )
    return "\n".join(part for part in parts if part)
