"""Delay networks: windows worked by hand, corners that never switch, the replacement beside."""

import math
from dataclasses import replace
from fractions import Fraction
from itertools import product
from pathlib import Path

import pytest

from rowkeeper.contract import OriginalDelay, OriginalReport
from rowkeeper.reading import catalogue, read_board_text
from rowkeeper.reading.board import LogicFamily, RcDelay
from rowkeeper.timing import default_delays, settle
from rowkeeper.timing.original import delay_windows, network_of, original_report
from rowkeeper.timing.resistor_capacitor import Network, crossing, exact_ps

LOOM = (Path(__file__).parents[2] / "boards" / "loom-16k.yaml").read_text(encoding="utf-8").split("\noriginal:")[0]
SECTION = """
original:
  row_to_select:    {r: 330 ohm ± 5 %, c: 100 pF ± 10 %, input: LS}
  select_to_column: {r: 330 ohm ± 5 %, c: 68 pF ± 10 %, input: LS}
  multiplexer: {min: 0 ns, max: 27 ns}
"""
F = Fraction
NONE = (F(0), F(0))


def delay(family: LogicFamily, **changes: object) -> RcDelay:
    """330 ohm 5 % and 100 pF 10 %."""
    plain = RcDelay("row_to_select", 330_000, F(1, 20), 100_000, F(1, 10), family, family)
    return replace(plain, **changes)


def windows(family: LogicFamily, **changes: object) -> dict[str, OriginalDelay]:
    return {one.edge: one for one in delay_windows(delay(family, **changes))}


def nanoseconds(ps: int | None) -> float | None:
    return None if ps is None else round(ps / 1000, 1)


# Worked examples of the RC bound: 330 ohm 5 % and 100 pF 10 %, no driver resistance, thresholds of the sheets.
# LS: VT 0.8 to 2.0 V, VOH 2.7 to 3.4 V, VOL 0.2 to 0.5 V (SDLS025D); LS14: VT+ 1.4 to 1.9 V, VT- 0.5 to 1.0 V
# (DS006353); HCT: 0.8 to 2.0 V on rails of 4.5 to 5 V (SCHS119B); CMOS: 30 to 70 % of the supply.
WORKED = [
    ("LS", "rising", 3.1, 48.5),
    ("LS14", "rising", 10.5, 43.4),
    ("HCT", "rising", 4.9, 22.4),
    ("CMOS", "rising", 10.1, 45.9),
]


@pytest.mark.parametrize(("name", "edge", "earliest", "latest"), WORKED)
def test_worked_windows(name: str, edge: str, earliest: float, latest: float) -> None:
    """Thresholds, R and C at their ends alone: the figures that a pocket calculator gives."""
    family = replace(catalogue.family(name), supply_max_mv=5000) if name == "HCT" else catalogue.family(name)
    plain = windows(family)[edge].stages[0]
    assert (earliest, latest) == (nanoseconds(plain.earliest_ps), nanoseconds(plain.latest_ps))


def test_nominal_of_usual_parts() -> None:
    """Threshold 1.3 V, high 3.4 V, low 0.35 V: 33 ns x ln(3.05 / 2.1) = 12.3 ns, 33 ns x ln(3.05 / 0.95) = 38.5 ns."""
    found = windows(catalogue.family("LS"))
    assert (nanoseconds(found["rising"].nominal_ps), nanoseconds(found["falling"].nominal_ps)) == (12.3, 38.5)


def test_falling_edge_is_held_up_by_the_input() -> None:
    """An LS input sources up to 0.4 mA. With its drop taken at 330 ohm the latest is 106.8 ns; the resistor that is
    5 % high also drops 5 % more, so that the guaranteed figure is 108.2 ns.
    """
    network = network_of(delay(catalogue.family("LS")), "falling", 5000, currents=False, driver=False)
    at_nominal = replace(network, end=(F(200), F(500) + F(132)))
    assert (nanoseconds(crossing(network).earliest_ps), nanoseconds(crossing(at_nominal).latest_ps)) == (9.3, 106.8)
    assert nanoseconds(windows(catalogue.family("LS"))["falling"].stages[1].latest_ps) == 108.2


def test_schmitt_input_may_never_fall() -> None:
    """0.5 V and 0.4 mA through 330 ohm make 0.632 V, not below VT- 0.5 V (DS006353); the early end is 32.1 ns."""
    found = windows(catalogue.family("LS14"))["falling"]
    assert found.latest_ps is None
    assert "NEVER in this corner" in found.never
    assert nanoseconds(found.stages[0].earliest_ps) == 32.1


def test_never_where_the_current_alone_prevents_it() -> None:
    """0.45 V and no current pass a threshold of 0.5 V; 0.4 mA through 330 ohm hold it off."""
    span = (F(450), F(450))
    plain = Network(
        False, (F(330_000),) * 2, (F(100_000),) * 2, (F(500),) * 2, (F(3400),) * 2, span, NONE, NONE, NONE, NONE
    )
    assert crossing(plain).never is None
    held = crossing(replace(plain, current=(F(0), F(400))))
    assert held.latest_ps is None
    assert held.never == (F(582), F(500))
    assert held.earliest_ps == crossing(plain).earliest_ps


