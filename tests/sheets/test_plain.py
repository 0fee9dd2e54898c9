"""Foreign text becomes one harmless line; nets are named as people write them."""

import unicodedata

import pytest
from hypothesis import given
from hypothesis import strategies as st

from rowkeeper.sheets.plain import comment_text, is_active_low, net_label, net_letters, one_line
from sheets import hostile


@given(st.text())
def test_one_line_has_nothing_unseen(text: str) -> None:
    """No control character, text direction or line separator is left, and cleaning twice changes nothing."""
    line = one_line(text)
    assert not [letter for letter in line if unicodedata.category(letter)[0] == "C"]
    assert [line] == (line.splitlines() or [""])
    assert line == one_line(line)


def test_one_line_keeps_letters_of_every_script() -> None:
    """Only what cannot be seen is taken out."""
    assert one_line(" Köln\t記憶 \n board ") == "Köln 記憶 board"


@given(st.text() | st.text(alphabet="*/-<>!\\\n` $"))
def test_comment_text_cannot_end_a_comment(text: str) -> None:
    """Neither a block comment nor a markup comment nor a line can be left."""
    safe = comment_text(text)
    assert safe.isascii()
    assert not [part for part in ("*/", "/*", "--", "<", ">", "\\", "`", "$", "\n", "\r") if part in safe]


@pytest.mark.parametrize("text", hostile.ALL)
def test_hostile_text_stays_in_a_comment(text: str) -> None:
    """The attempts kept for every file type."""
    assert len(comment_text(text).splitlines()) == 1
    assert "*/" not in comment_text(text)


@pytest.mark.parametrize(
    ("net", "label", "letters", "low"),
    [
        ("ras_n", "/RAS", "RAS", True),
        ("ma3", "MA3", "MA3", False),
        ("clk", "CLK", "CLK", False),
        ("data_in", "DATA_IN", "DATA_IN", False),
        ("_n", "_N", "_N", False),
    ],
)
def test_net_names(net: str, label: str, letters: str, low: bool) -> None:
    """`ras_n` in the logic is /RAS in text and RAS under an overbar in a drawing."""
    assert (label, letters, low) == (net_label(net), net_letters(net), is_active_low(net))
