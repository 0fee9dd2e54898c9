"""From a board file to a frozen `Board`, or all its problems.

Takes a path or bytes; gives `Board` or raises `Refused` with every problem of the file. Must not know ticks, logic or
tools.
"""

import hashlib
from pathlib import Path

from rowkeeper.reading.board import Bank, Board, BusFamily, Device, Net, Wiring
from rowkeeper.reading.catalogue import Catalogue
from rowkeeper.reading.levels import check_levels
from rowkeeper.reading.names import check_slug
from rowkeeper.reading.original import read_original
from rowkeeper.reading.problems import Problems
from rowkeeper.reading.section import Section
from rowkeeper.reading.sensible import (
    check_arrests,
    check_bank,
    check_banks,
    check_channels,
    check_designators,
    check_loads,
    check_needed,
    check_pins,
    check_places,
    check_refresh,
    check_sockets,
)
from rowkeeper.reading.spec import (
    BusPart,
    Heading,
    RefreshPart,
    read_banks,
    read_bus_part,
    read_device_part,
    read_heading,
    read_refresh,
    read_strobes,
)
from rowkeeper.reading.text_file import file_bytes, safe_text
from rowkeeper.reading.tree import Block, Node, places_of, read_tree
from rowkeeper.reading.wiring import all_nets, read_wiring

__all__ = ["read_board", "read_board_text"]

_SECTIONS = ("board", "bus", "memory", "refresh", "device", "strobes", "wiring", "parts")
_OPTIONAL_SECTIONS = ("original",)
_WIDEST_MEMORY_BITS = 8  # what the nets of a board may name when its chip is not known
_OPTIONAL_LINES = ("busreq_n", "busack_n", "reset_n")


def read_board(path: Path) -> Board:
    """The board in a file. Messages name the file as the caller did."""
    problems = Problems()
    data = file_bytes(path, str(path), problems)
    problems.stop_if_any()
    assert data is not None
    return read_board_text(data, str(path), path.parent)


def read_board_text(text: bytes, file: str, beside: Path | None) -> Board:
    """The board in the bytes of a file called `file`; catalogue files in the folder `beside` come before ours."""
    problems = Problems()
    slug = Path(file).stem
    check_slug(slug, file, problems)
    clean = safe_text(text, file, problems)
    root = None if clean is None else read_tree(clean, file, problems)
    if root is None:
        problems.stop_if_any()
    assert root is not None
    catalogue = Catalogue(beside, problems)
    return _Reader(root, file, slug, catalogue, problems).board(text)


def _absent(section: Section) -> Node:
    """Stands in for a section that is missing, which was noted already."""
    return Block((), section.at)


class _Reader:
    """Reads all sections, then checks them against each other, then stops or gives the board."""

    def __init__(self, root: Node, file: str, slug: str, catalogue: Catalogue, problems: Problems) -> None:
        self._root = root
        self._file = file
        self._slug = slug
        self._catalogue = catalogue
        self._problems = problems
        self._sections = Section(root, "a board file", problems, _SECTIONS, _OPTIONAL_SECTIONS)

    def _heading(self) -> Heading | None:
        node = self._sections.node("board")
        return None if node is None else read_heading(node, self._problems)

    def _bus(self) -> BusPart | None:
        node = self._sections.node("bus")
        return None if node is None else read_bus_part(node, self._catalogue, self._problems)

    def _refresh(self) -> RefreshPart | None:
        node = self._sections.node("refresh")
        return None if node is None else read_refresh(node, self._problems)

    def board(self, data: bytes) -> Board:
        """The board, or `Refused`."""
        problems, sections = self._problems, self._sections
        heading, bus, refresh = self._heading(), self._bus(), self._refresh()
        banks = read_banks(sections, self._catalogue, problems)
        device_node, strobes_node = sections.node("device"), sections.node("strobes")
        device, device_clock = read_device_part(device_node or _absent(sections), self._catalogue, problems)
        strobes = read_strobes(strobes_node or _absent(sections), problems)
        family = None if bus is None else bus.family
        wiring = self._wiring(family, banks)
        original_node = sections.node("original")
        original = None if original_node is None else read_original(original_node, self._catalogue, problems)
        if bus is not None and refresh is not None:
            self._check(bus, banks, refresh, device, wiring)
        problems.stop_if_any()
        assert heading is not None  # a part that is missing was noted, and stopped above
        assert bus is not None
        assert family is not None
        assert bus.grade is not None
        assert refresh is not None
        assert device is not None
        return Board(
            file=Path(self._file).name,
            slug=self._slug,
            name=heading.name,
            revision=heading.revision,
            bus=family,
            grade=bus.grade,
            bus_clock=bus.clock,
            at_worst=bus.at_worst,
            banks=banks,
            row_from=refresh.row_from,
            standby=refresh.standby,
            device=device,
            device_clock=device_clock,
            strobes=strobes,
            wiring=wiring,
            digest=self._digest(data),
            places=dict(places_of(self._root)),
            overrides=self._catalogue.overrides(),
            original=original,
        )

    def _wiring(self, family: BusFamily | None, banks: tuple[Bank, ...]) -> Wiring:
        address_bits = 16 if family is None else family.address_bits
        memory_bits = max((max(b.chip.row_bits, b.chip.column_bits) for b in banks), default=_WIDEST_MEMORY_BITS)
        nets = all_nets(address_bits, memory_bits)
        return read_wiring(
            self._sections.node("wiring"), self._sections.node("parts"), nets, self._catalogue, self._problems
        )

    def _check(
        self, bus: BusPart, banks: tuple[Bank, ...], refresh: RefreshPart, device: Device | None, wiring: Wiring
    ) -> None:
        problems = self._problems
        check_banks(banks, problems)
        if bus.family is None:
            return
        before = len(problems)
        for bank in banks:
            check_bank(bank, bus.family, problems)
        fitting = banks if len(problems) == before else ()
        check_refresh(refresh, banks, bus.family, problems)
        if self._sections.has("wiring"):
            self._check_wiring(bus, bus.family, fitting, device, wiring.nets)

    def _check_wiring(
        self, bus: BusPart, family: BusFamily, banks: tuple[Bank, ...], device: Device | None, nets: tuple[Net, ...]
    ) -> None:
        problems, at = self._problems, self._sections.at_key("wiring")
        check_arrests(nets, bus.at_worst, at, problems)
        check_places(nets, problems)
        check_channels(nets, family.data_width, problems)
        if device is not None:
            check_pins(nets, device, problems)
        for bank in banks[:1]:
            bits = max(bank.chip.row_bits, bank.chip.column_bits)
            needed = [n for n in all_nets(family.address_bits, bits) if n not in _OPTIONAL_LINES]
            if len(nets) == len(self._sections.items("wiring")):  # else a net that seems missing has a wrong name
                check_needed(nets, needed, at, problems)
            check_designators(nets, bank, problems)
            check_sockets(nets, bank, problems)
            check_loads(nets, bank, problems)
            for net in nets if device is not None else ():
                assert device is not None
                check_levels(net, bank.chip, family, device, problems)

    def _digest(self, data: bytes) -> str:
        """SHA-256 over the board file and every catalogue file used, each with its label and length."""
        digest = hashlib.sha256()
        for label, content in (("board", data), *self._catalogue.used()):
            digest.update(f"{label} {len(content)}\n".encode())
            digest.update(content)
        return digest.hexdigest()
