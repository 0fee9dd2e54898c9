"""The rest of a plan: ticks, arbitration, refresh, notes."""

from collections.abc import Callable
from dataclasses import fields, replace

from rowkeeper.sheets import plan_tables as t
from sheets.records import ARBITRATION, NOTES, PLAN, REFRESH, TICKS

Golden = Callable[[str, str], None]


def test_golden_plan(golden: Golden) -> None:
    """The whole text of a plan."""
    golden("plan.txt", t.plan_text(PLAN))


def test_arbitration_says_whether_a_wait_output_is_needed() -> None:
    """Available, needed, to spare, and what follows."""
    assert "to spare: no wait output is needed" in t.arbitration_text([ARBITRATION])
    late = replace(ARBITRATION, margin_ps=-129_000)
    assert "-129.0" in t.arbitration_text([late])
    assert "FAILS" in t.arbitration_text([late])
    assert "No event" in t.arbitration_text([])


def test_refresh_shows_every_bound_against_the_interval() -> None:
    """Running, any legal bus, any input whatever."""
    text = t.refresh_text(REFRESH)
    assert all(part in text for part in ("672.0 us", "1.8432 ms", "1.99168 ms", "8.32 us", "128 rows"))
    assert "FAILS" in t.refresh_text(replace(REFRESH, any_age_ps=2_000_000_001))


def test_every_tick_is_listed() -> None:
    """No field of the tick table is forgotten."""
    text = t.ticks_text(TICKS, 9_999, 10_001)
    names = [field.name.replace("_", " ") for field in fields(TICKS) if field.name != "style"]
    assert [name for name in names if f"\n{name} " not in text] == []
    assert "one tick is 9.999 ns to 10.001 ns" in text
    assert "one tick is 10.0 ns." in t.ticks_text(TICKS, 10_000, 10_000)


def test_notes_and_basis() -> None:
    """A plan from before routing says so."""
    assert "- tRC: the sheet promises 375 ns" in t.notes_text(NOTES)
    assert t.notes_text(()) == ""
    assert "BEFORE ROUTING" in t.plan_text(replace(PLAN, routed=False))
