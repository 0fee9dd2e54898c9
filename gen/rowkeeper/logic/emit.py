"""From components to text: RTLIL, which needs no tool."""

from amaranth.back import rtlil

from rowkeeper.contract import Design
from rowkeeper.logic.replacement import Replacement

__all__ = ["TOP", "rtlil_text"]

TOP = "rowkeeper_logic"


def rtlil_text(design: Design) -> str:
    """RTLIL of the whole replacement, top module `rowkeeper_logic`, without source paths."""
    top = Replacement(design)
    outputs = [getattr(top, name) for name in top.signature.members]
    return str(rtlil.convert(top, name=TOP, ports=[top.clock.clk, *outputs], emit_src=False))