def test_already_switched() -> None:
    """A start beyond the threshold is a delay of nothing, said aloud."""
    low, high = (F(900),) * 2, (F(3000),) * 2
    found = crossing(Network(True, (F(1000),) * 2, (F(1000),) * 2, (F(800),) * 2, low, high, NONE, NONE, NONE, NONE))
    assert (found.earliest_ps, found.at_once) == (0, True)


@pytest.mark.parametrize("name", catalogue.families())
def test_each_cause_only_widens(name: str) -> None:
    """What is counted more makes the guaranteed window wider, never narrower; the usual part lies inside."""
    for one in delay_windows(delay(catalogue.family(name))):
        for before, after in zip(one.stages, one.stages[1:], strict=False):
            assert before.earliest_ps is not None
            assert after.earliest_ps is not None
            assert after.earliest_ps <= before.earliest_ps
            assert after.latest_ps is None or (before.latest_ps is not None and before.latest_ps <= after.latest_ps)
        if one.nominal_ps is not None and one.earliest_ps is not None and not catalogue.family(name).schmitt:
            assert one.earliest_ps <= one.nominal_ps
            assert one.latest_ps is None or one.nominal_ps <= one.latest_ps


def test_no_point_between_the_ends_lies_outside() -> None:
    """A grid over every quantity of the network, solved in floating point, stays inside the window."""
    network = network_of(delay(catalogue.family("LS")), "rising", 5000, currents=True, driver=True)
    found = crossing(network)
    assert found.earliest_ps is not None
    assert found.latest_ps is not None
    spans = (
        *(network.resistance, network.capacitance, network.threshold, network.start, network.end),
        *(network.start_ohm, network.end_ohm, network.start_current, network.current),
    )
    for r, c, vt, v0, vf, r0, r1, i0, i1 in product(*([float(a), float(a + b) / 2, float(b)] for a, b in spans)):
        settled, began = vf + (r + r1) * i1 / 1e6, v0 + (r + r0) * i0 / 1e6
        ps = (r + r1) * c / 1e6 * math.log((settled - began) / (settled - vt))
        assert found.earliest_ps - 1e-6 <= ps <= found.latest_ps + 1e-6


def test_rounded_outward() -> None:
    """1 kohm and 1 pF to half of the swing: 693.147... ps, so 693 at the earliest and 694 at the latest."""
    half = Network(True, (F(10**6),) * 2, (F(1000),) * 2, (F(500),) * 2, NONE, (F(1000),) * 2, NONE, NONE, NONE, NONE)
    found = crossing(half)
    assert (found.earliest_ps, found.latest_ps) == (693, 694)
    assert str(exact_ps(F(10**6), F(1000), F(2))).startswith("693.14718055994530941723212145817656807550")  # ln 2


def test_slow_edge_is_said() -> None:
    """Only a Schmitt input may follow a slow edge; AHCT takes 20 ns/V (SCLS269P)."""
    assert any("only a Schmitt input" in text for text in windows(catalogue.family("LS"))["rising"].remarks)
    assert windows(catalogue.family("LS14"))["rising"].remarks == ()


def test_gates_behind_the_network() -> None:
    """A gate's own window is added as a step of its own."""
    plain = windows(catalogue.family("LS"))["rising"]
    gated = windows(catalogue.family("LS"), gate_lo_ps=3, gate_hi_ps=9)["rising"]
    assert (plain.earliest_ps, plain.latest_ps) != (None, None)
    assert (gated.earliest_ps, gated.latest_ps) == (plain.earliest_ps + 3, plain.latest_ps + 9)  # type: ignore[operator]
    assert [stage.name for stage in gated.stages][-1] == "and the gates behind it"


def test_memory_is_visible() -> None:
    """The entry without a sheet taints what rests on it."""
    assert windows(catalogue.family("CMOS"))["rising"].from_memory
    assert not windows(catalogue.family("LS"))["rising"].from_memory


def report() -> OriginalReport:
    board = read_board_text((LOOM + SECTION).encode(), "loom-16k.yaml", None)
    found = original_report(board, settle(board, default_delays(board)))
    assert found is not None
    return found


def test_beside_the_replacement() -> None:
    """An RC into plain LS guarantees neither the row's hold nor the reference point of the column strobe."""
    limits = {(limit.symbol, limit.sense): limit for limit in report().limits}
    assert set(limits) == {("tRAH", "min"), ("tASC", "min"), ("tRCD", "min"), ("tRCD", "max"), ("tCAC", "max")}
    hold = limits["tRAH", "min"]
    assert hold.original_margin_ps is not None
    assert hold.original_earliest_ps is not None
    assert hold.original_margin_ps == hold.original_earliest_ps - 20_000 < 0 <= (hold.replacement_margin_ps or -1)
    late = limits["tRCD", "max"]
    assert late.original_latest_ps is not None
    assert late.original_margin_ps == 50_000 - late.original_latest_ps < 0


def test_no_section_no_report() -> None:
    """A board that does not say what stands there has nothing to compare."""
    board = read_board_text(LOOM.encode(), "loom-16k.yaml", None)
    assert original_report(board, settle(board, default_delays(board))) is None
