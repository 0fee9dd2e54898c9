"""Levels along every net of a board: each wire from a driver to a receiver, in millivolts, by the book.

Takes a board; gives `Levels`: margins of every wire at the worst supply of both sides, the nets that need a translator
or buffer, what the outputs drive, and the synchronisers. Every figure is the sheet's at its worst supply: a share of
the supply (CMOS thresholds) stands in the catalogue at the end of the supply that is hardest. Must not know delays
beyond those that the synchronisers need.
"""

import re
from collections.abc import Iterator
from dataclasses import dataclass

from rowkeeper.contract import LevelMargin, LevelNeed, Levels
from rowkeeper.reading.board import Board, IoLevels, Net, Part
from rowkeeper.reading.figures import Mark, Source
from rowkeeper.timing.drive import drives
from rowkeeper.timing.metastability import settling

__all__ = ["NOISE_MARGIN_MV", "level_refusals", "levels_of", "wire_margin"]

NOISE_MARGIN_MV = 400  # what transistor-transistor logic is designed to have, common practice
_DEVICE_MV = 3300
_BOARD_MV = 5000
_CMOS_VIH_MV = 3000  # no input with TTL thresholds asks for so much, nor a strobe of three supplies
_STROBES = ("ras_n", "cas_n", "we_n")
_FROM_3V = "AHCT or HCT at 5 V (switches at TTL levels, drives 3.8 V), as SN74AHCT541"
_TO_3V = "LVC at 3.3 V (switches at TTL levels, takes 5.5 V), as SN74LVC245A"
_CMOS = "a part with TTL thresholds: AHCT at 5 V, LVC at 3.3 V; CMOS thresholds are not satisfied by TTL levels"
_STRONGER = "a buffer that drives further: AHCT or HCT at 5 V, as SN74AHCT541"
_PULL_UP = "a pull-up for this net, named under `parts: add`, to the supply of what it drives"
_MARK = Source(Mark.BOARD, "board file")


@dataclass(frozen=True, slots=True)
class End:
    """One end of a wire: its name, its levels, its supply, and the most it can drive."""

    name: str
    levels: IoLevels
    supply_mv: int
    pin_class: str
    highest_mv: int | None = None
    pulled_up: bool | None = None  # an open-drain output, and whether a pull-up is named for it


def levels_of(board: Board) -> Levels:
    """Everything electrical of one board."""
    wires = tuple(wire for net in board.wiring.nets for wire in _wires(board, net))
    needs = tuple(need for net in board.wiring.nets for need in _need(board, net))
    return Levels(wires, needs, drives(board), settling(board))


def level_refusals(levels: Levels) -> tuple[str, ...]:
    """One sentence for each kind of wire that fails: what drives what, by how much, and what mends it."""
    found: dict[tuple[str, ...], list[LevelMargin]] = {}
    for wire in levels.wires:
        if not wire.holds:
            found.setdefault((_generic(wire.driver), _generic(wire.receiver), wire.mend), []).append(wire)
    return tuple(_sentence(group) for group in found.values())


def _generic(name: str) -> str:
    """A name without the designator behind it."""
    return re.sub(r" [A-Z]{1,3}[0-9]+$", "", name)


def _sentence(group: list[LevelMargin]) -> str:
    wire = min(group, key=lambda w: min(m for m in (w.high_margin_mv, w.low_margin_mv, -w.over_mv) if m is not None))
    faults = [
        f"{what} {_volts(have)} against {_volts(need)}: {_volts(margin)}"
        for what, have, need, margin in (
            ("high", wire.voh_mv, wire.vih_mv, wire.high_margin_mv),
            ("low", wire.vol_mv, wire.vil_mv, wire.low_margin_mv),
        )
        if margin is not None and margin < 0
    ]
    if wire.over_mv:
        faults.append(
            f"up to {_volts(wire.highest_mv)} on a pin that takes {_volts(wire.limit_mv)}: "
            f"{_volts(wire.over_mv)} too much"
        )
    if wire.pulled_up is False:
        faults.append("an open-drain output, and the parts list names no pull-up for this net")
    others = f" and {len(group) - 1} more" if len(group) > 1 else ""
    return (
        f"levels of {wire.net}{others}, {wire.driver} to {wire.receiver}: {'; '.join(faults)} "
        f"({wire.driver_source}; {wire.receiver_source}). Would mend it: {wire.mend}."
    )


