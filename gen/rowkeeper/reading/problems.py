"""A user's mistakes: collected with their places, printed for a person at the bench.

Takes positions, messages and fixes from the rooms that read; gives `Problems` (the collector), `Refused` (the one stop
of a phase) and the printer. Must not know what any file means.
"""

import difflib
from collections.abc import Iterable
from dataclasses import dataclass

from rowkeeper.reading.position import Position

__all__ = ["Problem", "Problems", "Refused", "listed", "nearest", "printed", "printed_all", "quoted"]

_SHOWN_WIDTH = 110
_QUOTED_WIDTH = 60


@dataclass(frozen=True, slots=True)
class Problem:
    """One mistake: where, what, and what to write instead. `line` is the text of the line it stands in."""

    at: Position
    message: str
    fix: str
    line: str = ""


class Refused(Exception):
    """A file was refused; `problems` holds every mistake found in it, in file order."""

    def __init__(self, problems: Iterable[Problem]) -> None:
        self.problems = tuple(problems)
        super().__init__(printed_all(self.problems))


class Problems:
    """Collects the problems of one phase. Texts of the files read are kept to show the line."""

    def __init__(self) -> None:
        self._found: list[Problem] = []
        self._lines: dict[str, list[str]] = {}

    def __len__(self) -> int:
        return len(self._found)

    def know(self, file: str, text: str) -> None:
        """Remember the text of a file, so that its lines can be shown."""
        self._lines[file] = text.split("\n")

    def add(self, at: Position, message: str, fix: str) -> None:
        """Note one problem. The same problem at the same place is noted once."""
        lines = self._lines.get(at.file, [])
        line = lines[at.line - 1].rstrip("\r") if 0 < at.line <= len(lines) else ""
        problem = Problem(at, message, fix, line)
        if problem not in self._found:
            self._found.append(problem)

    def in_order(self) -> tuple[Problem, ...]:
        """All problems by file, line and column; problems at one place keep the order in which they were found."""
        return tuple(sorted(self._found, key=lambda p: (p.at.file, p.at.line, p.at.column)))

    def stop_if_any(self) -> None:
        """Raise `Refused` with everything collected, if there is anything."""
        if self._found:
            raise Refused(self.in_order())


def nearest(word: str, names: Iterable[str]) -> str | None:
    """The name most like `word`, or None when nothing is like it. Letter case does not count."""
    by_lower = {name.lower(): name for name in sorted(names)}
    if word.lower() in by_lower:
        return by_lower[word.lower()]
    close = difflib.get_close_matches(word.lower(), list(by_lower), n=1, cutoff=0.5)
    return by_lower[close[0]] if close else None


def listed(names: Iterable[str], word: str = "or") -> str:
    """`a, b or c`."""
    items = list(names)
    if len(items) < 2:
        return "".join(items)
    return f"{', '.join(items[:-1])} {word} {items[-1]}"


def quoted(text: str) -> str:
    """A piece of a user's file inside a message: cut short, unprintable characters spelled out."""
    clean = "".join(c if c.isprintable() else f"\\x{ord(c):02x}" for c in text)
    return f"`{clean if len(clean) <= _QUOTED_WIDTH else clean[:_QUOTED_WIDTH] + '...'}`"


def _line_and_caret(line: str, index: int) -> tuple[str, str]:
    """The line, cut to a window around the place if it is long, and a caret under the place."""
    start = max(0, index - _SHOWN_WIDTH + 40)
    shown = "".join(c if c.isprintable() else "?" for c in line[start : start + _SHOWN_WIDTH]).rstrip()
    before = "..." if start else ""
    after = "..." if start + _SHOWN_WIDTH < len(line) else ""
    return f"    {before}{shown}{after}", " " * (4 + len(before) + index - start) + "^"


def printed(problem: Problem) -> str:
    """`file:line:col: message`, the line, a caret under the place, and the fix."""
    at = problem.at
    file = "".join(c if c.isprintable() else "?" for c in at.file)
    place = f"{file}:{at.line}:{at.column}" if at.line else file
    text = [f"{place}: {problem.message}"]
    if at.line and problem.line.strip():
        text += _line_and_caret(problem.line, at.column - 1)
    if problem.fix:
        text.append(f"  fix: {problem.fix}")
    return "\n".join(text)


def printed_all(problems: Iterable[Problem]) -> str:
    """All problems, an empty line between two."""
    return "\n\n".join(printed(problem) for problem in problems)
