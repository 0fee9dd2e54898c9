"""The re-check of an invariant that another engine found: start, step, safe, by z3, on the graph itself.

Takes a graph and the text of a clauses file; gives the number of clauses, or a refusal. The header decides first:
`# Inductive invariant` is one, `# Clauses of the last timeframe` is not. Must not know what is being claimed.
"""

from collections.abc import Sequence

from rowkeeper.judging.proof.aiger import Aiger
from rowkeeper.judging.proof.formula import Frames

__all__ = ["CertificateError", "certify"]

_HEADER = "# Inductive invariant"


class CertificateError(Exception):
    """Why an invariant proves nothing."""


def certify(graph: Aiger, invariant: str, bads: Sequence[int], constraints: Sequence[int]) -> int:
    """Clauses of an invariant that holds at the start, is kept by every tick and excludes the bad states."""
    if not invariant.startswith(_HEADER):
        raise CertificateError(f"the file begins with {invariant.partition(chr(10))[0]!r}, which is no invariant")
    clauses = _clauses(graph, invariant)
    roots = [*bads, *constraints, *(literal for clause in clauses for literal in clause)]
    start = Frames(graph, roots, from_start=True)
    _exclude(start, 0, clauses)
    if start.solve() is not None:
        raise CertificateError("the invariant does not hold at the start")
    step = Frames(graph, roots)
    _include(step, clauses, constraints)
    step.tick()
    _exclude(step, 1, clauses)
    if step.solve() is not None:
        raise CertificateError("a tick leads out of the invariant")
    safe = Frames(graph, roots)
    _include(safe, clauses, constraints)
    safe.require(*(safe.literal(0, bad) for bad in bads))
    if safe.solve() is not None:
        raise CertificateError("the invariant holds a bad state")
    return len(clauses)


def _include(frames: Frames, clauses: Sequence[Sequence[int]], constraints: Sequence[int]) -> None:
    for clause in clauses:
        frames.require(*(frames.literal(0, literal) for literal in clause))
    for literal in constraints:
        frames.require(frames.literal(0, literal))


def _exclude(frames: Frames, frame: int, clauses: Sequence[Sequence[int]]) -> None:
    """At least one clause is broken in this frame."""
    switches = []
    for clause in clauses:
        switch = frames.new()
        switches.append(switch)
        for literal in clause:
            frames.require(-switch, -frames.literal(frame, literal))
    frames.require(*switches)


def _clauses(graph: Aiger, invariant: str) -> list[list[int]]:
    """Cubes of the file are what never happens; each gives a clause over latches.

    ABC's `fold` adds one latch (index `latches`) that says a constraint was broken before: on legal runs it is 0.
    """
    columns: list[int] = []
    clauses: list[list[int]] = []
    for line in invariant.splitlines():
        if line.startswith(".ilb"):
            columns = [_latch(name) for name in line.split()[1:]]
        elif line and line[0] in "01-":
            clause = _clause(graph, columns, line.split()[0])
            if clause is not None:
                clauses.append(clause)
    if not clauses and ".ilb" not in invariant:
        raise CertificateError("the invariant names no latches")
    return clauses


def _latch(name: str) -> int:
    digits = name.lstrip("lo")
    if not digits.isdigit():
        raise CertificateError(f"unknown latch {name!r} in the invariant")
    return int(digits)


def _clause(graph: Aiger, columns: Sequence[int], cube: str) -> list[int] | None:
    if len(columns) != len(cube):
        raise CertificateError("a line of the invariant has the wrong length")
    clause = []
    for index, bit in zip(columns, cube, strict=True):
        if index == graph.latches:
            if bit == "1":
                return None  # satisfied: that latch is 0 on legal runs
            continue
        if index > graph.latches:
            raise CertificateError(f"latch {index} is not in the graph")
        if bit != "-":
            clause.append(2 * (graph.inputs + 1 + index) + (bit == "1"))
    return clause
