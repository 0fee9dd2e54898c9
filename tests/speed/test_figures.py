"""Figures, on demand (`pytest --speed -s`): each is printed, and judged as a ratio within one run.

The yardstick is a fixed piece of arithmetic timed in the same run: a slow or busy machine stretches both.
"""

import subprocess
import sys
import time
from collections.abc import Callable
from pathlib import Path

import pytest

from rowkeeper.judging.bench.compiled import build
from rowkeeper.judging.bench.icarus import build_icarus
from rowkeeper.judging.bench.scenario import scenarios
from rowkeeper.logic.verilog import verilog_text
from rowkeeper.reading import read_board
from rowkeeper.run.pipeline import planned
from rowkeeper.run.progress import Progress

pytestmark = pytest.mark.speed
BOARDS = Path(__file__).parents[2] / "boards"
# Seconds the yardstick takes on the machine for which the figures are stated (two cores of 2024).
YARDSTICK_S = 0.75


def seconds(work: Callable[[], object]) -> float:
    begin = time.perf_counter()
    work()
    return time.perf_counter() - begin


def yardstick() -> float:
    return min(seconds(lambda: sum(i * i % 7 for i in range(10_000_000))) for _ in range(3))


def run(*arguments: str) -> None:
    subprocess.run([sys.executable, "-m", "rowkeeper", *arguments], check=True, capture_output=True)


def judge(what: str, took_s: float, figure_s: float) -> None:
    ratio = yardstick() / YARDSTICK_S
    print(f"\n{what}: {took_s:.2f} s; figure {figure_s:g} s, here {figure_s * ratio:.2f} s")
    assert took_s <= figure_s * ratio


def test_help() -> None:
    """`rowkeeper --help` within 0.5 s."""
    judge("help", min(seconds(lambda: run("--help")) for _ in range(3)), 0.5)


@pytest.mark.parametrize("board", ["loom-16k", "kiln-64k"])
def test_margins(board: str) -> None:
    """`margins` within 2 s."""
    command = ("margins", str(BOARDS / f"{board}.yaml"), "--quiet")
    judge(f"margins {board}", min(seconds(lambda: run(*command)) for _ in range(3)), 2.0)


@pytest.mark.parametrize("board", ["loom-16k", "kiln-64k"])
def test_claims(board: str) -> None:
    """All claims of one board, proved and certified, within 90 s."""
    judge(f"claims {board}", seconds(lambda: run("prove", str(BOARDS / f"{board}.yaml"), "--logic", "--quiet")), 90.0)


@pytest.mark.parametrize("board", ["loom-16k", "kiln-64k"])
def test_generate(board: str, tmp_path: Path) -> None:
    """`generate` with warm caches within 120 s."""
    command = ("generate", str(BOARDS / f"{board}.yaml"), "--out", str(tmp_path), "--quiet")
    judge(f"generate {board}", seconds(lambda: run(*command)), 120.0)


@pytest.mark.parametrize("board", ["loom-16k", "kiln-64k"])
def test_compiled_bench_against_icarus(board: str) -> None:
    """The compiled bench covers at least 50 times the bus time per second of Icarus on the same scenario."""
    work = planned(read_board(BOARDS / f"{board}.yaml"), Progress(None))
    ours = build(work.board, work.design, work.rtlil, work.windows)
    theirs = build_icarus(work.board, work.design, verilog_text(work.design), work.windows)
    scenario = next(one for one in scenarios(work.board) if one.name == "mix")
    compiled_s = min(seconds(lambda: ours.report(scenario, "random", 1, full=False)) for _ in range(3))
    icarus_s = seconds(lambda: theirs.report(scenario, "random", 1, full=False))
    print(f"\n{board}: Icarus {icarus_s:.2f} s, compiled {compiled_s:.3f} s, ratio {icarus_s / compiled_s:.0f}")
    assert icarus_s / compiled_s >= 50
