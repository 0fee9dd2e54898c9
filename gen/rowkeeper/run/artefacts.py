"""The output folder as a value: name to bytes, composed in memory.

Takes finished `Work` and its verdict; gives every file of `out/<board>/`. Must not know how to write it.
"""

import hashlib
from collections.abc import Mapping

from rowkeeper import __version__
from rowkeeper.contract import ClaimOutcome, Note, Verdict
from rowkeeper.fit.pins import pin_rows
from rowkeeper.fit.power_up import power_up
from rowkeeper.judging.bench.emit import emit_bench
from rowkeeper.logic.replacement import ports_of
from rowkeeper.logic.verilog import verilog_text
from rowkeeper.run.pipeline import Work
from rowkeeper.sheets.facts import board_stamp, sheet_facts
from rowkeeper.sheets.level_tables import levels_text
from rowkeeper.sheets.original_tables import original_text
from rowkeeper.sheets.pins_csv import pins_csv
from rowkeeper.sheets.plan_tables import plan_text
from rowkeeper.sheets.sheet_html import sheet_html
from rowkeeper.sheets.stamp import Stamp, with_header
from rowkeeper.sheets.verdict import junit_xml, manifest_json, plan_json, verdict_json
from rowkeeper.timing.levels import levels_of
from rowkeeper.timing.original import original_report

__all__ = ["artefacts", "sheet_artefacts", "stamped_logic"]


def artefacts(work: Work, verdict: Verdict) -> Mapping[str, bytes]:
    """Every file of a whole run."""
    stamp = board_stamp(work.board, __version__)
    files: dict[str, bytes] = {
        "logic.v": stamped_logic(work).encode(),
        "margins.txt": _margins_text(work).encode(),
        "margins.json": plan_json(
            stamp, work.plan, levels_of(work.board), original_report(work.board, work.plan)
        ).encode(),
        "verdict.json": verdict_json(stamp, verdict, work.plan, work.claims, work.bench, work.fit).encode(),
        "junit.xml": junit_xml(stamp, verdict).encode(),
        **_sheets(work, verdict),
    }
    files |= _fitted(work, stamp)
    files |= {f"bench/{name}": data for name, data in emit_bench(work.board, work.design, work.windows).items()}
    files |= {f"traces/{claim.claim}-{claim.subject}.vcd": claim.trace_vcd.encode() for claim in _broken(work)}
    return _with_manifest(files, stamp)


def _margins_text(work: Work) -> str:
    """Every margin in every situation, the levels, and what the board had before where its file says."""
    original = original_report(work.board, work.plan)
    parts = [plan_text(work.plan, every=True), levels_text(levels_of(work.board))]
    return "\n".join([*parts, original_text(original)] if original else parts)


def sheet_artefacts(work: Work, verdict: Verdict) -> Mapping[str, bytes]:
    """The sheets alone, with a verdict that says what was not run."""
    return _with_manifest(_sheets(work, verdict), board_stamp(work.board, __version__))


def stamped_logic(work: Work) -> str:
    """The logic as it is shipped."""
    return with_header(verilog_text(work.design), board_stamp(work.board, __version__), "verilog")


def _sheets(work: Work, verdict: Verdict) -> dict[str, bytes]:
    pins = pin_rows(work.board, ports_of(work.design))
    program = work.fit.programming if work.fit is not None else b""
    facts = sheet_facts(
        work.board,
        __version__,
        pins,
        verdict,
        (*work.plan.notes, _power_up_note(work)),
        program_sha256=hashlib.sha256(program).hexdigest() if program else "",
    )
    return {"pins.csv": pins_csv(pins).encode(), "sheet.html": sheet_html(facts).encode()}


def _power_up_note(work: Work) -> Note:
    return Note("power-up", power_up(work.board, work.plan.ticks).remark)


def _fitted(work: Work, stamp: Stamp) -> dict[str, bytes]:
    if work.fit is None:
        return {}
    files = {"fit/pins.pcf": with_header(work.fit.constraint_text, stamp, "hash").encode()}
    if work.fit.programming:
        files["fit/program.bin"] = work.fit.programming
        files["fit/netlist.v"] = with_header(work.fit.netlist_verilog, stamp, "verilog").encode()
    return files


def _broken(work: Work) -> list[ClaimOutcome]:
    return [claim for claim in work.claims if claim.trace_vcd]


def _with_manifest(files: Mapping[str, bytes], stamp: Stamp) -> Mapping[str, bytes]:
    return {**files, "manifest.json": manifest_json(stamp, files).encode()}
