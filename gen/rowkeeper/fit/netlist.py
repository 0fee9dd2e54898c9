"""The routed netlist as the router wrote it: cells, nets and their names.

Takes the JSON of the router and of the synthesis before it; gives a `Netlist` of checked cells (ICESTORM_LC, SB_IO,
SB_GB), or an error where a cell is set in a way that the logic never is. Must not know what the logic does.
"""

import json
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace
from typing import Any

__all__ = ["LUT_INPUTS", "TOP", "Cell", "Netlist", "NetlistError", "read_routed", "spoiled"]

TOP = "rowkeeper_logic"
_INPUT_PIN = "000001"
_OUTPUT_PIN = "011001"
LUT_INPUTS = ("I0", "I1", "I2", "I3")


class NetlistError(Exception):
    """A cell or a setting that this reading of the netlist does not know: our own gap, never the user's mistake."""


@dataclass(frozen=True, slots=True)
class Cell:
    """One cell: parameters as bit texts; `pins` maps each connected pin to its net number or constant."""

    name: str
    kind: str
    parameters: Mapping[str, str]
    pins: Mapping[str, int | str]

    def flag(self, name: str) -> bool:
        return self.parameters.get(name, "0").endswith("1")


@dataclass(frozen=True, slots=True)
class Netlist:
    """All cells in name order, the nets of each port bit by its Verilog name, and the names of each net."""

    cells: tuple[Cell, ...]
    ports: Mapping[str, tuple[int | str, ...]]
    names: Mapping[int, str]


def read_routed(routed: bytes, synthesised: bytes) -> Netlist:
    """Read the router's JSON, which holds exactly one module.

    The router keeps one name per net; the other names of the same net stand in the synthesised netlist it was given.
    """
    module, before = _module(routed), _module(synthesised)
    cells = tuple(_cell(name, module["cells"][name]) for name in sorted(module["cells"]))
    ports = {name: tuple(port["bits"]) for name, port in module["ports"].items()}
    return Netlist(cells, ports, _names(module["netnames"], before["netnames"], ports))


def _module(text: bytes) -> dict[str, dict[str, Any]]:
    modules: dict[str, dict[str, dict[str, Any]]] = json.loads(text)["modules"]
    tops = [m for name, m in modules.items() if name == TOP or len(modules) == 1]
    if len(tops) != 1:
        raise NetlistError(f"expected one top module in the netlist, found {len(tops)}")
    return tops[0]


def _cell(name: str, data: Mapping[str, Any]) -> Cell:
    pins = {pin: bits[0] for pin, bits in data["connections"].items() if bits}
    cell = Cell(name, str(data["type"]), {k: str(v) for k, v in data["parameters"].items()}, pins)
    if cell.kind == "ICESTORM_LC":
        _check_logic(cell)
    elif cell.kind == "SB_IO":
        _check_pad(cell)
    elif cell.kind != "SB_GB":
        raise NetlistError(f"cell {name}: unknown kind {cell.kind}")
    return cell


def _check_logic(cell: Cell) -> None:
    if cell.flag("NEG_CLK") or (cell.flag("ASYNC_SR") and "SR" in cell.pins):
        raise NetlistError(f"cell {cell.name}: falling clock or asynchronous reset, which the logic never has")


def _check_pad(cell: Cell) -> None:
    kind = cell.parameters["PIN_TYPE"][-6:]
    if kind not in (_INPUT_PIN, _OUTPUT_PIN):
        raise NetlistError(f"pad {cell.name}: pin type {kind} is neither a plain input nor a plain output")


def _bits(netnames: Mapping[str, Mapping[str, list[int | str]]]) -> Iterator[tuple[str, int]]:
    """Each name of each net, bit by bit."""
    for name, data in netnames.items():
        for index, bit in enumerate(data["bits"]):
            if isinstance(bit, int):
                yield (name if len(data["bits"]) == 1 else f"{name}[{index}]"), bit


def _names(
    after: Mapping[str, Mapping[str, list[int | str]]],
    before: Mapping[str, Mapping[str, list[int | str]]],
    ports: Mapping[str, tuple[int | str, ...]],
) -> dict[int, str]:
    """The best name of each net: one the logic gave, then the shortest. No name twice."""
    taken = {bit for bits in ports.values() for bit in bits}
    known = dict(_bits(before))
    others: dict[int, list[str]] = {}
    for name, bit in known.items():
        if name.split("[")[0] not in ports:
            others.setdefault(bit, []).append(name)
    best: dict[int, tuple[bool, bool, int, str]] = {}
    for name, bit in _bits(after):
        for other in [name, *others.get(known.get(name, -1), [])] if bit not in taken else []:
            rank = (other.startswith("$"), "SB_" in other, len(other), other)
            best[bit] = min(best.get(bit, rank), rank)
    names = {bit: rank[-1] for bit, rank in best.items()}
    if len(set(names.values())) != len(names):
        raise NetlistError("two nets of the routed netlist have one name")
    return names


def spoiled(netlist: Netlist, name: str, bit: int) -> Netlist:
    """The same netlist with one bit of one table turned: a judge that passes it is worth nothing."""
    cells = []
    for cell in netlist.cells:
        if cell.name == name:
            table = int(cell.parameters["LUT_INIT"], 2) ^ (1 << bit)
            cell = replace(cell, parameters={**cell.parameters, "LUT_INIT": f"{table:016b}"})
        cells.append(cell)
    return replace(netlist, cells=tuple(cells))
