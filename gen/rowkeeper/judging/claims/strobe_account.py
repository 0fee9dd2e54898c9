"""Helper assertions that tie the observers' stopwatches to the sequencer's own account of time.

Takes a checker and its stopwatches; adds lemmas. They strengthen the proofs and are proved with them: a wrong one
fails the proof. Must not add anything to what is claimed.
"""

from amaranth.hdl import Value

from rowkeeper.judging.claims.checker import Checker
from rowkeeper.judging.claims.scene import Seen, Stopwatch, at_most

__all__ = ["account_column", "account_rest", "account_row", "account_seen", "account_write", "limits"]


def limits(checker: Checker) -> tuple[int, int, int]:
    """Cut-off of the stopwatches of row, column and write: beyond every duration with the strobe low."""
    t = checker.scene.design.ticks
    row = max(t.give_up + t.write_lead + t.row_hold, t.refresh_low, t.precharge) + 2
    column = max(t.column_cap, t.column_rest, t.precharge) + 2
    return row, column, column + t.write_lead


def _when(condition: Value, holds: Value) -> Value:
    return ~condition | holds


def account_row(c: Checker, row: Stopwatch) -> None:
    """How long the row strobe has been low, from state and step."""
    s, t = c.scene, c.scene.design.ticks
    step = s.probe("step")
    c.lemma("row_step", _when(s.any_of("access", "refreshing"), row.lasted == step))
    late = s.any_of("reading", "writing")
    c.lemma("row_least", _when(late, row.lasted >= t.column + step))
    c.lemma("row_most", _when(late, row.lasted <= t.give_up + step))


def account_column(c: Checker, column: Stopwatch) -> None:
    """How long the column strobe has been low."""
    s, t = c.scene, c.scene.design.ticks
    step = s.probe("step")
    c.lemma("column_read", _when(s.probe("reading"), column.lasted == step))
    begun = s.probe("writing") & (step >= t.write_lead)
    c.lemma("column_write", _when(begun, column.lasted == step - t.write_lead))
    c.lemma("column_hold", _when(s.probe("holding"), column.lasted == t.row_hold + step))


def account_write(c: Checker, write: Stopwatch) -> None:
    """How long write enable has been low."""
    s, t = c.scene, c.scene.design.ticks
    step = s.probe("step")
    c.lemma("write_step", _when(s.probe("writing"), write.lasted == step))
    c.lemma("write_hold", _when(s.probe("holding") & s.write, write.lasted == t.write_lead + t.row_hold + step))


def account_rest(c: Checker, row: Stopwatch, column: Stopwatch) -> None:
    """How long the strobes have been high."""
    s, t = c.scene, c.scene.design.ticks
    step, waited = s.probe("step"), s.probe("waited")
    c.lemma("rest_row", s.row | (s.probe("rest") == at_most(row.lasted, t.precharge)))
    c.lemma("rest_column", _when(s.probe("resting"), column.lasted >= step))
    c.lemma("rest_pause", s.probe("rested") | (column.lasted >= at_most(waited, t.column_rest)))
    c.lemma("rest_idle", _when(s.probe("idle") & s.probe("rested"), column.lasted >= t.column_rest - 1))
    c.lemma("rest_prepare", _when(s.probe("preparing"), column.lasted >= at_most(step, t.column_rest)))


def account_seen(c: Checker, *seen: Seen) -> None:
    """The observers' two flip-flops hold what the logic's two hold."""
    for line in seen:
        c.lemma(f"seen_{line.line}", line.agrees)
