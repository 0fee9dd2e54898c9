"""The sheets of the shipped boards: every pin, three printed pages: the package, the wires, the work."""

import re
import shutil
import subprocess
from pathlib import Path

import pytest

from rowkeeper.contract import PortBit, Ports
from rowkeeper.fit.pins import pin_rows
from rowkeeper.reading import read_board
from rowkeeper.sheets.facts import SheetFacts, sheet_facts
from rowkeeper.sheets.sheet_html import sheet_html
from sheets.records import PASSED

BOARDS = sorted((Path(__file__).parents[2] / "boards").glob("*.yaml"))


def _facts(path: Path) -> SheetFacts:
    board = read_board(path)
    bits = [PortBit(net.name, None, net.name, net.side) for net in board.wiring.nets if net.side != "path"]
    return sheet_facts(board, "0.1.0", pin_rows(board, Ports(tuple(bits))), PASSED)


@pytest.mark.parametrize("path", BOARDS, ids=lambda path: path.stem)
def test_every_net_of_the_board_file_is_on_the_sheet(path: Path) -> None:
    """Pin and net of each line of the wiring section stand side by side."""
    facts = _facts(path)
    text = sheet_html(facts)
    wired = [row for row in facts.pins if row.net]
    labels = {row.pin: "/" + row.net[:-2].upper() if row.net.endswith("_n") else row.net.upper() for row in wired}
    rows = dict(re.findall(r'<td class="pin">(\d+)</td><td class="net">([^<]+)</td>', text))
    assert labels == rows


@pytest.mark.parametrize("path", BOARDS, ids=lambda path: path.stem)
def test_three_supplies_or_one(path: Path) -> None:
    """The rule of the negative supply is on the sheet exactly where the chips have one."""
    supplies = {name for bank in read_board(path).banks for name in bank.chip.supplies}
    assert any("-" in name for name in supplies) == any("FIRST" in step for step in _facts(path).order)


@pytest.mark.parametrize("path", BOARDS, ids=lambda path: path.stem)
def test_every_wire_has_a_channel(path: Path) -> None:
    """Each net that passes a part stands in that part's table, on pins of its own, between bus and device."""
    facts = _facts(path)
    tables = {table.designator: table for table in facts.packages}
    for row in facts.pins:
        place = row.through.partition(" ")[0]
        if place not in tables:
            continue
        label = "/" + row.net[:-2].upper() if row.net.endswith("_n") else row.net.upper()
        (channel,) = [c for c in tables[place].channels if c.net == label]
        ends = (channel.source, channel.target.rpartition("> ")[2])
        assert ends == ((row.meets, f"pin {row.pin}") if row.direction == "input" else (f"pin {row.pin}", row.meets))
    pins = [(t.designator, pin) for t in facts.packages for c in t.channels for pin in (c.input_pin, c.output_pin)]
    assert len(pins) == len(set(pins))
    assert not [pin for _, pin in pins if pin == "?"]


@pytest.mark.slow
@pytest.mark.skipif(shutil.which("chromium") is None, reason="no browser that prints")
@pytest.mark.parametrize("path", BOARDS, ids=lambda path: path.stem)
def test_prints_on_three_pages(path: Path, tmp_path: Path) -> None:
    """What a browser makes of it on A4."""
    page, printed = tmp_path / "sheet.html", tmp_path / "sheet.pdf"
    page.write_text(sheet_html(_facts(path)), encoding="utf-8")
    options = ["--headless", "--no-sandbox", "--disable-gpu", "--no-pdf-header-footer", f"--print-to-pdf={printed}"]
    subprocess.run(["chromium", *options, page.as_uri()], check=True, capture_output=True, timeout=120)
    assert len(re.findall(rb"/Type\s*/Page\b", printed.read_bytes())) == 3