def _volts(millivolts: int | None) -> str:
    if millivolts is None:
        return "no figure"
    whole, rest = divmod(abs(millivolts), 1000)
    digits = f"{rest:03d}"
    digits = digits[:2] if digits.endswith("0") else digits
    return f"{'-' if millivolts < 0 else ''}{whole}.{digits} V"


# --- wires -------------------------------------------------------------------------------------------------------


def _wires(board: Board, net: Net) -> Iterator[LevelMargin]:
    """Every wire of one net, from its driver through each part to its receiver."""
    driver: End | None = _driver(board, net)
    for element in net.through:
        if element.part is None:
            continue
        part, name = element.part, f"{element.part.name} {element.designator}".strip()
        if driver is not None:
            yield wire_margin(net.name, driver, End(name, part.input_levels, part.supply_mv, "part"))
        driver = End(
            name,
            part.output_levels,
            part.supply_mv,
            "part",
            part.output_levels.abs_max_mv,
            _pulled_up(board, net, part),
        )
    if driver is not None:
        for receiver in _receivers(board, net):
            yield wire_margin(net.name, driver, receiver)


def _pulled_up(board: Board, net: Net, part: Part) -> bool | None:
    """An output that only pulls down needs a pull-up; the parts list must name one for this net."""
    if part.output_levels.voh_min_mv is not None or part.output_levels.vol_max_mv is None:
        return None
    word = re.compile(rf"(?<![a-z0-9_]){re.escape(net.name)}(?![a-z0-9_])")
    return any("pull-up" in line and word.search(line) for line in (*board.wiring.add, *board.wiring.keep))


