"""How a problem is collected and shown."""

import pytest

from rowkeeper.reading.position import Position
from rowkeeper.reading.problems import Problem, Problems, Refused, listed, nearest, printed, quoted


def test_shown_with_line_caret_and_fix() -> None:
    """Place and message, the line, a caret under the place, the fix."""
    problem = Problem(Position("boards/x.yaml", 3, 5, "10"), "this time has no unit", "write `10 ns`", "max: 10")
    assert printed(problem) == (
        "boards/x.yaml:3:5: this time has no unit\n    max: 10\n        ^\n  fix: write `10 ns`"
    )


def test_problem_of_a_whole_file() -> None:
    """Without a line there is no caret."""
    assert printed(Problem(Position("x.yaml", 0, 0), "no such file", "look again")) == (
        "x.yaml: no such file\n  fix: look again"
    )


def test_caret_stands_under_the_place_in_a_long_line() -> None:
    """A long line is cut on both sides; the caret still points at the same character."""
    line = "a" * 300 + "X" + "b" * 300
    text = printed(Problem(Position("x.yaml", 1, 301), "here", "", line)).split("\n")
    assert text[1][text[2].index("^")] == "X"
    assert text[1].startswith("    ...a")
    assert text[1].endswith("b...")
    assert max(len(part) for part in text) < 125


def test_nothing_in_a_file_can_steer_the_screen() -> None:
    """Characters that a terminal would act on are never printed."""
    text = printed(Problem(Position("x.yaml", 1, 1), f"{quoted(chr(27) + '[2J')} is bad", "", "\x1b[2J"))
    assert "\x1b" not in text


def test_in_file_order_and_each_once() -> None:
    """Problems are sorted by place; the same one is not told twice."""
    problems = Problems()
    for line in (5, 2, 5, 9):
        problems.add(Position("x.yaml", line, 1), "bad", "mend it")
    assert [problem.at.line for problem in problems.in_order()] == [2, 5, 9]


def test_stop() -> None:
    """Nothing collected, no stop; else one exception with everything."""
    problems = Problems()
    problems.stop_if_any()
    problems.add(Position("x.yaml", 1, 1), "bad", "mend it")
    with pytest.raises(Refused) as caught:
        problems.stop_if_any()
    assert problems.in_order() == caught.value.problems
    assert str(caught.value) == "x.yaml:1:1: bad\n  fix: mend it"


def test_nearest_name() -> None:
    """The likeliest name whatever the letter case, or none; the same answer every time."""
    names = ("tolerance", "frequency", "duty")
    assert nearest("tolerence", names) == "tolerance"
    assert nearest("DUTY", names) == "duty"
    assert nearest("zzz", names) is None


def test_lists_in_sentences() -> None:
    """One, two and three names."""
    assert [
        listed([]),
        listed(["a"]),
        listed(["a", "b"]),
        listed(["a", "b", "c"], "and"),
    ] == ["", "a", "a or b", "a, b and c"]
