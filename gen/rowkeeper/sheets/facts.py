"""What the assembly sheet says, as one record of finished text.

Takes a board, its pin rows, the verdict and the notes of a run; gives `SheetFacts`. Must not know how the page is laid
out, nor how any of it was found.
"""

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from fractions import Fraction

from rowkeeper.contract import Finding, Note, PinRow, Status, Verdict
from rowkeeper.reading.board import Bank, Board, Net, PathElement
from rowkeeper.sheets.channels import PackageTable, package_tables
from rowkeeper.sheets.order import order_of_work
from rowkeeper.sheets.outcome_tables import verdict_line
from rowkeeper.sheets.plain import net_label, one_line
from rowkeeper.sheets.quantities import bytes_text, decimal, frequency, hexadecimal, volts
from rowkeeper.sheets.stamp import Stamp, short_digest

__all__ = ["HANDLING", "NOT_PROVEN", "PathRow", "SheetFacts", "board_stamp", "sheet_facts"]

# What no margin, proof or simulation of this tool can see.
NOT_PROVEN = (
    "Ringing and overshoot on the real wiring.",
    "The rails: their level, noise and order at power-up.",
    "Temperature: how warm the chips really get.",
    "The true marking of a part: relabelled, mixed or half-good chips.",
    "Metastability beyond two flip-flops.",
    "Time from power to valid strobes: the device's sheet gives a typical figure only.",
    "Solder joints, cold joints, bridges, and the board's own tracks.",
)


_OPEN_SHOWN = 8
_NOTE_LETTERS = 210


@dataclass(frozen=True, slots=True)
class PathRow:
    """A net of the board that does not touch the device: the data path."""

    net: str
    meets: str
    through: str


@dataclass(frozen=True, slots=True)
class SheetFacts:
    """The text of one sheet. `passed`: the verdict allows fitting. `open_items`: what failed or did not run."""

    board_name: str
    revision: str
    slug: str
    digest: str
    short_digest: str
    tool: str
    summary: tuple[tuple[str, str], ...]
    passed: bool
    verdict: str
    device: str
    package: str
    pins: tuple[PinRow, ...]
    paths: tuple[PathRow, ...]
    remove: tuple[str, ...]
    keep: tuple[str, ...]
    add: tuple[str, ...]
    handling: tuple[str, ...]
    order: tuple[str, ...]
    chips: tuple[str, ...]
    assumed: tuple[str, ...]
    not_proven: tuple[str, ...]
    open_items: tuple[str, ...]
    notes: tuple[str, ...]
    packages: tuple[PackageTable, ...] = ()


def board_stamp(board: Board, version: str) -> Stamp:
    """The stamp of a board for the headers of text files."""
    return Stamp(version, board.slug, board.revision, board.digest)


def sheet_facts(
    board: Board,
    version: str,
    pins: Sequence[PinRow],
    verdict: Verdict,
    notes: Iterable[Note] = (),
    program_sha256: str = "",
) -> SheetFacts:
    """Everything the sheet says of one board after one run. `program_sha256`: of the programming file, if known."""
    return SheetFacts(
        board_name=one_line(board.name),
        revision=one_line(board.revision),
        slug=one_line(board.slug),
        digest=board.digest,
        short_digest=short_digest(board.digest),
        tool=f"rowkeeper {version}",
        summary=_summary(board),
        passed=verdict.status is Status.PASSED,
        verdict=verdict_line(verdict),
        device=_device(board),
        package=board.device.package.upper(),
        pins=tuple(pins),
        paths=tuple(_path(net) for net in board.wiring.nets if net.side == "path"),
        remove=_lines(board.wiring.remove),
        keep=_lines(board.wiring.keep),
        add=_lines(board.wiring.add),
        handling=HANDLING,
        order=order_of_work(board, program_sha256),
        chips=_chip_notes(board),
        assumed=_lines(board.bus.assumptions.values()),
        not_proven=NOT_PROVEN,
        open_items=_open_items(verdict.findings),
        notes=(*_data_margin(board), *_short_notes(notes)),
        packages=package_tables(board),
    )


def _lines(texts: Iterable[str]) -> tuple[str, ...]:
    return tuple(one_line(text) for text in texts)


def _short_notes(notes: Iterable[Note]) -> tuple[str, ...]:
    """The first note of each topic, cut to what a sheet has room for; the rest is in the margins."""
    topics: dict[str, list[str]] = {}
    for note in notes:
        topics.setdefault(note.topic, []).append(note.text)
    return tuple(_short(topic, texts) for topic, texts in topics.items())


