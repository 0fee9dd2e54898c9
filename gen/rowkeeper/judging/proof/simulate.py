"""Runs an and-inverter graph tick by tick: to replay a trace, and to reach a late state before a search.

Takes a graph and input bits per tick; gives the values of its outputs and its state. A trace counts only after it has
been replayed here. Must not know what is being claimed.
"""

from collections.abc import Callable, Iterable, Iterator, Mapping, Sequence
from dataclasses import replace

from rowkeeper.judging.proof.aiger import Aiger, cone

__all__ = ["from_state", "idle_row", "replay", "state_after"]


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


def state_after(graph: Aiger, row: str, ticks: int, holding: Sequence[int] = ()) -> list[int] | None:
    """The latches after so many ticks with the same inputs; None where one of `holding` fails on the way."""
    step = _compiled(graph, tuple(holding))
    state, inputs = [0] * graph.latches, [int(bit) for bit in row]
    for _ in range(ticks):
        state, held = step(state, inputs)
        if not all(held):
            return None
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
    """One tick as a Python function with a local variable per gate."""
    gates, _ = cone(graph, [*graph.nexts, *watched])
    given = [f"v{variable}" for variable in range(1, graph.first_gate)]
    lines = ["def step(state, inputs):", " v0 = 0"]
    if given:
        lines.append(f" {', '.join(given)}, = [*inputs, *state]")
    for variable in sorted(gates):
        left, right = graph.gates[variable - graph.first_gate]
        lines.append(f" v{variable} = {_term(left)} & {_term(right)}")
    lines.append(f" return [{', '.join(map(_term, graph.nexts))}], [{', '.join(map(_term, watched))}]")
    scope: dict[str, _Step] = {}
    exec("\n".join(lines), scope)  # text built from integers only
    return scope["step"]


def _term(literal: int) -> str:
    return f"(v{literal >> 1} ^ 1)" if literal & 1 else f"v{literal >> 1}"
