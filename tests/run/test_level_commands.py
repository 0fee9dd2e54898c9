"""Levels and the original on the command line: a level that fails ends in exit 1 and a sentence to act on."""

import json
from pathlib import Path

import pytest

from rowkeeper import cli

BOARDS = Path(__file__).parents[2] / "boards"


def run(capsys: pytest.CaptureFixture[str], *arguments: str) -> tuple[int, str]:
    with pytest.raises(SystemExit) as stop:
        cli.main(arguments)
    return int(stop.value.code or 0), capsys.readouterr().out


def without_pull_ups(folder: Path) -> str:
    """The loom board whose parts list names no pull-up for its open-drain line."""
    lines = (BOARDS / "loom-16k.yaml").read_text(encoding="utf-8").splitlines()
    kept = [line for line in lines if not ("pull-up" in line and "enable_n" in line)]
    assert len(kept) < len(lines)
    path = folder / "loom-16k.yaml"
    path.write_text("\n".join(kept) + "\n", encoding="utf-8")
    return str(path)


def test_margins_show_levels_and_the_original(capsys: pytest.CaptureFixture[str]) -> None:
    """Both stand below the timing; the board holds."""
    code, out = run(capsys, "margins", str(BOARDS / "loom-16k.yaml"), "--quiet")
    assert code == 0
    assert "Levels at the worst supply" in out
    assert "The original: row to select, rising edge" in out
    assert max(map(len, out.splitlines())) <= 100


def test_margins_for_machines(capsys: pytest.CaptureFixture[str]) -> None:
    """`levels` always, `original` where the board file says what stands there."""
    for name, expected in (("loom-16k", True), ("kiln-64k", False)):
        code, out = run(capsys, "margins", str(BOARDS / f"{name}.yaml"), "--json", "--quiet")
        found = json.loads(out)
        assert code == 0
        assert {"wires", "needs", "drives", "settling"} == set(found["levels"])
        assert ("original" in found) is expected


def test_level_that_fails(capsys: pytest.CaptureFixture[str], tmp_path: Path) -> None:
    """Exit 1, with the net, the fault and what mends it, though every time is kept."""
    code, out = run(capsys, "margins", without_pull_ups(tmp_path), "--quiet")
    (sentence,) = [line for line in out.splitlines() if line.startswith("refused:")]
    assert code == 1
    assert "levels of enable_n" in sentence
    assert "names no pull-up" in sentence
    assert "Would mend it: a pull-up for this net" in sentence
    assert "FAILS" in out


def test_sheet_says_that_a_level_fails(capsys: pytest.CaptureFixture[str], tmp_path: Path) -> None:
    """The assembly sheet of such a board names the failed check; it never shows it as passed."""
    out = tmp_path / "out"
    run(capsys, "sheet", without_pull_ups(tmp_path), "--out", str(out), "--quiet")
    page = (out / "loom-16k" / "sheet.html").read_text(encoding="utf-8")
    assert "level enable levels" in page
