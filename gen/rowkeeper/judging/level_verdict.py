"""Levels as findings of a verdict: one per kind of wire, and one for each wire that no sheet lets us judge.

Takes `Levels`; gives findings. A wire without a figure on one side was not judged, so it did not run. An open-drain
output has its high level from the pull-up that the parts list must name. The oscillator of the device clock is bought
with the device's own levels, and only its supply is judged. Must not know how a level was found.
"""

from collections.abc import Iterable

from rowkeeper.contract import Finding, LevelMargin, Levels, Status

__all__ = ["level_findings"]

_CLOCK = "clk"


def level_findings(levels: Levels) -> tuple[Finding, ...]:
    """The worst wire of each pin class."""
    judged = [wire for wire in levels.wires if _least(wire) is not None or not wire.holds]
    if not judged:
        return (Finding("level", "levels", Status.NOT_RUN, "no wire has figures on both sides"),)
    classes = dict.fromkeys(wire.pin_class for wire in judged)
    found = [_finding(name, [wire for wire in judged if wire.pin_class == name]) for name in classes]
    return (*found, *(_open(wire) for wire in levels.wires if _half_known(wire)))


def _half_known(wire: LevelMargin) -> bool:
    known = (wire.low_margin_mv,) if wire.pulled_up is not None else (wire.high_margin_mv, wire.low_margin_mv)
    return wire.net != _CLOCK and None in known


def _open(wire: LevelMargin) -> Finding:
    side = "high" if wire.high_margin_mv is None else "low"
    detail = f"no figure for the {side} level of {wire.driver} to {wire.receiver}"
    return Finding("level", f"{wire.net}: {wire.driver} to {wire.receiver}", Status.NOT_RUN, detail)


def _least(wire: LevelMargin) -> int | None:
    return min((m for m in (wire.high_margin_mv, wire.low_margin_mv) if m is not None), default=None)


def _rank(wire: LevelMargin) -> int:
    least = _least(wire)
    faults = [-wire.over_mv] * bool(wire.over_mv) + [-1] * (wire.pulled_up is False)
    return min([0 if least is None else least, *faults])


def _finding(name: str, wires: Iterable[LevelMargin]) -> Finding:
    chosen = list(wires)
    worst = min(chosen, key=_rank)
    memory = "; rests on a figure from memory" if any(wire.from_memory for wire in chosen) else ""
    over = f", pin driven {worst.over_mv} mV beyond its absolute maximum" if worst.over_mv else ""
    over += ", open drain without a pull-up" if worst.pulled_up is False else ""
    detail = f"worst of {len(chosen)} wires: {worst.net}, {worst.driver} to {worst.receiver}, {_least(worst)} mV{over}"
    status = Status.PASSED if all(wire.holds for wire in chosen) else Status.FAILED
    return Finding("level", f"{name} levels", status, detail + memory)
