"""The output folder: all of it or nothing."""

from pathlib import Path

import pytest

from rowkeeper.run.output import OutputRefused, write_all

FILES = {"manifest.json": b"{}", "bench/run.sh": b"#!/bin/sh\n", "logic.v": b"module m; endmodule\n"}


def listing(folder: Path) -> dict[str, bytes]:
    return {str(p.relative_to(folder)): p.read_bytes() for p in sorted(folder.rglob("*")) if p.is_file()}


def test_writes_every_file(tmp_path: Path) -> None:
    """A new folder holds exactly what was composed, and nothing lies beside it."""
    write_all(tmp_path / "out" / "loom", FILES)
    assert listing(tmp_path / "out") == {f"loom/{name}": content for name, content in FILES.items()}


def test_scripts_can_be_run(tmp_path: Path) -> None:
    """The emitted bench is started with one command."""
    write_all(tmp_path / "loom", FILES)
    assert (tmp_path / "loom" / "bench" / "run.sh").stat().st_mode & 0o100


def test_replaces_an_older_output(tmp_path: Path) -> None:
    """A file of the last run that is no longer written is gone."""
    write_all(tmp_path / "loom", {**FILES, "old.txt": b"x"})
    write_all(tmp_path / "loom", FILES)
    assert listing(tmp_path / "loom") == FILES


def test_leaves_a_folder_of_somebody_else_alone(tmp_path: Path) -> None:
    """A folder that is not an output of ours is never replaced."""
    (tmp_path / "loom").mkdir()
    (tmp_path / "loom" / "thesis.txt").write_text("years of work")
    with pytest.raises(OutputRefused, match="was not written by rowkeeper"):
        write_all(tmp_path / "loom", FILES)
    assert listing(tmp_path / "loom") == {"thesis.txt": b"years of work"}


def test_refuses_a_file_in_the_way(tmp_path: Path) -> None:
    """A file where a folder should go is refused in words."""
    (tmp_path / "out").write_text("")
    with pytest.raises(OutputRefused, match="cannot write"):
        write_all(tmp_path / "out" / "loom", FILES)


@pytest.mark.parametrize("name", ["/etc/passwd", "../x", "a/../../x"])
def test_no_name_leaves_the_folder(tmp_path: Path, name: str) -> None:
    """A name that would leave the folder is our own bug, and writes nothing."""
    with pytest.raises(ValueError, match="not a name inside"):
        write_all(tmp_path / "loom", {name: b"x"})
    assert listing(tmp_path) == {}
