"""The verdict for machines: verdict.json, junit.xml, manifest.json, and any record as JSON.

Takes the records of a run; gives text. Keys keep one order, times are whole picoseconds, and there is no date, host or
path. In JUnit what did not run is an <error>, so that no CI counts it as passed. Must not know the rule of the verdict.
"""

import hashlib
import json
from collections.abc import Mapping, Sequence
from dataclasses import fields, is_dataclass
from enum import Enum
from xml.etree import ElementTree

from rowkeeper.contract import (
    ArbitrationSum,
    BenchOutcome,
    ClaimOutcome,
    Finding,
    FitOutcome,
    Levels,
    Margin,
    OriginalReport,
    Plan,
    RefreshBounds,
    Status,
    Term,
    Verdict,
)
from rowkeeper.sheets.plain import one_line
from rowkeeper.sheets.stamp import Stamp

__all__ = ["json_text", "junit_xml", "manifest_json", "plain_value", "plan_json", "verdict_json"]

Json = None | bool | int | str | list["Json"] | dict[str, "Json"]
_TOOL = "rowkeeper"


def json_text(value: Json) -> str:
    """JSON with keys in the order given, ASCII only, ended by a newline."""
    return json.dumps(value, indent=1, ensure_ascii=True, allow_nan=False) + "\n"


def plain_value(value: object) -> Json:
    """A record as JSON: fields in their order, mappings by key, exact numbers only."""
    if value is None or isinstance(value, bool | int | str):
        return value
    if isinstance(value, Enum):
        return str(value.value)
    if is_dataclass(value) and not isinstance(value, type):
        return {field.name: plain_value(getattr(value, field.name)) for field in fields(value)}
    if isinstance(value, Mapping):
        return {str(key): plain_value(value[key]) for key in sorted(value)}
    if isinstance(value, tuple | list):
        return [plain_value(item) for item in value]
    raise TypeError(f"no exact JSON form for {type(value).__name__}")


def _origin(stamp: Stamp) -> dict[str, Json]:
    board: Json = {"slug": stamp.board, "revision": stamp.revision, "digest": stamp.digest}
    return {"tool": {"name": _TOOL, "version": stamp.version}, "board": board}


def plan_json(stamp: Stamp, plan: Plan, levels: Levels | None = None, original: OriginalReport | None = None) -> str:
    """A plan with every term of every margin; the levels and what the board had before, where they are known."""
    more = {"levels": levels, "original": original}
    known = {name: plain_value(record) for name, record in more.items() if record is not None}
    margins: Json = [_with_ends(margin) for margin in plan.margins]
    sums: Json = [_sum_with_ends(one) for one in plan.arbitration]
    refresh: Json = _without(plan.refresh, "terms") | {"terms": _ends(plan.refresh.terms)}
    body = _without(plan) | {"margins": margins, "arbitration": sums, "refresh": refresh}
    return json_text(_origin(stamp) | {"plan": body} | known)


def _with_ends(margin: Margin) -> Json:
    return _without(margin) | {"terms": _ends(margin.terms)}


def _sum_with_ends(one: ArbitrationSum) -> Json:
    return _without(one) | {"available": _ends(one.available), "needed": _ends(one.needed)}


def _ends(terms: Sequence[Term]) -> Json:
    """Terms, each with the end of its promise that was used."""
    return [_without(term) | {"used_end": _end(term)} for term in terms]


def _end(term: Term) -> str:
    if term.lo_ps == term.hi_ps:
        return "both"
    return "low" if term.lo_ps is not None and abs(term.used_ps) == abs(term.lo_ps) else "high"


