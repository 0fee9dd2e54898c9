"""What the tree promises: rooms, top level, settings."""

import os
import subprocess
import sys
from pathlib import Path

import pytest

TOP = Path(__file__).parent.parent


def test_top_level_is_tidy() -> None:
    """Nothing at the top but what a newcomer expects there."""
    tracked = subprocess.run(["git", "ls-files"], cwd=TOP, capture_output=True, text=True, check=False).stdout.split()
    if not tracked:
        pytest.skip("not a git checkout")
    tops = {name.split("/")[0] for name in tracked if not name.startswith(".")}
    expected = {"README.md", "DEVELOPERS.md", "pyproject.toml", "LICENSE", "gen", "boards", "tests", "out"}
    assert tops == expected
    assert [name for name in tracked if name.startswith("out/")] == ["out/.gitignore"]


@pytest.mark.parametrize("command", [["ruff", "check", "."], ["ruff", "format", "--check", "."], ["mypy"]])
def test_lint_and_types(command: list[str]) -> None:
    """Ruff and strict mypy find nothing."""
    module = [sys.executable, "-m", *command]
    run = subprocess.run(module, cwd=TOP, capture_output=True, text=True, check=False)
    assert run.returncode == 0, run.stdout + run.stderr


def test_rooms_keep_their_direction() -> None:
    """The import rules hold, indirect imports included."""
    program = Path(sys.executable).parent / "lint-imports"
    environment = {**os.environ, "PYTHONPATH": str(TOP / "gen")}
    run = subprocess.run([str(program)], cwd=TOP, env=environment, capture_output=True, text=True, check=False)
    assert run.returncode == 0, run.stdout


def test_every_dependency_has_its_sentence() -> None:
    """A dependency stands below a comment that says what it is for."""
    lines = (TOP / "pyproject.toml").read_text().splitlines()
    begin, end = lines.index("dependencies = ["), lines.index("[project.scripts]")
    for before, line in zip(lines[begin:end], lines[begin + 1 : end], strict=False):
        if line.strip().startswith('"'):
            assert before.strip().startswith("# "), line