def _short(topic: str, texts: Sequence[str]) -> str:
    more = f" ({len(texts) - 1} more of this kind)" if len(texts) > 1 else ""
    return f"{_whole_sentences(one_line(f'{topic}: {texts[0]}'))}{more}"


def _whole_sentences(text: str) -> str:
    """As many sentences as there is room for; a long list ends with `and more`, any other text with three dots."""
    if len(text) <= _NOTE_LETTERS:
        return text
    ends = [place + 1 for place in range(len(text) - 1) if text[place] == "." and text[place + 1] == " "]
    fitting = [end for end in ends if end <= _NOTE_LETTERS]
    if fitting:
        return text[: fitting[-1]]
    clauses = [place for place in range(_NOTE_LETTERS) if text[place] == ";"]
    if clauses:
        return text[: clauses[-1]] + "."
    listed = text[:_NOTE_LETTERS].rpartition(", ")[0]
    return f"{listed} and more." if listed else text[:_NOTE_LETTERS].rpartition(" ")[0] + " ..."


def _data_margin(board: Board) -> tuple[str, ...]:
    """A data line straight from the bus to the chips: its high level by the book, where nothing is to spare."""
    straight = any(
        net.name == "data_in" and all(element.part is None for element in net.through) for net in board.wiring.nets
    )
    gives = board.bus.output_levels.voh_min_mv
    asks = max((bank.chip.address_levels.vih_min_mv or 0 for bank in board.banks), default=0)
    if not straight or gives is None or gives > asks:
        return ()
    return (
        f"data in: the bus promises a high of {volts(gives)} and the chips ask for {volts(asks)}: no margin by the"
        " book. Measure it.",
    )


def _open_items(findings: Iterable[Finding]) -> tuple[str, ...]:
    """What failed or did not run; a long list is cut with a count, so that the sheet keeps its pages."""
    items = tuple(_open(finding) for finding in findings if finding.status is not Status.PASSED)
    rest = len(items) - _OPEN_SHOWN
    return items if rest <= 0 else (*items[:_OPEN_SHOWN], f"and {rest} more in verdict.json")


def _open(finding: Finding) -> str:
    word = "failed" if finding.status is Status.FAILED else "not run"
    detail = f": {finding.detail}" if finding.detail else ""
    return one_line(f"{word}: {finding.group} {finding.name}{detail}")


def _summary(board: Board) -> tuple[tuple[str, str], ...]:
    """What the board is, in a few lines for the head of the sheet."""
    bus = f"{board.bus.title}, {board.grade.name} grade, clocked at {frequency(board.bus_clock.frequency_hz)}"
    device = f"{_device(board)}, {frequency(board.device_clock.frequency_hz)} clock"
    banks = "; ".join(map(_bank, board.banks))
    return (("Memory", one_line(banks)), ("Bus", one_line(bus)), ("Device", one_line(device)))


def _device(board: Board) -> str:
    """The device with its package, said once."""
    title, package = one_line(board.device.title), board.device.package.upper()
    return title if package in title else f"{title} in {package}"


def _bank(bank: Bank) -> str:
    chip = bank.chip
    where = f"{bytes_text(bank.size)} from {hexadecimal(bank.base)}"
    return f"{bank.chips} × {chip.name}, {where}, {chip.refresh_rows} rows to refresh"


def _chip_notes(board: Board) -> tuple[str, ...]:
    """What the catalogue has to say of the memory chips; of the device the pin table says what a fitter needs."""
    notes = {bank.chip.name: bank.chip.notes for bank in board.banks}
    return tuple(one_line(f"{name}: {' '.join(said)}") for name, said in notes.items() if said)


def _path(net: Net) -> PathRow:
    return PathRow(net_label(net.name), one_line(net.meets), ", ".join(map(_element, net.through)))


def _element(element: PathElement) -> str:
    """One thing that a net passes through."""
    if element.part is not None:
        return one_line(f"{element.designator} {element.part.name} at {volts(element.part.supply_mv)}")
    if element.kind == "series":
        return f"{decimal(Fraction(element.series_milliohm, 1000))} ohm"
    if element.kind == "load":
        return f"load {decimal(Fraction(element.load_ff, 1000))} pF"
    return "plain wire"


HANDLING = (
    "The law of the place, licensed practice and the rules of the workshop come before anything on this sheet.",
    "Mains and CRT equipment: switch off, pull the plug, lock it out, discharge and measure before a hand goes in."
    " Work on live mains or on a CRT is for licensed people only. No wrist strap near mains, a CRT or high voltage.",
    "Away from those: handle the device and the memory chips under ESD control (ANSI/ESD S20.20).",
    "All supplies off, and measured off, whenever a part is fitted, pulled or soldered.",
    "Never 5 V into a 3.3 V pin: every line from the board passes its translator first.",
)
