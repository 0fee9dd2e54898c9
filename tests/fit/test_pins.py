"""The pin table."""

from collections import Counter
from pathlib import Path

from fit.boards import PORTS, board, nets
from rowkeeper.fit.pins import path_text, pin_rows
from rowkeeper.reading import read_board
from rowkeeper.reading.board import PathElement

LOOM = Path(__file__).parents[2] / "boards" / "loom-16k.yaml"


def test_every_pin_of_the_package_has_one_row_in_order() -> None:
    """One hundred pins, one hundred rows."""
    assert [str(n) for n in range(1, 101)] == [row.pin for row in pin_rows(board(), PORTS)]


def test_every_pin_is_accounted_for() -> None:
    """Nets, open pins, supplies, ground and configuration add up to the package."""
    used = Counter(row.direction for row in pin_rows(board(), PORTS))
    outputs = sum(bit.direction == "output" for bit in PORTS.bits)
    inputs = len(PORTS.bits) - outputs
    assert used == {
        "input": inputs,
        "output": outputs,
        "open": 68 - inputs - outputs + 1,  # and the programming supply that is left open
        "supply": 15,
        "ground": 10,
        "config": 6,
    }


def test_every_net_is_on_one_row() -> None:
    """The rows carry the nets of the logic, each once."""
    assert sorted(bit.net for bit in PORTS.bits) == sorted(row.net for row in pin_rows(board(), PORTS) if row.net)


def test_a_row_says_what_the_pin_meets_and_through_what() -> None:
    """The row strobe goes through its buffer, its resistor and its load."""
    row = next(row for row in pin_rows(board(), PORTS) if row.net == "ras_n")
    wired = next(net for net in nets() if net.name == "ras_n")
    assert (row.pin, row.function, row.direction) == ("51", "IOR_52", "output")
    assert row.meets == wired.meets
    assert row.through == "U22 SN74AHCT541 at 5 V, 33 ohm, load 90 pF"
    assert row.level == "gives 2.74 / 0.4 V"


def test_level_names_both_ends() -> None:
    """The device's pin and what stands at the other end: the bus, the chips, the part that is enabled."""
    levels = {row.net: row.level for row in pin_rows(read_board(LOOM), PORTS)}
    assert levels["mreq_n"] == "asks 2 / 0.8 V; bus gives 2.4 / 0.4 V"
    assert levels["ras_n"] == "gives 2.74 / 0.4 V; chip asks 2.7 / 0.8 V"
    assert levels["ma0"] == "gives 2.74 / 0.4 V; chip asks 2.4 / 0.8 V"
    assert levels["enable_n"] == "gives 2.74 / 0.4 V; U22 asks 2 / 0.8 V"
    assert levels["clk"] == "asks 2 / 0.8 V"


def test_pins_without_a_net_say_what_to_do_with_them() -> None:
    """Open pins, supplies, ground and the flash's pins each have their own words."""
    rows = {row.pin: row for row in pin_rows(board(), PORTS)}
    assert (rows["10"].direction, rows["10"].note) == ("open", "leave open")
    assert (rows["6"].direction, rows["6"].level) == ("supply", "3.14 to 3.46 V")
    assert (rows["50"].function, rows["50"].level) == ("VCC_SPI", "3.14 to 3.46 V")
    assert (rows["11"].function, rows["11"].level) == ("VCC", "1.14 to 1.26 V")
    assert (rows["75"].function, rows["75"].level) == ("VPP_2V5", "2.3 to 3.46 V")
    assert (rows["5"].direction, rows["5"].level) == ("ground", "0 V")
    assert (rows["76"].direction, rows["76"].note) == ("open", "leave open")
    assert (rows["48"].direction, rows["48"].note) == ("config", "to the flash's clock")


def test_every_configuration_pin_has_its_note() -> None:
    """No configuration pin is left without a word."""
    notes = [row.note for row in pin_rows(board(), PORTS) if row.direction == "config"]
    assert len(notes) == 6
    assert all(notes)


def test_odd_values_are_written_exactly() -> None:
    """Tenths of an ohm and of a picofarad keep their digits."""
    path = (PathElement("direct"), PathElement("series", series_milliohm=22_100), PathElement("load", load_ff=7_500))
    assert path_text(path) == "plain wire, 22.1 ohm, load 7.5 pF"
