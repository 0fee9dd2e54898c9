"""The verdict: every check of a run as one list, and the rule that what did not run is not passed.

Takes a plan and the outcomes of claims, bench and fit; gives a `Verdict`. A proof without an assertion or
certificate, a cover that was not reached, a spoiled design that was not caught and a bench without a check all count as
not run: they show nothing. Must not know how a margin was found or what a claim means.
"""

from collections.abc import Iterable, Sequence

from rowkeeper.contract import (
    ArbitrationSum,
    BenchOutcome,
    ClaimOutcome,
    Finding,
    FindingGroup,
    FitOutcome,
    Margin,
    Plan,
    RefreshBounds,
    Status,
    Verdict,
)

__all__ = [
    "bench_findings",
    "bench_name",
    "claim_findings",
    "claim_name",
    "fit_findings",
    "plan_findings",
    "verdict_of",
]

_REFUSED = "refused"  # topic of a note that keeps a plan from holding


def verdict_of(findings: Iterable[Finding], expected: Sequence[tuple[FindingGroup, str]] = ()) -> Verdict:
    """The verdict on `findings`; whatever is in `expected` (group, name) and was not found did not run.

    A failure outranks what did not run: the design must change either way. An empty list is not a pass.
    """
    found = tuple(findings)
    names = {(finding.group, finding.name) for finding in found}
    missing = [pair for pair in dict.fromkeys(expected) if pair not in names]
    found += tuple(Finding(group, name, Status.NOT_RUN, "asked for, and gave no outcome") for group, name in missing)
    statuses = {finding.status for finding in found}
    if Status.FAILED in statuses:
        return Verdict(Status.FAILED, found)
    passed = statuses == {Status.PASSED}
    return Verdict(Status.PASSED if passed else Status.NOT_RUN, found)


def plan_findings(plan: Plan, routed_wanted: bool = False) -> tuple[Finding, ...]:
    """Margins by symbol, arbitration sums and the refresh bound of one plan.

    `routed_wanted`: a plan that still rests on figures from before routing counts as not run.
    """
    hard = [margin for margin in plan.margins if margin.kind == "hard"]
    symbols = dict.fromkeys((margin.symbol, margin.sense) for margin in hard)
    margins = [_symbol([m for m in hard if (m.symbol, m.sense) == pair]) for pair in symbols]
    if not margins:
        margins = [Finding("margin", "all limits", Status.NOT_RUN, "no margin was computed")]
    if routed_wanted and not plan.routed:
        margins.append(Finding("margin", "routed delays", Status.NOT_RUN, "judged before routing only"))
    found = (*margins, *_refusals(plan), *map(_arbitration, plan.arbitration), _refresh(plan.refresh))
    if plan.holds or any(finding.status is Status.FAILED for finding in found):
        return found
    return (*found, Finding("margin", "the plan", Status.FAILED, "the plan says of itself that it does not hold"))


def _refusals(plan: Plan) -> list[Finding]:
    """What the plan says cannot be built, each as a failure of its own."""
    texts = [note.text for note in plan.notes if note.topic == _REFUSED]
    return [Finding("margin", f"refusal {number}", Status.FAILED, text) for number, text in enumerate(texts, 1)]


def _symbol(margins: Sequence[Margin]) -> Finding:
    worst = min(margins, key=lambda margin: margin.margin_ps)
    status = Status.PASSED if worst.margin_ps >= 0 else Status.FAILED
    mark = "; rests on a figure from memory" if any(margin.from_memory for margin in margins) else ""
    place = f"{worst.cycle}, {worst.neighbour}" if worst.neighbour else worst.cycle
    count = f"worst of {len(margins)} situations: " if len(margins) > 1 else ""
    detail = f"{count}{place}{mark}"
    return Finding("margin", f"{worst.symbol} {worst.sense}", status, detail, worst.margin_ps)


