"""The order of work: chips out first, what must be measured before they go back, with the board's own figures."""

from pathlib import Path

import pytest

from rowkeeper.reading import read_board
from rowkeeper.reading.board import Board
from rowkeeper.sheets.order import order_of_work
from sheets.boards import BOARD

BOARDS = Path(__file__).parents[2] / "boards"
LOOM = read_board(BOARDS / "loom-16k.yaml")
KILN = read_board(BOARDS / "kiln-64k.yaml")


def _place(steps: tuple[str, ...], words: str) -> int:
    (place,) = [place for place, step in enumerate(steps) if words in step]
    return place


@pytest.mark.parametrize("board", [LOOM, KILN, BOARD], ids=["loom", "kiln", "bare"])
def test_chips_come_out_first_and_go_back_after_every_measurement(board: Board) -> None:
    """No memory chip sees a supply or a strobe that was not measured."""
    steps = order_of_work(board)
    assert _place(steps, "take the memory chips out") == 0
    fitted = _place(steps, "Fit the memory chips")
    assert max(_place(steps, w) for w in ("no other driver", "low with a clip", "CDONE", "measure at each")) < fitted
    assert steps[fitted].startswith("Supplies off")


def test_supplies_by_socket_pin() -> None:
    """Pins of the 4116 and the 4164 differ: -5 V, +12 V and +5 V on 1, 8 and 9; +5 V on 8 alone."""
    loom, kiln = (" ".join(order_of_work(board)) for board in (LOOM, KILN))
    wanted = "U10-U17: pin 1 VBB -4.5 to -5.5 V, pin 8 VDD 10.8 to 13.2 V, pin 9 VCC 4.5 to 5.5 V, pin 16 VSS 0 V;"
    assert wanted in loom
    assert "U1-U8: pin 8 VCC 4.5 to 5.5 V, pin 16 VSS 0 V;" in kiln


def test_strobes_stand_high_with_the_device_held_and_without_its_supply() -> None:
    """2.7 V is what a 4116 strobe asks for (MK4116 sheet, p. 2)."""
    (step,) = [step for step in order_of_work(LOOM) if "CRESET_B (pin 44) low" in step]
    assert "2.7 V or more" in step
    assert "/READ (U6.1+19) high" in step
    assert "3.3 V missing" in step


def test_configured_before_reset_rises() -> None:
    """Both pins by place, both times with their standing."""
    (step,) = [step for step in order_of_work(LOOM) if "CDONE" in step]
    assert [w for w in ("(pin 43)", "/RESET (X1.27)", "53 ms typically", "250 ms") if w not in step] == []


def test_bus_clock_against_its_grade() -> None:
    """110 ns at 4 MHz (Z8400 specification), 180 ns at 2.5 MHz (MK3880 manual)."""
    assert "high for 110 ns or more (TwCh), low for 110 ns or more (TwCl)" in " ".join(order_of_work(LOOM))
    assert "high for 180 ns or more (TwCh), low for 180 ns or more (TwCl)" in " ".join(order_of_work(KILN))


def test_slow_lines_need_a_gate() -> None:
    """The translator's own demand on edges stands beside it."""
    (step,) = [step for step in order_of_work(LOOM) if "Schmitt" in step]
    assert step.startswith("/RESET (X1.27), /BUSREQ (X1.25)")
    assert "faster than 10 ns/V" in step


def test_programming_file_by_its_digest_where_known() -> None:
    """Sixteen hexadecimal digits are enough to compare by eye."""
    assert "begins 00112233aabbccdd." in order_of_work(LOOM, "00112233aabbccdd" * 4)[1]
    assert "manifest.json" in order_of_work(LOOM)[1]
