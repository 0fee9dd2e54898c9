"""Where a value stands in a file.

Takes nothing; gives `Position` (file, line, column, raw text) and `Located`, a value together with its position.
Must not know what the value means.
"""

from dataclasses import dataclass
from typing import Generic, TypeVar

__all__ = ["NOWHERE", "Located", "Position"]

T = TypeVar("T")


@dataclass(frozen=True, slots=True)
class Position:
    """One place in a file: `line` and `column` count from 1; `raw` is the text that stands there."""

    file: str
    line: int
    column: int
    raw: str = ""

    def __str__(self) -> str:
        return f"{self.file}:{self.line}:{self.column}"


NOWHERE = Position("", 0, 0)


@dataclass(frozen=True, slots=True)
class Located(Generic[T]):
    """A value read from a file, with the place it was read from."""

    value: T
    at: Position = NOWHERE
