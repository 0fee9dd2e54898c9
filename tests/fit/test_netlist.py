"""The routed netlist read back as plain logic, on netlists small enough to write by hand."""

import copy
import json
from typing import Any

import pytest

from rowkeeper.contract import PortBit, Ports
from rowkeeper.fit.netlist import NetlistError, read_routed, spoiled
from rowkeeper.fit.plain_logic import plain_texts, rtlil_of
from rowkeeper.tools import run_tool

PORTS = Ports(
    (
        PortBit("clk", None, "clk", "input"),
        *(PortBit("a", i, f"a{i}", "input") for i in range(3)),
        *(PortBit("y", i, f"y{i}", "output") for i in range(2)),
    )
)


def pad(port: int, inner: int, kind: str) -> dict[str, Any]:
    side = {"input": ("000001", "D_IN_0"), "output": ("011001", "D_OUT_0")}[kind]
    return {
        "type": "SB_IO",
        "parameters": {"PIN_TYPE": side[0]},
        "connections": {"PACKAGE_PIN": [port], side[1]: [inner], "OUTPUT_ENABLE": []},
    }


def logic(table: str, pins: dict[str, int], **flags: str) -> dict[str, Any]:
    every: dict[str, list[int]] = {pin: [] for pin in ("I0", "I1", "I2", "I3", "CIN", "CLK", "CEN", "SR", "O", "COUT")}
    return {
        "type": "ICESTORM_LC",
        "parameters": {"LUT_INIT": table, "DFF_ENABLE": "0", "NEG_CLK": "0", "ASYNC_SR": "0"} | flags,
        "connections": every | {pin: [net] for pin, net in pins.items()},
    }


# y[0]: a flip-flop with enable a[2] and set a[1] that takes a[0].  y[1]: the carry of a[0] + a[1] + 1.
CELLS = {
    "clk$sb_io": pad(1, 11, "input"),
    "gb": {
        "type": "SB_GB",
        "parameters": {},
        "connections": {"USER_SIGNAL_TO_GLOBAL_BUFFER": [11], "GLOBAL_BUFFER_OUTPUT": [12]},
    },
    **{f"a[{i}]$sb_io": pad(2 + i, 20 + i, "input") for i in range(3)},
    **{f"y[{i}]$sb_io": pad(5 + i, 30 + i, "output") for i in range(2)},
    "keep_LC": logic(
        "1010101010101010",
        {"I0": 20, "CLK": 12, "CEN": 22, "SR": 21, "O": 30},
        DFF_ENABLE="1",
        SET_NORESET="1",
    ),
    "foot_LC": logic("0" * 16, {"I1": 20, "I2": 21, "COUT": 40}, CARRY_ENABLE="1", CIN_CONST="1", CIN_SET="1"),
    "out_LC": logic("1111111100000000", {"I3": 40, "O": 31}),
}
NAMES = {"a[0]$in": 20, "keep_SB_DFF_Q": 30, "y[1]$SB_IO_OUT": 31}


def routed(cells: dict[str, Any] | None = None) -> bytes:
    ports = {"clk": [1], "a": [2, 3, 4], "y": [5, 6]}
    module = {
        "ports": {name: {"bits": bits} for name, bits in ports.items()},
        "cells": CELLS if cells is None else cells,
        "netnames": {name: {"bits": [bit]} for name, bit in NAMES.items()},
    }
    return json.dumps({"modules": {"top": module}}).encode()


# The synthesis knows the flip-flop by its own name as well.
SYNTHESISED = json.dumps(
    {"modules": {"rowkeeper_logic": {"netnames": {"keep_SB_DFF_Q": {"bits": [7]}, "part.keep": {"bits": [7]}}}}}
).encode()


def simulated(verilog: str, stimulus: str) -> str:
    """What a few lines of stimulus display, in Icarus."""
    bench = f"""
module bench;
  reg clk = 0; reg [2:0] a = 0; wire [1:0] y;
  rowkeeper_logic dut(.clk(clk), .a(a), .y(y));
  task tick; begin #1 clk = 1; #1 clk = 0; #1; end endtask
  initial begin {stimulus} $finish; end
endmodule
"""
    built = run_tool("iverilog", ["-o", "b.out", "b.v", "n.v"], files={"b.v": bench, "n.v": verilog}, wants=["b.out"])
    assert built.stderr == ""
    return run_tool("vvp", ["-n", "b.out"], files={"b.out": built.files["b.out"]}).stdout


