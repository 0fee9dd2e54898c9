"""Proof by induction over one tick: the assertions together are their own invariant.

Takes a graph, the literals that must hold and those that may be assumed; gives None where the proof stands, or the
step that breaks it. The check is z3's, on the graph itself: start, step. Must not know what is being claimed.
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from rowkeeper.judging.proof.aiger import Aiger
from rowkeeper.judging.proof.formula import Frames

__all__ = ["Step", "induct"]


@dataclass(frozen=True, slots=True)
class Step:
    """What breaks an induction: assertions that fail, in `start` or after one `step`; values of outputs, per frame."""

    where: str
    broken: tuple[str, ...]
    values: tuple[Mapping[str, bool], ...]


def induct(graph: Aiger, asserted: Mapping[str, int], assumed: Sequence[int]) -> Step | None:
    """Each assertion holds in the first tick; where all held in one tick, all hold in the next."""
    roots = [*asserted.values(), *assumed]
    start = Frames(graph, roots, from_start=True)
    broken = _break(start, asserted, assumed, "start")
    if broken is not None:
        return broken
    step = Frames(graph, roots)
    for literal in [*asserted.values(), *assumed]:
        step.require(step.literal(0, literal))
    step.tick()
    return _break(step, asserted, assumed, "step")


def _break(frames: Frames, asserted: Mapping[str, int], assumed: Sequence[int], where: str) -> Step | None:
    last = len(frames) - 1
    for literal in assumed:
        frames.require(frames.literal(last, literal))
    frames.require(*(-frames.literal(last, literal) for literal in asserted.values()))
    model = frames.solve()
    if model is None:
        return None
    broken = tuple(name for name, literal in asserted.items() if not model.value(frames.literal(last, literal)))
    outputs = {name: literal for name, literal in frames.graph.named().items() if frames.known(literal)}
    known = [
        {name: model.value(frames.literal(f, literal)) for name, literal in outputs.items()} for f in range(len(frames))
    ]
    return Step(where, broken, tuple(known))
