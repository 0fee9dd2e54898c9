"""Tables of the catalogue: every figure with where it comes from."""

from collections.abc import Callable

from hypothesis import given, settings
from hypothesis import strategies as st

from rowkeeper.reading.describe import KINDS, CatalogRow, FigureRow, all_names, catalog_rows, figure_rows
from rowkeeper.sheets.columns import WIDTH, shown_width
from rowkeeper.sheets.parts_tables import catalogue_text, figures_text

TEXT = st.text(max_size=120)
ROWS = (
    FigureRow("tRC", "", "375", "", "ns", "MK4116 sheet p. 3", "sheet", "320 ns to about 65 °C"),
    FigureRow("tRAS", "", "150", "10000", "ns", "MK4116 sheet p. 3", "sheet", ""),
    FigureRow("tCSH", "", "150", "", "ns", "from memory", "from memory", ""),
    FigureRow("tRCD", "", "25", "50", "ns", "comparison of sheets", "copy", ""),
)


def _widest(text: str) -> int:
    return max((shown_width(line) for line in text.splitlines()), default=0)


def test_golden(golden: Callable[[str, str], None]) -> None:
    """A list of the catalogue, and the figures of one part."""
    listed = catalogue_text({"chips": [CatalogRow("4116-15", "16K x 1", "128 rows in 2 ms")], "devices": []})
    golden("parts.txt", listed + "\n" + figures_text("4116-15: 16K x 1", ROWS, ["Pin 8 is +12 V."]))


def test_figures_from_memory_are_marked() -> None:
    """A star at the symbol and its meaning below; neither where every figure has a document."""
    assert "\ntCSH *" in figures_text("part", ROWS)
    assert "* from memory, confirmed in no document at hand" in figures_text("part", ROWS)
    assert "*" not in figures_text("part", ROWS[:2])


def test_columns_without_any_entry_are_left_out() -> None:
    """A chip has one grade: no column for it."""
    heads = figures_text("part", ROWS).splitlines()[2].split()
    assert heads == ["symbol", "min", "max", "unit", "source", "note"]


def test_part_without_figures() -> None:
    """Said, not shown as an empty table."""
    assert "no figure" in figures_text("part", ())


@settings(max_examples=40)
@given(st.lists(st.builds(FigureRow, *[TEXT] * 8), max_size=3), st.lists(TEXT, max_size=2), TEXT)
def test_any_figures_keep_to_the_page(rows: list[FigureRow], notes: list[str], title: str) -> None:
    """No scrolling sideways."""
    listed = [CatalogRow(row.symbol, row.note, row.source) for row in rows]
    assert max(_widest(figures_text(title, rows, notes)), _widest(catalogue_text({title: listed}))) <= WIDTH


def test_the_shipped_catalogue_keeps_to_the_page() -> None:
    """Every entry of every kind, and all of its figures listed."""
    assert _widest(catalogue_text({kind: catalog_rows(kind) for kind in KINDS})) <= WIDTH
    for name in all_names():
        text = figures_text(name, figure_rows(name))
        assert _widest(text) <= WIDTH
        assert [row.symbol for row in figure_rows(name) if row.symbol.split(" ")[0] not in text] == []
