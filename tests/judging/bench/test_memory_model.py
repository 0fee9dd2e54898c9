"""The memory model alone, its pins moved by hand: every limit of the sheet bites, and only when it is broken."""

import dataclasses
from collections.abc import Callable, Sequence
from pathlib import Path

import pytest

from judging.bench.handmade import LOOM_DESIGN, loom, loom_windows
from rowkeeper.judging.bench.compiled import parameters_text
from rowkeeper.judging.bench.outcome import Report, read_report
from rowkeeper.judging.bench.parameters import parameters_of
from rowkeeper.reading.figures import Figure, Mark, Source
from rowkeeper.tools import available, run_tool

pytestmark = pytest.mark.skipif(not available("c++"), reason="no C++ compiler")

ENGINE = Path("gen/rowkeeper/judging/bench/engine")
ROOT = Path(__file__).parents[3]

# A made-up sheet in which every limit can be broken on its own; the 4116 sheet has negative and zero ones.
STRICT = (
    "tRC 375 tRAS 150:10000 tRP 100 tCRP 10 tRCD 25:50 tASR 5 tRAH 20 tASC 5 tCAH 45 tAR 95 tRSH 100 tCSH 150 "
    "tCAS 100:10000 tCPN 50 tRCS 5 tRCH 5 tRRH 10 tWCS 5 tWCH 45 tWCR 95 tWP 45 tRWL 60 tCWL 60 tDS 5 tDH 45 tDHR 95 "
    "tOFF 0:40 tRAC :150 tCAC :100"
)
GOOD = {
    "row": -20, "ras_f": 0, "col": 30, "din": 30, "we_f": 40, "cas_f": 60, "ras_r": 200, "cas_r": 220, "we_r": 225,
    "din_off": 250,
}  # fmt: skip
START_NS = 300_000
UNKNOWN, ROW, COLUMN, VALUE = 256, 5, 9, 0x5A

Edges = dict[str, int]


def write(at: int = START_NS, **moved: int) -> list[tuple[int, str, int]]:
    """One early write at `at` nanoseconds, some edges moved."""
    e = GOOD | moved
    return [
        (at + e["row"], "ma", ROW), (at + e["ras_f"], "ras", 0), (at + e["col"], "ma", COLUMN),
        (at + e["din"], "din", VALUE), (at + e["we_f"], "we", 0), (at + e["cas_f"], "cas", 0),
        (at + e["ras_r"], "ras", 1), (at + e["cas_r"], "cas", 1), (at + e["we_r"], "we", 1),
        (at + e["din_off"], "din", UNKNOWN),
    ]  # fmt: skip


def read(at: int = START_NS, **moved: int) -> list[tuple[int, str, int]]:
    """One read at `at` nanoseconds, some edges moved."""
    return [edge for edge in write(at, **moved) if edge[1] not in ("we", "din")]


def strobes(count: int, at: int) -> list[tuple[int, str, int]]:
    """Row-only cycles, each on a row of its own."""
    edges = []
    for number in range(count):
        base = at + 500 * number
        edges += [(base - 20, "ma", 64 + number), (base, "ras", 0), (base + 200, "ras", 1)]
    return edges


def pins_text(edges: Sequence[tuple[int, str, int]]) -> str:
    levels = {"ras": 1, "cas": 1, "we": 1, "ma": 0, "din": UNKNOWN}
    lines = []
    for at, pin, value in sorted(edges, key=lambda edge: edge[0]):
        levels[pin] = value
        lines.append(f"{at * 1000} {' '.join(str(levels[name]) for name in ('ras', 'cas', 'we', 'ma', 'din'))}")
    return "\n".join(lines) + "\n"


def program(limits: str | None) -> bytes:
    board = loom()
    if limits is not None:
        words = limits.split()
        sheet = Source(Mark.SHEET, "made up")
        figures = {}
        for symbol, value in zip(words[::2], words[1::2], strict=True):
            low, _, high = value.partition(":")
            figures[symbol] = Figure(
                symbol, int(low) * 1000 if low else None, int(high) * 1000 if high else None, sheet
            )
        bank = dataclasses.replace(board.banks[0], chip=dataclasses.replace(board.banks[0].chip, limits=figures))
        board = dataclasses.replace(board, banks=(bank,))
    files = {name: (ROOT / ENGINE / name).read_bytes() for name in ("basics.h", "memory.h")}
    files["memory_pins.cc"] = Path(__file__).with_name("memory_pins.cc").read_bytes()
    files["parameters.h"] = parameters_text(parameters_of(board, LOOM_DESIGN, loom_windows())).encode()
    run = run_tool("c++", ["-std=c++14", "-w", "-o", "pins", "memory_pins.cc"], files=files, wants=["pins"])
    assert run.code == 0, run.stderr
    return run.files["pins"]


@pytest.fixture(scope="module")
def strict() -> Callable[..., Report]:
    """The model under the made-up sheet, woken up, then moved as told."""
    binary = program(STRICT)

    def move(edges: Sequence[tuple[int, str, int]], warm: int = 8, warm_at: int = 210_000) -> Report:
        text = pins_text([*strobes(warm, warm_at), *edges])
        return read_report(run_tool("./pins", [], files={"pins": binary, "pins.txt": text}).stdout)

    return move


def failed(report: Report) -> set[str]:
    return {violation.check for violation in report.violations}


