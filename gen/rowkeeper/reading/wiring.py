"""The wiring section of a board file: nets, pins, and what every net passes through.

Takes the nodes of `wiring` and `parts`, the catalogue, and the nets that the board needs; gives `Wiring`. A net without
its path is a mistake, never a delay of zero. Must not know ticks, logic or tools.
"""

import re
from collections.abc import Iterable
from typing import Literal

from rowkeeper.reading.board import Net, PathElement, Wiring
from rowkeeper.reading.catalogue import Catalogue
from rowkeeper.reading.names import VERILOG_WORDS, designator, meeting_place, sentence
from rowkeeper.reading.position import NOWHERE, Position
from rowkeeper.reading.problems import Problems, listed, nearest, quoted
from rowkeeper.reading.section import Section, read_listing, read_scalars
from rowkeeper.reading.spec import unknown
from rowkeeper.reading.tree import Node, Scalar
from rowkeeper.reading.units import capacitance_ff, resistance_milliohm, voltage_mv

__all__ = ["OUTPUTS", "PATHS", "all_nets", "read_wiring", "side_of"]

LINES = ("mreq_n", "m1_n", "rd_n", "wr_n", "busreq_n", "busack_n", "reset_n")
OUTPUTS = ("ras_n", "cas_n", "we_n", "read_n", "enable_n")
PATHS = ("data_in", "data_out")
_NUMBERED = re.compile(r"(a|ma)(0|[1-9][0-9]?)", re.ASCII)
_LARGEST_SERIES_MILLIOHM = 1_000_000
_LARGEST_LOAD_FF = 1_000_000
_RAILS_MV = (3300, 5000)


def side_of(name: str) -> Literal["input", "output", "path"]:
    """Which way a net runs, seen from the device."""
    if name in PATHS:
        return "path"
    return "output" if name in OUTPUTS or name.startswith("ma") else "input"


def all_nets(address_bits: int, memory_bits: int) -> tuple[str, ...]:
    """Every net that a board of these sizes may name."""
    addresses = tuple(f"a{i}" for i in range(address_bits))
    memory = tuple(f"ma{i}" for i in range(memory_bits))
    return ("clk", *LINES, *addresses, *OUTPUTS, *memory, *PATHS)


def _part_element(section: Section, kind: str, catalogue: Catalogue, problems: Problems) -> PathElement:
    scalar = section.scalar(kind)
    place = section.take("designator", designator, "")
    if not section.has("designator"):
        problems.add(section.at, f"this {kind} has no designator", "add `designator: U22`, its name on the board")
    if scalar is None:
        return PathElement("part", at=section.at)
    part = catalogue.part(scalar.text)
    if part is None:
        unknown(scalar, kind, catalogue.names("parts"), problems)
    elif part.kind != kind:
        problems.add(scalar.at, f"{part.name} is a {part.kind}, not a {kind}", f"write `{part.kind}: {part.name}`")
    return PathElement("part", part, place, at=section.at)


def _series(scalar: Scalar, problems: Problems) -> int:
    value = resistance_milliohm(scalar, problems)
    if value > _LARGEST_SERIES_MILLIOHM:
        problems.add(scalar.at, f"{scalar.text} in series is more than 1 kohm", "a damping resistor has 10 to 100 ohm")
    return value


def _load(scalar: Scalar, problems: Problems) -> int:
    value = capacitance_ff(scalar, problems)
    if value > _LARGEST_LOAD_FF:
        problems.add(scalar.at, f"a load of {scalar.text} is more than 1000 pF", "count the inputs on this net again")
    return value


def _direct(scalar: Scalar, problems: Problems) -> int:
    value = voltage_mv(scalar, problems)
    if value and value not in _RAILS_MV:
        problems.add(
            scalar.at, f"{quoted(scalar.text)} is not a supply that a wire can join here", "write 3.3 V or 5 V"
        )
    return value


def _element(node: Node, catalogue: Catalogue, problems: Problems) -> PathElement:
    """One thing of a path: exactly one of buffer, translator, series, load, direct."""
    kinds = ("buffer", "translator", "series", "load", "direct")
    section = Section(node, "an entry of `through`", problems, (), (*kinds, "designator"))
    found = [kind for kind in kinds if section.has(kind)]
    if len(found) != 1:
        if section.whole:
            problems.add(node.at, f"an entry of `through` is one of {listed(kinds)}", "write one of them per entry")
        return PathElement("direct", at=node.at)
    kind = found[0]
    if kind in ("buffer", "translator"):
        return _part_element(section, kind, catalogue, problems)
    if section.has("designator"):
        problems.add(
            section.at_key("designator"), f"a {kind} entry takes no designator here", "list resistors under `parts`"
        )
    if kind == "series":
        return PathElement("series", series_milliohm=section.take("series", _series, 0), at=node.at)
    if kind == "load":
        return PathElement("load", load_ff=section.take("load", _load, 0), at=node.at)
    return PathElement("direct", at=node.at, rail_mv=section.take("direct", _direct, 0))