def verdict_json(
    stamp: Stamp,
    verdict: Verdict,
    plan: Plan | None = None,
    claims: Sequence[ClaimOutcome] = (),
    bench: Sequence[BenchOutcome] = (),
    fit: FitOutcome | None = None,
) -> str:
    """The verdict with every finding, margin, claim and bench run; a part that is absent is null or empty."""
    counts: Json = {status.value.replace(" ", "_"): verdict.count(status) for status in Status}
    head = _origin(stamp) | {"status": verdict.status.value, "exit_code": verdict.exit_code, "counts": counts}
    body: dict[str, Json] = {
        "findings": plain_value(verdict.findings),
        "plan": None if plan is None else _plan(plan),
        "claims": [_without(claim, "trace_vcd") for claim in claims],
        "bench": plain_value(tuple(bench)),
        "fit": None if fit is None else _fit(fit),
    }
    return json_text(head | body)


def _plan(plan: Plan) -> Json:
    """A plan without the terms of its margins, which `plan_json` has."""
    return _without(plan, "margins") | {"margins": [_without(margin, "terms") for margin in plan.margins]}


def _without(
    record: Plan | Margin | ClaimOutcome | Term | ArbitrationSum | RefreshBounds, *names: str
) -> dict[str, Json]:
    """A record as JSON, some of its fields left out: traces have files of their own."""
    chosen = [field.name for field in fields(record) if field.name not in names]
    return {name: plain_value(getattr(record, name)) for name in chosen}


def _fit(fit: FitOutcome) -> Json:
    names = ("status", "cells_used", "cells_total", "fmax_mhz", "detail")
    sizes: dict[str, Json] = {name: plain_value(getattr(fit, name)) for name in names}
    return sizes | {"programming_sha256": hashlib.sha256(fit.programming).hexdigest() if fit.programming else None}


def junit_xml(stamp: Stamp, verdict: Verdict) -> str:
    """One testcase per finding, one testsuite per group; failed is <failure>, not run is <error>."""
    root = ElementTree.Element("testsuites", {"name": f"{_TOOL} {one_line(stamp.board)}"})
    _count(root, verdict.findings or (_NOTHING,))
    for group in dict.fromkeys(finding.group for finding in verdict.findings or (_NOTHING,)):
        chosen = [finding for finding in verdict.findings or (_NOTHING,) if finding.group == group]
        suite = ElementTree.SubElement(root, "testsuite", {"name": group})
        _count(suite, chosen)
        for finding in chosen:
            _case(suite, f"{_TOOL}.{_class_part(stamp.board)}.{group}", finding)
    ElementTree.indent(root, " ")
    return '<?xml version="1.0" encoding="UTF-8"?>\n' + ElementTree.tostring(root, encoding="unicode") + "\n"


# A file without a single case would count as passed in some CI.
_NOTHING = Finding("fit", "the run", Status.NOT_RUN, "nothing was checked")


def _count(element: ElementTree.Element, findings: Sequence[Finding]) -> None:
    statuses = [finding.status for finding in findings]
    element.set("tests", str(len(statuses)))
    element.set("failures", str(statuses.count(Status.FAILED)))
    element.set("errors", str(statuses.count(Status.NOT_RUN)))
    if element.tag == "testsuite":
        element.set("skipped", "0")


def _case(suite: ElementTree.Element, class_name: str, finding: Finding) -> None:
    case = ElementTree.SubElement(suite, "testcase", {"classname": class_name, "name": one_line(finding.name)})
    spare = "" if finding.margin_ps is None else f" [margin {finding.margin_ps} ps]"
    text = one_line(finding.detail + spare)
    if finding.status is Status.PASSED:
        if text:
            ElementTree.SubElement(case, "system-out").text = text
        return
    tag, kind = ("failure", "failed") if finding.status is Status.FAILED else ("error", "not run")
    ElementTree.SubElement(case, tag, {"type": kind, "message": text or kind}).text = text or kind


def _class_part(text: str) -> str:
    """A dot would open a new level of the class name."""
    return one_line(text).replace(".", "_")


def manifest_json(stamp: Stamp, files: Mapping[str, bytes]) -> str:
    """Name to SHA-256 of every file of the output, by name."""
    sums: Json = {name: hashlib.sha256(files[name]).hexdigest() for name in sorted(files)}
    return json_text(_origin(stamp) | {"files": sums})
