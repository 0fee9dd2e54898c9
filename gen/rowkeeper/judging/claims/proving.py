"""From a claim to its outcome: proof with certificate, or trace; cover; spoiled design; count of assertions.

Takes a Claim and RTLIL texts; gives a `contract.ClaimOutcome`. No verdict without z3's check of the graph: either the
assertions are inductive together, or PDR's invariant is re-checked. Nothing that did not run counts as passed.
"""

from collections.abc import Callable, Iterator, Mapping, Sequence
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass, replace
from typing import Literal

from rowkeeper.contract import ClaimOutcome, Design, Status
from rowkeeper.judging.claims.catalogue import Claim
from rowkeeper.judging.proof.abc import pdr, search
from rowkeeper.judging.proof.aiger import Aiger, reduced
from rowkeeper.judging.proof.certificate import CertificateError, certify
from rowkeeper.judging.proof.equality import Equality, equal
from rowkeeper.judging.proof.graphs import ProofError, build
from rowkeeper.judging.proof.induction import induct
from rowkeeper.judging.proof.simulate import from_state, idle_row, replay, state_after
from rowkeeper.judging.proof.trace import vcd_text
from rowkeeper.tools import TimedOut, ToolMissing

__all__ = ["ShortTexts", "prove", "prove_all"]

_SEARCH_TICKS = 130
_SEARCH_SECONDS = 40
_PDR_SECONDS = 60


@dataclass(frozen=True, slots=True)
class ShortTexts:
    """RTLIL of the probe view of the short design (`claims.short.shortened`), and of its spoiled variants by name."""

    probe_rtlil: str
    spoiled: Mapping[str, str]


@dataclass(frozen=True, slots=True)
class _Trace:
    """A replayed violation."""

    text: str
    vcd: str


def prove_all(
    claims: Sequence[Claim],
    probe_rtlil: str,
    subjects: Mapping[Literal["logic", "netlist"], str],
    short: ShortTexts | None,
    progress: Callable[[str], None],
    jobs: int = 2,
) -> tuple[ClaimOutcome, ...]:
    """Every claim on every subject, `jobs` at a time; outcomes in the order of subjects, then claims.

    The claims are proved on the probe view. They hold for a subject because its outputs equal those of the probe view
    in every tick, which is one more proof per subject, with a certificate of its own.
    """
    names = sorted(subjects)
    design = claims[0].design
    with ThreadPoolExecutor(max_workers=jobs) as pool:
        equalities = [pool.submit(_equality, probe_rtlil, subjects[name], design) for name in names]
        proofs = [pool.submit(_told, claim, probe_rtlil, short, progress) for claim in claims]
        outcomes = [proof.result() for proof in proofs]
        found = []
        for name, waiting in zip(names, equalities, strict=True):
            equality = waiting.result()
            progress(f"{name} equals what the claims are proved on: {equality.status.value}")
            found += [_same(name, equality), *(_transferred(outcome, name, equality) for outcome in outcomes)]
        return tuple(found)


def _told(claim: Claim, probe_rtlil: str, short: ShortTexts | None, progress: Callable[[str], None]) -> ClaimOutcome:
    outcome = prove(claim, probe_rtlil, short)
    progress(f"claim {claim.name}: {outcome.status.value}")
    return outcome


def _equality(probe_rtlil: str, subject_rtlil: str, design: Design) -> Equality:
    try:
        return equal(probe_rtlil, subject_rtlil, _late_ticks(design))
    except (ProofError, ToolMissing, TimedOut) as error:
        return Equality(Status.NOT_RUN, 0, 0, str(error))


def _same(subject: Literal["logic", "netlist"], equality: Equality) -> ClaimOutcome:
    return ClaimOutcome(
        claim="same",
        sentence=f"The {subject} has the outputs of the logic that the claims are proved on, whatever comes in.",
        subject=subject,
        status=equality.status,
        assertions=equality.outputs,
        assumptions=(),
        certificate=equality.certificate,
        covered=None,
        spoiled_caught=None,
        detail=equality.detail,
        trace_vcd=equality.trace_vcd,
    )


