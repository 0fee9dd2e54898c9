"""Refusals: what a plan breaks, where, by how much, and what would mend it, in plain words.

Takes a plan; gives one sentence per limit that is not kept, the worst case of each. Must not know how the plan was
found.
"""

from rowkeeper.contract import ArbitrationSum, Margin, Plan

__all__ = ["refusals"]

_FASTER_CHIP = "a faster grade of chip"
_SLOWER_BUS = "a slower bus clock"
_FINER = "a faster device clock"
_EVEN_PATHS = "buffers whose delays lie closer together"

_MENDS: dict[str, tuple[str, ...]] = {
    **dict.fromkeys(("TcC", "TwCh", "TwCl"), (_SLOWER_BUS, "a clock of more even duty", "a faster grade of the bus")),
    **dict.fromkeys(("TrC", "TfC"), ("a clock driver with steeper edges",)),
    **dict.fromkeys(
        ("tRAC", "tCAC", "TsD(Cr)", "TsD(Cf)"), (_FASTER_CHIP, _FINER, "a faster data buffer", _SLOWER_BUS)
    ),
    **dict.fromkeys(("tRAH", "tASC", "tASR", "tRCD", "tWCS"), (_FINER, _EVEN_PATHS, _FASTER_CHIP)),
    **dict.fromkeys(("tRP", "tRC", "ready", "tCRP", "tCPN", "tRAS"), (_FASTER_CHIP, _FINER, _SLOWER_BUS)),
    **dict.fromkeys(("kind", "address-captured", "grant over"), (_SLOWER_BUS, _EVEN_PATHS)),
    **dict.fromkeys(
        ("turnaround", "tOFF", "ThD", "tOFF(RDr)", "ThD(RDr)"),
        ("a data buffer that switches off faster", _FINER, _SLOWER_BUS),
    ),
    **dict.fromkeys(("RD seen", "WR seen", "give up", "column cap"), (_FINER, _SLOWER_BUS, "shorter waits")),
    "tREF": ("fewer or longer grants", "shorter waits", "a faster bus clock", "a faster device clock"),
}
_MENDS_MAXIMUM = ("shorter waits", _SLOWER_BUS)
# Two ticks of the synchroniser, whatever the table: here a finer tick takes time away.
_MENDS_ANY_ROW = (_EVEN_PATHS, "a smaller series resistor in the memory address lines", "a slower device clock")


def refusals(plan: Plan) -> tuple[str, ...]:
    """One sentence for everything that keeps the plan from holding; none when it holds."""
    broken = [note.text for note in plan.notes if note.topic == "refused"]
    met: set[tuple[str, str]] = set()
    # The bus clock first: where the processor's own limits are broken, nothing after them can be believed.
    for margin in sorted(plan.margins, key=lambda m: m.cycle != "bus clock"):
        key = margin.symbol, margin.sense
        if margin.kind == "hard" and margin.margin_ps < 0 and key not in met:
            met.add(key)
            broken.append(_limit(margin))
    broken += [_arbitration(one) for one in plan.arbitration if one.margin_ps < 0]
    short = plan.refresh.any_age_ps - plan.refresh.interval_ps
    if short > 0:
        broken.append(_refresh(plan, short))
    return tuple(broken)


def _time(ps: int | None) -> str:
    """Nanoseconds, or microseconds from ten on, to a tenth; away from zero, so that a shortfall never reads as none."""
    if ps is None:
        return "nothing"
    unit, name = (1_000, "ns") if abs(ps) < 10_000_000 else (1_000_000, "us")
    tenths = -(-abs(ps) * 10 // unit)
    return f"{'-' if ps < 0 else ''}{tenths // 10}.{tenths % 10} {name}"


def _where(margin: Margin) -> str:
    return f"{margin.cycle}, then {margin.neighbour}" if margin.neighbour else margin.cycle


def _limit(margin: Margin) -> str:
    lower = margin.sense == "min"
    has = margin.earliest_ps if lower else margin.latest_ps
    asked = "at least" if lower else "at most"
    mends = _MENDS.get(margin.symbol, (_FASTER_CHIP, _FINER, _SLOWER_BUS)) if lower or margin.symbol in _MENDS else ()
    if (margin.symbol, margin.cycle) == ("tASR", "any access"):
        mends = _MENDS_ANY_ROW
    what = margin.note.split(";")[0]
    text = (
        f"{margin.symbol} ({_where(margin)}): {what or 'the limit'} must be {asked} {_time(margin.required_ps)} "
        f"({margin.source}) and can be {_time(has)}: {_time(-margin.margin_ps)} {'short' if lower else 'too long'}. "
    )
    return f"{text}Would mend it: {', or '.join(mends or _MENDS_MAXIMUM)}."


def _arbitration(one: ArbitrationSum) -> str:
    line = "BUSREQ" if "grant" in one.event else "RESET"
    unwired = "wired" in one.notice
    mends = [f"wire {line} to the device, which rises earlier"] if unwired else [_FINER, _FASTER_CHIP, _SLOWER_BUS]
    return (
        f"{one.event}: after {one.notice}, a refresh of our own may still run {_time(-one.margin_ps)} into the next "
        f"access. Would mend it: {', or '.join(mends)}."
    )


def _refresh(plan: Plan, short_ps: int) -> str:
    interval = _time(plan.refresh.interval_ps)
    return (
        f"refresh: a row can wait {_time(short_ps)} longer than the {interval} the chip allows. "
        "Would mend it: standby own-timer, or a limit on grant and reset, or a faster device clock."
    )
