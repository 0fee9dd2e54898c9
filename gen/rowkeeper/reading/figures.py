"""Figures of the trade: exact windows, each with the document it was read in.

Takes nothing; gives `Source`, `Window` and `Figure`. All times are integer picoseconds. Must not know which
component a figure belongs to.
"""

from dataclasses import dataclass
from enum import Enum

__all__ = ["Figure", "Mark", "Source", "Window"]


class Mark(Enum):
    """How far a figure can be trusted."""

    SHEET = "sheet"  # read in the maker's own document
    COPY = "copy"  # read in a transcription of the maker's document
    DERIVED = "derived"  # arithmetic on figures that have a source
    PRACTICE = "practice"  # common practice, no source
    MEMORY = "from memory"  # not confirmed in any text; taints every margin that rests on it
    BOARD = "board file"  # stated by the owner of the board
    ROUTED = "routed"  # computed by the router for this very netlist
    UNPUBLISHED = "no minimum published"  # a lower end the sheet does not give, taken as 0


@dataclass(frozen=True, slots=True)
class Source:
    """Where a figure comes from: `document` (title or number), `page` as printed there, and the trust in it."""

    mark: Mark
    document: str = ""
    page: str = ""

    def __str__(self) -> str:
        if self.mark is Mark.MEMORY:
            return "from memory"
        place = " ".join(part for part in (self.document, self.page) if part)
        return place or self.mark.value


@dataclass(frozen=True, slots=True)
class Window:
    """A closed span of time in picoseconds; `None` means no bound on that side."""

    lo_ps: int | None
    hi_ps: int | None


@dataclass(frozen=True, slots=True)
class Figure:
    """One line of a data sheet: symbol, window in picoseconds, source, and an optional remark.

    `lo_ps` is the sheet's minimum, `hi_ps` its maximum; a typical value is never stored here.
    """

    symbol: str
    lo_ps: int | None
    hi_ps: int | None
    source: Source
    note: str = ""
