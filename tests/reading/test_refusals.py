"""Every wrong board file gets one refusal, with its exact text and place.

`refusals.txt` holds what a person sees; run with BLESS=1 to write it anew, then read it.
"""

import os
from pathlib import Path

import pytest

from reading.refusal_cases import CASES, Case
from rowkeeper.reading import read_board, read_board_text
from rowkeeper.reading.problems import Problem, Refused, printed_all

BOARDS = Path(__file__).parents[2] / "boards"
EXPECTED = Path(__file__).with_name("refusals.txt")
RULE = "=" * 30


def wrong_file(case: Case) -> bytes:
    """The bytes of the wrong file; a lone surrogate in a case stands for a byte that is not UTF-8."""
    good = (BOARDS / f"{case.base}.yaml").read_text(encoding="utf-8")
    assert good.count(case.old) == 1, f"{case.name}: the text to exchange stands {good.count(case.old)} times"
    return good.replace(case.old, case.new).encode("utf-8", "surrogateescape")


def refusal(case: Case) -> tuple[Problem, ...]:
    """What the reader says to a wrong file."""
    with pytest.raises(Refused) as caught:
        read_board_text(wrong_file(case), f"{case.base}.yaml", None)
    return caught.value.problems


def expected() -> dict[str, str]:
    """The texts of `refusals.txt` by the name of the case."""
    texts: dict[str, str] = {}
    for piece in EXPECTED.read_text(encoding="utf-8").split(RULE + " ")[1:]:
        name, _, text = piece.partition("\n")
        texts[name] = text.strip("\n")
    return texts


@pytest.mark.skipif("BLESS" not in os.environ, reason="only to write refusals.txt anew")
def test_bless() -> None:
    """Writes what the reader says today; the person who blesses reads every message."""
    pieces = [f"{RULE} {case.name}\n{printed_all(refusal(case))}\n" for case in CASES]
    EXPECTED.write_text("\n".join(pieces), encoding="utf-8")


@pytest.mark.parametrize("case", CASES, ids=[case.name for case in CASES])
def test_refusal(case: Case) -> None:
    """One mistake gives one problem, worded and placed as in refusals.txt."""
    problems = refusal(case)
    assert expected()[case.name] == printed_all(problems)
    assert len(problems) == 1


def test_no_case_is_forgotten() -> None:
    """The text file holds these cases and no others, each once."""
    assert list(expected()) == [case.name for case in CASES]
    assert len(CASES) >= 60


@pytest.fixture
def here(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    monkeypatch.chdir(tmp_path)
    return tmp_path


def said(path: Path) -> str:
    with pytest.raises(Refused) as caught:
        read_board(path)
    return str(caught.value)


def test_directory(here: Path) -> None:
    """A directory is named as one."""
    (here / "board").mkdir()
    assert said(Path("board")) == "board: this is a directory, not a file\n  fix: name the YAML file itself"


def test_no_such_file(here: Path) -> None:  # noqa: ARG001 - only the folder matters
    """A file that is not there is named as the user named it."""
    assert said(Path("x/loom.yaml")) == "x/loom.yaml: there is no such file\n  fix: check the name and the folder"


def test_unreadable_file(here: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """A file without the right to read it. The right is taken by hand, because the tests may run as root."""
    (here / "loom.yaml").write_text("board: {}")

    def refuse(*_: object, **__: object) -> None:
        raise PermissionError(13, "Permission denied")

    monkeypatch.setattr(Path, "open", refuse)
    assert said(Path("loom.yaml")) == "loom.yaml: this file may not be read\n  fix: give yourself the right to read it"


def test_file_of_ten_megabytes(here: Path) -> None:
    """A large file is refused before it is read as text."""
    (here / "loom.yaml").write_bytes(b"# padding\n" * 1_000_000)
    assert said(Path("loom.yaml")) == (
        "loom.yaml: this file is larger than 1 MB\n  fix: a board file has a few kilobytes: name the right one"
    )


def test_special_file() -> None:
    """A device file is never opened."""
    assert said(Path("/dev/zero")).startswith("/dev/zero: this is not a regular file")


def test_name_that_no_file_can_have() -> None:
    """A null character in the name is a mistake like any other."""
    assert "cannot be read" in said(Path("a\0b.yaml")) or "no such file" in said(Path("a\0b.yaml"))


@pytest.mark.parametrize("name", ["Loom", "loom 16k", "loom_16k", "-loom", "lööm", "module"])
def test_file_name_that_cannot_name_the_output(here: Path, name: str) -> None:
    """The output folder and the Verilog module take their names from the file's."""
    (here / f"{name}.yaml").write_bytes((BOARDS / "loom-16k.yaml").read_bytes())
    message = said(Path(f"{name}.yaml"))
    assert message.startswith(f"{name}.yaml: the file name `{name}` ")
    assert message.count("fix:") == 1


def test_empty_file() -> None:
    """An empty file is said to be empty."""
    with pytest.raises(Refused, match="this file is empty"):
        read_board_text(b"# nothing here\n", "loom.yaml", None)


def test_all_problems_at_once() -> None:
    """Problems of different sections are reported together, in file order."""
    text = (BOARDS / "loom-16k.yaml").read_bytes()
    text = text.replace(b"grade: 4 MHz", b"grade: 5 MHz").replace(b"chip: 4116-15", b"chip: 4116-16")
    text = text.replace(b"standby: own-timer", b"standby: owntimer").replace(b"pin: 52", b"pin: 58")
    with pytest.raises(Refused) as caught:
        read_board_text(text, "loom-16k.yaml", None)
    lines = [problem.at.line for problem in caught.value.problems]
    assert len(lines) == 4
    assert lines == sorted(lines)
