"""A resistor into a capacitor, read by a logic input: when it switches, at the earliest and at the latest.

Takes ends of every quantity; gives a window in whole picoseconds, rounded outward, or says that it may never switch.
Charging towards Vf from V0 the threshold VT is crossed after R C ln((Vf - V0) / (Vf - VT)) (textbook). An input is a
current source between two ends; it shifts Vf, and V0, by R times itself. Must not know boards or limits.

All ends of everything are tried. That is enough: the time grows with C and with the distance to go, falls with the
drive, and is concave in R where a current helps, so that its least value stands at an end of R as well.
"""

from collections.abc import Iterator
from dataclasses import dataclass
from decimal import ROUND_CEILING, ROUND_FLOOR, Context, Decimal
from fractions import Fraction
from itertools import product

__all__ = ["Crossing", "Network", "Span", "crossing", "exact_ps"]

Span = tuple[Fraction, Fraction]
_EXACT = Context(prec=60)
_SURE = Decimal(10) ** -30  # far more than the logarithm can be wrong by, far less than a picosecond


@dataclass(frozen=True, slots=True)
class Network:
    """One edge of a delay network. Millivolts, milliohms, femtofarads, microamperes; each a lower and an upper end.

    `rises`: the input goes up. `start`, `end`: what the driver gives before and after. `start_ohm`, `end_ohm`: its own
    resistance in each state. `start_current`, `current`: what the input feeds into the network while it still stands,
    and on the way; below zero it takes.
    """

    rises: bool
    resistance: Span
    capacitance: Span
    threshold: Span
    start: Span
    end: Span
    start_ohm: Span
    end_ohm: Span
    start_current: Span
    current: Span


@dataclass(frozen=True, slots=True)
class Crossing:
    """Earliest and latest crossing; None: never, in the easiest or in the hardest corner.

    `never`: the level at which it settles and the threshold in the hardest corner. `at_once`: in some corner the input
    never was on the other side of its threshold. `slowest_ps_per_v`: the slowest edge at the threshold.
    """

    earliest_ps: int | None
    latest_ps: int | None
    never: tuple[Fraction, Fraction] | None
    at_once: bool
    slowest_ps_per_v: Fraction | None


def exact_ps(milliohm: Fraction, femtofarad: Fraction, ratio: Fraction) -> Decimal:
    """R C ln(ratio) in picoseconds, to some fifty digits."""
    product_ps = milliohm * femtofarad / 10**6
    natural = _EXACT.ln(_decimal(ratio))
    return _EXACT.multiply(_decimal(product_ps), natural)


def _decimal(value: Fraction) -> Decimal:
    return _EXACT.divide(Decimal(value.numerator), Decimal(value.denominator))


def _floor(value: Decimal) -> int:
    return int(_EXACT.subtract(value, _SURE).to_integral_value(ROUND_FLOOR)) if value > 0 else 0


def _ceiling(value: Decimal) -> int:
    return int(_EXACT.add(value, _SURE).to_integral_value(ROUND_CEILING)) if value > 0 else 0


def crossing(network: Network) -> Crossing:
    """The window of one edge over all corners."""
    earliest: list[Decimal] = []
    latest: list[Decimal] = []
    nevers: list[tuple[Fraction, Fraction]] = []
    slopes: list[Fraction] = []
    at_once = False
    for resistance, own in product(_ends(network.resistance), _ends(network.end_ohm)):
        total = resistance + own
        corners = list(_corners(network, resistance, total))
        nevers += [(settled, threshold) for settled, threshold, ratio in corners if ratio is None]
        ratios = [ratio for _, _, ratio in corners if ratio is not None]
        if ratios:
            at_once = at_once or min(ratios) <= 1
            earliest.append(exact_ps(total, network.capacitance[0], max(min(ratios), Fraction(1))))
            latest.append(exact_ps(total, network.capacitance[1], max(*ratios, Fraction(1))))
            gaps = [abs(settled - threshold) for settled, threshold, ratio in corners if ratio is not None]
            slopes.append(total * network.capacitance[1] / 1000 / min(gaps))
    hardest = max(nevers, key=lambda pair: abs(pair[0] - pair[1]), default=None)
    return Crossing(
        _floor(min(earliest)) if earliest else None,
        None if nevers or not latest else _ceiling(max(latest)),
        hardest,
        at_once,
        max(slopes, default=None),
    )


def _ends(span: Span) -> tuple[Fraction, ...]:
    return tuple(dict.fromkeys(span))


def _corners(
    network: Network, resistance: Fraction, total: Fraction
) -> Iterator[tuple[Fraction, Fraction, Fraction | None]]:
    """Level it settles at, threshold, and (Vf - V0) / (Vf - VT); None where the threshold is never reached."""
    up = 1 if network.rises else -1
    levels = (network.end, network.start, network.start_ohm, network.threshold)
    for end, start, own, threshold in product(*map(_ends, levels)):
        for before, on_the_way in product(_ends(network.start_current), _ends(network.current)):
            settled = end + total * on_the_way / 10**6
            began = start + (resistance + own) * before / 10**6
            beyond = up * (settled - threshold)
            yield settled, threshold, None if beyond <= 0 else up * (settled - began) / beyond
