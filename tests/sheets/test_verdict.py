"""The verdict for machines: what did not run is an error there, and equal input gives equal bytes."""

import hashlib
import json
from collections.abc import Callable
from dataclasses import replace
from fractions import Fraction
from xml.etree import ElementTree

import pytest

from rowkeeper.contract import Finding, Status, Verdict
from rowkeeper.sheets.stamp import Stamp
from rowkeeper.sheets.verdict import junit_xml, manifest_json, plain_value, plan_json, verdict_json
from sheets import hostile
from sheets.records import BENCH, CLAIM, DIGEST, FIT, MIXED, PASSED, PLAN, STAMP

Golden = Callable[[str, str], None]


def test_golden_json(golden: Golden) -> None:
    """Everything of a run, keys in one order, times as whole picoseconds."""
    golden("verdict.json", verdict_json(STAMP, MIXED, PLAN, [CLAIM], [BENCH], FIT))


def test_golden_junit(golden: Golden) -> None:
    """The same run for a CI."""
    golden("junit.xml", junit_xml(STAMP, MIXED))


@pytest.mark.parametrize(("verdict", "code"), [(PASSED, 0), (MIXED, 1), (Verdict(Status.NOT_RUN, ()), 3)])
def test_exit_code_is_in_the_file(verdict: Verdict, code: int) -> None:
    """A machine need not know the rule."""
    data = json.loads(verdict_json(STAMP, verdict))
    assert (code, verdict.status.value) == (data["exit_code"], data["status"])
    assert len(verdict.findings) == sum(data["counts"].values())


def test_no_number_is_a_float() -> None:
    """A float would round, and print differently elsewhere."""

    def refuse(text: str) -> float:
        raise AssertionError(text)

    json.loads(verdict_json(STAMP, MIXED, PLAN, [CLAIM], [BENCH], FIT), parse_float=refuse)
    json.loads(plan_json(STAMP, PLAN), parse_float=refuse)
    with pytest.raises(TypeError, match="no exact JSON form for float"):
        plain_value(0.5)
    with pytest.raises(TypeError, match="no exact JSON form for Fraction"):
        plain_value(Fraction(1, 3))


def test_terms_are_in_the_margins_file() -> None:
    """`margins` for machines has every term; the verdict has the sums only."""
    margin = json.loads(plan_json(STAMP, PLAN))["plan"]["margins"][0]
    assert [term["used_ps"] for term in margin["terms"]] == [59_997, -40_002, 4_100, -12_045, -4_500]
    assert "terms" not in json.loads(verdict_json(STAMP, PASSED, PLAN))["plan"]["margins"][0]


def test_mappings_are_sorted() -> None:
    """The order in which a mapping was filled does not show."""
    assert list(plain_value({"b": 1, "a": (True, None, "x")})) == ["a", "b"]  # type: ignore[arg-type]


def _suites(text: str) -> ElementTree.Element:
    return ElementTree.fromstring(text.encode())


def _check_shape(root: ElementTree.Element) -> None:
    """The shape that the readers of JUnit files share: suites of cases, counts that add up, one outcome per case."""
    assert root.tag == "testsuites"
    totals = {"tests": 0, "failures": 0, "errors": 0}
    for suite in root:
        assert suite.tag == "testsuite"
        assert set(suite.attrib) == {"name", "tests", "failures", "errors", "skipped"}
        cases = suite.findall("testcase")
        assert len(cases) == len(suite)
        counted = {"tests": len(cases)}
        counted |= {name: len(suite.findall(f"testcase/{name[:-1]}")) for name in ("failures", "errors")}
        assert counted == {name: int(suite.attrib[name]) for name in totals}
        totals = {name: totals[name] + counted[name] for name in totals}
        for case in cases:
            assert set(case.attrib) == {"classname", "name"}
            assert len(case.findall("failure")) + len(case.findall("error")) <= 1
            assert {child.tag for child in case} <= {"failure", "error", "system-out"}
    assert totals == {name: int(root.attrib[name]) for name in totals}


@pytest.mark.parametrize("verdict", [PASSED, MIXED, Verdict(Status.NOT_RUN, ())])
def test_junit_has_the_usual_shape(verdict: Verdict) -> None:
    """Counts are right in every suite and in the whole."""
    _check_shape(_suites(junit_xml(STAMP, verdict)))


def test_not_run_is_an_error_and_failed_a_failure() -> None:
    """A CI that reads only the counts stays red in both cases."""
    root = _suites(junit_xml(STAMP, MIXED))
    assert [case.get("name") for case in root.iter("testcase") if case.find("failure") is not None] == ["tRP min"]
    errors = [case.get("name") for case in root.iter("testcase") if case.find("error") is not None]
    assert errors == ["precharge kept (netlist)", "march, all max (logic, icarus)"]


def test_an_empty_verdict_is_one_error() -> None:
    """A file without cases would pass in some CI."""
    root = _suites(junit_xml(STAMP, Verdict(Status.NOT_RUN, ())))
    assert (root.get("tests"), root.get("errors")) == ("1", "1")


@pytest.mark.parametrize("text", hostile.ALL)
def test_hostile_text_stays_text(text: str) -> None:
    """Names and details of any kind leave both files well formed and of the same shape."""
    findings = tuple(Finding("claim", text, status, text) for status in Status)
    stamp = Stamp("0.1.0", text, text, DIGEST)
    root = _suites(junit_xml(stamp, Verdict(Status.FAILED, findings)))
    _check_shape(root)
    assert {"testsuites", "testsuite", "testcase", "failure", "error", "system-out"} == {e.tag for e in root.iter()}
    data = json.loads(verdict_json(stamp, Verdict(Status.FAILED, findings)))
    assert [text] * 3 == [finding["name"] for finding in data["findings"]]


def test_manifest_lists_sums_by_name() -> None:
    """Any program can check the sums."""
    files = {"pins.csv": b"b", "logic.v": b"a", "bench/run.sh": b""}
    data = json.loads(manifest_json(STAMP, files))
    assert list(data["files"]) == ["bench/run.sh", "logic.v", "pins.csv"]
    assert hashlib.sha256(b"a").hexdigest() == data["files"]["logic.v"]
    assert data["board"]["digest"] == DIGEST
    assert manifest_json(STAMP, files) == manifest_json(STAMP, dict(reversed(files.items())))


def test_programming_file_is_a_sum_in_the_verdict() -> None:
    """The bytes themselves are in their own file."""
    fit = json.loads(verdict_json(STAMP, PASSED, fit=FIT))["fit"]
    assert hashlib.sha256(FIT.programming).hexdigest() == fit["programming_sha256"]
    absent = replace(FIT, programming=b"")
    assert json.loads(verdict_json(STAMP, PASSED, fit=absent))["fit"]["programming_sha256"] is None