def _transferred(outcome: ClaimOutcome, subject: Literal["logic", "netlist"], equality: Equality) -> ClaimOutcome:
    """A claim holds for a subject only with its equality."""
    if outcome.status is not Status.PASSED or equality.status is Status.PASSED:
        return replace(outcome, subject=subject)
    return replace(outcome, subject=subject, status=equality.status, detail=f"not transferred: {equality.detail}")


def prove(claim: Claim, probe_rtlil: str, short: ShortTexts | None = None) -> ClaimOutcome:
    """One claim on the logic. Without `short`, cover and spoiled design are not asked for."""
    outcome = ClaimOutcome(
        claim=claim.name,
        sentence=claim.sentence,
        subject="logic",
        status=Status.NOT_RUN,
        assertions=0,
        assumptions=claim.assumptions,
        certificate=None,
        covered=None,
        spoiled_caught=None,
    )
    try:
        outcome = _proof(outcome, claim, probe_rtlil)
        if short is not None and outcome.status is Status.PASSED:
            outcome = _guards(outcome, claim.short(), short)
    except (ProofError, ToolMissing, TimedOut) as error:
        return replace(outcome, status=Status.NOT_RUN, detail=str(error))
    return outcome


def _proof(outcome: ClaimOutcome, claim: Claim, probe_rtlil: str) -> ClaimOutcome:
    built = build(probe_rtlil, claim.harness(probe_rtlil))
    outcome = replace(outcome, assertions=built.claim_assertions)
    if built.claim_assertions != claim.assertions:
        text = f"{built.claim_assertions} assertions in the checker, {claim.assertions} announced"
        return replace(outcome, status=Status.FAILED, detail=text)
    graph = built.graph
    if claim.assumptions and not _possible(graph, claim):
        text = "with these promises of the bus the situation it is about cannot come about"
        return replace(outcome, status=Status.FAILED, detail=text)
    if claim.checker.by_pdr:
        return _by_pdr(outcome, graph, claim)
    asserted, assumed = _asserted(graph), _assumed(graph)
    if induct(graph, asserted, assumed) is None:
        text = f"{len(asserted)} assertions, inductive together"
        return replace(outcome, status=Status.PASSED, certificate=len(asserted), detail=text)
    trace = _refute(graph, claim)
    if trace is not None:
        return replace(outcome, status=Status.FAILED, detail=trace.text, trace_vcd=trace.vcd)
    return _by_pdr(outcome, graph, claim)


def _by_pdr(outcome: ClaimOutcome, graph: Aiger, claim: Claim) -> ClaimOutcome:
    """The helper assertions did not carry the proof: let PDR find an invariant of its own."""
    graph = reduced(graph, [*_claimed(graph).values(), *_assumed(graph)])
    bads, assumed = [literal ^ 1 for literal in _claimed(graph).values()], _assumed(graph)
    answer = pdr(graph, bads, assumed, _PDR_SECONDS)
    if answer.trace is not None:
        trace = _replayed(graph, answer.trace, claim.name)
        if trace is not None:
            return replace(outcome, status=Status.FAILED, detail=trace.text, trace_vcd=trace.vcd)
    if answer.invariant is None:
        return replace(outcome, status=Status.NOT_RUN, detail="neither proved nor refuted in the time given")
    try:
        clauses = certify(graph, answer.invariant, bads, assumed)
    except CertificateError as refusal:
        return replace(outcome, status=Status.NOT_RUN, detail=f"the invariant was refused: {refusal}")
    return replace(outcome, status=Status.PASSED, certificate=clauses, detail=f"invariant of {clauses} clauses")


def _guards(outcome: ClaimOutcome, claim: Claim, short: ShortTexts) -> ClaimOutcome:
    """Cover and spoiled design, on the short design."""
    built = build(short.probe_rtlil, claim.harness(short.probe_rtlil))
    cover = search(
        built.graph, [built.graph.output("cover_seen")], _assumed(built.graph), _SEARCH_TICKS, _SEARCH_SECONDS
    )
    covered = cover.trace is not None and _reaches(built.graph, cover.trace, "cover_seen")
    spoiled = short.spoiled[claim.spoiled]
    caught = _search(build(spoiled, claim.harness(spoiled)).graph, claim.name, _SEARCH_TICKS)
    outcome = replace(outcome, covered=covered, spoiled_caught=caught is not None)
    if not covered:
        return replace(outcome, status=Status.FAILED, detail="the situation it is about was not reached")
    if caught is None:
        text = f"the spoiled design {claim.spoiled!r} passes: the claim proves nothing"
        return replace(outcome, status=Status.FAILED, detail=text)
    return outcome


