"""The only room that starts programs."""

import sys
from pathlib import Path

import pytest

from rowkeeper import tools


def test_runs_beside_its_files_and_reads_back() -> None:
    """Files are written, wanted files come back, others are absent, the folder is gone."""
    script = "pwd > where; cat a > b; echo out; echo err >&2; exit 3"
    run = tools.run_tool("sh", ["-c", script], files={"a": "é"}, wants=["b", "where", "none"])
    assert (run.code, run.stdout, run.stderr) == (3, "out\n", "err\n")
    assert run.files["b"].decode() == "é"
    assert "none" not in run.files
    assert not Path(run.files["where"].decode().strip()).exists()


def test_runs_a_program_it_was_given() -> None:
    """A program among the files is made executable and started by its relative name."""
    run = tools.run_tool("./hello", [], files={"hello": "#!/bin/sh\necho $0\n"})
    assert run.stdout == "./hello\n"


def test_missing_program_is_said() -> None:
    """A program that is not there is an answer of its own, not a failed check."""
    with pytest.raises(tools.ToolMissing, match="no-such-program is not installed"):
        tools.run_tool("no-such-program", [])
    assert not tools.available("no-such-program")


def test_time_out_ends_the_whole_family() -> None:
    """A program that does not end is ended together with what it started."""
    with pytest.raises(tools.TimedOut, match=r"sh did not end within 0\.2 s"):
        tools.run_tool("sh", ["-c", "sleep 60 & sleep 60"], timeout_s=0.2)


@pytest.mark.parametrize("name", ["../x", "/x", "a/b"])
def test_no_name_leaves_the_work_folder(name: str) -> None:
    """A file name that is not plain never reaches the disk."""
    with pytest.raises((ValueError, OSError)):
        tools.run_tool("true", [], files={name: "x"})


def test_no_shell_between() -> None:
    """An argument reaches the program as it is."""
    run = tools.run_tool(sys.executable, ["-c", "import sys; print(sys.argv[1])", "$(echo x); `y`"])
    assert run.stdout == "$(echo x); `y`\n"


def test_compiler_is_found() -> None:
    """A C++ compiler is there: the system's own or the one from the package index."""
    run = tools.run_tool("c++", ["--version"])
    assert run.code == 0
