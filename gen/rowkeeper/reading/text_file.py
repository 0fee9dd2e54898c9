"""Bytes of a file turned into text that is safe to read on.

Takes a path or bytes; gives text without a tab, a control character or an invisible one, or every place where one
stands. Must not know YAML.
"""

import unicodedata
from pathlib import Path

from rowkeeper.reading.position import Position
from rowkeeper.reading.problems import Problems

__all__ = ["LARGEST_FILE", "file_bytes", "safe_text"]

LARGEST_FILE = 1_000_000
_MOST_SHOWN = 20  # a binary file would else fill the screen

# Characters that move or hide text, or that some readers take for the end of a line.
_HIDDEN = {"Cc", "Cf", "Zl", "Zp", "Cs", "Co"}


def file_bytes(path: Path, file: str, problems: Problems) -> bytes | None:
    """The bytes of a file, or None with the reason noted. Nothing above the size limit is read."""
    nowhere = Position(file, 0, 0)
    try:
        if path.is_dir():
            problems.add(nowhere, "this is a directory, not a file", "name the YAML file itself")
            return None
        if path.exists() and not path.is_file():
            problems.add(nowhere, "this is not a regular file", "name a YAML file")
            return None
        with path.open("rb") as stream:
            data = stream.read(LARGEST_FILE + 1)
    except FileNotFoundError:
        problems.add(nowhere, "there is no such file", "check the name and the folder")
    except PermissionError:
        problems.add(nowhere, "this file may not be read", "give yourself the right to read it")
    except (OSError, ValueError) as error:
        reason = error.strerror if isinstance(error, OSError) and error.strerror else "the name is not a file name"
        problems.add(nowhere, f"this file cannot be read: {reason}", "check the name and the disk")
    else:
        return data
    return None


def _place(file: str, data: bytes, offset: int) -> Position:
    """The line and column of a byte, for bytes that are text up to there."""
    before = data[:offset].decode("utf-8", "replace")
    return Position(file, before.count("\n") + 1, len(before) - (before.rfind("\n") + 1) + 1)


def _complaint(character: str) -> tuple[str, str]:
    code = f"U+{ord(character):04X}"
    if character == "\t":
        return "a tab stands here", "use spaces only"
    if character == "\ufeff":
        return "a byte order mark stands here", "save the file as UTF-8 without a byte order mark"
    if character == "\r":
        return "a carriage return stands alone here", "end lines with a line feed"
    if unicodedata.category(character) == "Cc":
        return f"a control character ({code}) stands here", "delete it"
    return f"an invisible character ({code}) stands here", "delete it"


def safe_text(data: bytes, file: str, problems: Problems) -> str | None:
    """The text of a file, or None with each reason noted."""
    if len(data) > LARGEST_FILE:
        problems.add(
            Position(file, 0, 0),
            "this file is larger than 1 MB",
            "a board file has a few kilobytes: name the right one",
        )
        return None
    try:
        text = data.decode("utf-8")
    except UnicodeDecodeError as error:
        problems.know(file, data.decode("utf-8", "replace"))
        byte = data[error.start]
        problems.add(
            _place(file, data, error.start),
            f"this file is not UTF-8: byte 0x{byte:02X} stands here",
            "save it as UTF-8",
        )
        return None
    text = text.replace("\r\n", "\n")
    problems.know(file, text)
    before = len(problems)
    for number, line in enumerate(text.split("\n"), start=1):
        for column, character in enumerate(line, start=1):
            if unicodedata.category(character) in _HIDDEN and len(problems) - before < _MOST_SHOWN:
                problems.add(Position(file, number, column, character), *_complaint(character))
    return text if len(problems) == before else None
