"""The drawing shows the package from above: pin 1 top left, the rest anticlockwise."""

from dataclasses import replace

import pytest

from rowkeeper.contract import PinRow
from rowkeeper.sheets.package_view import PinMark, direction_word, kind_of, package_view
from sheets.records import pin_rows

ROW = PinRow("1", "IO", "ras_n", "out", "3.3 V", "U5.4", "U31", "")


def _corner(mark: PinMark, middle: int) -> tuple[str, str]:
    return ("left" if mark.x < middle else "right", "top" if mark.y < middle else "bottom")


def test_sides_of_a_hundred_pins_seen_from_above() -> None:
    """Common practice for four-sided flat packages: 1 to 25 down the left side, then anticlockwise."""
    view = package_view(pin_rows())
    pins = {int(mark.pin): mark for mark in view.pins}
    middle = view.size // 2
    corners = {pin: _corner(pins[pin], middle) for pin in (1, 25, 26, 50, 51, 75, 76, 100)}
    expected = {
        1: ("left", "top"),
        25: ("left", "bottom"),
        26: ("left", "bottom"),
        50: ("right", "bottom"),
        51: ("right", "bottom"),
        75: ("right", "top"),
        76: ("right", "top"),
        100: ("left", "top"),
    }
    assert expected == corners
    assert {pins[pin].x for pin in range(1, 26)} == {view.body_at}
    assert {pins[pin].y for pin in range(26, 51)} == {view.body_at + view.body}
    assert {pins[pin].x for pin in range(51, 76)} == {view.body_at + view.body}
    assert {pins[pin].y for pin in range(76, 101)} == {view.body_at}


def test_pins_follow_each_other_anticlockwise() -> None:
    """The shoelace sum of the pins in order is negative on a screen whose y runs down."""
    points = [(mark.x, mark.y) for mark in package_view(pin_rows()).pins]
    following = [*points[1:], points[0]]
    area = sum(x * below - right * y for (x, y), (right, below) in zip(points, following, strict=True))
    assert area < 0


def test_only_corner_pins_have_the_large_number() -> None:
    """First and last pin of each side."""
    assert [m.pin for m in package_view(pin_rows()).pins if m.corner] == [
        "1",
        "25",
        "26",
        "50",
        "51",
        "75",
        "76",
        "100",
    ]


def test_leads_and_names_point_outwards() -> None:
    """Text never runs into the body: turned or not, it starts outside."""
    for mark in package_view(pin_rows()).pins:
        assert mark.name_x * mark.outward > 0
        assert mark.number_x * mark.outward < 0


def test_arrow_points_in_for_an_input_and_out_for_an_output() -> None:
    """The tip of an input is nearer to the body than its tail."""
    output, entry = (package_view([replace(ROW, direction=way)] * 4).pins[2] for way in ("out", "in"))
    tips = [int(mark.arrow.split(" ")[0].split(",")[0]) for mark in (output, entry)]
    tails = [int(mark.arrow.split(" ")[1].split(",")[0]) for mark in (output, entry)]
    assert tips[0] > tails[0]
    assert tips[1] < tails[1]


@pytest.mark.parametrize(
    ("direction", "kind", "word"),
    [
        ("in", "in", "board → device"),
        ("input", "in", "board → device"),
        ("output", "out", "device → board"),
        ("supply", "fixed", "supply"),
        ("ground", "fixed", "ground"),
        ("config", "fixed", "config"),
        ("none", "open", "leave open"),
        ("", "open", "leave open"),
    ],
)
def test_kinds_of_pins(direction: str, kind: str, word: str) -> None:
    """Every pin is an input, an output, fixed by the device, or left open."""
    row = replace(ROW, direction=direction)
    assert (kind, word) == (kind_of(row), direction_word(row))


@pytest.mark.parametrize("count", [0, 1, 99])
def test_uneven_package_is_our_own_bug(count: int) -> None:
    """A drawing with sides of different length is refused, never drawn wrong."""
    with pytest.raises(ValueError, match="same number of pins on each side"):
        package_view([ROW] * count)
