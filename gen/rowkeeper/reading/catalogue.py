"""The catalogue: files shipped in the package, overridden by files beside the board.

Takes a kind and a name; gives the typed entry, or the names that exist. `Catalogue` is one board's view and remembers
which texts were used (for the digest) and which came from beside the board. Must not know what a board needs.
"""

from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass
from functools import cache
from importlib import resources
from pathlib import Path
from types import MappingProxyType
from typing import Literal, TypeAlias, TypeVar, get_args

from rowkeeper.reading.board import BusFamily, Chip, Device, LogicFamily, Part
from rowkeeper.reading.catalogue_entries import Entry, read_bus, read_chips, read_device, read_parts
from rowkeeper.reading.logic_family import read_families
from rowkeeper.reading.problems import Problems
from rowkeeper.reading.text_file import file_bytes, safe_text
from rowkeeper.reading.tree import Block, Node, Scalar, read_tree

__all__ = [
    "KINDS",
    "Catalogue",
    "Kind",
    "bus",
    "buses",
    "chip",
    "chips",
    "device",
    "devices",
    "families",
    "family",
    "part",
    "parts",
]

Kind: TypeAlias = Literal["chips", "buses", "devices", "parts", "families"]
KINDS: tuple[Kind, ...] = get_args(Kind)
_READERS: Mapping[Kind, tuple[str, Callable[[Node, Problems], tuple[Entry, ...]]]] = {
    "chips": ("chip", read_chips),
    "buses": ("bus", read_bus),
    "devices": ("device", read_device),
    "parts": ("part", read_parts),
    "families": ("family", read_families),
}
T = TypeVar("T")


@dataclass(frozen=True, slots=True)
class _Shelved:
    """An entry with the file that holds it: its label (`chips/4116.yaml`) and its bytes."""

    entry: Entry
    label: str
    data: bytes


def _kind_matches(root: Node, word: str, problems: Problems) -> bool:
    kind = next((v for k, v in root.entries if k.text == "kind"), None) if isinstance(root, Block) else None
    if isinstance(kind, Scalar) and kind.text == word:
        return True
    problems.add(kind.at if kind else root.at, f"this folder holds files of kind {word}", f"begin with `kind: {word}`")
    return False


def _entries(kind: Kind, data: bytes, file: str, problems: Problems) -> tuple[Entry, ...]:
    """The entries of one catalogue file; none if it has a problem."""
    word, reader = _READERS[kind]
    before = len(problems)
    text = safe_text(data, file, problems)
    root = None if text is None else read_tree(text, file, problems)
    if root is None or not _kind_matches(root, word, problems):
        return ()
    found = reader(root, problems)
    return found if len(problems) == before else ()


@cache
def _shipped(kind: Kind) -> Mapping[str, _Shelved]:
    """Everything of one kind that the package ships. A problem in there is our own bug, and raises."""
    folder = resources.files("rowkeeper") / "catalog" / kind
    shelf: dict[str, _Shelved] = {}
    problems = Problems()
    for item in sorted(folder.iterdir(), key=lambda item: item.name):
        if item.name.endswith(".yaml"):
            label = f"{kind}/{item.name}"
            data = item.read_bytes()
            shelf |= {e.name: _Shelved(e, label, data) for e in _entries(kind, data, f"catalog/{label}", problems)}
    problems.stop_if_any()
    return MappingProxyType(shelf)


def _beside(kind: Kind, folder: Path, problems: Problems) -> Iterator[tuple[str, _Shelved]]:
    """Entries in files beside the board."""
    try:
        paths = sorted((folder / kind).glob("*.yaml"))
    except OSError:
        return
    for path in paths:
        data = file_bytes(path, str(path), problems)
        if data is not None:
            for entry in _entries(kind, data, str(path), problems):
                yield entry.name, _Shelved(entry, f"{kind}/{path.name}", data)


class Catalogue:
    """What one board may use: the shipped entries, with those beside the board in front of them."""

    def __init__(self, beside: Path | None, problems: Problems) -> None:
        self._own: dict[Kind, dict[str, _Shelved]] = {kind: {} for kind in KINDS}
        self._used: dict[str, bytes] = {}
        self._overrides: dict[str, None] = {}
        if beside is not None:
            for kind in KINDS:
                self._own[kind] = dict(_beside(kind, beside, problems))

    def names(self, kind: Kind) -> tuple[str, ...]:
        """Every name of a kind, sorted."""
        return tuple(sorted({*_shipped(kind), *self._own[kind]}))

    def _get(self, kind: Kind, name: str, wanted: type[T]) -> T | None:
        own = self._own[kind].get(name)
        shelved = own or _shipped(kind).get(name)
        if shelved is None or not isinstance(shelved.entry, wanted):
            return None
        self._used[("own " if own else "shipped ") + shelved.label] = shelved.data
        if own:
            self._overrides[f"{name} ({shelved.label})"] = None
        return shelved.entry

    def chip(self, name: str) -> Chip | None:
        """A chip of one grade, or None."""
        return self._get("chips", name, Chip)

    def bus(self, name: str) -> BusFamily | None:
        """A bus family, or None."""
        return self._get("buses", name, BusFamily)

    def device(self, name: str) -> Device | None:
        """A device, or None."""
        return self._get("devices", name, Device)

    def part(self, name: str) -> Part | None:
        """A buffer or translator, or None."""
        return self._get("parts", name, Part)

    def family(self, name: str) -> LogicFamily | None:
        """A logic family, or None."""
        return self._get("families", name, LogicFamily)

    def used(self) -> tuple[tuple[str, bytes], ...]:
        """Label and bytes of every file used so far, sorted by label."""
        return tuple(sorted(self._used.items()))

    def overrides(self) -> tuple[str, ...]:
        """Entries used that came from beside the board, sorted."""
        return tuple(sorted(self._overrides))


def _shipped_entry(kind: Kind, name: str, wanted: type[T]) -> T:
    entry = _shipped(kind)[name].entry
    assert isinstance(entry, wanted)
    return entry


def chips() -> tuple[str, ...]:
    """Names of the shipped chips."""
    return tuple(sorted(_shipped("chips")))


def buses() -> tuple[str, ...]:
    """Names of the shipped bus families."""
    return tuple(sorted(_shipped("buses")))


def devices() -> tuple[str, ...]:
    """Names of the shipped devices."""
    return tuple(sorted(_shipped("devices")))


def parts() -> tuple[str, ...]:
    """Names of the shipped buffers and translators."""
    return tuple(sorted(_shipped("parts")))


def families() -> tuple[str, ...]:
    """Names of the shipped logic families."""
    return tuple(sorted(_shipped("families")))


def family(name: str) -> LogicFamily:
    """A shipped logic family; KeyError if there is none."""
    return _shipped_entry("families", name, LogicFamily)


def chip(name: str) -> Chip:
    """A shipped chip; KeyError if there is none."""
    return _shipped_entry("chips", name, Chip)


def bus(name: str) -> BusFamily:
    """A shipped bus family; KeyError if there is none."""
    return _shipped_entry("buses", name, BusFamily)


def device(name: str) -> Device:
    """A shipped device; KeyError if there is none."""
    return _shipped_entry("devices", name, Device)


def part(name: str) -> Part:
    """A shipped buffer or translator; KeyError if there is none."""
    return _shipped_entry("parts", name, Part)
