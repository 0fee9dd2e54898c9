"""The strict subset of YAML and its places."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from rowkeeper.reading.problems import Problems
from rowkeeper.reading.text_file import safe_text
from rowkeeper.reading.tree import Block, Listing, Node, Scalar, places_of, read_tree

SAMPLE = """\
# a comment
board: {name: "Loom: 16", revision: 010}
memory:
  - bank: 0
    flag: NO
  - [1, 2.50, 'x']
empty:
"""


def tree(text: str) -> Node:
    problems = Problems()
    root = read_tree(text, "f.yaml", problems)
    assert problems.in_order() == ()
    assert root is not None
    return root


def plain(node: Node) -> object:
    """The tree as plain lists, dictionaries and text."""
    if isinstance(node, Scalar):
        return node.text
    if isinstance(node, Listing):
        return [plain(item) for item in node.items]
    return {key.text: plain(value) for key, value in node.entries}


def test_every_scalar_stays_text() -> None:
    """010 is not 8, NO is not false, 2.50 keeps its nought."""
    assert plain(tree(SAMPLE)) == {
        "board": {"name": "Loom: 16", "revision": "010"},
        "memory": [{"bank": "0", "flag": "NO"}, ["1", "2.50", "x"]],
        "empty": "",
    }


def test_places() -> None:
    """Line and column from 1, and the text as it stands, quotes included."""
    places = dict(places_of(tree(SAMPLE)))
    assert (
        places["board.name"].line,
        places["board.name"].column,
        places["board.name"].raw,
    ) == (2, 15, '"Loom: 16"')
    assert (places["memory.0.flag"].line, places["memory.0.flag"].column, places["memory.0.flag"].raw) == (5, 11, "NO")
    assert (places["memory.1.1"].line, places["memory.1.1"].column) == (6, 9)
    assert str(places["memory.1.1"]) == "f.yaml:6:9"


def test_keys_keep_their_order() -> None:
    """A block is a list of entries in file order."""
    root = tree("b: 1\na: 2\n")
    assert isinstance(root, Block)
    assert [key.text for key, _ in root.entries] == ["b", "a"]


def test_line_ends_of_other_systems() -> None:
    """Carriage return and line feed together end a line, and do not shift a place."""
    problems = Problems()
    text = safe_text(SAMPLE.replace("\n", "\r\n").encode(), "f.yaml", problems)
    assert text == SAMPLE


@pytest.mark.parametrize(
    ("data", "line", "column"),
    [
        (b"a: 1\nb:\t2\n", 2, 3),
        (b"a: \xc3\xa9\nb: \xff\n", 2, 4),
        ("a: é\u200b\n".encode(), 1, 5),
        ("a: 1\u2028b: 2\n".encode(), 1, 5),
        ("a: 1\u0085b: 2\n".encode(), 1, 5),
        (b"a: 1\rb: 2\n", 1, 5),
        (b"a: \x7f\n", 1, 4),
    ],
)
def test_places_of_strange_characters(data: bytes, line: int, column: int) -> None:
    """Columns count characters, not bytes; nothing that some reader takes for a line end slips through."""
    problems = Problems()
    assert safe_text(data, "f.yaml", problems) is None
    (problem,) = problems.in_order()
    assert (line, column) == (problem.at.line, problem.at.column)


def test_a_binary_file_does_not_fill_the_screen() -> None:
    """After twenty places the rest is left out."""
    problems = Problems()
    safe_text(bytes(range(1, 9)) * 1000, "f.yaml", problems)
    assert len(problems) == 20


def test_too_many_values() -> None:
    """A file of endless small values stops early."""
    problems = Problems()
    assert read_tree("[" + "1," * 30_000 + "1]", "f.yaml", problems) is None
    assert "more than 20000 values" in problems.in_order()[0].message


def test_nesting_without_end() -> None:
    """Depth is refused before the parser's own stack is."""
    problems = Problems()
    assert read_tree("[" * 5000, "f.yaml", problems) is None
    assert "nested deeper" in problems.in_order()[0].message


@given(st.text(alphabet=st.sampled_from("ab:-?,[]{}&*!|>'\"%@`#<~ \n0"), max_size=60))
def test_any_text_is_a_tree_or_problems(text: str) -> None:
    """The marks of YAML in any order give a tree or a problem with a place, never a failure."""
    problems = Problems()
    root = read_tree(text, "f.yaml", problems)
    assert root is not None or len(problems) > 0
    assert all(problem.at.line >= 1 and problem.at.column >= 1 for problem in problems.in_order())
