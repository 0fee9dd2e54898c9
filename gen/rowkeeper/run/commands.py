"""What the quick commands do, from a path to an answer.

Takes paths and options; gives an `Answer`: text for stdout and an exit code. Loads neither logic nor solvers: those
are for the commands in `line`. Must not know any rule of the trade.
"""

from dataclasses import dataclass
from pathlib import Path

from rowkeeper import __version__
from rowkeeper.contract import Levels, Plan
from rowkeeper.reading import describe, read_board
from rowkeeper.reading.board import Board
from rowkeeper.run.output import UnknownNameError
from rowkeeper.run.progress import EXPECTED_S, Progress
from rowkeeper.sheets.facts import board_stamp
from rowkeeper.sheets.level_tables import levels_text
from rowkeeper.sheets.original_tables import original_text
from rowkeeper.sheets.parts_tables import catalogue_text, figures_text
from rowkeeper.sheets.plan_tables import plan_text
from rowkeeper.sheets.tables import explain_text
from rowkeeper.sheets.verdict import json_text, plain_value, plan_json
from rowkeeper.timing import default_delays, refusals, settle
from rowkeeper.timing.levels import level_refusals, levels_of
from rowkeeper.timing.original import original_report

__all__ = ["Answer", "margins", "parts", "refused_text"]


@dataclass(frozen=True, slots=True)
class Answer:
    """Text for stdout, and the exit code."""

    text: str
    code: int


def margins(board: Path, explain: str | None, routed: bool, as_json: bool, progress: Progress) -> Answer:
    """Every margin, worst first, or the terms of one limit."""
    progress.plan({name: EXPECTED_S[name] for name in ("plan", *(("fit",) if routed else ()))})
    typed = read_board(board)
    plan = _routed_plan(typed, progress) if routed else _plan(typed, progress)
    levels, original = levels_of(typed), original_report(typed, plan)
    code = 0 if plan.holds and levels.holds else 1
    if as_json:
        return Answer(plan_json(board_stamp(typed, __version__), plan, levels, original), code)
    if explain is not None:
        symbols = sorted({margin.symbol for margin in plan.margins})
        if explain not in symbols:
            raise UnknownNameError(f"no limit {explain!r} in this plan; there are {', '.join(symbols)}")
        return Answer(explain_text(plan.margins, explain), code)
    parts = [plan_text(plan), levels_text(levels), original_text(original) if original else ""]
    return Answer("\n".join(part for part in (*parts, refused_text(plan, levels)) if part), code)


def _plan(board: Board, progress: Progress) -> Plan:
    with progress.step("plan"):
        return settle(board, default_delays(board))


def _routed_plan(board: Board, progress: Progress) -> Plan:
    """Judged with the router's delays; the tools of the long commands are loaded for it."""
    from rowkeeper.run.pipeline import fitted, planned

    work = planned(board, progress)
    return fitted(work, progress).plan if work.plan.holds else work.plan


def refused_text(plan: Plan, levels: Levels | None = None) -> str:
    """What keeps a plan or a level from holding, a line each."""
    sentences = (*refusals(plan), *(level_refusals(levels) if levels else ()))
    return "".join(f"refused: {sentence}\n" for sentence in sentences)


def parts(name: str | None, as_json: bool) -> Answer:
    """The catalogue, or one entry with every figure."""
    if name is None:
        kinds = {kind: describe.catalog_rows(kind) for kind in describe.KINDS}
        return Answer(json_text(plain_value(kinds)) if as_json else catalogue_text(kinds), 0)
    if name not in describe.all_names():
        raise UnknownNameError(f"the catalogue has no {name!r}; `rowkeeper parts` lists it")
    rows = describe.figure_rows(name)
    return Answer(json_text(plain_value(rows)) if as_json else figures_text(name, rows), 0)