def _path(section: Section, name: str, catalogue: Catalogue, problems: Problems) -> tuple[PathElement, ...]:
    """`through:`; missing or empty is refused."""
    fix = (
        "add `through:` with the buffer or translator, the series resistor and the load; a plain wire is `direct: 5 V`"
    )
    if not section.has("through"):
        problems.add(section.at, f"net {name} does not say what it passes through", fix)
        return ()
    before = len(problems)
    items = section.items("through")
    if not items and section.whole:
        problems.add(section.at_key("through"), f"net {name} passes through nothing", fix)
    path = tuple(_element(item, catalogue, problems) for item in items)
    loads = [i for i, element in enumerate(path) if element.kind == "load"]
    if len(loads) > 1 or (loads and loads[0] != len(path) - 1):
        problems.add(path[loads[0]].at, f"the load of net {name} is not the last entry", "put one load, at the end")
    return path if len(problems) == before else ()


def _last(kind: str, expected: tuple[str, ...]) -> int:
    """The highest number of the nets `a...` or `ma...`."""
    matches = [_NUMBERED.fullmatch(name) for name in expected]
    return max((int(match[2]) for match in matches if match and match[1] == kind), default=0)


def _name(section: Section, expected: tuple[str, ...], problems: Problems) -> str:
    scalar = section.scalar("net")
    if scalar is None:
        return ""
    name = scalar.text
    if name in expected:
        return name
    if name in VERILOG_WORDS:
        problems.add(scalar.at, f"{quoted(name)} is a reserved word of Verilog", "use the net's own name, as `ras_n`")
        return ""
    if _NUMBERED.fullmatch(name):
        kind = "ma" if name.startswith("ma") else "a"
        fix = f"the nets run from {kind}0 to {kind}{_last(kind, expected)}"
        problems.add(scalar.at, f"this board has no net {name}", fix)
        return ""
    guess = nearest(name, expected)
    plain = [net for net in expected if not _NUMBERED.fullmatch(net)]
    ranges = [f"{kind}0 to {kind}{_last(kind, expected)}" for kind in ("a", "ma")]
    fix = f"did you mean `{guess}`?" if guess else f"the nets are {listed([*plain, *ranges], 'and')}"
    problems.add(scalar.at, f"there is no net {quoted(name)}", fix)
    return ""


def _pin(section: Section, name: str, problems: Problems) -> tuple[str, Position]:
    scalar = section.scalar("pin")
    at = section.at_key("pin")
    if side_of(name) == "path":
        if scalar is not None:
            problems.add(at, f"net {name} does not touch the device", "delete `pin:`")
        return "", NOWHERE
    if scalar is None:
        if section.has("net") and not section.has("pin"):
            problems.add(section.at, f"net {name} has no pin", "add `pin:`, the pin of the device")
        return "", at
    return scalar.text, at


def _net(node: Node, expected: tuple[str, ...], catalogue: Catalogue, problems: Problems) -> Net | None:
    section = Section(node, "a net", problems, ("net", "meets"), ("pin", "through"))
    name = _name(section, expected, problems)
    meets = section.take("meets", meeting_place, "")
    if not name:
        return None
    pin, pin_at = _pin(section, name, problems)
    return Net(
        name,
        side_of(name),
        pin,
        meets,
        _path(section, name, catalogue, problems),
        node.at,
        pin_at,
        section.at_key("meets"),
    )


def _only_once(nets: Iterable[Net], problems: Problems) -> tuple[Net, ...]:
    """A net named twice is refused, both places named."""
    seen: dict[str, Net] = {}
    for net in nets:
        first = seen.setdefault(net.name, net)
        if first is not net:
            problems.add(net.at, f"net {net.name} stands twice: first in line {first.at.line}", "keep one of the two")
    return tuple(seen.values())


def _lines(section: Section, key: str, problems: Problems) -> tuple[str, ...]:
    node = section.node(key)
    if node is None:
        return ()
    return tuple(sentence(scalar, problems) for scalar in read_scalars(node, f"`{key}`", problems))


def read_wiring(
    wiring: Node | None, parts: Node | None, expected: tuple[str, ...], catalogue: Catalogue, problems: Problems
) -> Wiring:
    """Nets in file order, and the parts to remove, keep and add. An entry whose net is not known is left out."""
    items = () if wiring is None else read_listing(wiring, "`wiring`", problems)
    found = [_net(item, expected, catalogue, problems) for item in items]
    nets = _only_once((net for net in found if net is not None), problems)
    if parts is None:
        return Wiring(nets, (), (), ())
    section = Section(parts, "`parts`", problems, ("remove", "keep", "add"))
    remove, keep, add = (_lines(section, key, problems) for key in ("remove", "keep", "add"))
    return Wiring(nets, remove, keep, add)
