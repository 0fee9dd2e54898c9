"""The scenarios and corners of the bench, each with one sentence for the report.

Takes a board; gives the scenarios that its bus can have. Must not know the engines.
"""

from dataclasses import dataclass

from rowkeeper.reading.board import Board

__all__ = ["CORNERS", "Scenario", "scenarios"]

CORNERS = ("min", "max", "random")


@dataclass(frozen=True, slots=True)
class Scenario:
    """One program for the bus. `sentence` says what it shows."""

    name: str
    sentence: str


def scenarios(board: Board) -> tuple[Scenario, ...]:
    """Every scenario that this board's bus can meet, in the order they are run."""
    worst = board.at_worst
    found = [
        Scenario(
            "warm-up", "The processor runs from power-up; no strobe before the pause is over, then all is served."
        ),
        Scenario("march-c", "March C- over the memory, opcode fetches and refreshes between the accesses."),
        Scenario("idle", "No access for longer than the refresh interval, halted and in reset; nothing is lost."),
    ]
    if worst.reset_max_ps != 0:
        found.append(Scenario("reset", "Reset strikes at every phase of a cycle, and once for long; nothing is lost."))
    if worst.grant_max_ps != 0:
        found.append(Scenario("grants", "Grants after every machine cycle, longest and shortest; nothing is lost."))
    found.append(Scenario("mix", "Random instructions, interrupts, input and output, resets and grants among them."))
    return tuple(found)