def test_a_good_write_and_read_break_nothing(strict: Callable[..., Report]) -> None:
    report = strict([*write(), *read(START_NS + 400)])
    assert failed(report) == set()
    assert report.facts["cell"] == VALUE


# Broken alone: exactly this check fails.
ALONE = {
    "tRP": [*read(), *read(START_NS + 290, row=-20)],
    "tRC": [*read(), *read(START_NS + 350)],
    "tCRP": [*read(cas_r=395), *read(START_NS + 400, cas_f=60)],
    "tRAS_min": read(ras_r=145, cas_f=40),
    "tRAS_max": read(ras_r=10_100, cas_r=10_050),
    "tASR": read(row=-3),
    "tRAH": read(col=15),
    "tASC": read(col=57),
    "tCAH": [*read(), (START_NS + 100, "ma", 3)],
    "tAR": [*read(cas_f=40), (START_NS + 90, "ma", 3)],
    "tRSH": read(cas_f=110),
    "tCSH": read(cas_f=40, cas_r=145),
    "tCAS_min": read(cas_r=155),
    "tCAS_max": read(cas_r=10_200),
    "tCPN": [*read(cas_r=389), *read(START_NS + 400, cas_f=30, col=24)],
    "tRCS": [*write(we_r=457), *read(START_NS + 400)],
    "tRCH": [*read(), *write(START_NS + 400, we_f=-177)],
    "tRRH": [*read(ras_r=215, cas_r=210), *write(START_NS + 400, we_f=-178)],
    "tWCS": write(we_f=57),
    "tWCH": write(we_r=100),
    "tWCR": write(cas_f=40, we_f=30, we_r=90),
    "tDS": write(din=57),
    "tDH": write(din_off=100),
    "tDHR": write(cas_f=40, we_f=30, din_off=90),
    "tRPC": [(START_NS + 500, "cas", 0)],
}


@pytest.mark.parametrize("check", ALONE)
def test_a_limit_broken_alone_is_named_alone(strict: Callable[..., Report], check: str) -> None:
    """Each spoiled pin sequence breaks one limit, and the model names that one first."""
    report = strict(ALONE[check])
    assert report.violations[0].check == check


# These cannot be broken without breaking a neighbour that the sheet ties to them.
TOGETHER = {
    "tRCD": read(cas_f=24, col=20),
    "tWP": write(we_f=54, we_r=98),
    "tRWL": write(we_f=145, cas_f=155, cas_r=260, we_r=265),
    "tCWL": write(we_f=165, cas_f=175, ras_r=300, cas_r=220),
}


@pytest.mark.parametrize("check", TOGETHER)
def test_a_limit_broken_with_its_neighbours_is_among_those_named(strict: Callable[..., Report], check: str) -> None:
    assert check in failed(strict(TOGETHER[check]))


def test_a_row_left_too_long_loses_its_contents(strict: Callable[..., Report]) -> None:
    """2 ms: the sheet's interval. The cell is unknown afterwards, not merely late."""
    report = strict([*write(), *strobes(9, START_NS + 2_100_000), *read(START_NS + 2_200_000)])
    assert "tREF" in failed(report)
    assert report.facts["cell"] == UNKNOWN


def test_a_strobe_before_the_pause_is_over_is_caught(strict: Callable[..., Report]) -> None:
    assert "pause" in failed(strict([], warm_at=100_000))


def test_a_column_strobe_before_the_wake_up_cycles_is_caught(strict: Callable[..., Report]) -> None:
    assert failed(strict(read(), warm=3)) == {"wake_up"}


def test_the_wake_up_cycles_are_due_again_after_a_missed_interval(strict: Callable[..., Report]) -> None:
    assert "wake_up" in failed(strict([*read(), *read(START_NS + 2_500_000)]))


def test_a_cut_strobe_destroys_the_row(strict: Callable[..., Report]) -> None:
    """The sense amplifiers had no time to write back: every cell of the row is garbage."""
    cut = [(START_NS + 380, "ma", ROW), (START_NS + 400, "ras", 0), (START_NS + 440, "ras", 1)]
    report = strict([*write(), *cut])
    assert failed(report) == {"tRAS_min"}
    assert report.facts["cell"] == UNKNOWN


def test_an_address_that_moves_in_its_window_destroys_what_it_may_have_hit(strict: Callable[..., Report]) -> None:
    assert strict([*write(), *read(START_NS + 400, col=10)]).facts["cell"] == UNKNOWN


def test_a_late_column_is_taken_where_the_sheet_allows_it() -> None:
    """4116: tASC -10 ns and tWCS -20 ns, so column and write enable may follow the column strobe."""
    binary = program(None)
    text = pins_text([*strobes(8, 210_000), *write(col=69, we_f=78, din=30)])
    report = read_report(run_tool("./pins", [], files={"pins": binary, "pins.txt": text}).stdout)
    assert failed(report) == set()
    assert report.facts["cell"] == VALUE


def test_a_cycle_time_that_only_rates_the_ambient_is_counted_and_not_failed() -> None:
    """MK4116 sheet, note 9: a cycle under tRC lowers the ambient allowed."""
    text = pins_text([*strobes(8, 210_000), *read(), *read(START_NS + 350)])
    report = read_report(run_tool("./pins", [], files={"pins": program(None), "pins.txt": text}).stdout)
    assert failed(report) == set()
    assert report.facts["derated"] == 1
