"""The plan of a board: ticks chosen or given, every margin, the arbitration sums and the refresh bounds.

Takes a board and delays; gives a `Plan`. `judge` is pure: the same board, ticks and delays give the same plan. A plan
that does not hold is given all the same, with its negative margins; `refusals` says what is wrong and what mends it.
"""

from dataclasses import replace

from rowkeeper.contract import Delays, Design, Margin, Note, Plan, Term, TickTable
from rowkeeper.reading.board import Board
from rowkeeper.timing.arbitration import arbitration, arbitration_notes
from rowkeeper.timing.clock_limits import clock_margins, clock_notes
from rowkeeper.timing.device import Facts, facts_of, with_ticks
from rowkeeper.timing.margins import judged, margin_notes, worst_of
from rowkeeper.timing.refresh_bounds import Drought, drought_of, refresh_bounds, timer_ticks
from rowkeeper.timing.search import best_ticks, first_guess

__all__ = ["design_of", "judge", "settle"]

REFUSED = "refused"  # topic of a note that keeps a plan from holding


def settle(board: Board, delays: Delays) -> Plan:
    """Choose the ticks the board file leaves open, and judge them."""
    facts = facts_of(board, delays, first_guess_of(board, delays))
    chosen = with_ticks(facts, best_ticks(facts, board.strobes))
    return _judge(with_ticks(chosen, timer_ticks(chosen).ticks))


def first_guess_of(board: Board, delays: Delays) -> TickTable:
    """Ticks to start from."""
    nothing = TickTable("counted", *(1,) * 15)
    return first_guess(facts_of(board, delays, nothing), board.strobes)


def judge(board: Board, ticks: TickTable, delays: Delays) -> Plan:
    """Every margin of these ticks with these delays."""
    return _judge(facts_of(board, delays, ticks))


def _judge(facts: Facts) -> Plan:
    board, ticks = facts.board, facts.ticks
    drought = _drought(facts)
    bounds = refresh_bounds(facts, drought)
    legal = _legal_margins(facts, drought, bounds.legal_gap_ticks)
    margins = [*clock_margins(board), *worst_of(judged(facts, whole=True)), *legal]
    sums = arbitration(facts)
    unused = all(m.margin_ps >= 0 for m in legal)
    notes = [
        *_refused(board, ticks),
        *clock_notes(board),
        *margin_notes(facts, margins),
        *_drought_notes(facts, drought),
        *arbitration_notes(facts, sums, unused),
    ]
    order = sorted(margins, key=lambda m: (m.kind != "hard", m.margin_ps, m.symbol, m.cycle, m.neighbour, m.note))
    return Plan(
        ticks, facts.tick_lo_ps, facts.tick_hi_ps, tuple(order), sums, bounds, tuple(notes), facts.delays.routed
    )


def _refused(board: Board, ticks: TickTable) -> list[Note]:
    """What no choice of ticks can mend."""
    texts: list[str] = []
    if ticks.style == "straight":
        reasons = ["only counted strobes are generated"]
        if board.at_worst.reset_max_ps != 0 and not board.at_worst.reset_aligned:
            reasons.append("an unaligned reset would cut short a strobe that is passed straight on")
        if board.standby == "own-timer":
            reasons.append("an access could begin in the middle of a refresh of our own")
        texts.append(f"strobe style straight: {'; '.join(reasons)}. Leave the style to `auto` or give `counted`")
    if len(board.banks) > 1:
        texts.append(f"{len(board.banks)} banks: one bank is generated; give each bank a board file of its own")
    if board.row_from != "counter":
        texts.append(f"rows from {board.row_from}: only `counter` is generated; set refresh.row_from to counter")
    return [Note(REFUSED, text) for text in texts]


def _drought(facts: Facts) -> Drought:
    """The drought that these ticks cover: with the shortest resets where that fits."""
    for short_resets in (True, False):
        drought = drought_of(facts, facts.ticks.reset_settle, short_resets)
        if refresh_bounds(facts, drought).legal_gap_ticks < facts.ticks.forced:
            break
    return drought


def _legal_margins(facts: Facts, drought: Drought, legal_gap: int) -> list[Margin]:
    """On a legal bus the forced refresh is never used: the longest legal gap ends before it."""
    if facts.board.standby != "own-timer":
        return []
    tick, t = facts.tick_hi_ps, facts.ticks
    terms = (
        Term(f"standby, {t.standby} ticks", t.standby * tick, t.standby * tick, t.standby * tick, facts.tick_source),
        *_in_ticks(drought, tick, legal_gap - t.standby, facts),
    )
    latest = sum(term.used_ps for term in terms)
    required = t.forced * tick
    note = "the longest gap on a legal bus ends before a refresh is forced"
    source = facts.board.bus.traffic.source
    return [
        Margin(
            "tREF", "refresh", "", "max", "hard", required, None, latest, required - latest, terms, source, False, note
        )
    ]


def _in_ticks(drought: Drought, tick: int, ticks: int, facts: Facts) -> tuple[Term, ...]:
    """The drought's own terms, and the whole ticks it is rounded up to."""
    rest = ticks * tick - sum(term.used_ps for term in drought.terms)
    name = "rounding to ticks, and from the request to its strobe"
    return (*drought.terms, Term(name, 0, rest, rest, facts.tick_source))


def _drought_notes(facts: Facts, drought: Drought) -> list[Note]:
    worst = facts.board.at_worst
    if worst.reset_max_ps == 0 or drought.short_resets or facts.board.standby != "own-timer":
        return []
    text = (
        f"a reset shorter than {facts.ticks.reset_settle} ticks that strikes at the end of the bus's longest gap can "
        "bring a forced refresh into the first access after it; no row is ever late, but that access may be"
    )
    return [Note("short reset", text)]


def design_of(board: Board, ticks: TickTable) -> Design:
    """What the logic is built from."""
    bank = board.banks[0]
    low_bits = (bank.size - 1).bit_length()
    wired = {net.name for net in board.wiring.nets if net.pin}
    return Design(
        board.slug,
        bank.chip.row_bits,
        bank.chip.column_bits,
        max(b.chip.refresh_row_bits for b in board.banks),
        board.bus.address_bits,
        board.bus.address_bits - low_bits,
        bank.base >> low_bits,
        "busreq_n" in wired,
        "busack_n" in wired,
        "reset_n" in wired,
        board.standby == "own-timer",
        replace(ticks),
    )
