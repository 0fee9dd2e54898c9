"""What if: each value is a plan of its own, and an end that is named holds while the next step does not."""

from dataclasses import replace
from fractions import Fraction

import pytest

from rowkeeper.reading import catalogue
from rowkeeper.timing import default_delays, settle
from rowkeeper.timing.vary import reach, same_kind, vary_chip, vary_clock, with_chip, with_clock
from timing.hand_built import KILN

CHIPS = tuple(catalogue.chip(name) for name in catalogue.chips())
BOARD = with_chip(KILN, catalogue.chip("4164-15-256row"))

pytestmark = pytest.mark.speed  # dozens of plans each: on demand


def test_each_frequency_is_planned_by_itself() -> None:
    """The same worst margin as the plan of a board file with that clock; the board's own value is among them."""
    found = vary_clock(BOARD, [Fraction(2_400_000)], str)
    assert [(p.position, p.own) for p in found.points] == [(Fraction(12, 5), False), (Fraction(5, 2), True)]
    for point in found.points:
        other = with_clock(BOARD, point.position * 10**6)
        plan = settle(other, default_delays(other))
        assert (plan.worst_ps, plan.holds) == (point.margins_ps[point.worst], point.holds)
        assert min(point.margins_ps.values()) == point.margins_ps[point.worst]


def test_grades_of_one_kind() -> None:
    """Both row counts of the 4164 are different kinds; the fastest grade comes first."""
    names = [chip.name for chip in same_kind(BOARD.banks[0].chip, CHIPS)]
    assert names == sorted(names)
    assert names
    assert all(name.endswith("256row") for name in names)


def test_a_slower_chip_leaves_less() -> None:
    """tCAC margin of the slower grade is no larger."""
    found = vary_chip(BOARD, same_kind(BOARD.banks[0].chip, CHIPS))
    left = [point.margins_ps["tRAC", "min"] for point in found.points]
    assert left == sorted(left, reverse=True)


def test_the_slowest_clock_holds_and_the_next_step_does_not() -> None:
    """Planned in full on both sides of the end."""
    found = reach(BOARD, CHIPS)
    assert found.least_clock_hz is not None
    for hertz, holds in ((found.least_clock_hz, True), (found.least_clock_hz - found.clock_step_hz, False)):
        board = with_clock(BOARD, hertz)
        assert settle(board, default_delays(board)).holds is holds
    assert found.grant_open  # the timer refreshes in a grant, however long


def test_a_board_that_does_not_hold_has_no_ends() -> None:
    """Not asked, rather than zero."""
    slow = replace(BOARD, device_clock=replace(BOARD.device_clock, frequency_hz=Fraction(5_000_000)))
    found = reach(slow, CHIPS)
    assert (found.least_clock_hz, found.most_wait_ps, found.most_grant_ps) == (None, None, None)
