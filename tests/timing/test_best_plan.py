"""The choice of ticks, judged from outside: a solver that sees every path with the ticks open finds nothing better.

Best is the lexicographically largest sorted vector of hard margins (the sums of arbitration among them) that leaves
room for the refresh timer. The outside judge is z3; the first five different margins are asked for, within eight ticks
of the table found.
"""

import os
import random
from dataclasses import replace
from fractions import Fraction
from pathlib import Path

import pytest

from rowkeeper.contract import TickTable
from rowkeeper.reading import catalogue, read_board
from rowkeeper.reading.board import Board
from rowkeeper.timing import default_delays, settle
from rowkeeper.timing.device import Facts, facts_of
from timing.every_path import Question, open_and_judged, worst_margins
from timing.hand_built import KILN, LOOM, clock, device

BOARDS = Path(__file__).parents[2] / "boards"
QUICK, WHOLE = 6, int(os.environ.get("ROWKEEPER_RANDOM_BOARDS", "40"))  # as many as asked for on demand
DISTINCT = 5


def chosen(board: Board) -> tuple[Facts, TickTable]:
    delays = default_delays(board)
    ticks = settle(board, delays).ticks
    return facts_of(board, delays, ticks), ticks


def some_board(seed: int) -> Board:
    """Chip, both clocks, duty, pads, waits and grants at random."""
    dice = random.Random(seed)
    base, first = dice.choice(((LOOM, "4116"), (KILN, "4164")))
    chip = catalogue.chip(dice.choice([name for name in catalogue.chips() if name.startswith(first)]))
    in_lo, out_lo, share = dice.randint(0, 3), dice.randint(0, 4), dice.randint(0, 5)
    mhz = Fraction(dice.randint(20, 40 if base is LOOM else 25), 10)
    return replace(
        base,
        banks=(replace(base.banks[0], chip=chip),),
        bus_clock=clock(str(mhz), duty=(f"0.{50 - share}", f"0.{50 + share}")),
        device_clock=clock(dice.choice(("50", "66.667", "80", "100", "120", "133.333")), 50),
        device=device((in_lo, in_lo + dice.randint(2, 9)), (out_lo, out_lo + dice.randint(2, 11))),
        at_worst=replace(
            base.at_worst,
            wait_max_ps=dice.choice((0, 0, 0, 10**6)),
            grant_max_ps=dice.choice((0, 20 * 10**6, 100 * 10**6)),
        ),
    )


def nothing_better(board: Board, distinct: int = DISTINCT) -> None:
    facts, ticks = chosen(board)
    worst = worst_margins(facts, ticks)
    better = Question(facts).better(worst, distinct)
    assert better is None, (ticks, worst[:8], better, worst_margins(facts, better)[:8])


@pytest.mark.speed
@pytest.mark.parametrize("name", ["loom-16k", "kiln-64k"])
def test_shipped_boards_have_the_best_ticks(name: str) -> None:
    """Before routing; what the router changes is planned again in the same way."""
    nothing_better(read_board(BOARDS / f"{name}.yaml"))


@pytest.mark.speed
@pytest.mark.parametrize("seed", range(QUICK))
def test_some_boards_have_the_best_ticks(seed: int) -> None:
    """A few random boards, each with the first different margins only: the rest is on demand."""
    nothing_better(some_board(seed), distinct=2)


@pytest.mark.speed
@pytest.mark.parametrize("seed", range(WHOLE))
def test_many_boards_have_the_best_ticks(seed: int) -> None:
    """Many random boards, on demand (--speed); ROWKEEPER_RANDOM_BOARDS=200 asks for more."""
    nothing_better(some_board(seed))


@pytest.mark.parametrize("board", [LOOM, KILN], ids=lambda board: board.slug)
def test_open_margins_are_those_of_the_judge(board: Board) -> None:
    """The judge from outside speaks of the same margins: at any table both give the same vector."""
    facts, ticks = chosen(board)
    tables = [ticks, replace(ticks, mux=ticks.mux - 1), replace(ticks, column=ticks.column + 3, row_hold=5)]
    for open_margins, judged_margins in open_and_judged(facts, tables):
        assert judged_margins == open_margins


def test_a_worse_table_is_caught() -> None:
    """The column two ticks too early, and the solver names a better table."""
    facts, ticks = chosen(KILN)
    worse = replace(ticks, mux=ticks.mux - 2)
    assert Question(facts).better(worst_margins(facts, worse), 1) is not None
