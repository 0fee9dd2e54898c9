"""The constraint file and every refusal before it."""

from collections.abc import Callable
from dataclasses import replace
from fractions import Fraction

import pytest

from fit.boards import FILE, PORTS, board, nets
from rowkeeper.contract import Constraint
from rowkeeper.fit.constraints import (
    constraint_text,
    constraints_of,
    free_pins,
    megahertz,
    read_back,
    refusals,
)
from rowkeeper.reading.board import Net

Change = Callable[[Net], Net]


def _changed(name: str, change: Change) -> tuple[Net, ...]:
    return tuple(change(net) if net.name == name else net for net in nets())


def _on(pin: str) -> Change:
    return lambda net: replace(net, pin=pin)


def test_a_good_board_has_no_refusals() -> None:
    """The board of these tests is wired rightly."""
    assert refusals(board(), PORTS) == ()


TURNED = "`mreq_n` is an input of the device, but is wired as an output"

REFUSED = [
    ("ras_n", _on("5"), 64, 21, "`ras_n`: pin 5 (GND) is a ground pin"),
    ("ras_n", _on("11"), 64, 21, "`ras_n`: pin 11 (VCC) is a supply pin"),
    ("ras_n", _on("44"), 64, 21, "`ras_n`: pin 44 (CRESET_B) is kept for configuration from the flash"),
    ("ras_n", _on("48"), 64, 21, "`ras_n`: pin 48 (IOB_46_SCK) is kept for configuration from the flash"),
    ("ras_n", _on("76"), 64, 21, "`ras_n`: pin 76 (VPP_FAST) is to be left open"),
    ("ras_n", _on("101"), 64, 21, "`ras_n`: VQ100 has no pin 101"),
    ("ras_n", _on(""), 64, 21, "`ras_n`: VQ100 has no pin (none given)"),
    ("cas_n", _on("51"), 65, 21, f"`cas_n`: pin 51 already carries `ras_n`, at {FILE}:64:21"),
    ("clk", _on("10"), 40, 21, "`clk`: pin 10 feeds no global buffer; 13, 15, 33, 34, 62, 63, 89, 90 do"),
    ("mreq_n", lambda net: replace(net, side="output"), 41, 5, TURNED),
]


@pytest.mark.parametrize(("name", "change", "line", "column", "text"), REFUSED)
def test_a_wrong_pin_is_refused_with_its_place(name: str, change: Change, line: int, column: int, text: str) -> None:
    """One wrong thing, one sentence, at the place it stands."""
    (refusal,) = refusals(board(_changed(name, change)), PORTS)
    assert (line, column, text) == (refusal.at.line, refusal.at.column, refusal.text)


def test_a_misspelt_net_is_refused_with_the_nearest_name_and_the_one_left_out() -> None:
    """The wrong name is told apart from the net that now has no pin."""
    wrong = refusals(board(_changed("ras_n", lambda net: replace(net, name="ras"))), PORTS)
    assert [refusal.text for refusal in wrong] == [
        "`ras` is not a net of the logic; did you mean `ras_n`?",
        "`ras_n`, an output of the logic, is on no pin",
    ]


def test_a_net_wired_twice_is_refused_with_both_places() -> None:
    """The second place is refused, the first is named."""
    twice = (*nets(), replace(nets()[1], pin="10"))
    (refusal,) = refusals(board(twice), PORTS)
    assert refusal.text == f"`mreq_n` is wired twice, first at {FILE}:41:5"


def test_all_refusals_come_at_once() -> None:
    """Two wrong pins and a missing net are three sentences."""
    wiring = tuple(replace(n, pin="5") if n.name in ("ras_n", "cas_n") else n for n in nets() if n.name != "we_n")
    wrong = refusals(board(wiring), PORTS)
    assert len(wrong) == 4  # two ground pins, one pin used twice, one net missing


def test_a_path_that_does_not_touch_the_device_needs_no_pin() -> None:
    """The data path is on the board, not on the device."""
    data = replace(nets()[1], name="data_in", side="path", pin="")
    assert refusals(board((*nets(), data)), PORTS) == ()


def test_a_pin_table_with_a_hole_is_refused() -> None:
    """Every pin of the package must be accounted for."""
    whole = board()
    pins = {number: pin for number, pin in whole.device.pins.items() if number != "100"}
    (refusal,) = refusals(replace(whole, device=replace(whole.device, pins=pins)), PORTS)
    assert refusal.text == "ice40hx1k-vq100: the pin table does not hold pins 1 to 100 exactly once"


def test_a_pull_up_where_the_device_has_none_is_refused() -> None:
    """The left bank cannot pull up; the top bank can; an unknown net cannot be asked for."""
    texts = [refusal.text for refusal in refusals(board(), PORTS, frozenset({"mreq_n", "a0", "nothing"}))]
    assert texts == [
        "`mreq_n`: pin 1 is in bank 3, which has no pull-ups",
        "a pull-up is asked for `nothing`, which is on no pin",
    ]


def test_the_file_holds_every_port_once_and_reads_back() -> None:
    """What is written is what was meant, and says so when read again."""
    meant = constraints_of(board(), PORTS, frozenset({"a0"}))
    text = constraint_text(board(), meant)
    assert text.startswith("# loom-16k: pins of the ice40hx1k-vq100\n# specification 0123456789abcdef")
    assert "set_io clk 15\n" in text
    assert "set_io -pullup yes a[0] 78\n" in text
    assert text.endswith("set_frequency clk 100.005000\n")
    assert len(PORTS.bits) == text.count("set_io ")
    assert meant == read_back(text, PORTS, board().device)


SPOILED_LINES = [
    ("set_io ras_n 51", "set_io ras 51"),
    ("set_io ras_n 51", "set_io ras_n 151"),
    ("set_io ras_n 51", "set_io ras_n 52"),
    ("set_io ras_n 51", "set_io -nowarn ras_n 51"),
    ("set_io ras_n 51\n", ""),
    ("set_frequency clk 100.005000", "set_frequency clock 100"),
]


@pytest.mark.parametrize(("right", "wrong"), SPOILED_LINES)
def test_a_spoiled_file_does_not_read_back(right: str, wrong: str) -> None:
    """Typos that the router only warns of, or accepts, are errors here."""
    text = constraint_text(board(), constraints_of(board(), PORTS))
    assert right in text
    with pytest.raises(ValueError, match=r"constraint of this design|used twice|without a pin"):
        read_back(text.replace(right, wrong), PORTS, board().device)


def test_a_port_name_that_could_carry_a_command_is_our_bug() -> None:
    """Nothing but plain names reaches the file."""
    bad = replace(PORTS.bits[1], port="a b\nset_io")
    with pytest.raises(ValueError, match="not a plain port name"):
        constraint_text(board(), (Constraint(bad, "1", False),))


def test_the_clock_is_rounded_up_to_a_hertz() -> None:
    """100 MHz with 50 ppm is 100.005 MHz; a third of a hertz counts as one."""
    assert megahertz(Fraction(100_000_000), Fraction(50)) == "100.005000"
    assert megahertz(Fraction(10_000_000, 3)) == "3.333334"


def test_pins_that_carry_no_net_are_known() -> None:
    """Of 68 pins that may carry a net, this board uses 35."""
    free = free_pins(board().device, constraints_of(board(), PORTS))
    usable = [pin for pin in board().device.pins.values() if pin.role in ("io", "clock")]
    assert len(usable) == 68
    assert len(usable) - len(PORTS.bits) == len(free)
