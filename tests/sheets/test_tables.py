"""Tables of the timing: worst first, marked where a figure is from memory, a sum where one asks why."""

from collections.abc import Callable
from dataclasses import replace
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from rowkeeper.contract import Margin, Term
from rowkeeper.reading.figures import Mark, Source
from rowkeeper.sheets import tables as t
from rowkeeper.sheets.columns import WIDTH, shown_width
from sheets.records import MARGINS, TASC, TCAC, TRCD, TRP

Golden = Callable[[str, str], None]

TIMES = st.integers(-(10**9), 10**12)
ENDS = st.none() | TIMES
SOURCES = st.builds(Source, st.sampled_from(Mark), st.text(max_size=80), st.text(max_size=30))
TERMS = st.builds(Term, st.text(max_size=120), ENDS, ENDS, TIMES, SOURCES)
MARGIN = st.builds(
    Margin,
    symbol=st.text(max_size=12),
    cycle=st.text(max_size=60),
    neighbour=st.text(max_size=60),
    sense=st.sampled_from(["min", "max"]),
    kind=st.sampled_from(["hard", "reference"]),
    required_ps=TIMES,
    earliest_ps=ENDS,
    latest_ps=ENDS,
    margin_ps=TIMES,
    terms=st.tuples(TERMS, TERMS),
    source=SOURCES,
    from_memory=st.booleans(),
    note=st.text(max_size=150),
)


def test_golden_explanation(golden: Golden) -> None:
    """A limit explained as a sum."""
    golden("explain.txt", t.explain_text((*MARGINS, TRP), "tASC") + "\n" + t.explain_text(MARGINS, "tCAC"))


@settings(max_examples=40)
@given(st.lists(MARGIN, max_size=4))
def test_timing_tables_keep_to_the_page(margins: list[Margin]) -> None:
    """No scrolling sideways, whatever the names and times."""
    texts = [t.margin_text(margins, every=True), *(t.explain_text(margins, margin.symbol) for margin in margins)]
    assert max(shown_width(line) for text in texts for line in text.splitlines()) <= WIDTH


def _limits(text: str) -> list[str]:
    body = text.split("\n\n", maxsplit=1)[0].splitlines()[2:]
    return [line.split()[1] for line in body]


def test_margins_come_worst_first_and_reference_points_last() -> None:
    """A reference point is no limit, however negative."""
    assert _limits(t.margin_text((TASC, TRCD, TCAC, TRP))) == ["tRP", "tCAC", "tASC", "tRCD"]


def test_one_line_per_limit_or_every_situation() -> None:
    """Short by default, whole when asked."""
    margins = (TASC, replace(TASC, margin_ps=20_000, cycle="opcode fetch"))
    assert len(_limits(t.margin_text(margins))) == 1
    assert len(_limits(t.margin_text(margins, every=True))) == 2


def test_marks_are_shown_and_explained_only_where_they_occur() -> None:
    """A star for memory, (ref) for a reference point, FAILS for a broken limit."""
    text = t.margin_text((TASC, TRCD, TRP))
    assert "tASC min *" in text
    assert "* rests on a figure from memory" in text
    assert "tRCD max (ref)" in text
    assert "tRP min FAILS" in text
    assert "from memory" not in t.margin_text((TCAC,))


def test_a_negative_reference_point_does_not_fail() -> None:
    """tRCD(max) is where the access time starts to depend on the column strobe, not a limit."""
    assert "FAILS" not in t.margin_text((TRCD,))


def test_no_margin_is_loud() -> None:
    """An empty table is not a pass."""
    assert t.margin_text(()).startswith("NOT RUN")


def test_sources_are_numbered_once() -> None:
    """Each document stands once below the table."""
    text = t.margin_text(MARGINS)
    assert text.count("MK4116 data sheet p. 4 (copy)") == 1
    assert text.count("  [1]\n") == 3


def test_explanation_names_the_known_limits_when_asked_for_an_unknown_one() -> None:
    """A typing mistake is answered with the list."""
    assert t.explain_text(MARGINS, "tXYZ") == "No limit is called tXYZ. Known here: tASC, tCAC, tRCD.\n"
    assert t.explain_text((), "tRP") == "No limit is called tRP. Known here: none.\n"


def test_explanation_ignores_capitals() -> None:
    """tasc is tASC."""
    assert t.explain_text(MARGINS, "tASC") == t.explain_text(MARGINS, "tasc")


def test_terms_that_do_not_add_up_are_said_so() -> None:
    """A sum that a person follows must be the one that was judged."""
    assert "ATTENTION" not in t.explain_text((TASC,), "tASC")
    wrong = replace(TASC, terms=TASC.terms[:-1])
    assert "ATTENTION: the terms add up to 12.05 ns, not to earliest." in t.explain_text((wrong,), "tASC")


@pytest.mark.parametrize(
    ("source", "expected"),
    [
        (Source(Mark.SHEET, "UM0080", "table 7"), "UM0080 table 7"),
        (Source(Mark.MEMORY), "from memory"),
        (Source(Mark.COPY, "MK4116", "p. 4"), "MK4116 p. 4 (copy)"),
        (Source(Mark.ROUTED), "routed"),
    ],
)
def test_sources_say_how_far_they_are_to_be_trusted(source: Source, expected: str) -> None:
    """A maker's own sheet needs no remark, everything else has one."""
    assert expected == t.source_text(source)


def test_terms_from_memory_have_a_mark() -> None:
    """The star stands at the figure itself."""
    row: Any = t.term_row(TASC.terms[-1])
    assert row == ("-", "4.5*", "between two packages of AHCT541 (-4.5 .. 4.5)", "from memory")
