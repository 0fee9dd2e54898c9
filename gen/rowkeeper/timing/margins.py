"""Margins: every rule in every scene, worst case of each, with the terms that add up to it.

Takes `Facts`; gives `Margin` records and, for the planner, how each one moves with the ticks. Must not know how ticks
are chosen.
"""

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, replace
from fractions import Fraction

from rowkeeper.contract import Margin, Note, Term
from rowkeeper.reading.board import Chip
from rowkeeper.reading.figures import Mark, Source
from rowkeeper.timing.device import Facts
from rowkeeper.timing.limits import ABSENT_IS_FINE, NOT_JUDGED, Rule, asked_symbols, rules_of
from rowkeeper.timing.network import Bound
from rowkeeper.timing.scenes import Scene, chips_of, scenes

__all__ = ["Judged", "derated_ambient", "judged", "margin_notes", "spare", "worst_of"]

_DERATED = Source(Mark.SHEET, "MK4116 sheet", "p. 3 note 9")
_TRANSITION_PS = 5_000  # the sheets' own tT for AC figures


@dataclass(frozen=True, slots=True)
class Judged:
    """One margin in one case. `per_tick`: picoseconds gained by one more of each tick; `conditions`: see `Scene`."""

    margin: Margin
    events: tuple[str, str]
    case: str
    per_tick: Mapping[str, int]
    conditions: tuple[Bound, ...]


def judged(facts: Facts, *, whole: bool = False) -> list[Judged]:
    """Every rule in every scene. `whole`: the end of the window that does not decide is worked out as well."""
    found: list[Judged] = []
    for scene in scenes(facts):
        for rule in rules_of(scene, facts):
            one = _judge(scene, rule, whole)
            if one is not None:
                found.append(one)
    return found


def spare(symbol: str, situation: str, margin_ps: int, per_tick: Mapping[str, int], source: Source) -> Judged:
    """Time to spare that is no limit of a sheet: only the choice of ticks sees it, beside the margins."""
    m = Margin(symbol, situation, "", "min", "hard", 0, margin_ps, None, margin_ps, (), source, False)
    return Judged(m, (situation, symbol), "", per_tick, ())


def _judge(scene: Scene, rule: Rule, whole: bool) -> Judged | None:
    network = scene.network
    lower = rule.sense == "min"
    bound = network.earliest(rule.earlier, rule.later) if lower else network.latest(rule.earlier, rule.later)
    required = rule.required.lo_ps if lower else rule.required.hi_ps
    if rule.required.counts and rule.required.hi_ps is not None:
        required = rule.required.hi_ps
    if bound is None or required is None:
        return None
    margin = bound.total_ps - required if lower else required - bound.total_ps
    other = _other_end(scene, rule) if whole else None
    record = Margin(
        rule.symbol,
        scene.cycle,
        scene.neighbour if rule.later.startswith("next ") else "",
        rule.sense,
        rule.kind,
        required,
        bound.total_ps if lower else other,
        other if lower else bound.total_ps,
        margin,
        bound.terms,
        rule.required.source,
        _tainted(bound.terms, rule.required.source),
        "; ".join(part for part in (rule.note, scene.case) if part),
    )
    sign = 1 if lower else -1
    per_tick = {name: sign * ps for name, ps in bound.per_tick.items()}
    for name, times in rule.required.counts:
        per_tick[name] = per_tick.get(name, 0) - times * rule.required.tick_hi_ps
    return Judged(_eased(record, scene.chip), (rule.earlier, rule.later), scene.case, per_tick, scene.conditions)


def _other_end(scene: Scene, rule: Rule) -> int | None:
    """The end of the window that the limit does not ask for."""
    if rule.sense == "min":
        bound = scene.network.latest(rule.earlier, rule.later)
    else:
        bound = scene.network.earliest(rule.earlier, rule.later)
    return None if bound is None else bound.total_ps


def _tainted(terms: Iterable[Term], source: Source) -> bool:
    return source.mark is Mark.MEMORY or any(term.source.mark is Mark.MEMORY for term in terms)


def derated_ambient(cycle_ps: int) -> Fraction:
    """Highest ambient in degrees Celsius of an MK4116 at this cycle time: 70 - 9.0 x (MHz - 2.66), at most 70."""
    rate = Fraction(10**6, cycle_ps)
    return min(Fraction(70), 70 - 9 * (rate - Fraction(266, 100)))


def _eased(margin: Margin, chip: Chip) -> Margin:
    """tRC of the MK4116 is a rating: a shorter cycle lowers the ambient, until it is shorter than its parts."""
    if margin.symbol != "tRC" or "MK4116" not in margin.source.document:
        return margin
    if (margin.earliest_ps or 0) < _parts_of_cycle(chip):
        return margin
    if margin.margin_ps >= 0:
        return replace(margin, kind="reference")
    degrees = derated_ambient(margin.earliest_ps or 1)
    text = f"derated: ambient at most {_tenths(degrees)} degrees C at this cycle time ({_DERATED})"
    return replace(margin, kind="reference", note=f"{margin.note}; {text}" if margin.note else text)


def _parts_of_cycle(chip: Chip) -> int:
    """tRAS + tRP + 2 tT."""
    parts = [chip.limits[s].lo_ps or 0 for s in ("tRAS", "tRP") if s in chip.limits]
    return sum(parts) + 2 * _TRANSITION_PS


def _tenths(value: Fraction) -> str:
    """One decimal, rounded down: the safe way for a highest temperature."""
    tenths = value.numerator * 10 // value.denominator
    return f"{tenths // 10}.{tenths % 10}"


def worst_of(found: Iterable[Judged]) -> tuple[Margin, ...]:
    """The worst case of each limit in each situation, worst first; hard limits before reference points."""
    worst: dict[tuple[str, ...], Margin] = {}
    for one in found:
        m = one.margin
        key = (m.symbol, m.cycle, m.neighbour, m.sense, m.kind, m.note.split(";")[0])
        if key not in worst or m.margin_ps < worst[key].margin_ps:
            worst[key] = m
    order = sorted(worst, key=lambda k: (worst[k].kind != "hard", worst[k].margin_ps, k))
    return tuple(worst[key] for key in order)


def margin_notes(facts: Facts, margins: Iterable[Margin]) -> list[Note]:
    """Limits a sheet lacks, limits nobody judges, minima nobody publishes, derating."""
    notes: list[Note] = []
    for chip in chips_of(facts):
        lacking = [s for s in asked_symbols() if s not in chip.limits and s not in ABSENT_IS_FINE]
        if lacking:
            notes.append(Note("not in this sheet", f"{chip.name}: {', '.join(lacking)}"))
        left = [s for s in NOT_JUDGED if s in chip.limits]
        if left:
            notes.append(Note("not judged", f"{chip.name}: {', '.join(left)} (the steepness of edges on the board)"))
    margins = tuple(margins)
    terms = {t.name for m in margins for t in m.terms if t.source.mark is Mark.UNPUBLISHED}
    if terms:
        text = f"earliest taken as 0 for {', '.join(sorted(terms))}"
        notes.append(Note("no minimum published", text))
    for m in margins:
        if m.symbol == "tRC" and "derated" in m.note:
            notes.append(Note("derating", f"tRC, {m.cycle} then {m.neighbour}: {m.note}"))
    return notes