def _claimed(graph: Aiger) -> dict[str, int]:
    return {name: literal for name, literal in graph.named().items() if name.startswith("claim_")}


def _asserted(graph: Aiger) -> dict[str, int]:
    return {name: literal for name, literal in graph.named().items() if name.startswith(("claim_", "lemma_"))}


def _assumed(graph: Aiger) -> list[int]:
    return [literal for name, literal in graph.named().items() if name.startswith("assume_")]


def _search(graph: Aiger, name: str, ticks: int) -> _Trace | None:
    """A replayed trace from the start to a broken statement of the claim."""
    bads = [literal ^ 1 for literal in _claimed(graph).values()]
    answer = search(graph, bads, _assumed(graph), ticks, _SEARCH_SECONDS)
    return None if answer.trace is None else _replayed(graph, answer.trace, name)


def _starts(graph: Aiger, design: Design) -> Iterator[tuple[int, Aiger]]:
    """The graph from the start, and from late states that a bus at rest leads to within the assumptions."""
    yield 0, graph
    for ticks in _late_ticks(design):
        state = state_after(graph, idle_row(graph), ticks, _assumed(graph))
        if state is not None:
            yield ticks, from_state(graph, state)


def _refute(graph: Aiger, claim: Claim) -> _Trace | None:
    """A trace from the start, after the warm-up or from late ages: these lie too deep for a search from the start."""
    for ticks, start in _starts(graph, claim.design):
        bads = [literal ^ 1 for literal in _claimed(start).values()]
        answer = search(start, bads, _assumed(start), _SEARCH_TICKS, _SEARCH_SECONDS // 4)
        trace = None if answer.trace is None else _replayed(start, answer.trace, claim.name, ticks)
        if trace is not None:
            return trace
    return None


def _possible(graph: Aiger, claim: Claim) -> bool:
    """Whether the situation is reached with the real ticks, so that the assumptions leave something to prove."""
    for ticks, start in _starts(graph, claim.design):
        if ticks == 0:
            continue
        answer = search(start, [start.output("allowed_seen")], _assumed(start), _SEARCH_TICKS, _SEARCH_SECONDS // 4)
        if answer.trace is not None and _reaches(start, answer.trace, "allowed_seen"):
            return True
    return False


def _late_ticks(design: Design) -> tuple[int, ...]:
    """After the warm-up, and shortly before a refresh of our own becomes wanted and forced."""
    t = design.ticks
    warm = t.pause + (t.warm_up_cycles + 1) * (t.refresh_low + t.rest + t.row_setup)
    return warm, warm + t.standby, warm + t.forced - t.row_end


def _replayed(graph: Aiger, trace: Sequence[str], name: str, before: int = 0) -> _Trace | None:
    """The trace, run again: its assumptions must hold throughout, and a statement of the claim must break."""
    ticks = []
    for tick, values in enumerate(replay(graph, trace)):
        ticks.append(values)
        if not all(holds for key, holds in values.items() if key.startswith("assume_")):
            return None
        broken = [key for key, holds in values.items() if key.startswith("claim_") and not holds]
        if broken:
            told = ", ".join(sorted(key.removeprefix("claim_") for key in broken))
            after = f", after {before} idle ticks" if before else ""
            return _Trace(f"{told} broken at tick {tick}{after}", vcd_text(ticks, name))
    return None


def _reaches(graph: Aiger, trace: Sequence[str], output: str) -> bool:
    seen = False
    for values in replay(graph, trace):
        if not all(holds for key, holds in values.items() if key.startswith("assume_")):
            return False
        seen = seen or values[output]
    return seen
