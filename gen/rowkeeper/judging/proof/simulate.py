"""Runs an and-inverter graph tick by tick: to replay a trace, and to reach a late state before a search.

Takes a graph and input bits per tick; gives the values of its outputs and its state. A trace counts only after it has
been replayed here. Must not know what is being claimed.
"""

from collections.abc import Callable, Iterable, Iterator, Mapping
from dataclasses import replace

from rowkeeper.judging.proof.aiger import Aiger, cone

__all__ = ["from_state", "idle_row", "replay", "state_after"]

_CHUNK = 500


def replay(graph: Aiger, trace: Iterable[str]) -> Iterator[Mapping[str, bool]]:
    """Outputs by name in each tick of a trace of input bits."""
    named = graph.named()
    step = _compiled(graph, tuple(named.values()))
    state = [0] * graph.latches
    for row in trace:
        state, values = step(state, [int(bit) for bit in row])
        yield {name: bool(value) for name, value in zip(named, values, strict=True)}


def idle_row(graph: Aiger) -> str:
    """Inputs of a bus at rest: every active-low line high, everything else 0. A miter calls its inputs `in_...`."""
    names = [graph.input_names.get(index, "") for index in range(graph.inputs)]
    return "".join("1" if name.endswith("_n") and not name.startswith("late_") else "0" for name in names)


def state_after(graph: Aiger, row: str, ticks: int) -> list[int]:
    """The latches after so many ticks with the same inputs."""
    step = _compiled(graph, ())
    state, inputs = [0] * graph.latches, [int(bit) for bit in row]
    for _ in range(ticks):
        state, _ = step(state, inputs)
    return state


def from_state(graph: Aiger, state: list[int]) -> Aiger:
    """The same graph started in `state`: latches that are 1 there are kept inverted, so that all start at 0."""
    first = graph.inputs + 1
    flip = [0] * (graph.first_gate + len(graph.gates))
    for index, value in enumerate(state):
        flip[first + index] = value

    def turned(literal: int) -> int:
        return literal ^ flip[literal >> 1]

    return replace(
        graph,
        nexts=tuple(turned(literal) ^ state[index] for index, literal in enumerate(graph.nexts)),
        outputs=tuple(map(turned, graph.outputs)),
        gates=tuple((turned(left), turned(right)) for left, right in graph.gates),
    )


_Step = Callable[[list[int], list[int]], tuple[list[int], list[int]]]


def _compiled(graph: Aiger, watched: tuple[int, ...]) -> _Step:
    """One tick as Python functions over a list of values, in pieces that the compiler takes easily."""
    gates, _ = cone(graph, [*graph.nexts, *watched])
    order = sorted(gates)
    pieces = []
    for at in range(0, len(order), _CHUNK):
        lines = ["def piece(v):"]
        for variable in order[at : at + _CHUNK]:
            left, right = graph.gates[variable - graph.first_gate]
            lines.append(f" v[{variable}] = {_term(left)} & {_term(right)}")
        scope: dict[str, Callable[[list[int]], None]] = {}
        exec("\n".join(lines), scope)  # text built from integers only
        pieces.append(scope["piece"])
    span = graph.first_gate + len(graph.gates)

    def step(state: list[int], inputs: list[int]) -> tuple[list[int], list[int]]:
        values = [0] * span
        values[1 : graph.first_gate] = inputs + state
        for piece in pieces:
            piece(values)
        following = [values[literal >> 1] ^ (literal & 1) for literal in graph.nexts]
        return following, [values[literal >> 1] ^ (literal & 1) for literal in watched]

    return step


def _term(literal: int) -> str:
    return f"(v[{literal >> 1}] ^ 1)" if literal & 1 else f"v[{literal >> 1}]"
