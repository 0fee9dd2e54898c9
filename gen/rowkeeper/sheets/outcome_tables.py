"""Tables of what was judged for a terminal: claims, bench runs, the verdict.

Takes outcomes and a `Verdict`; gives text of at most 100 columns. What did not run is shown loudly. Must not know how
a proof or a simulation is done.
"""

from collections.abc import Sequence

from rowkeeper.contract import BenchOutcome, ClaimOutcome, Finding, Status, Verdict
from rowkeeper.sheets.columns import paragraph, table
from rowkeeper.sheets.quantities import signed_nanoseconds, time_text
from rowkeeper.sheets.tables import lines_text

__all__ = ["bench_text", "claims_text", "status_word", "verdict_line", "verdict_text"]

_WORDS = {Status.PASSED: "passed", Status.FAILED: "FAILED", Status.NOT_RUN: "NOT RUN"}
_TITLES = {
    "margin": "Margins",
    "level": "Levels",
    "arbitration": "Arbitration",
    "refresh": "Refresh",
    "claim": "Claims",
    "bench": "Bench",
    "fit": "Fit",
}


def status_word(status: Status) -> str:
    """Small letters for what passed, capitals for what needs a person."""
    return _WORDS[status]


def claims_text(outcomes: Sequence[ClaimOutcome]) -> str:
    """Every claim with its status and its sentence, then the guards against a proof that shows nothing."""
    if not outcomes:
        return "NOT RUN: no claim was put to the prover.\n"
    lines: list[str] = []
    for sentence, same in _by_sentence(outcomes).items():
        lines += [line for outcome in same for line in paragraph(_claim_line(outcome), hanging="    ")]
        lines += [*paragraph(sentence, "        "), ""]
    assumed = list(dict.fromkeys(name for outcome in outcomes for name in outcome.assumptions))
    return lines_text(lines[:-1], paragraph("Assumed of the bus: " + (", ".join(assumed) or "nothing"), hanging="    "))


def _by_sentence(outcomes: Sequence[ClaimOutcome]) -> dict[str, list[ClaimOutcome]]:
    """A claim on several subjects is one sentence."""
    found: dict[str, list[ClaimOutcome]] = {}
    for outcome in outcomes:
        found.setdefault(outcome.sentence, []).append(outcome)
    return found


def _claim_line(outcome: ClaimOutcome) -> str:
    parts = [f"{outcome.assertions} assertions", _guards(outcome), outcome.detail]
    told = "; ".join(part for part in parts if part)
    return f"{status_word(outcome.status)}  {outcome.claim} ({outcome.subject}): {told}"


def _guards(outcome: ClaimOutcome) -> str:
    """Certificate, cover and spoiled design, each with its result."""
    parts = [] if outcome.certificate is None else [f"certificate {outcome.certificate}"]
    for name, result in (("cover", outcome.covered), ("spoiled", outcome.spoiled_caught)):
        if result is not None:
            parts.append(f"{name} {'ok' if result else 'MISSED'}")
    return ", ".join(parts) or "none"


def bench_text(outcomes: Sequence[BenchOutcome]) -> str:
    """Every bench run with its status, what it checked and how much bus time it saw."""
    if not outcomes:
        return "NOT RUN: no bench was run.\n"
    rows = [
        (status_word(o.status), o.scenario, o.corner, o.subject, o.engine, str(o.checks), time_text(o.bus_ps), o.detail)
        for o in outcomes
    ]
    headings = ("status", "scenario", "corner", "subject", "engine", "checks", "bus time", "detail")
    return lines_text(table(headings, rows, right=(5, 6)))


def verdict_line(verdict: Verdict) -> str:
    """The whole verdict in one line."""
    total = len(verdict.findings)
    failed, missing = verdict.count(Status.FAILED), verdict.count(Status.NOT_RUN)
    if not total:
        return "NOT RUN: nothing was checked"
    counts = f"{verdict.count(Status.PASSED)} of {total} checks passed, {failed} failed, {missing} not run"
    return f"{status_word(verdict.status).upper()}: {counts}"


def verdict_text(verdict: Verdict) -> str:
    """Each margin, claim, bench run and fit step listed; what failed or did not run once more at the end."""
    blocks = [_block(group, verdict.findings) for group in _TITLES]
    bad = [finding for finding in verdict.findings if finding.status is not Status.PASSED]
    rule = "=" * 60
    return lines_text(*blocks, [rule, *_attention(bad), verdict_line(verdict), rule])


def _block(group: str, findings: Sequence[Finding]) -> list[str]:
    chosen = [finding for finding in findings if finding.group == group]
    if not chosen:
        return [f"{_TITLES[group]}: no check of this kind in this run"]
    if all(finding.margin_ps is None for finding in chosen):
        plain = [(status_word(f.status), f.name, f.detail) for f in chosen]
        return [_TITLES[group], *table(("status", "check", "detail"), plain)]
    rows = [(status_word(f.status), f.name, _spare(f), f.detail) for f in chosen]
    return [_TITLES[group], *table(("status", "check", "to spare, ns", "detail"), rows, right=(2,))]


def _spare(finding: Finding) -> str:
    return "" if finding.margin_ps is None else signed_nanoseconds(finding.margin_ps)


def _attention(findings: Sequence[Finding]) -> list[str]:
    texts = [f"{status_word(f.status)}: {f.group} {f.name}" + (f": {f.detail}" if f.detail else "") for f in findings]
    return [line for text in texts for line in paragraph(text, "! ", "    ")]
