"""The what-if picture: margin against the varied thing, limit by limit, the worst one named.

Takes a variation; gives an SVG that needs nothing from outside. Every line has a colour, a dash pattern and a name at
its end, so that it reads in black and white too. Coordinates are whole numbers: two runs give the same bytes. Must not
know how a value was judged.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction
from html import escape

from rowkeeper.sheets.plain import one_line
from rowkeeper.sheets.quantities import signed_nanoseconds
from rowkeeper.sheets.stamp import Stamp, header
from rowkeeper.sheets.vary_tables import Limit, PointFacts, VariationFacts, limit_text

__all__ = ["vary_svg"]

# Okabe and Ito, "Color universal design": without yellow, which is too light for a line on white.
_INKS = ("#0072B2", "#D55E00", "#009E73", "#CC79A7", "#E69F00", "#56B4E9", "#000000")
_DASHES = ("", "14 5", "4 4", "14 4 3 4", "9 3", "3 3 9 3 3 3", "22 6")
_LINES = len(_INKS)
_WIDTH, _HEIGHT = 1000, 620
_LEFT, _RIGHT, _TOP, _BOTTOM = 90, 770, 76, 520
_KEY = "The least margin of each limit; hatched: below zero it fails. Filled dots: timing holds. Rings: the worst."
_FLOOR_PS, _CEILING_PS = -150_000, 150_000  # beyond these a line leaves the picture
_TICKS_PS = (1_000, 2_000, 5_000, 10_000, 20_000, 50_000, 100_000)


@dataclass(frozen=True, slots=True)
class _Scale:
    """From a position and a margin to whole coordinates."""

    first: Fraction
    last: Fraction
    low_ps: int
    high_ps: int

    def x(self, position: Fraction) -> int:
        span = self.last - self.first
        share = (position - self.first) / span if span else Fraction(1, 2)
        return round(_LEFT + 20 + share * (_RIGHT - _LEFT - 40))

    def y(self, margin_ps: int) -> int:
        return round(_BOTTOM - Fraction(margin_ps - self.low_ps, self.high_ps - self.low_ps) * (_BOTTOM - _TOP))


def vary_svg(stamp: Stamp, variation: VariationFacts) -> str:
    """The whole picture."""
    points = variation.points
    limits = _chosen(points)
    scale = _scale(points, limits)
    title = f"{stamp.board}: margin against {variation.what}"
    parts = [
        f'<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 {_WIDTH} {_HEIGHT}" role="img" '
        'aria-labelledby="title about" font-family="sans-serif" font-size="14" fill="#000">',
        header(stamp, "markup").rstrip(),
        f'<title id="title">{_safe(title)}</title>',
        f'<desc id="about">{_safe(_about(points))}</desc>',
        f'<rect width="{_WIDTH}" height="{_HEIGHT}" fill="#fff"/>',
        _HATCH,
        f'<text x="{_LEFT}" y="30" font-size="19" font-weight="bold">{_safe(title)}</text>',
        f'<text x="{_LEFT}" y="52">{_KEY}</text>',
        *_frame(scale, variation),
        '<g clip-path="url(#plot)" fill="none" stroke-linejoin="round">',
        *(_line(scale, points, limit, place) for place, limit in enumerate(limits)),
        "</g>",
        *_names(scale, points, limits),
        *_worst(scale, points),
        "</svg>",
    ]
    return "\n".join(parts) + "\n"


_HATCH = (
    '<defs><pattern id="fails" width="8" height="8" patternUnits="userSpaceOnUse" patternTransform="rotate(45)">'
    '<line x1="0" y1="0" x2="0" y2="8" stroke="#999" stroke-width="1.4"/></pattern>'
    f'<clipPath id="plot"><rect x="{_LEFT}" y="{_TOP}" width="{_RIGHT - _LEFT}" height="{_BOTTOM - _TOP}"/></clipPath>'
    "</defs>"
)


def _safe(text: str) -> str:
    return escape(one_line(text), quote=True)


def _chosen(points: Sequence[PointFacts]) -> list[Limit]:
    """The limits that decide: the worst ones first, then those that come closest anywhere."""
    least: dict[Limit, int] = {}
    for point in points:
        for limit, margin in point.margins_ps.items():
            least[limit] = min(margin, least.get(limit, margin))
    deciding = {limit for point in points for limit in (point.worst, point.inside)}
    order = sorted(least, key=lambda limit: (limit not in deciding, least[limit], limit))
    return order[:_LINES]


def _scale(points: Sequence[PointFacts], limits: Sequence[Limit]) -> _Scale:
    shown = [point.margins_ps[limit] for point in points for limit in limits if limit in point.margins_ps]
    step = 10_000
    low = max(min([*shown, -step]), _FLOOR_PS) // step * step
    high = -(-min(max([*shown, step]), _CEILING_PS) // step) * step
    return _Scale(points[0].position, points[-1].position, low, high)


def _about(points: Sequence[PointFacts]) -> str:
    held = [point.label for point in points if point.holds]
    holds = f"holds at {', '.join(held)}" if held else "holds at none of the values"
    worst = "; ".join(
        f"{p.label}: {limit_text(p.worst)} {signed_nanoseconds(p.margins_ps[p.worst])} ns" for p in points
    )
    return f"Timing {holds}. Worst limit of each value: {worst}."


def _frame(scale: _Scale, variation: VariationFacts) -> list[str]:
    """Axes, grid, the failing half, the board's own value."""
    zero = scale.y(0)
    parts = [
        f'<rect x="{_LEFT}" y="{zero}" width="{_RIGHT - _LEFT}" height="{_BOTTOM - zero}" fill="url(#fails)" '
        'opacity="0.55"/>'
    ]
    step = next((s for s in _TICKS_PS if (scale.high_ps - scale.low_ps) // s <= 12), _TICKS_PS[-1])
    for margin in range(-(-scale.low_ps // step) * step, scale.high_ps + 1, step):
        y = scale.y(margin)
        parts.append(f'<path d="M{_LEFT} {y}H{_RIGHT}" stroke="#ccc" stroke-width="1"/>')
        parts.append(f'<text x="{_LEFT - 8}" y="{y + 5}" text-anchor="end">{margin // 1000}</text>')
    parts.append(f'<path d="M{_LEFT} {zero}H{_RIGHT}" stroke="#000" stroke-width="2.5"/>')
    parts += _values(scale, variation)
    parts.append(
        f'<rect x="{_LEFT}" y="{_TOP}" width="{_RIGHT - _LEFT}" height="{_BOTTOM - _TOP}" fill="none" stroke="#000"/>'
    )
    middle = (_TOP + _BOTTOM) // 2
    parts.append(f'<text transform="translate(32 {middle}) rotate(-90)" text-anchor="middle">margin, ns</text>')
    what = _safe(f"{variation.what}, {variation.unit}" if variation.unit else variation.what)
    parts.append(f'<text x="{(_LEFT + _RIGHT) // 2}" y="{_HEIGHT - 14}" text-anchor="middle">{what}</text>')
    return parts


def _values(scale: _Scale, variation: VariationFacts) -> list[str]:
    """A mark for each value, filled where it holds; the board's own value named."""
    parts = []
    turned = len(variation.points) > 6
    for point in variation.points:
        x = scale.x(point.position)
        fill = "#000" if point.holds else "#fff"
        parts.append(f'<circle cx="{x}" cy="{_BOTTOM + 12}" r="5" fill="{fill}" stroke="#000" stroke-width="1.5"/>')
        label = _safe(point.label.removesuffix(f" {variation.unit}"))
        place = f'transform="translate({x + 4} {_BOTTOM + 26}) rotate(-45)" text-anchor="end"'
        if not turned:
            place = f'x="{x}" y="{_BOTTOM + 36}" text-anchor="middle"'
        parts.append(f'<text {place} font-size="12">{label}</text>')
        if point.own:
            parts.append(f'<path d="M{x} {_TOP}V{_BOTTOM}" stroke="#000" stroke-dasharray="2 4"/>')
            parts.append(f'<text x="{x}" y="{_TOP - 6}" text-anchor="middle" font-size="12">this board</text>')
    return parts


def _line(scale: _Scale, points: Sequence[PointFacts], limit: Limit, place: int) -> str:
    met = [(scale.x(p.position), scale.y(p.margins_ps[limit])) for p in points if limit in p.margins_ps]
    path = "M" + "L".join(f"{x} {y}" for x, y in met)
    dash = f' stroke-dasharray="{_DASHES[place]}"' if _DASHES[place] else ""
    dots = "".join(f'<circle cx="{x}" cy="{y}" r="2.5" fill="{_INKS[place]}"/>' for x, y in met)
    name = f"<title>{_safe(limit_text(limit))}</title>"
    return f'<g stroke="{_INKS[place]}">{name}<path d="{path}" stroke-width="2.5"{dash}/>{dots}</g>'


def _names(scale: _Scale, points: Sequence[PointFacts], limits: Sequence[Limit]) -> list[str]:
    """Each line's name at its right end, moved apart so that none lies on another."""
    ends = []
    for place, limit in enumerate(limits):
        last = [p for p in points if limit in p.margins_ps][-1]
        y = min(max(scale.y(last.margins_ps[limit]), _TOP), _BOTTOM)
        ends.append((y, place, limit, scale.x(last.position)))
    ends.sort()
    places = [y for y, *_ in ends]
    for i in range(1, len(places)):
        places[i] = max(places[i], places[i - 1] + 18)
    for i in reversed(range(len(places))):
        places[i] = min(places[i], (places[i + 1] if i + 1 < len(places) else _BOTTOM + 18) - 18)
    parts = []
    for (y, place, limit, x), at in zip(ends, places, strict=True):
        dash = f' stroke-dasharray="{_DASHES[place]}"' if _DASHES[place] else ""
        parts.append(f'<path d="M{x} {y}L{_RIGHT + 12} {at}" stroke="{_INKS[place]}" fill="none"/>')
        parts.append(f'<path d="M{_RIGHT + 12} {at}h52" stroke="{_INKS[place]}" stroke-width="3"{dash} fill="none"/>')
        parts.append(f'<text x="{_RIGHT + 72}" y="{at + 5}">{_safe(limit_text(limit))}</text>')
    return parts


def _worst(scale: _Scale, points: Sequence[PointFacts]) -> list[str]:
    """The worst limit, ringed at every value and named where it changes; an arrow where it is out of the picture."""
    parts = []
    named: Limit | None = None
    for point in points:
        x, y = scale.x(point.position), scale.y(point.margins_ps[point.worst])
        shown = min(max(y, _TOP + 6), _BOTTOM - 6)
        ring = f'<circle cx="{x}" cy="{y}" r="7"' if y == shown else f'<path d="M{x - 6} {shown - 9}h12l-6 12z"'
        parts.append(f'{ring} fill="none" stroke="#000" stroke-width="2"/>')
        if point.worst != named:
            named = point.worst
            parts.append(_worst_name(x, shown, named))
    return parts


def _worst_name(x: int, y: int, limit: Limit) -> str:
    below = y < (_TOP + _BOTTOM) // 2
    side, at = ("start", max(x - 10, _LEFT + 6)) if x < (_LEFT + _RIGHT) // 2 else ("end", x + 10)
    place = f'x="{at}" y="{y + (24 if below else -16)}" text-anchor="{side}"'
    halo = 'font-weight="bold" stroke="#fff" stroke-width="4" paint-order="stroke"'
    return f"<text {place} {halo}>worst: {_safe(limit_text(limit))}</text>"
