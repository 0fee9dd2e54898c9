"""The shipped bench: runs by itself in Icarus with one command, and agrees with the compiled one on every event."""

import os
import subprocess
from dataclasses import replace
from functools import cache
from pathlib import Path
from xml.etree import ElementTree

import pytest

from judging.bench.handmade import LOOM_DESIGN, LOOM_TICKS, kiln, kiln_design, loom, loom_windows, windows_for
from rowkeeper.contract import Status
from rowkeeper.judging.bench import agree, build, build_icarus, emit_bench, run_icarus, scenarios
from rowkeeper.judging.bench import icarus as icarus_module
from rowkeeper.logic.emit import rtlil_text
from rowkeeper.logic.verilog import verilog_text
from rowkeeper.tools import ToolMissing, available

needs_icarus = pytest.mark.skipif(not available("iverilog"), reason="Icarus Verilog is not installed")
BY_NAME = {scenario.name: scenario for scenario in scenarios(loom())}


@cache
def loom_verilog() -> str:
    return verilog_text(LOOM_DESIGN)


def unpack(folder: Path, logic: str) -> Path:
    (folder / "bench").mkdir()
    for name, content in emit_bench(loom(), LOOM_DESIGN, loom_windows()).items():
        (folder / "bench" / name).write_bytes(content)
    (folder / "logic.v").write_text(logic)
    return folder / "bench"


def one_command(bench: Path, *options: str) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        ["sh", "run.sh", *options], cwd=bench, capture_output=True, text=True, timeout=900, check=False
    )


def test_the_files_are_plain_and_the_same_each_time() -> None:
    files = emit_bench(loom(), LOOM_DESIGN, loom_windows())
    assert dict(files) == dict(emit_bench(loom(), LOOM_DESIGN, loom_windows()))
    assert sorted(files) == [
        "bench.v", "board.vh", "bus.vh", "checks.vh", "cycles.vh", "memory.vh", "parameters.vh", "program.vh", "run.sh",
    ]  # fmt: skip
    assert not any(b"{{" in content or b"/work" in content for content in files.values())


def test_nothing_of_a_board_file_reaches_the_files_but_numbers() -> None:
    """A name is text of a stranger: it must not be able to become Verilog or shell."""
    board = replace(loom(), name='"; $finish; //', slug="$(rm -r x)", revision="`include")
    assert dict(emit_bench(board, LOOM_DESIGN, loom_windows())) == dict(emit_bench(loom(), LOOM_DESIGN, loom_windows()))


@needs_icarus
def test_one_command_passes_and_writes_results(tmp_path: Path) -> None:
    bench = unpack(tmp_path, loom_verilog())
    run = one_command(bench, "+scenario=grants")
    assert (run.returncode, run.stdout.splitlines()[-1]) == (0, "PASS")
    suite = ElementTree.parse(bench / "results.xml").getroot()
    assert [(case.get("name"), len(case)) for case in suite] == [("grants", 0)]


@needs_icarus
def test_one_command_fails_when_a_tick_in_the_logic_is_spoiled(tmp_path: Path) -> None:
    spoiled = verilog_text(replace(LOOM_DESIGN, ticks=replace(LOOM_TICKS, mux=1)))
    bench = unpack(tmp_path, spoiled)
    run = one_command(bench, "+scenario=warm-up")
    assert (run.returncode, run.stdout.splitlines()[-1]) == (1, "FAIL")
    suite = ElementTree.parse(bench / "results.xml").getroot()
    failures = [failure.get("message", "") for failure in suite.iter("failure")]
    assert len(failures) == 1
    assert "tRAH" in failures[0]


@needs_icarus
def test_a_run_without_checks_fails(tmp_path: Path) -> None:
    bench = unpack(tmp_path, loom_verilog())
    assert one_command(bench, "+scenario=nothing").returncode == 1


@needs_icarus
def test_a_time_out_fails(tmp_path: Path) -> None:
    bench = unpack(tmp_path, loom_verilog())
    text = (bench / "parameters.vh").read_text()
    (bench / "parameters.vh").write_text(
        text.replace("TIME_OUT_PS = 64'sd60000000000000", "TIME_OUT_PS = 64'sd250000000")
    )
    run = one_command(bench, "+scenario=mix")
    assert (run.returncode, run.stdout.splitlines()[-1]) == (1, "FAIL time-out")


@needs_icarus
def test_an_unknown_option_is_refused(tmp_path: Path) -> None:
    assert one_command(unpack(tmp_path, loom_verilog()), "--everything").returncode == 2


def test_a_machine_without_icarus_is_told(tmp_path: Path) -> None:
    bench = unpack(tmp_path, "")
    only_shell = {"PATH": str(tmp_path), "HOME": os.environ.get("HOME", "")}
    (tmp_path / "dirname").symlink_to("/usr/bin/dirname")
    run = subprocess.run(["/bin/sh", "run.sh"], cwd=bench, env=only_shell, capture_output=True, text=True, check=False)
    assert (run.returncode, run.stderr) == (3, "iverilog is not installed\n")


@needs_icarus
@pytest.mark.parametrize(("name", "corner"), [("grants", "random"), ("mix", "max")])
def test_icarus_and_the_compiled_bench_agree_on_every_event_of_a_seeded_run(name: str, corner: str) -> None:
    """Outside check: the source of the second opinion is Icarus Verilog, an event-driven simulator not ours."""
    compiled = build(loom(), LOOM_DESIGN, rtlil_text(LOOM_DESIGN), loom_windows())
    icarus = build_icarus(loom(), LOOM_DESIGN, loom_verilog(), loom_windows())
    outcome = agree(compiled, icarus, BY_NAME[name], corner, 7)
    assert (outcome.status, outcome.detail) == (Status.PASSED, "")
    assert outcome.checks > 5_000


@needs_icarus
@pytest.mark.slow
@pytest.mark.parametrize("name", BY_NAME)
def test_both_engines_agree_on_every_scenario_of_the_big_board(name: str) -> None:
    """The same outside check on 256 rows, a 50 MHz oscillator and a bus of 2.5 MHz."""
    design = kiln_design()
    windows = windows_for(design)
    compiled = build(kiln(), design, rtlil_text(design), windows)
    icarus = build_icarus(kiln(), design, verilog_text(design), windows)
    assert agree(compiled, icarus, BY_NAME[name], "random", 11).status is Status.PASSED


@needs_icarus
@pytest.mark.slow
def test_engines_on_different_logic_do_not_agree() -> None:
    """The comparison itself can fail: one tick apart is seen at once."""
    other = replace(LOOM_DESIGN, ticks=replace(LOOM_TICKS, row_hold=LOOM_TICKS.row_hold + 1))
    compiled = build(loom(), other, rtlil_text(other), loom_windows())
    icarus = build_icarus(loom(), LOOM_DESIGN, loom_verilog(), loom_windows())
    outcome = agree(compiled, icarus, BY_NAME["warm-up"], "min", 7)
    assert outcome.status is Status.FAILED
    assert outcome.detail.startswith("event ")


def test_a_missing_icarus_is_not_run_and_says_so(monkeypatch: pytest.MonkeyPatch) -> None:
    def missing(program: str, *_: object, **__: object) -> None:
        raise ToolMissing(program)

    monkeypatch.setattr(icarus_module, "run_tool", missing)
    outcome = run_icarus(loom(), LOOM_DESIGN, "", loom_windows(), BY_NAME["mix"], "min")
    assert (outcome.status, outcome.detail) == (Status.NOT_RUN, "iverilog is not installed")
