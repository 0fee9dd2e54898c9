"""The emitted bench run in Icarus Verilog, and its agreement with the compiled bench, event by event.

Takes the files of `bench/` and the Verilog of the logic; gives outcomes. Must not know how either was made.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Literal

from rowkeeper.contract import BenchOutcome, Design, Status
from rowkeeper.judging.bench.compiled import BuildError, CompiledBench
from rowkeeper.judging.bench.emit import emit_bench
from rowkeeper.judging.bench.outcome import Report, not_run, outcome_of, read_report
from rowkeeper.judging.bench.scenario import Scenario
from rowkeeper.reading.board import Board
from rowkeeper.reading.figures import Window
from rowkeeper.tools import TimedOut, ToolMissing, run_tool

__all__ = ["IcarusBench", "agree", "build_icarus", "run_icarus"]

_TIMEOUT_S = 900.0


@dataclass(frozen=True, slots=True)
class IcarusBench:
    """The compiled simulation of one logic."""

    board: Board
    program: bytes
    subject: Literal["logic", "netlist"]

    def report(self, scenario: Scenario, corner: str, seed: int, *, full: bool = False, log: bool = False) -> Report:
        """Run one scenario and read what it printed. Raises ToolMissing or TimedOut."""
        arguments = ["-n", "bench.vvp", f"+scenario={scenario.name}", f"+corner={corner}", f"+seed={seed}"]
        arguments += ["+full"] if full else []
        arguments += ["+log"] if log else []
        run = run_tool("vvp", arguments, files={"bench.vvp": self.program}, timeout_s=_TIMEOUT_S)
        return read_report(run.stdout)


def build_icarus(
    board: Board,
    design: Design,
    logic_verilog: str,
    windows: Mapping[str, Window],
    subject: Literal["logic", "netlist"] = "logic",
) -> IcarusBench:
    """Compile the emitted bench around this Verilog. Raises ToolMissing or BuildError."""
    files: dict[str, bytes | str] = {**emit_bench(board, design, windows), "logic.v": logic_verilog}
    options = ["-g2005", "-I", ".", "-s", "bench", "-o", "bench.vvp", "bench.v", "logic.v"]
    run = run_tool("iverilog", options, files=files, wants=["bench.vvp"], timeout_s=_TIMEOUT_S)
    if run.code or "bench.vvp" not in run.files:
        raise BuildError(f"Icarus could not compile the bench: {run.stderr.strip()[:400]}")
    return IcarusBench(board, run.files["bench.vvp"], subject)


def run_icarus(
    board: Board,
    design: Design,
    logic_verilog: str,
    windows: Mapping[str, Window],
    scenario: Scenario,
    corner: str,
    seed: int = 1,
    subject: Literal["logic", "netlist"] = "logic",
) -> BenchOutcome:
    """One scenario in Icarus; not run where Icarus is not installed."""
    try:
        report = build_icarus(board, design, logic_verilog, windows, subject).report(scenario, corner, seed)
    except (ToolMissing, BuildError, TimedOut) as error:
        return not_run(scenario.name, "icarus", subject, corner, str(error))
    return outcome_of(board, report, scenario.name, "icarus", subject, corner)


def agree(compiled: CompiledBench, icarus: IcarusBench, scenario: Scenario, corner: str, seed: int) -> BenchOutcome:
    """Both engines on the same short seeded run: every event at the chips and every datum read must be equal.

    The outside check of the compiled bench; `checks` counts the events compared.
    """
    name = f"{scenario.name}, compiled against icarus"
    try:
        ours = compiled.report(scenario, corner, seed, full=False, log=True)
        theirs = icarus.report(scenario, corner, seed, full=False, log=True)
    except (ToolMissing, TimedOut) as error:
        return not_run(name, "icarus", icarus.subject, corner, str(error))
    status, detail = _compare(ours.events, theirs.events)
    bus_ps = ours.facts.get("bus_ps", 0)
    return BenchOutcome(name, "icarus", icarus.subject, corner, status, len(ours.events), bus_ps, detail)


def _compare(ours: tuple[str, ...], theirs: tuple[str, ...]) -> tuple[Status, str]:
    if not ours or not theirs:
        return Status.FAILED, "no event was recorded"
    for number, (one, other) in enumerate(zip(ours, theirs, strict=False), 1):
        if one != other:
            return Status.FAILED, f"event {number}: compiled `{one}`, Icarus `{other}`"
    if len(ours) != len(theirs):
        return Status.FAILED, f"compiled has {len(ours)} events, Icarus {len(theirs)}"
    return Status.PASSED, ""
