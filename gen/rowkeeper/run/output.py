"""Writes what was composed: all of it or nothing.

Takes a folder and a mapping of relative names to bytes; gives the folder, complete. The files are first written
beside the target and put in its place by renaming, so a run that is stopped leaves what was there before.
"""

import os
import shutil
import tempfile
from collections.abc import Mapping
from pathlib import Path, PurePosixPath

__all__ = ["OutputRefused", "UnknownNameError", "write_all", "write_text"]


class OutputRefused(Exception):
    """The target cannot be written; the message says why."""


class UnknownNameError(Exception):
    """A name that the catalogue or the plan does not have."""


def write_all(folder: Path, files: Mapping[str, bytes]) -> None:
    """Make `folder` hold exactly `files`. Raises OutputRefused and changes nothing where that is not possible."""
    if folder.exists() and not _ours(folder):
        raise OutputRefused(f"{folder} exists and was not written by rowkeeper: choose another --out")
    try:
        folder.parent.mkdir(parents=True, exist_ok=True)
        fresh = Path(tempfile.mkdtemp(prefix=f".{folder.name}-", dir=folder.parent))
    except OSError as error:
        raise OutputRefused(f"cannot write in {folder.parent}: {error.strerror}") from None
    try:
        fresh.chmod(0o755)
        for name, content in sorted(files.items()):
            path = fresh / _plain(name)
            path.parent.mkdir(parents=True, exist_ok=True)
            path.write_bytes(content)
            if name.endswith(".sh"):
                path.chmod(0o755)
        _swap(fresh, folder)
    except OSError as error:
        raise OutputRefused(f"cannot write {folder}: {error.strerror}") from None
    finally:
        shutil.rmtree(fresh, ignore_errors=True)


def write_text(path: Path, text: str) -> None:
    """One file that was asked for by name. Raises OutputRefused."""
    try:
        path.write_text(text, encoding="utf-8")
    except OSError as error:
        raise OutputRefused(f"cannot write {path}: {error.strerror}") from None


def _ours(folder: Path) -> bool:
    return folder.is_dir() and ((folder / "manifest.json").is_file() or not any(folder.iterdir()))


def _plain(name: str) -> PurePosixPath:
    path = PurePosixPath(name)
    if path.is_absolute() or ".." in path.parts:
        raise ValueError(f"not a name inside the output folder: {name!r}")
    return path


def _swap(fresh: Path, folder: Path) -> None:
    if not folder.exists():
        os.replace(fresh, folder)  # noqa: PTH105  # one system call: there is no moment with half a folder
        return
    old = Path(tempfile.mkdtemp(prefix=f".{folder.name}-old-", dir=folder.parent))
    try:
        os.replace(folder, old / "was")  # noqa: PTH105
        os.replace(fresh, folder)  # noqa: PTH105
    finally:
        shutil.rmtree(old, ignore_errors=True)
