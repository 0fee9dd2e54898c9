"""The published schemas of margins and verdict: real outputs keep them, and a margin can be recomputed from its terms.

Outside judge: jsonschema.
"""

import copy
import json
from dataclasses import fields
from importlib import resources
from pathlib import Path
from typing import Any

import jsonschema
import pytest

from rowkeeper.contract import BenchOutcome, ClaimOutcome, Finding, Margin, Plan, RefreshBounds, Term, TickTable
from rowkeeper.judging.verdict import plan_findings, verdict_of
from rowkeeper.reading import read_board
from rowkeeper.reading.figures import Mark
from rowkeeper.sheets.facts import board_stamp
from rowkeeper.sheets.verdict import plan_json, verdict_json
from rowkeeper.timing import default_delays, settle
from sheets.records import BENCH, CLAIM, FIT, MIXED, PASSED, PLAN, STAMP

BOARDS = Path(__file__).parents[2] / "boards"
FOLDER = resources.files("rowkeeper") / "catalog"
MARGINS = json.loads((FOLDER / "margins.schema.json").read_text(encoding="utf-8"))
VERDICT = json.loads((FOLDER / "verdict.schema.json").read_text(encoding="utf-8"))


@pytest.fixture(scope="module", params=["loom-16k", "kiln-64k"])
def printed(request: pytest.FixtureRequest) -> dict[str, Any]:
    """What `margins --json` prints of a shipped board."""
    board = read_board(BOARDS / f"{request.param}.yaml")
    data: dict[str, Any] = json.loads(plan_json(board_stamp(board, "0"), settle(board, default_delays(board))))
    return data


@pytest.mark.parametrize("schema", [MARGINS, VERDICT])
def test_schemas_are_schemas(schema: dict[str, Any]) -> None:
    """By the rules of their own dialect."""
    jsonschema.Draft202012Validator.check_schema(schema)


def test_real_margins_keep_the_schema(printed: dict[str, Any]) -> None:
    """Every shipped board."""
    jsonschema.validate(printed, MARGINS)


@pytest.mark.parametrize(
    "text",
    [verdict_json(STAMP, MIXED, PLAN, [CLAIM], [BENCH], FIT), verdict_json(STAMP, PASSED)],
    ids=["everything", "nothing but findings"],
)
def test_verdicts_keep_the_schema(text: str) -> None:
    """With every part, and with none."""
    jsonschema.validate(json.loads(text), VERDICT)


@pytest.mark.parametrize("name", ["loom-16k", "kiln-64k"])
def test_the_verdict_of_a_real_plan_keeps_the_schema(name: str) -> None:
    """Its margins, sums and refresh, with everything that was not run."""
    board = read_board(BOARDS / f"{name}.yaml")
    plan = settle(board, default_delays(board))
    found = verdict_of(plan_findings(plan), [("claim", "every claim"), ("bench", "every bench")])
    jsonschema.validate(json.loads(verdict_json(board_stamp(board, "0"), found, plan)), VERDICT)


def test_a_margin_is_recomputed_from_its_terms(printed: dict[str, Any]) -> None:
    """Add up the terms, compare with what is required: nothing else is needed."""
    for margin in printed["plan"]["margins"]:
        total = sum(term["used_ps"] for term in margin["terms"])
        lower = margin["sense"] == "min"
        assert (margin["earliest_ps"] if lower else margin["latest_ps"]) == total, margin
        assert margin["margin_ps"] == (total - margin["required_ps"] if lower else margin["required_ps"] - total)


def test_a_term_is_one_end_of_its_promise(printed: dict[str, Any]) -> None:
    """`used_end` says which; a lower end that nobody publishes says so."""
    for margin in printed["plan"]["margins"]:
        for term in margin["terms"]:
            ends = {"low": term["lo_ps"], "high": term["hi_ps"], "both": term["lo_ps"]}
            assert abs(term["used_ps"]) == abs(ends[term["used_end"]] or 0), term


def test_the_sums_add_up(printed: dict[str, Any]) -> None:
    """What is available less what is needed."""
    for one in printed["plan"]["arbitration"]:
        available, needed = (sum(term["used_ps"] for term in one[side]) for side in ("available", "needed"))
        assert one["margin_ps"] == available - needed


def test_memory_taints(printed: dict[str, Any]) -> None:
    """A margin is marked where the limit or a term is from memory, and only there."""
    for margin in printed["plan"]["margins"]:
        marks = [margin["source"]["mark"], *(term["source"]["mark"] for term in margin["terms"])]
        assert margin["from_memory"] == ("from memory" in marks)


@pytest.mark.parametrize(
    ("schema", "name", "record", "less", "more"),
    [
        (MARGINS, "margin", Margin, set(), set()),
        (MARGINS, "term", Term, set(), {"used_end"}),
        (MARGINS, "ticks", TickTable, set(), set()),
        (MARGINS, "refresh", RefreshBounds, set(), set()),
        (VERDICT, "limit", Margin, {"terms"}, set()),
        (VERDICT, "term", Term, set(), set()),
        (VERDICT, "finding", Finding, set(), set()),
        (VERDICT, "claim", ClaimOutcome, {"trace_vcd"}, set()),
        (VERDICT, "bench", BenchOutcome, set(), set()),
    ],
)
def test_schema_has_every_field(
    schema: dict[str, Any], name: str, record: type, less: set[str], more: set[str]
) -> None:
    """A field that is added to a record is added to the schema, or this fails."""
    expected = {field.name for field in fields(record)} - less | more  # type: ignore[arg-type]
    assert expected == set(schema["$defs"][name]["properties"]) == set(schema["$defs"][name]["required"])


def test_the_plan_has_every_field() -> None:
    """In both files."""
    expected = {field.name for field in fields(Plan)}
    assert expected == set(MARGINS["properties"]["plan"]["properties"])
    assert expected == set(VERDICT["properties"]["plan"]["anyOf"][1]["properties"])


def test_every_mark_is_in_the_schema() -> None:
    """How far a figure can be trusted: the words are those of the catalogue."""
    assert [mark.value for mark in Mark] == MARGINS["$defs"]["source"]["properties"]["mark"]["enum"]


@pytest.mark.parametrize("damage", ["float", "text", "missing", "unknown"])
def test_damage_is_refused(printed: dict[str, Any], damage: str) -> None:
    """A float, a text for a number, a field less or a field more."""
    wrong = copy.deepcopy(printed)
    margin = wrong["plan"]["margins"][0]
    if damage == "missing":
        del margin["terms"]
    elif damage == "unknown":
        margin["confidence"] = 1
    else:
        margin["margin_ps"] = {"float": 0.5, "text": "12"}[damage]
    with pytest.raises(jsonschema.ValidationError):
        jsonschema.validate(wrong, MARGINS)
