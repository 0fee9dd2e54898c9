"""Channels of the packages: which input and output carries which net, and what the other pins want."""

from dataclasses import replace

from rowkeeper.reading import catalogue
from rowkeeper.reading.board import Board, Net, PathElement
from rowkeeper.sheets.channels import Channel, package_tables
from sheets.boards import BOARD, BUFFER


def _part(name: str, designator: str) -> PathElement:
    return PathElement("part", part=catalogue.part(name), designator=designator)


def _series(ohm: int) -> PathElement:
    return PathElement("series", series_milliohm=1000 * ohm)


def _board(*nets: Net) -> Board:
    return replace(BOARD, wiring=replace(BOARD.wiring, nets=nets))


def test_channels_are_used_up_in_file_order() -> None:
    """Pins 2 to 9 face 18 to 11, and the bus is on the input side."""
    through = (_part("SN74LVC245A", "U24"),)
    nets = (Net("mreq_n", "input", "1", "X1.21", through), Net("a0", "input", "78", "X1.1", through))
    (table,) = package_tables(_board(*nets))
    assert table.channels == (
        Channel("/MREQ", "X1.21", "2", "18", "pin 1"),
        Channel("A0", "X1.1", "3", "17", "pin 78"),
    )
    assert table.unused == "Tie 6 unused inputs (pins 4, 5, 6, 7, 8, 9) to GND, their outputs open."
    assert "1 DIR: 3.3 V: from side A to side B" in table.fixed
    assert table.from_memory


def test_output_goes_through_its_resistor_to_the_chips() -> None:
    """From the device's pin; an enable that a net meets is named by that net, not by the catalogue's words."""
    ras = Net("ras_n", "output", "51", "U10-U17.4", (_part("SN74AHCT541", "U22"), _series(22)))
    enable = Net("enable_n", "output", "56", "U22.1+19", (_part("SN74LVC1G07", "U27"),))
    strobes, gate = package_tables(_board(ras, enable))
    assert strobes.channels == (Channel("/RAS", "pin 51", "2", "18", "22 ohm > U10-U17.4"),)
    assert strobes.fixed[:2] == ("1 OE1: /ENABLE", "19 OE2: /ENABLE")
    assert gate.channels == (Channel("/ENABLE", "pin 56", "2", "4", "U22.1+19"),)
    assert gate.unused == ""


def test_two_parts_in_a_row_name_each_other() -> None:
    """The first ends at an input of the second, the second begins at an output of the first."""
    through = (_part("SN74AHCT541", "U22"), _series(33), _part("SN74AHCT244", "U23"))
    first, second = package_tables(_board(Net("ras_n", "output", "51", "U10.4", through)))
    assert first.channels == (Channel("/RAS", "pin 51", "2", "18", "33 ohm > U23.2"),)
    assert second.channels == (Channel("/RAS", "U22.18", "2", "18", "U10.4"),)


def test_kept_data_buffer_is_not_wired_anew() -> None:
    """Eight lines go by one net: their channels are on the board already."""
    (table,) = package_tables(_board(Net("data_out", "path", "", "U10-U17.14", (_part("SN74LS244", "U6"),))))
    assert (table.channels, table.unused) == ((), "")
    assert table.remark == "DATA_OUT: the channels stay as they are wired."


def test_part_without_a_pin_table_says_so() -> None:
    """No channel is made up."""
    element = PathElement("part", part=BUFFER, designator="U6")
    (table,) = package_tables(_board(Net("ras_n", "output", "51", "U10.4", (element,))))
    assert (table.channels, table.fixed) == ((), ())
    assert "no pin table" in table.remark
