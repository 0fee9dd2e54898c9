"""What a bench printed, read back: facts by name, the first violation in words, the outcome of the run.

Takes the text of one run and the board whose sheets the limits come from; gives `BenchOutcome`. Must not know which
engine printed it.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Literal

from rowkeeper.contract import BenchOutcome, Status
from rowkeeper.reading.board import Board
from rowkeeper.reading.figures import Figure

__all__ = ["Report", "Violation", "not_run", "outcome_of", "read_report"]

_SYMBOLS = {
    "tRAS_min": "tRAS",
    "tRAS_max": "tRAS",
    "tCAS_min": "tCAS",
    "tCAS_max": "tCAS",
    "mreq_high": "TwMREQh",
    "mreq_low": "TwMREQl",
    "address_before_mreq": "TdA(MREQf)",
    "data_before_write": "TdD(WRf)",
    "data_hold": "ThD",
}
_SENTENCES = {
    "tREF": "a row was left too long without refresh",
    "pause": "a strobe came before the pause after power-up was over",
    "wake_up": "a column strobe came before the wake-up cycles",
    "enable": "a row strobe came while the output buffers were off",
    "data": "the data read is not the data written",
    "data_setup": "data came too late for the processor",
    "data_hold": "data went away before the processor had taken it",
    "contention": "two drivers were on the data lines at once",
    "tRPC": "a column strobe came without its row strobe",
    "drought": "the bus went longer without a refresh request than its cycle table allows",
}


@dataclass(frozen=True, slots=True)
class Violation:
    """One failed check: when, which, what was measured and what was asked, in picoseconds (or a count)."""

    at_ps: int
    check: str
    measured: int
    limit: int


@dataclass(frozen=True, slots=True)
class Report:
    """One run as printed. `counts`: how often each check was made; `facts`: the other numbers by name."""

    passed: bool
    facts: Mapping[str, int]
    counts: Mapping[str, int]
    slack_ps: Mapping[str, int]
    violations: tuple[Violation, ...]
    events: tuple[str, ...]
    waves: tuple[tuple[int, str, int], ...] = ()


def read_report(text: str) -> Report:
    """The lines of one run. A run that did not print its last line did not pass."""
    facts: dict[str, int] = {}
    counts: dict[str, int] = {}
    slack: dict[str, int] = {}
    violations: list[Violation] = []
    events: list[str] = []
    waves: list[tuple[int, str, int]] = []
    passed = False
    for line in text.splitlines():
        word, *rest = line.split() or [""]
        if word == "event":
            events.append(" ".join(rest))
        elif word == "wave" and len(rest) == 3:
            waves.append((int(rest[0]), rest[1], int(rest[2])))
        elif word == "violation" and len(rest) == 4:
            violations.append(Violation(int(rest[0]), rest[1], int(rest[2]), int(rest[3])))
        elif word == "check" and len(rest) == 4:
            counts[rest[0]], slack[rest[0]] = int(rest[1]), int(rest[3])
        elif word == "PASS":
            passed = True
        elif len(rest) == 1 and rest[0].lstrip("-").isdigit():
            facts[word] = int(rest[0])
    return Report(passed, facts, counts, slack, tuple(violations), tuple(events), tuple(waves))


def outcome_of(
    board: Board,
    report: Report,
    scenario: str,
    engine: Literal["compiled", "icarus"],
    subject: Literal["logic", "netlist"],
    corner: str,
) -> BenchOutcome:
    """Passed only with checks of data made and none failed."""
    checks, bus_ps = report.facts.get("checks", 0), report.facts.get("bus_ps", 0)
    if report.violations:
        status, detail = Status.FAILED, _sentence(board, report.violations[0])
    elif not report.facts.get("reads", 0):
        status, detail = Status.FAILED, "no data was ever checked"
    elif not report.passed:
        status, detail = Status.FAILED, "the run did not come to its end"
    else:
        status, detail = Status.PASSED, ""
    return BenchOutcome(scenario, engine, subject, corner, status, checks, bus_ps, detail)


def not_run(
    scenario: str,
    engine: Literal["compiled", "icarus"],
    subject: Literal["logic", "netlist"],
    corner: str,
    why: str,
) -> BenchOutcome:
    """The outcome of a run that a missing tool, or a tool that failed, has prevented."""
    return BenchOutcome(scenario, engine, subject, corner, Status.NOT_RUN, 0, 0, why)


def _figure(board: Board, symbol: str) -> Figure | None:
    return board.banks[0].chip.limits.get(symbol) or board.grade.figures.get(symbol)


def _sentence(board: Board, violation: Violation) -> str:
    """The first violation as an engineer reads it: time, symbol, figures, document."""
    chip, check = board.banks[0].chip, violation.check
    symbol = _SYMBOLS.get(check, check)
    figure, formula = _figure(board, symbol), board.grade.formulas.get(symbol)
    source = figure.source if figure else formula.source if formula else None
    if check == "tREF":
        source = chip.refresh_source
    elif check in ("pause", "wake_up"):
        source = chip.warm_up_source
    assumed = board.bus.assumptions.get(check.replace("_", "-"))
    said = f"the bus model broke what is assumed of it: {assumed}" if assumed else _SENTENCES.get(check)
    numbers = f"{symbol} {violation.measured} ps against {violation.limit} ps"
    if check in ("data", "contention", "enable", "wake_up", "drought", "tRPC"):
        numbers = symbol
    place = f" [{source}]" if source else ""
    return f"at {violation.at_ps} ps: {numbers}{': ' + said if said else ''}{place}"
