"""And-inverter graphs in the binary AIGER format (Biere, Heljanko, Wieringa: FMV report 11/2, 2011).

Takes the bytes of a binary AIGER file with a symbol table; gives records, and bytes again for the parts asked for.
Every latch starts at 0. Must not know solvers.
"""

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass

__all__ = ["Aiger", "cone", "read_aiger", "reduced", "write_aiger"]


@dataclass(frozen=True, slots=True)
class Aiger:
    """Literals: 0 is false, 1 true, 2v variable v, 2v + 1 its negation. Inputs come first, then latches, then gates."""

    inputs: int
    nexts: tuple[int, ...]
    outputs: tuple[int, ...]
    bads: tuple[int, ...]
    constraints: tuple[int, ...]
    gates: tuple[tuple[int, int], ...]
    input_names: Mapping[int, str]
    latch_names: Mapping[int, str]
    output_names: Mapping[int, str]

    @property
    def latches(self) -> int:
        return len(self.nexts)

    @property
    def first_gate(self) -> int:
        """The variable of the first gate."""
        return 1 + self.inputs + self.latches

    def output(self, name: str) -> int:
        """The literal of a one-bit output."""
        for index, found in self.output_names.items():
            if found == name:
                return self.outputs[index]
        raise KeyError(name)

    def named(self) -> dict[str, int]:
        """Literal by output name."""
        return {name: self.outputs[index] for index, name in self.output_names.items()}


def read_aiger(data: bytes) -> Aiger:
    """Read a binary AIGER file."""
    header, _, _ = data.partition(b"\n")
    kind, *numbers = header.split()
    if kind != b"aig":
        raise ValueError("not a binary AIGER file")
    counts = [int(n) for n in numbers] + [0] * 9
    _, inputs, latches, outputs, gates, bads, constraints = counts[:7]
    position = len(header) + 1
    rows: list[int] = []
    for _ in range(latches + outputs + bads + constraints):
        end = data.index(b"\n", position)
        fields = data[position:end].split()
        if len(rows) < latches and len(fields) > 1 and fields[1] != b"0":
            raise ValueError("a latch that does not start at 0")
        rows.append(int(fields[0]))
        position = end + 1
    pairs, position = _read_gates(data, position, gates, 1 + inputs + latches)
    names = _read_symbols(data[position:])
    split = [latches, latches + outputs, latches + outputs + bads]
    return Aiger(
        inputs=inputs,
        nexts=tuple(rows[: split[0]]),
        outputs=tuple(rows[split[0] : split[1]]),
        bads=tuple(rows[split[1] : split[2]]),
        constraints=tuple(rows[split[2] :]),
        gates=tuple(pairs),
        input_names=names["i"],
        latch_names=names["l"],
        output_names=names["o"],
    )


def _read_gates(data: bytes, position: int, gates: int, first: int) -> tuple[list[tuple[int, int]], int]:
    pairs = []
    for index in range(gates):
        deltas = []
        for _ in range(2):
            value = shift = 0
            while True:
                byte = data[position]
                position += 1
                value |= (byte & 0x7F) << shift
                shift += 7
                if not byte & 0x80:
                    break
            deltas.append(value)
        left = 2 * (first + index) - deltas[0]
        pairs.append((left, left - deltas[1]))
    return pairs, position


def _read_symbols(tail: bytes) -> dict[str, dict[int, str]]:
    names: dict[str, dict[int, str]] = {"i": {}, "l": {}, "o": {}, "b": {}, "c": {}}
    for line in tail.decode().splitlines():
        if line == "c":
            break
        place, _, name = line.partition(" ")
        names[place[0]][int(place[1:])] = name
    return names


def write_aiger(graph: Aiger, bads: Sequence[int], constraints: Iterable[int] = ()) -> bytes:
    """A binary AIGER file with these literals as the bad states, without outputs and names."""
    kept = tuple(constraints)
    most = graph.inputs + graph.latches + len(graph.gates)
    head = f"aig {most} {graph.inputs} {graph.latches} 0 {len(graph.gates)} {len(bads)} {len(kept)}\n"
    lines = [head, *(f"{literal}\n" for literal in (*graph.nexts, *bads, *kept))]
    body = bytearray("".join(lines).encode())
    for index, (left, right) in enumerate(graph.gates):
        high, low = max(left, right), min(left, right)
        for delta in (2 * (graph.first_gate + index) - high, high - low):
            while delta > 0x7F:
                body.append(delta & 0x7F | 0x80)
                delta >>= 7
            body.append(delta)
    return bytes(body)


def cone(graph: Aiger, literals: Iterable[int]) -> tuple[frozenset[int], frozenset[int]]:
    """Gates (variables) and latches (indices) that these literals depend on, through any number of ticks."""
    gates: set[int] = set()
    latches: set[int] = set()
    pending = [literal >> 1 for literal in literals]
    while pending:
        variable = pending.pop()
        if variable >= graph.first_gate:
            if variable not in gates:
                gates.add(variable)
                pending += [literal >> 1 for literal in graph.gates[variable - graph.first_gate]]
        elif variable > graph.inputs:
            index = variable - graph.inputs - 1
            if index not in latches:
                latches.add(index)
                pending.append(graph.nexts[index] >> 1)
    return frozenset(gates), frozenset(latches)


def reduced(graph: Aiger, literals: Iterable[int]) -> Aiger:
    """Only what these literals depend on, with every input kept and the outputs that still can be told."""
    roots = list(literals)
    gates, latches = cone(graph, roots)
    number = {0: 0} | {variable: variable for variable in range(1, graph.inputs + 1)}
    for index in sorted(latches):
        number[graph.inputs + 1 + index] = len(number)
    for variable in sorted(gates):
        number[variable] = len(number)

    def moved(literal: int) -> int:
        return 2 * number[literal >> 1] + (literal & 1)

    kept = [index for index, literal in enumerate(graph.outputs) if literal >> 1 in number]
    order = sorted(latches)
    return Aiger(
        inputs=graph.inputs,
        nexts=tuple(moved(graph.nexts[index]) for index in order),
        outputs=tuple(moved(graph.outputs[index]) for index in kept),
        bads=(),
        constraints=(),
        gates=tuple(
            (moved(left), moved(right))
            for left, right in (graph.gates[variable - graph.first_gate] for variable in sorted(gates))
        ),
        input_names=graph.input_names,
        latch_names={new: graph.latch_names.get(old, "") for new, old in enumerate(order)},
        output_names={new: graph.output_names[old] for new, old in enumerate(kept) if old in graph.output_names},
    )
