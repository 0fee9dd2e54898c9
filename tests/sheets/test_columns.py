"""Tables keep to a hundred columns whatever is put in them, and lose nothing."""

from hypothesis import given
from hypothesis import strategies as st

from rowkeeper.sheets.columns import WIDTH, paragraph, shown_width, table, wrapped
from rowkeeper.sheets.plain import one_line

CELL = st.text(max_size=60) | st.text(alphabet="ab 記.\u0301", max_size=200)


@st.composite
def _grids(draw: st.DrawFn) -> tuple[list[str], list[list[str]], set[int]]:
    count = draw(st.integers(1, 12))
    row = st.lists(CELL, min_size=count, max_size=count)
    return draw(row), draw(st.lists(row, max_size=4)), draw(st.sets(st.integers(0, count - 1)))


def _letters(text: str) -> list[str]:
    return sorted(letter for letter in one_line(text) if letter not in " -")


@given(_grids())
def test_no_line_is_wider_than_the_page(grid: tuple[list[str], list[list[str]], set[int]]) -> None:
    """A hundred columns, wide letters counted as two."""
    headings, rows, right = grid
    lines = table(headings, rows, right)
    assert max(map(shown_width, lines)) <= WIDTH
    assert _letters(" ".join(lines)) == _letters(" ".join([*headings, *(cell for row in rows for cell in row)]))


@given(st.text(max_size=400), st.integers(0, 20))
def test_paragraphs_keep_to_the_page(text: str, indent: int) -> None:
    """The indent counts."""
    assert max(map(shown_width, paragraph(text, " " * indent))) <= WIDTH


def test_numbers_stand_point_under_point() -> None:
    """A column of numbers can be compared by eye."""
    actual = table(("ns",), [("12.35",), ("-3.0",), ("100",), (".125",)], right=(0,))
    assert ["ns".rjust(7), "-" * 7, " 12.35", " -3.0", "100", "   .125"] == actual


def test_words_wrap_and_long_words_break() -> None:
    """Nothing is cut off."""
    assert wrapped("ab cd efghijk l", 5) == ["ab cd", "efghi", "jk l"]
    assert wrapped("", 5) == [""]


def test_rows_wrap_inside_their_column() -> None:
    """The second line of a cell stands below the first."""
    lines = table(("a", "b"), [("x", "word " * 30)])
    assert lines[2].startswith("x  word")
    assert lines[3].startswith("   word")


def test_hanging_indent() -> None:
    """The second line of a list entry stands under its text."""
    lines = paragraph("word " * 30, "- ", "  ")
    assert lines[0].startswith("- word")
    assert lines[1].startswith("  word")


def test_a_long_word_is_kept_whole_where_another_column_can_give_way() -> None:
    """A name that is cut in two cannot be searched for."""
    lines = table(("name", "text"), [("address-captured", "word " * 40), ("x " * 40, "word")])
    assert [line for line in lines if "address-captured" in line] != []
