"""Tables of what was judged: everything listed, what did not run loudly."""

from collections.abc import Callable
from dataclasses import replace

from hypothesis import given, settings
from hypothesis import strategies as st

from rowkeeper.contract import BenchOutcome, ClaimOutcome, Finding, Status, Verdict
from rowkeeper.sheets import outcome_tables as t
from rowkeeper.sheets.columns import WIDTH, shown_width
from sheets.records import BENCH, CLAIM, MIXED, PASSED

Golden = Callable[[str, str], None]
TEXT = st.text(max_size=150)


def _widest(*texts: str) -> int:
    return max((shown_width(line) for text in texts for line in text.splitlines()), default=0)


def test_golden_verdicts(golden: Golden) -> None:
    """A run that passed and one that did not."""
    golden("verdict.txt", t.verdict_text(PASSED) + "\n" + t.verdict_text(MIXED))


def test_golden_claims_and_bench(golden: Golden) -> None:
    """Status, subject, guards and sentence of each claim; each bench run."""
    lost = replace(
        CLAIM, subject="netlist", status=Status.NOT_RUN, certificate=None, covered=False, spoiled_caught=None
    )
    late = replace(BENCH, engine="icarus", status=Status.FAILED, detail="row 0x37 too old at 1.2 ms")
    golden("judged.txt", t.claims_text([CLAIM, lost]) + "\n" + t.bench_text([BENCH, late]))


@settings(max_examples=40)
@given(
    st.lists(st.builds(Finding, group=st.sampled_from(["margin", "claim"]), name=TEXT, status=st.sampled_from(Status),
                       detail=TEXT, margin_ps=st.none() | st.integers())),
    st.lists(st.builds(ClaimOutcome, claim=TEXT, sentence=TEXT, assumptions=st.tuples(TEXT), detail=TEXT), max_size=3),
    st.lists(st.builds(BenchOutcome, scenario=TEXT, corner=TEXT, detail=TEXT), max_size=3),
)  # fmt: skip
def test_outcome_tables_keep_to_the_page(
    findings: list[Finding], claims: list[ClaimOutcome], runs: list[BenchOutcome]
) -> None:
    """No scrolling sideways."""
    verdict = Verdict(Status.FAILED, tuple(findings))
    assert _widest(t.verdict_text(verdict), t.claims_text(claims), t.bench_text(runs)) <= WIDTH


def test_every_finding_is_listed() -> None:
    """Each claim, margin and bench run by name."""
    text = t.verdict_text(MIXED)
    assert [finding.name for finding in MIXED.findings if finding.name not in text] == []


def test_what_needs_a_person_is_repeated_at_the_end() -> None:
    """The last lines are enough to know what happened."""
    end = t.verdict_text(MIXED).split("=" * 60)[1]
    assert "! FAILED: margin tRP min" in end
    assert "! NOT RUN: bench march, all max (logic, icarus): iverilog is not installed" in end
    assert "FAILED: 1 of 4 checks passed, 1 failed, 2 not run" in end
    assert "!" not in t.verdict_text(PASSED)


def test_nothing_judged_is_loud() -> None:
    """An empty list is not a pass."""
    assert t.claims_text([]).startswith("NOT RUN")
    assert t.bench_text([]).startswith("NOT RUN")
    assert t.verdict_line(Verdict(Status.NOT_RUN, ())) == "NOT RUN: nothing was checked"


def test_an_absent_group_is_named() -> None:
    """A verdict without bench runs says that there were none."""
    assert "Refresh: no check of this kind in this run" in t.verdict_text(MIXED)
