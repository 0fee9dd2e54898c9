"""The package seen from above, as coordinates: where each pin stands and which way its text runs.

Takes `PinRow` records in pin order; gives a `PackageView` of whole hundredths of a millimetre for the drawing template.
Pin 1 stands at the top of the left side and the pins count anticlockwise, as on every four-sided flat package seen from
above. Must not know what a net does.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

from rowkeeper.contract import PinRow
from rowkeeper.sheets.plain import is_active_low, net_label, net_letters, one_line

__all__ = ["Kind", "PackageView", "PinMark", "direction_word", "kind_of", "package_view"]

Kind = Literal["in", "out", "fixed", "open"]

SIDES = 4
BODY = 9900  # side of the body
CORNER = 800  # from a corner of the body to the first pin
LABELS = 2200  # room for leads and names on each side
LEAD = 260
ARROW_FROM, ARROW_TO = 330, 560
NAME_AT = 640
NUMBER_AT = 110
DOT_AT = 1050

_FIXED = frozenset({"supply", "ground", "power", "config", "configuration"})


@dataclass(frozen=True, slots=True)
class PinMark:
    """One pin of the drawing, about its own origin on the edge of the body.

    `turned`: a quarter turn anticlockwise. Along the turned axis the outside lies at `outward` (1 or -1).
    """

    pin: str
    kind: Kind
    name: str  # capitals without polarity, or the function of a fixed pin
    active_low: bool
    title: str
    x: int
    y: int
    turned: bool
    outward: Literal[1, -1]
    half: int  # half the width of the lead
    corner: bool

    @property
    def lead_x(self) -> int:
        """Left edge of the lead."""
        return 0 if self.outward > 0 else -LEAD

    @property
    def arrow(self) -> str:
        """The corners of a triangle that points into the body for an input, away from it for an output."""
        tip, tail = (ARROW_FROM, ARROW_TO) if self.kind == "in" else (ARROW_TO, ARROW_FROM)
        tip, tail = self.outward * tip, self.outward * tail
        return f"{tip},0 {tail},90 {tail},-90"

    @property
    def name_x(self) -> int:
        """Where the name starts, outside of the arrow; nearer for a pin without one."""
        return self.outward * (NAME_AT if self.kind in ("in", "out") else ARROW_FROM)

    @property
    def number_x(self) -> int:
        """Where the pin number starts, inside the body."""
        return -self.outward * NUMBER_AT


@dataclass(frozen=True, slots=True)
class PackageView:
    """The whole drawing. `size`: side of its square; `body_at`: left and top edge of the body."""

    pins: tuple[PinMark, ...]
    size: int
    body: int
    body_at: int
    dot_at: int
    lead: int


def package_view(rows: Sequence[PinRow]) -> PackageView:
    """The drawing of a package whose pins are `rows`, pin 1 first."""
    count = len(rows)
    if count == 0 or count % SIDES:
        raise ValueError(f"a four-sided package has the same number of pins on each side, not {count} pins")
    marks = tuple(_mark(row, index, count // SIDES) for index, row in enumerate(rows))
    return PackageView(marks, BODY + 2 * LABELS, BODY, LABELS, LABELS + DOT_AT, LEAD)


def kind_of(row: PinRow) -> Kind:
    """Whether a pin is an input, an output, fixed by the device (supply, ground, configuration) or left open."""
    direction = row.direction.strip().lower()
    if direction.startswith("in"):
        return "in"
    if direction.startswith("out"):
        return "out"
    return "fixed" if direction in _FIXED else "open"


def direction_word(row: PinRow) -> str:
    """The direction in words that leave no doubt about the point of view."""
    words = {"in": "board → device", "out": "device → board", "open": "leave open"}
    return words.get(kind_of(row), one_line(row.direction))


def _mark(row: PinRow, index: int, per_side: int) -> PinMark:
    side, place = divmod(index, per_side)
    x, y = _edge(side, place, per_side)
    kind = kind_of(row)
    signal = kind in ("in", "out")
    name = net_letters(row.net) if signal else one_line(row.function)
    shown = net_label(row.net) if signal else name
    title = f"pin {one_line(row.pin)}: {shown}, {direction_word(row)}"
    half = min(75, _step(per_side, 1) // 4)
    corner = place in (0, per_side - 1)
    outward: Literal[1, -1] = -1 if side in (0, 1) else 1
    low = signal and is_active_low(row.net)
    return PinMark(one_line(row.pin), kind, name, low, title, x, y, side in (1, 3), outward, half, corner)


def _edge(side: int, place: int, per_side: int) -> tuple[int, int]:
    """The point on the edge of the body: left side downwards, bottom rightwards, right side upwards, top leftwards."""
    near, far = LABELS, LABELS + BODY
    forth = LABELS + CORNER + _step(per_side, place)
    back = LABELS + BODY - CORNER - _step(per_side, place)
    return ((near, forth), (forth, far), (far, back), (back, near))[side]


def _step(per_side: int, place: int) -> int:
    """Distance from the first pin of a side to the one at `place`."""
    return (BODY - 2 * CORNER) * place // max(1, per_side - 1)
