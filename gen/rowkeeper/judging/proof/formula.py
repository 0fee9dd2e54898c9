"""Frames of an and-inverter graph as clauses, and z3 as their judge.

Takes an Aiger record; gives clauses of one or more ticks and the answer of z3's propositional solver. Variables of
frame `f` are numbered from `f * span`. Must not know what is being claimed.
"""

from collections.abc import Iterable

import z3

from rowkeeper.judging.proof.aiger import Aiger, cone

__all__ = ["Frames", "Model"]


class Frames:
    """Consecutive ticks of a graph. Literals of clauses are plain integers, negative for a negation."""

    def __init__(self, graph: Aiger, roots: Iterable[int], *, from_start: bool = False) -> None:
        self.graph = graph
        self._gates, self._latches = cone(graph, roots)
        self._sorted_gates = sorted(self._gates)
        self._clauses: list[str] = []
        self._most = 1
        self._frames: list[list[int]] = []
        self._clause(1)  # variable 1 is true
        if from_start:
            first = dict.fromkeys(self._latches, -1)
        else:
            first = {index: self._fresh() for index in sorted(self._latches)}
        self._add(first)

    def __len__(self) -> int:
        return len(self._frames)

    def known(self, literal: int) -> bool:
        """Whether a graph's literal is among what these frames are about."""
        return self._frames[0][literal >> 1] != 0

    def literal(self, frame: int, literal: int) -> int:
        """A graph's literal in one frame."""
        found = self._frames[frame][literal >> 1]
        if found == 0:
            raise KeyError(literal)
        return -found if literal & 1 else found

    def tick(self) -> None:
        """One frame more, its latches tied to the last one's next states."""
        last = len(self._frames) - 1
        self._add({index: self.literal(last, self.graph.nexts[index]) for index in self._latches})

    def require(self, *literals: int) -> None:
        """At least one of these holds."""
        self._clause(*literals)

    def new(self) -> int:
        """A literal of its own."""
        return self._fresh()

    def solve(self) -> "Model | None":
        """A model of all clauses, or None. Raises where z3 gives no answer."""
        context = z3.Context()
        solver = z3.SolverFor("QF_FD", ctx=context)
        solver.from_string(f"p cnf {self._most} {len(self._clauses)}\n" + "\n".join(self._clauses) + "\n")
        answer = solver.check()
        if answer == z3.unsat:
            return None
        if answer != z3.sat:
            raise RuntimeError(f"z3 gave no answer: {solver.reason_unknown()}")
        return Model(solver.model(), context)

    def _fresh(self) -> int:
        self._most += 1
        return self._most

    def _clause(self, *literals: int) -> None:
        self._clauses.append(" ".join(map(str, literals)) + " 0")

    def _add(self, latches: dict[int, int]) -> None:
        graph = self.graph
        values = [0] * (graph.first_gate + len(graph.gates))
        values[0] = -1
        for variable in range(1, graph.inputs + 1):
            values[variable] = self._fresh()
        for index, value in latches.items():
            values[graph.inputs + 1 + index] = value
        for variable in self._sorted_gates:
            left, right = graph.gates[variable - graph.first_gate]
            a = -values[left >> 1] if left & 1 else values[left >> 1]
            b = -values[right >> 1] if right & 1 else values[right >> 1]
            values[variable] = self._and(a, b)
        self._frames.append(values)

    def _and(self, a: int, b: int) -> int:
        if a == -1 or b == -1 or a == -b:
            return -1
        if a == 1 or a == b:
            return b
        if b == 1:
            return a
        c = self._fresh()
        self._clauses += [f"{-c} {a} 0", f"{-c} {b} 0", f"{c} {-a} {-b} 0"]
        return c


class Model:
    """Values of clause literals in a model."""

    def __init__(self, model: z3.ModelRef, context: z3.Context) -> None:
        self._values = {str(d): z3.is_true(model[d]) for d in model.decls()}
        self._context = context

    def value(self, literal: int) -> bool:
        if abs(literal) == 1:
            return literal > 0
        found = self._values.get(f"k!{abs(literal)}", False)
        return found if literal > 0 else not found
