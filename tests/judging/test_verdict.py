"""The rule of the verdict: failed outranks not run, and what shows nothing did not run."""

from dataclasses import replace

import pytest

from rowkeeper.contract import BenchOutcome, Finding, Note, Status
from rowkeeper.judging import verdict as v
from sheets.records import ARBITRATION, BENCH, CLAIM, FIT, PLAN, REFRESH, TASC, TRCD, TRP

GOOD = Finding("claim", "a", Status.PASSED)
BAD = Finding("claim", "b", Status.FAILED)
LOST = Finding("bench", "c", Status.NOT_RUN)


@pytest.mark.parametrize(
    ("findings", "status", "code"),
    [
        ((GOOD,), Status.PASSED, 0),
        ((GOOD, BAD), Status.FAILED, 1),
        ((GOOD, LOST), Status.NOT_RUN, 3),
        ((LOST, BAD), Status.FAILED, 1),
        ((), Status.NOT_RUN, 3),
    ],
)
def test_status_and_exit_code(findings: tuple[Finding, ...], status: Status, code: int) -> None:
    """Nothing at all is not a pass."""
    verdict = v.verdict_of(findings)
    assert (status, code) == (verdict.status, verdict.exit_code)


def test_what_was_expected_and_is_missing_did_not_run() -> None:
    """A check that silently vanished turns the verdict."""
    verdict = v.verdict_of([GOOD], expected=[("claim", "a"), ("bench", "c"), ("bench", "c")])
    assert Status.NOT_RUN is verdict.status
    assert [(f.group, f.name, f.status) for f in verdict.findings[1:]] == [("bench", "c", Status.NOT_RUN)]


def test_counts() -> None:
    """Each status is counted."""
    verdict = v.verdict_of([GOOD, BAD, LOST, LOST])
    assert [verdict.count(status) for status in Status] == [1, 1, 2]


def test_margins_are_grouped_by_limit_with_their_worst() -> None:
    """One finding per hard limit; a reference point is none."""
    better = replace(TASC, margin_ps=20_000, from_memory=False)
    findings = v.plan_findings(replace(PLAN, margins=(better, TASC, TRCD)))
    margins = [finding for finding in findings if finding.group == "margin"]
    assert [(f.name, f.status, f.margin_ps) for f in margins] == [("tASC min", Status.PASSED, 17_550)]
    assert margins[0].detail == "worst of 2 situations: memory read, after refresh; rests on a figure from memory"


def test_a_negative_margin_fails() -> None:
    """And zero passes: the limit is met exactly."""
    findings = v.plan_findings(replace(PLAN, margins=(TRP, replace(TASC, margin_ps=0))))
    assert [finding.status for finding in findings[:2]] == [Status.FAILED, Status.PASSED]


def test_no_margin_did_not_run() -> None:
    """Reference points alone are no judgement."""
    findings = v.plan_findings(replace(PLAN, margins=(TRCD,)))
    assert (findings[0].name, findings[0].status) == ("all limits", Status.NOT_RUN)


def test_routed_delays_can_be_asked_for() -> None:
    """A plan from before routing is no verdict on the device."""
    before = replace(PLAN, routed=False)
    assert Status.PASSED is v.verdict_of(v.plan_findings(before)).status
    assert Status.NOT_RUN is v.verdict_of(v.plan_findings(before, routed_wanted=True)).status
    assert Status.PASSED is v.verdict_of(v.plan_findings(PLAN, routed_wanted=True)).status


def test_arbitration_and_refresh_can_fail() -> None:
    """A refresh that is not over in time, or one row too old by a picosecond."""
    late = v.plan_findings(replace(PLAN, arbitration=(replace(ARBITRATION, margin_ps=-1),)))
    assert [f.name for f in late if f.status is Status.FAILED] == ["end of grant"]
    old = v.plan_findings(replace(PLAN, refresh=replace(REFRESH, running_age_ps=2_000_000_001)))
    assert [f.margin_ps for f in old if f.status is Status.FAILED] == [-1]


def test_refusals_fail() -> None:
    """What the plan itself refuses cannot pass, whatever its margins."""
    refused = replace(PLAN, notes=(Note("refused", "K_any is longer than the interval"), Note("other", "x")))
    failed = [f for f in v.plan_findings(refused) if f.status is Status.FAILED]
    assert [(f.name, f.detail) for f in failed] == [("refusal 1", "K_any is longer than the interval")]


def test_plan_and_verdict_never_disagree() -> None:
    """A plan that does not hold fails, and one that holds has no failure."""
    for plan in (PLAN, replace(PLAN, margins=(TRP,)), replace(PLAN, refresh=replace(REFRESH, any_age_ps=10**10))):
        assert plan.holds == all(f.status is Status.PASSED for f in v.plan_findings(plan))


def test_a_proof_that_shows_something_passes() -> None:
    """Assertions, certificate, cover and spoiled design."""
    (finding,) = v.claim_findings([CLAIM])
    assert (finding.name, finding.status) == ("precharge kept (logic)", Status.PASSED)
    assert finding.detail == "3 assertions, certificate of 41 clauses re-checked"


@pytest.mark.parametrize(
    ("change", "why"),
    [
        ({"assertions": 0}, "the proof held no assertion"),
        ({"certificate": None}, "no second solver re-checked the proof"),
        ({"covered": False}, "the situation it speaks of was never reached"),
        ({"spoiled_caught": False}, "the spoiled design passed as well"),
    ],
)
def test_a_hollow_proof_did_not_run(change: dict[str, object], why: str) -> None:
    """It succeeded, and shows nothing."""
    (finding,) = v.claim_findings([replace(CLAIM, **change)])  # type: ignore[arg-type]
    assert (Status.NOT_RUN, why) == (finding.status, finding.detail)


def test_guards_that_were_not_asked_for_do_not_count() -> None:
    """The netlist repeats the proofs, not their spoiled designs."""
    (finding,) = v.claim_findings([replace(CLAIM, covered=None, spoiled_caught=None)])
    assert Status.PASSED is finding.status


def test_a_failed_claim_keeps_its_detail() -> None:
    """The reason reaches the verdict."""
    (finding,) = v.claim_findings([replace(CLAIM, status=Status.FAILED, detail="broken at clock 89")])
    assert (finding.status, finding.detail) == (Status.FAILED, "broken at clock 89")


def test_a_bench_without_a_check_did_not_run() -> None:
    """However long it ran."""
    lost: BenchOutcome = replace(BENCH, status=Status.FAILED, detail="row too old")
    findings = v.bench_findings([BENCH, replace(BENCH, checks=0), lost])
    assert [finding.status for finding in findings] == [Status.PASSED, Status.NOT_RUN, Status.FAILED]
    assert findings[0].name == "march, all max (logic, compiled)"


def test_a_fit_lists_its_steps() -> None:
    """A step that gave nothing did not run."""
    findings = v.fit_findings(FIT)
    assert [finding.name for finding in findings] == [
        "place and route",
        "constraint file",
        "programming file",
        "routed netlist",
        "routed delays",
    ]
    assert [finding.name for finding in findings if finding.status is Status.NOT_RUN] == ["routed delays"]
    (failed,) = v.fit_findings(replace(FIT, status=Status.FAILED, detail="does not fit"))
    assert (failed.status, failed.detail) == (Status.FAILED, "does not fit")