@pytest.fixture(scope="module")
def texts() -> tuple[str, str]:
    return plain_texts(rtlil_of(read_routed(routed(), SYNTHESISED), PORTS))


def test_the_ports_are_those_of_the_logic_in_its_order(texts: tuple[str, str]) -> None:
    """The top is called as the logic is, and holds no cell of the vendor."""
    rtlil, verilog = texts
    assert "module rowkeeper_logic(clk, a, y);" in verilog
    assert "module \\rowkeeper_logic" in rtlil
    assert "SB_" not in rtlil.replace("keep_SB_DFF_Q", "").replace("$SB_IO_OUT", "")
    assert "ICESTORM" not in verilog


def test_no_tool_banner_stays_in_the_texts(texts: tuple[str, str]) -> None:
    """Neither the version nor the build of a tool reaches an output."""
    for text in texts:
        assert "Yosys" not in text
        assert "/*" not in text


def test_a_flip_flop_has_the_name_that_the_logic_gave_it(texts: tuple[str, str]) -> None:
    """The router's name for the net leads to the synthesis's other names of it."""
    assert "wire \\part.keep" in texts[0]


def test_a_flip_flop_starts_at_0_and_keeps_set_and_enable_apart(texts: tuple[str, str]) -> None:
    """Starts at 0; takes a[0] with the enable; the enable holds the set off as well."""
    shown = simulated(
        texts[1],
        '#1 $display("start %b", y[0]);'
        'a = 3\'b001; tick; $display("held %b", y[0]);'
        'a = 3\'b101; tick; $display("taken %b", y[0]);'
        'a = 3\'b100; tick; $display("cleared %b", y[0]);'
        'a = 3\'b010; tick; $display("not set %b", y[0]);'
        'a = 3\'b110; tick; $display("set %b", y[0]);',
    )
    assert shown.split("\n")[:6] == ["start 0", "held 0", "taken 1", "cleared 0", "not set 0", "set 1"]


def test_a_carry_is_the_majority_with_its_fixed_foot(texts: tuple[str, str]) -> None:
    """With the carry in fixed at 1, the carry out is a[0] or a[1]."""
    shown = simulated(texts[1], "".join(f"a = {n}; #1 $display(y[1]);" for n in range(4)))
    assert shown.split()[:4] == ["0", "1", "1", "1"]


def test_a_spoiled_netlist_differs_in_one_bit_of_one_table() -> None:
    """The guard of the comparison turns exactly what it says."""
    good = read_routed(routed(), SYNTHESISED)
    bad = spoiled(good, "out_LC", 8)
    changed = [cell.name for cell, other in zip(good.cells, bad.cells, strict=True) if cell != other]
    assert changed == ["out_LC"]
    tables = {cell.name: cell.parameters["LUT_INIT"] for cell in bad.cells if cell.kind == "ICESTORM_LC"}
    assert tables["out_LC"] == "1111111000000000"


STRANGE = [
    ("keep_LC", "parameters", "NEG_CLK", "1", "falling clock"),
    ("keep_LC", "parameters", "ASYNC_SR", "1", "asynchronous reset"),
    ("a[0]$sb_io", "parameters", "PIN_TYPE", "101001", "neither a plain input nor a plain output"),
    ("keep_LC", "type", "", "SB_RAM40_4K", "unknown kind SB_RAM40_4K"),
]


@pytest.mark.parametrize(("cell", "section", "key", "value", "words"), STRANGE)
def test_a_cell_that_the_logic_never_has_is_refused(cell: str, section: str, key: str, value: str, words: str) -> None:
    """Nothing is read back in a way it does not mean."""
    cells = copy.deepcopy(CELLS)
    if key:
        cells[cell][section][key] = value
    else:
        cells[cell][section] = value
    with pytest.raises(NetlistError, match=words):
        read_routed(routed(cells), SYNTHESISED)


def test_other_ports_than_the_logic_has_are_refused() -> None:
    """A netlist of something else is not taken."""
    with pytest.raises(NetlistError, match="ports of the routed netlist"):
        rtlil_of(read_routed(routed(), SYNTHESISED), Ports(PORTS.bits[:4]))