def _arbitration(total: ArbitrationSum) -> Finding:
    status = Status.PASSED if total.margin_ps >= 0 else Status.FAILED
    return Finding("arbitration", total.event, status, f"notice: {total.notice}", total.margin_ps)


def _refresh(bounds: RefreshBounds) -> Finding:
    oldest_ps = max(bounds.running_age_ps, bounds.legal_age_ps, bounds.any_age_ps)
    status = Status.PASSED if oldest_ps <= bounds.interval_ps else Status.FAILED
    return Finding("refresh", "age of the oldest row", status, f"{bounds.rows} rows", bounds.interval_ps - oldest_ps)


def claim_name(outcome: ClaimOutcome) -> str:
    """A claim and its subject, as one name."""
    return f"{outcome.claim} ({outcome.subject})"


def claim_findings(outcomes: Iterable[ClaimOutcome]) -> tuple[Finding, ...]:
    """One finding per claim and subject; a proof that shows nothing counts as not run."""
    return tuple(_claim(outcome) for outcome in outcomes)


def _claim(outcome: ClaimOutcome) -> Finding:
    if outcome.status is not Status.PASSED:
        return Finding("claim", claim_name(outcome), outcome.status, outcome.detail)
    hollow = _hollow(outcome)
    if hollow:
        return Finding("claim", claim_name(outcome), Status.NOT_RUN, hollow)
    detail = f"{outcome.assertions} assertions, certificate of {outcome.certificate} clauses re-checked"
    return Finding("claim", claim_name(outcome), Status.PASSED, detail)


def _hollow(outcome: ClaimOutcome) -> str:
    """Why a proof that succeeded shows nothing; empty where it does show something."""
    if outcome.assertions < 1:
        return "the proof held no assertion"
    if outcome.certificate is None:
        return "no second solver re-checked the proof"
    if outcome.covered is False:
        return "the situation it speaks of was never reached"
    if outcome.spoiled_caught is False:
        return "the spoiled design passed as well"
    return ""


def bench_name(outcome: BenchOutcome) -> str:
    """A bench run as one name: scenario, corner, subject and engine."""
    return f"{outcome.scenario}, {outcome.corner} ({outcome.subject}, {outcome.engine})"


def bench_findings(outcomes: Iterable[BenchOutcome]) -> tuple[Finding, ...]:
    """One finding per bench run; a run without a check counts as not run."""
    return tuple(_bench(outcome) for outcome in outcomes)


def _bench(outcome: BenchOutcome) -> Finding:
    if outcome.status is not Status.PASSED:
        return Finding("bench", bench_name(outcome), outcome.status, outcome.detail)
    if outcome.checks < 1:
        return Finding("bench", bench_name(outcome), Status.NOT_RUN, "the run made no check")
    return Finding("bench", bench_name(outcome), Status.PASSED, f"{outcome.checks} checks")


def fit_findings(outcome: FitOutcome) -> tuple[Finding, ...]:
    """One finding per step of the fit. A fit without its file, netlist or routed delays did not run to its end."""
    if outcome.status is not Status.PASSED:
        return (Finding("fit", "place and route", outcome.status, outcome.detail),)
    size = f"{outcome.cells_used} of {outcome.cells_total} cells, {outcome.fmax_mhz} MHz"
    steps = (
        ("place and route", outcome.cells_used > 0, size),
        ("constraint file", bool(outcome.constraint_text), "every port on one pin"),
        ("programming file", bool(outcome.programming), f"{len(outcome.programming)} bytes"),
        ("routed netlist", bool(outcome.netlist_verilog), "written as plain Verilog"),
        ("routed delays", outcome.delays is not None and outcome.delays.routed, "fed back into the margins"),
    )
    return tuple(_step(name, there, detail) for name, there, detail in steps)


def _step(name: str, there: bool, detail: str) -> Finding:
    if there:
        return Finding("fit", name, Status.PASSED, detail)
    return Finding("fit", name, Status.NOT_RUN, "the step gave nothing")
