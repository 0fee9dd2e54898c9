"""A table of up to four inputs as a few gates: what a logic cell of the device computes.

Takes a table, bit r of which is the output for the inputs' binary number r, and the nets of its inputs; gives gates
in RTLIL, of the word-level kinds that every backend of Yosys takes, one bit wide. Must not know the device.
"""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from functools import cache

__all__ = ["evaluate", "gate", "gate_lines"]


@dataclass(frozen=True, slots=True)
class _Node:
    """A gate over inputs (numbers) and other gates; kind `0`, `1` and `wire` cost nothing. `cost` counts gates."""

    kind: str
    parts: tuple["_Node | int", ...]
    cost: int


_ZERO, _ONE = _Node("0", (), 0), _Node("1", (), 0)


@cache
def _best(table: int, inputs: tuple[int, ...]) -> _Node:
    """The fewest gates that Shannon's expansion gives, over every order of the inputs."""
    full = (1 << (1 << len(inputs))) - 1
    if table in (0, full):
        return _ONE if table else _ZERO
    return min((_split(table, inputs, place) for place in range(len(inputs))), key=lambda node: node.cost)


def _split(table: int, inputs: tuple[int, ...], place: int) -> _Node:
    """The table about one input: the cheapest gate that joins its two halves."""
    rest = inputs[:place] + inputs[place + 1 :]
    full = (1 << (1 << len(rest))) - 1
    low, high = (_half(table, len(inputs), place, value) for value in (0, 1))
    if low == high:
        return _best(low, rest)
    this = _Node("wire", (inputs[place],), 0)
    if (low, high) == (0, full):
        return this
    if (low, high) == (full, 0):
        return _joined("not", this)
    if low == full ^ high:
        return _joined("xor", _best(low, rest), this)
    if low in (0, full):
        return (
            _joined("or", _best(high, rest), _joined("not", this)) if low else _joined("and", _best(high, rest), this)
        )
    if high in (0, full):
        return _joined("or", _best(low, rest), this) if high else _joined("and", _best(low, rest), _joined("not", this))
    return _joined("mux", _best(low, rest), _best(high, rest), this)


def _joined(kind: str, *parts: _Node) -> _Node:
    return _Node(kind, parts, 1 + sum(part.cost for part in parts))


def _half(table: int, inputs: int, place: int, value: int) -> int:
    """The rows of the table in which input `place` has `value`, in order."""
    rows = [row for row in range(1 << inputs) if row >> place & 1 == value]
    return sum((table >> row & 1) << i for i, row in enumerate(rows))


def evaluate(node_table: int, values: Sequence[int]) -> int:
    """The output that the chosen gates give for input `values`, for checking them against the table."""
    return _value(_best(node_table, tuple(range(len(values)))), values)


def _value(node: _Node, values: Sequence[int]) -> int:
    if node.kind in ("0", "1"):
        return int(node.kind)
    if node.kind == "wire":
        (number,) = node.parts
        return values[number] if isinstance(number, int) else 0
    a, *others = (_value(part, values) for part in node.parts if isinstance(part, _Node))
    b = others[0] if others else 0
    results = {"not": 1 - a, "and": a & b, "or": a | b, "xor": a ^ b, "mux": b if others[1:] == [1] else a}
    return results[node.kind]


def gate_lines(table: int, nets: Sequence[str], output: str) -> Iterator[str]:
    """RTLIL of the gates that drive the wire `output`, which is already declared."""
    node = _best(table, tuple(range(len(nets))))
    if node.kind in ("0", "1", "wire"):
        yield f"  connect {output} {_leaf(node, nets)}"
    else:
        yield from _cell(node, nets, output, output)


def _leaf(node: _Node, nets: Sequence[str]) -> str:
    if node.kind != "wire":
        return f"1'{node.kind}"
    (number,) = node.parts
    return nets[number] if isinstance(number, int) else ""


def _cell(node: _Node, nets: Sequence[str], output: str, name: str) -> Iterator[str]:
    inputs = []
    for pin, part in zip("abs", node.parts, strict=False):
        if not isinstance(part, _Node):
            continue
        if part.kind in ("0", "1", "wire"):
            inputs.append(_leaf(part, nets))
            continue
        inner = f"{name}{pin}"
        yield f"  wire {inner}"
        yield from _cell(part, nets, inner, inner)
        inputs.append(inner)
    yield from gate(node.kind, f"{name}$gate", inputs, output)


def gate(kind: str, name: str, inputs: Sequence[str], output: str) -> Iterator[str]:
    """RTLIL of one gate: not, and, or, xor; or mux, which gives its second input where its third is 1."""
    pins = "ABS"[: len(inputs)]
    yield f"  cell ${kind} {name}"
    if kind == "mux":
        yield "    parameter \\WIDTH 1"
    else:
        yield from (f"    parameter \\{pin}_SIGNED 0" for pin in pins)
        yield from (f"    parameter \\{pin}_WIDTH 1" for pin in (*pins, "Y"))
    yield from (f"    connect \\{pin} {net}" for pin, net in zip(pins, inputs, strict=True))
    yield f"    connect \\Y {output}"
    yield "  end"