def _driver(board: Board, net: Net) -> End | None:
    chip, bus, device = board.banks[0].chip, board.bus, board.device
    if net.name == "clk":
        rail = next((element.rail_mv for element in net.through if element.rail_mv), 0)
        nothing = IoLevels(None, None, None, None, None, _MARK)
        return End("the oscillator", nothing, rail, "clock", rail * 21 // 20) if rail else None
    if net.side == "output":
        return End("the device", device.levels, _DEVICE_MV, "device output", device.levels.abs_max_mv)
    if net.name == "data_out":
        return End(chip.name, chip.output_levels, _BOARD_MV, "memory output", chip.output_levels.abs_max_mv)
    return End("the bus", bus.output_levels, _BOARD_MV, "bus output", bus.supply_max_mv)


def _receivers(board: Board, net: Net) -> tuple[End, ...]:
    """Who reads the net: the device, the chips, the bus, or the parts whose enables it meets."""
    chip, bus, device = board.banks[0].chip, board.bus, board.device
    if net.side == "input":
        return (End("the device", device.levels, _DEVICE_MV, "device input"),)
    if net.name in _STROBES:
        return (End(f"{chip.name} strobe", chip.strobe_levels, _BOARD_MV, "strobe"),)
    if net.name.startswith("ma"):
        return (End(f"{chip.name} address", chip.address_levels, _BOARD_MV, "address"),)
    if net.name == "data_in":
        return (End(f"{chip.name} data", chip.address_levels, _BOARD_MV, "data"),)
    if net.name == "data_out":
        return (End("the bus", bus.input_levels, _BOARD_MV, "bus input"),)
    return tuple(_parts_met(board, net))


def _parts_met(board: Board, net: Net) -> Iterator[End]:
    """The parts of other nets whose designators this net meets: `U22-U23.1+19` meets U22 and U23."""
    match = re.fullmatch(r"([A-Z]+)([0-9]+)(?:-[A-Z]+([0-9]+))?\..*", net.meets)
    if match is None:
        return
    places = {f"{match[1]}{n}" for n in range(int(match[2]), int(match[3] or match[2]) + 1)}
    seen: set[str] = set()
    for element in (element for other in board.wiring.nets for element in other.through):
        if element.part is not None and element.designator in places - seen:
            seen.add(element.designator)
            name = f"{element.part.name} {element.designator}"
            yield End(name, element.part.input_levels, element.part.supply_mv, "enable")


def wire_margin(net: str, driver: End, receiver: End) -> LevelMargin:
    """Both margins of one wire, and the highest voltage on the pin against what it stands."""
    d, r = driver.levels, receiver.levels
    high = None if d.voh_min_mv is None or r.vih_min_mv is None else d.voh_min_mv - r.vih_min_mv
    low = None if d.vol_max_mv is None or r.vil_max_mv is None else r.vil_max_mv - d.vol_max_mv
    over = driver.highest_mv is not None and r.abs_max_mv is not None and driver.highest_mv > r.abs_max_mv
    short = (high is not None and high < 0) or (low is not None and low < 0)
    mend = _mend(driver, receiver, over=over) if over or short else _PULL_UP if driver.pulled_up is False else ""
    memory = Mark.MEMORY in (d.source.mark, r.source.mark)
    return LevelMargin(
        net,
        driver.name,
        receiver.name,
        receiver.pin_class,
        d.voh_min_mv,
        r.vih_min_mv,
        d.vol_max_mv,
        r.vil_max_mv,
        high,
        low,
        driver.highest_mv,
        r.abs_max_mv,
        d.source,
        r.source,
        memory,
        _direction(driver, receiver),
        mend,
        _note(high, low, driver),
        driver.pulled_up,
    )


def _direction(driver: End, receiver: End) -> str:
    if driver.supply_mv == receiver.supply_mv:
        return ""
    return f"{_rail(driver.supply_mv)} to {_rail(receiver.supply_mv)}"


def _rail(millivolts: int) -> str:
    whole, rest = divmod(millivolts, 1000)
    return f"{whole}.{rest // 100} V" if rest else f"{whole} V"


def _mend(driver: End, receiver: End, *, over: bool) -> str:
    """The family that fits between the two."""
    if over and receiver.supply_mv < _BOARD_MV:
        return _TO_3V
    asks = receiver.levels.vih_min_mv
    if receiver.pin_class == "part" and asks is not None and asks > _CMOS_VIH_MV:
        return _CMOS
    if receiver.supply_mv < _BOARD_MV <= driver.supply_mv:
        return _TO_3V
    return _FROM_3V if driver.supply_mv < _BOARD_MV else _STRONGER


def _note(high: int | None, low: int | None, driver: End) -> str:
    if driver.pin_class == "clock":
        return "the oscillator is no part of the catalogue: only its supply, 5 % high, is held against the pin"
    if driver.pulled_up is not None:
        named = "names one" if driver.pulled_up else "names NONE"
        return f"open drain: a pull-up gives the high level, and the parts list {named}; its height is not computed"
    if high is None or low is None:
        return "no figure on one side: not judged"
    if high == 0:
        return "no margin at all by the book: an unloaded output drives more, typically, and that is not promised"
    return ""


# --- what would happen without the parts -------------------------------------------------------------------------


def _need(board: Board, net: Net) -> Iterator[LevelNeed]:
    """A net whose ends, joined straight, break a pin or leave less than the noise margin across two supplies."""
    driver, receivers = _driver(board, net), _receivers(board, net)
    if driver is None or driver.pin_class == "clock" or not receivers:
        return
    stands = ", ".join(f"{e.part.name} {e.designator}".strip() for e in net.through if e.part is not None)
    for receiver in receivers[:1]:
        wire = wire_margin(net.name, driver, receiver)
        known = [margin for margin in (wire.high_margin_mv, wire.low_margin_mv) if margin is not None]
        least = min(known, default=None)
        enough = NOISE_MARGIN_MV if wire.direction and receiver.pin_class not in ("enable", "device input") else 0
        if wire.over_mv or (least is not None and least < enough):
            direction = wire.direction or f"{_rail(driver.supply_mv)} to {_rail(receiver.supply_mv)}"
            mend = wire.mend or _mend(driver, receiver, over=False)
            yield LevelNeed(net.name, direction, least, wire.over_mv, mend, stands)
