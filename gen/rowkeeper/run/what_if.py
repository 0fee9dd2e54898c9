"""`margins --vary`: reads what is to vary, has it planned, and gives table and picture.

Takes a path, the words after `--vary` and where the picture goes; gives an `Answer`. Must not know any rule of the
trade.
"""

import re
from fractions import Fraction
from pathlib import Path

from rowkeeper import __version__
from rowkeeper.reading import catalogue, read_board
from rowkeeper.reading.board import Board, Chip
from rowkeeper.run.commands import Answer
from rowkeeper.run.output import OutputRefused, UnknownNameError
from rowkeeper.run.progress import Progress
from rowkeeper.sheets.facts import board_stamp
from rowkeeper.sheets.quantities import frequency
from rowkeeper.sheets.vary_picture import vary_svg
from rowkeeper.sheets.vary_tables import reach_text, variation_json, variation_text
from rowkeeper.timing.vary import reach, same_kind, vary_chip, vary_clock

__all__ = ["clock_values", "vary"]

_CLOCK = re.compile(
    r"(?P<from>\d{1,6}(?:\.\d{1,6})?)\s*(?P<unit>[kM]?Hz)?\s*\.\.\s*(?P<to>\d{1,6}(?:\.\d{1,6})?)\s*(?P<last>[kM]?Hz)"
    r"(?:\s*/\s*(?P<step>\d{1,6}(?:\.\d{1,6})?)\s*(?P<by>[kM]?Hz))?"
)
_HERTZ = {"Hz": 1, "kHz": 10**3, "MHz": 10**6}
_STEPS_HZ = tuple(unit * 10**power for power in range(9) for unit in (1, 2, 5))
_FEW, _MANY = 16, 200
_HOW = "give clock=2..8MHz, clock=2..8MHz/0.25MHz, chip=4116-15,4116-20 or chip=all"


def vary(board: Path, words: str, picture: Path | None, as_json: bool, progress: Progress) -> Answer:
    """A table of what happens when one thing of the board is another, and a picture of it where one is asked for."""
    typed = read_board(board)
    what, _, values = words.partition("=")
    chips = tuple(catalogue.chip(name) for name in catalogue.chips())
    if what == "clock":
        hertz = clock_values(values)
        with progress.step("vary"):
            found = vary_clock(typed, hertz, frequency, progress.say)
    elif what == "chip":
        chosen = _chips(typed, values, chips)
        with progress.step("vary"):
            found = vary_chip(typed, chosen, progress.say)
    else:
        raise UnknownNameError(f"--vary {words!r}: {_HOW}")
    with progress.step("how far it can go"):
        ends = reach(typed, chips, progress.say)
    if picture is not None:
        _write(picture, vary_svg(board_stamp(typed, __version__), found))
    code = 1 if any(point.own and not point.holds for point in found.points) else 0
    if as_json:
        return Answer(variation_json(board_stamp(typed, __version__), found, ends), code)
    return Answer(f"{variation_text(found)}\n{reach_text(ends)}", code)


def clock_values(text: str) -> tuple[Fraction, ...]:
    """The frequencies of `2..8MHz`, at most sixteen steps apart evenly, or of `2..8MHz/0.25MHz`."""
    match = _CLOCK.fullmatch(text.strip())
    if match is None:
        raise UnknownNameError(f"--vary clock={text!r}: {_HOW}")
    last = Fraction(match["to"]) * _HERTZ[match["last"]]
    first = Fraction(match["from"]) * _HERTZ[match["unit"] or match["last"]]
    if not 0 < first < last:
        raise UnknownNameError(f"--vary clock={text!r}: the first frequency must be above 0 and below the last")
    if match["step"]:
        step = Fraction(match["step"]) * _HERTZ[match["by"]]
    else:
        step = Fraction(next(step for step in _STEPS_HZ if (last - first) / step <= _FEW))
    if step <= 0 or (last - first) / step > _MANY:
        raise UnknownNameError(f"--vary clock={text!r}: the step must give at most {_MANY} values")
    return tuple(first + step * count for count in range(int((last - first) // step) + 1))


def _chips(board: Board, text: str, chips: tuple[Chip, ...]) -> tuple[Chip, ...]:
    grades = same_kind(board.banks[0].chip, chips)
    if text.strip() in ("", "all"):
        return grades
    known = {chip.name: chip for chip in grades}
    names = [name.strip() for name in text.split(",")]
    unknown = [name for name in names if name not in known]
    if unknown:
        raise UnknownNameError(
            f"--vary chip: {', '.join(map(repr, unknown))} fits no socket of this board; there are {', '.join(known)}"
        )
    return tuple(known[name] for name in dict.fromkeys(names))


def _write(path: Path, text: str) -> None:
    try:
        path.write_text(text, encoding="utf-8")
    except OSError as error:
        raise OutputRefused(f"cannot write {path}: {error.strerror}") from None
