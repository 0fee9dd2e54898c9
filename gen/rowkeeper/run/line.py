"""The long commands: everything that generates, fits, proves or simulates.

Takes paths and options; gives an `Answer`. Loads the logic, the solvers and the tools, which the quick commands do
without. Must not know any rule of the trade.
"""

from pathlib import Path

from rowkeeper import __version__
from rowkeeper.contract import Verdict
from rowkeeper.reading import read_board
from rowkeeper.run.artefacts import artefacts, sheet_artefacts
from rowkeeper.run.commands import Answer, refused_text
from rowkeeper.run.output import write_all, write_text
from rowkeeper.run.pipeline import Work, benched, fitted, planned, proved, verdict
from rowkeeper.run.progress import EXPECTED_S, Progress
from rowkeeper.sheets.facts import board_stamp
from rowkeeper.sheets.outcome_tables import claims_text, verdict_text
from rowkeeper.sheets.verdict import json_text, junit_xml, verdict_json
from rowkeeper.timing.levels import levels_of

__all__ = ["generate", "prove", "sheet", "simulate"]


def generate(board: Path, out: Path, as_json: bool, progress: Progress) -> Answer:
    """The whole line. A plan that does not hold ends it: nothing is written then."""
    progress.plan(EXPECTED_S)
    work = planned(read_board(board), progress)
    if work.plan.holds:
        work = fitted(work, progress)
    if not _worth_judging(work):
        return _judged(work, verdict(work, ("fit",) if work.fit else ()), as_json)
    work = proved(work, progress)
    work = benched(work, progress, seed=1, subjects=work.subjects, icarus=True)
    found = verdict(work, ("fit", "claim", "bench"))
    write_all(out / work.board.slug, artefacts(work, found))
    progress.say(f"written to {out / work.board.slug}")
    return _judged(work, found, as_json)


def _worth_judging(work: Work) -> bool:
    return work.plan.holds and work.fit is not None and bool(work.fit.netlist_rtlil)


def _judged(work: Work, found: Verdict, as_json: bool) -> Answer:
    if as_json:
        stamp = board_stamp(work.board, __version__)
        return Answer(verdict_json(stamp, found, work.plan, work.claims, work.bench, work.fit), found.exit_code)
    refused = refused_text(work.plan, levels_of(work.board))
    parts = [refused, claims_text(work.claims) if work.claims else "", verdict_text(found)]
    return Answer("\n".join(part for part in parts if part), found.exit_code)


def prove(board: Path, only_logic: bool, as_json: bool, progress: Progress) -> Answer:
    """Every claim, on the logic and on the routed netlist."""
    steps = ("plan", "prove") if only_logic else ("plan", "fit", "prove")
    progress.plan({name: EXPECTED_S[name] for name in steps})
    work = planned(read_board(board), progress)
    if not work.plan.holds:
        return _judged(work, verdict(work, ()), as_json)
    if not only_logic:
        work = fitted(work, progress)
    work = proved(work, progress)
    return _judged(work, verdict(work, ("claim",) if only_logic else ("fit", "claim")), as_json)


def simulate(
    board: Path, netlist: bool, seed: int, icarus: bool, junit: Path | None, as_json: bool, progress: Progress
) -> Answer:
    """The bench, on the logic or on the routed netlist, with the delays the router found."""
    progress.plan({name: EXPECTED_S[name] for name in ("plan", "fit", "bench")})
    work = planned(read_board(board), progress)
    if not work.plan.holds:
        return _judged(work, verdict(work, ()), as_json)
    work = fitted(work, progress)
    chosen = {name: text for name, text in work.subjects.items() if (name == "netlist") == netlist}
    work = benched(work, progress, seed, chosen, icarus)
    found = verdict(work, ("fit", "bench"))
    if junit is not None:
        write_text(junit, junit_xml(board_stamp(work.board, __version__), found))
    return _judged(work, found, as_json)


def sheet(board: Path, out: Path, as_json: bool, progress: Progress) -> Answer:
    """Pin list and assembly sheet, with everything that was not run said on it."""
    progress.plan({"plan": EXPECTED_S["plan"]})
    work = planned(read_board(board), progress)
    if not work.plan.holds:
        return _judged(work, verdict(work, ()), as_json)
    found = verdict(work, ("fit", "claim", "bench"))
    write_all(out / work.board.slug, sheet_artefacts(work, found))
    progress.say(f"written to {out / work.board.slug}; its verdict says what was not run")
    return Answer(json_text([str(out / work.board.slug / name) for name in ("pins.csv", "sheet.html")]), 0)
