"""Scenes: one cycle of the bus and the one that follows, with everything the device and the chip make of them.

Takes `Facts`; gives networks, one per cycle, neighbour, number of waits and case. Where the device acts at the later
of two causes, each cause that can be the later one is a case of its own; a cause that never can is left out. Must
not know limits.
"""

from collections.abc import Iterator
from dataclasses import dataclass, replace

from rowkeeper.reading.board import Chip
from rowkeeper.timing.bus import CYCLES, FOLLOWERS, BusCycles, CycleKind, from_figure, request_clock
from rowkeeper.timing.device import SYNCHRONISER, Facts, ahead, counted, drive, sample, skewed, through
from rowkeeper.timing.network import SAME, Bound, Network, Promise
from rowkeeper.timing.paths import part_of, travel
from rowkeeper.timing.strobes import follow, is_straight, next_access, next_cycle, refresh, requests, row_strobe

__all__ = ["Scene", "chips_of", "scenes"]

_SPARE_CLOCKS = 3
_ACCESSES: tuple[CycleKind, ...] = ("opcode fetch", "memory read", "memory write")


@dataclass(frozen=True, slots=True)
class Scene:
    """`within`: limits inside the first cycle are judged here too, and not only those between the two cycles.

    `conditions`: bounds that must not be below 0, or the case cannot happen.
    """

    network: Network
    chip: Chip
    cycle: str
    neighbour: str
    case: str
    within: bool
    conditions: tuple[Bound, ...] = ()


def chips_of(facts: Facts) -> tuple[Chip, ...]:
    """The types of chip on the board, each once."""
    return tuple({bank.chip.name: bank.chip for bank in facts.board.banks}.values())


def scenes(facts: Facts) -> Iterator[Scene]:
    """Every scene that can happen."""
    for chip in chips_of(facts):
        if not is_straight(facts):
            yield _whatever(facts, chip)
            yield _row_alone(facts, chip)
            yield _whatever_then_refresh(facts, chip)
            yield _own_refreshes(facts, chip)
            yield from _after_notice(facts, chip)
        for kind in CYCLES:
            for follower in FOLLOWERS[kind]:
                for waits in _waits(facts, kind):
                    yield from _pair(facts, chip, kind, follower, waits)


def _waits(facts: Facts, kind: CycleKind) -> tuple[int, ...]:
    """No wait, and as many as the board's longest wait can make."""
    longest = -(-facts.board.at_worst.wait_max_ps // facts.clock.period_lo_ps)
    return (0, longest) if longest and kind != "refresh" else (0,)


# --- one pair of cycles ------------------------------------------------------------------------------------------


def _pair(facts: Facts, chip: Chip, kind: CycleKind, follower: CycleKind, waits: int) -> Iterator[Scene]:
    network = Network()
    bus = BusCycles(network, facts.board.grade, facts.clock, facts.clock_source)
    second = request_clock(kind, waits)
    bus.clocks(second + _SPARE_CLOCKS)
    bus.begin(kind, 1)
    bus.finish(kind, 1, waits)
    bus.begin(follower, second, "next ")
    bus.between()
    requests(network, facts)
    next_cycle(network, facts, follower)
    within = follower == FOLLOWERS[kind][0]
    note = f"{waits} waits" if waits else ""
    scene = Scene(network, chip, kind, follower, note, within)
    if kind == "interrupt acknowledge":
        yield scene
    elif kind == "refresh":
        network.promise("on time", "turn", SAME)
        refresh(network, facts, "")
        follow(network, facts, "row rises")
        yield scene
    else:
        yield from _access(scene, facts, kind)


def _access(scene: Scene, facts: Facts, kind: CycleKind) -> Iterator[Scene]:
    """Row strobe on time, column select, then the cases of the column strobe and of its end."""
    network = scene.network
    write = kind == "memory write"
    network.promise("on time", "row falls", SAME)
    row_strobe(network, facts, "row falls", "MREQf", "RASf")
    _row(network, facts)
    network.promise("row falls", "column selected", counted(facts, "mux"))
    drive(network, facts, "ma", "column selected", "column address")
    drive(network, facts, "ma", "column selected", "row address ends")
    network.promise("row falls", "earliest column", counted(facts, "column"))
    network.promise("row falls", "given up", counted(facts, "give_up"))
    strobe = "WRf" if write else "RDf"
    network.promise(f"{strobe} seen", "strobe known", counted(facts, plus=SYNCHRONISER))
    for case in _later(scene, facts, "earliest column", "strobe known", ("column by tick", f"column by {strobe[:2]}")):
        _column(case, facts, write)
        for last in _ends(case, facts, write):
            _end(last.network, facts, write)
            follow(last.network, facts, "column rises")
            _data(last.network, facts, scene.chip, write)
            _pads(last, facts, write)
            yield last


def _ends(scene: Scene, facts: Facts, write: bool) -> Iterator[Scene]:
    """The column strobe ends at the latest of row hold, MREQ and, in a read, RD."""
    words = ("ended by row hold", "ended by the bus")
    if write:
        yield from _later(scene, facts, "row held on", "request over", words, "column rises")
        return
    for last in _later(scene, facts, "request over", "read over", ("MREQ ends last", "RD ends last"), "bus over"):
        yield from _later(last, facts, "row held on", "bus over", words, "column rises")


def _row(network: Network, facts: Facts) -> None:
    """The row goes out with the first clock edge after the address has come, and no later than MREQ is first seen.

    That the address outputs are free by then is a limit between the cycle before and this one.
    """
    nothing = Promise("no later than MREQ is first seen", 0, None, facts.tick_source)
    edge = Promise("to the next device clock edge", 0, facts.tick_hi_ps, facts.tick_source)
    network.promise("row goes out", "MREQf seen", nothing)
    network.promise("A arrives", "row goes out", edge)
    drive(network, facts, "ma", "row goes out", "row address")


def _later(
    scene: Scene, facts: Facts, one: str, other: str, words: tuple[str, str], event: str = "go"
) -> Iterator[Scene]:
    """`event` happens at the later of two clock edges: a case for each that can be the later one."""
    network = scene.network
    ahead = network.latest(one, other)
    behind = network.earliest(one, other)
    tick = counted(facts, plus=1, at_least=True)
    if behind is None or behind.total_ps <= 0:
        first = network.copy()
        first.promise(one, event, SAME)
        first.promise(other, one, Promise(f"{words[0]}", 0, None, facts.tick_source))
        yield _case(scene, first, words[0], behind and _negative(behind))
    if ahead is None or ahead.total_ps >= (tick.lo_ps or 0):
        second = network.copy()
        second.promise(other, event, SAME)
        second.promise(one, other, tick)
        yield _case(scene, second, words[1], ahead and _less(ahead, tick.lo_ps or 0))


def _negative(bound: Bound) -> Bound:
    return Bound(-bound.total_ps, (), {name: -ps for name, ps in bound.per_tick.items()})


def _less(bound: Bound, ps: int) -> Bound:
    return Bound(bound.total_ps - ps, (), bound.per_tick)


def _case(scene: Scene, network: Network, words: str, condition: Bound | None) -> Scene:
    case = ", ".join(part for part in (scene.case, words) if part)
    conditions = scene.conditions + ((condition,) if condition is not None else ())
    return Scene(network, scene.chip, scene.cycle, scene.neighbour, case, scene.within, conditions)


def _column(scene: Scene, facts: Facts, write: bool) -> None:
    """From `go`: write enable and column strobe, then the early end of the row strobe."""
    network = scene.network
    by_tick = "by tick" in scene.case
    if write:
        lead = counted(facts, "write_lead")
        network.promise("go", "write falls", SAME)
        network.promise("write falls", "column falls", lead)
        drive(network, facts, "we_n", "write falls", "WEf")
    else:
        network.promise("go", "column falls", SAME)
    drive(network, facts, "cas_n", "column falls", "CASf")
    network.promise("column falls", "row rises", counted(facts, "row_hold"))
    row_strobe(network, facts, "row rises", "MREQr", "RASr")
    if write:
        skewed(network, facts, ("we_n", "WEf"), ("cas_n", "CASf"), lead)
    if by_tick:
        network.promise("column selected", "go", ahead(facts, "mux", "column"))
    if by_tick and not is_straight(facts):
        span = counted(facts, "column", "write_lead") if write else counted(facts, "column")
        skewed(network, facts, ("ras_n", "RASf"), ("cas_n", "CASf"), span)
    network.promise("row rises", "row held on", counted(facts, plus=1))
    network.promise("MREQr seen", "request over", counted(facts, plus=SYNCHRONISER))
    if not write:
        network.promise("RDr seen", "read over", counted(facts, plus=SYNCHRONISER))
    network.promise("MREQr seen", "last start", counted(facts, plus=SYNCHRONISER - 1))
    network.promise("column falls", "capped", counted(facts, "column_cap"))


def _end(network: Network, facts: Facts, write: bool) -> None:
    """Column strobe, write enable and the data buffer end at one edge; at a refresh the address may move with them."""
    drive(network, facts, "cas_n", "column rises", "CASr")
    if write:
        drive(network, facts, "we_n", "column rises", "WEr")
        skewed(network, facts, ("cas_n", "CASr"), ("we_n", "WEr"), SAME)
    network.promise("column rises", "address released", counted(facts, at_least=True))
    drive(network, facts, "ma", "address released", "column address ends")


def _pads(scene: Scene, facts: Facts, write: bool) -> None:
    """Strobes that follow a line of the bus, from pin to pin, where the sheet bounds both pads as a pair."""
    network, see = scene.network, counted(facts, plus=SYNCHRONISER)
    lead = (counted(facts, "write_lead"),) if write else ()
    by_tick = "by tick" in scene.case
    if not is_straight(facts):
        through(network, facts, ("mreq_n", "MREQf"), ("ras_n", "RASf"), see)
    line = ("mreq_n", "MREQf") if by_tick else (("wr_n", "WRf") if write else ("rd_n", "RDf"))
    spans = (see, counted(facts, "column")) if by_tick else (see,)
    through(network, facts, line, ("cas_n", "CASf"), *spans, *lead)
    if write:
        through(network, facts, line, ("we_n", "WEf"), *spans)
    else:
        through(network, facts, line, ("read_n", "READf"), *spans)
    if "ended by the bus" in scene.case:
        ends = ("rd_n", "RDr") if "RD ends last" in scene.case else ("mreq_n", "MREQr")
        for net, event in (("cas_n", "CASr"), ("read_n", "READr"), ("we_n", "WEr")):
            if network.holds(event):
                through(network, facts, ends, (net, event), see)


def _data(network: Network, facts: Facts, chip: Chip, write: bool) -> None:
    """Data on its way: from the chip through the board's buffer to the bus, or from the bus to the chip."""
    if write:
        travel(network, "D", "DIN", facts.paths["data_in"])
        travel(network, "D ends", "DIN ends", facts.paths["data_in"])
        return
    out = facts.paths["data_out"]
    for symbol, cause in (("tRAC", "RASf"), ("tCAC", "CASf")):
        figure = chip.limits.get(symbol)
        if figure is not None:
            network.promise(cause, f"DOUT {symbol}", Promise(symbol, None, figure.hi_ps, figure.source))
            travel(network, f"DOUT {symbol}", f"data {symbol}", out)
    off = chip.limits.get("tOFF")
    if off is not None:
        network.promise("CASr", "DOUT floats", from_figure(off))
        travel(network, "DOUT floats", "data decays", out)
    buffer = part_of(facts.board, "data_out")
    drive(network, facts, "read_n", "column falls", "READf")
    drive(network, facts, "read_n", "column rises", "READr")
    if buffer is not None and buffer.enable is not None:
        network.promise("READf", "buffer drives", from_figure(buffer.enable, f"data_out: {buffer.name} enable"))
    if buffer is not None and buffer.disable is not None:
        network.promise("READr", "buffer floats", from_figure(buffer.disable, f"data_out: {buffer.name} disable"))


# --- without the bus ---------------------------------------------------------------------------------------------


def _own_refreshes(facts: Facts, chip: Chip) -> Scene:
    """Two refreshes of our own back to back, as in the warm-up."""
    network = Network()
    refresh(network, facts, "")
    network.promise("row rises", "next turn", counted(facts, "precharge"))
    refresh(network, facts, "next ")
    return Scene(network, chip, "own refresh", "own refresh", "", True)


def _after_notice(facts: Facts, chip: Chip) -> Iterator[Scene]:
    """A refresh of our own begun at the last moment, then the first cycle after a grant or a reset."""
    worst, figures = facts.board.at_worst, facts.board.grade.figures
    if facts.board.standby != "own-timer":
        return
    wired = {net.name for net in facts.board.wiring.nets if net.pin}
    if worst.grant_max_ps != 0 and "busreq_n" in wired:
        setup = figures.get("TsBUSREQ")
        least = Promise("TsBUSREQ", 0, None, facts.clock_source)
        if setup is not None:
            least = Promise(setup.symbol, setup.lo_ps, None, setup.source)
        for kind in _ACCESSES:
            network = _bus_comes_back(facts, kind, "busreq_n", 1, least)
            if "busack_n" in wired and "TdCf(BUSACKr)" in figures:
                network.promise("Cf1", "BUSACKr", from_figure(figures["TdCf(BUSACKr)"]))
                sample(network, facts, "busack_n", "BUSACKr", "BUSACKr seen")
            yield Scene(network, chip, "own refresh", f"{kind} after a grant", "", False)
    if worst.reset_max_ps != 0 and "reset_n" in wired:
        nothing = Promise("RESET at any time before it is taken", 0, None, facts.clock_source)
        clocks = facts.board.bus.traffic.reset_restart_clocks
        network = _bus_comes_back(facts, "opcode fetch", "reset_n", clocks, nothing)
        yield Scene(network, chip, "own refresh", "opcode fetch after a reset", "", False)


def _bus_comes_back(facts: Facts, kind: CycleKind, net: str, clocks: int, before: Promise) -> Network:
    """`net` is taken high at Cr1; T1 comes `clocks` later. Until the device sees it, a refresh of ours may begin."""
    network = Network()
    bus = BusCycles(network, facts.board.grade, facts.clock, facts.clock_source)
    bus.clocks(1 + clocks + _SPARE_CLOCKS)
    bus.begin(kind, 1 + clocks, "next ")
    network.promise("notice", "Cr1", before)
    sample(network, facts, net, "notice", "notice seen")
    requests(network, facts)
    network.promise("notice seen", "last turn", counted(facts, plus=SYNCHRONISER - 1))
    network.promise("turn", "last turn", Promise("a refresh begins no later", 0, None, facts.tick_source))
    refresh(network, facts, "")
    next_cycle(network, facts, kind)
    follow(network, facts, "row rises")
    return network


def _whatever(facts: Facts, chip: Chip) -> Scene:
    """What the counted strobes keep whatever the bus does: the bus may break off, never come, or never end."""
    network = Network()
    shortest = counted(facts, "column", "row_hold", at_least=True)
    longest = counted(facts, "give_up", "write_lead", "row_hold", at_most=True)
    network.promise("row falls", "row rises", shortest)
    network.promise("row falls", "row rises", longest)
    network.promise("row falls", "column selected", counted(facts, "mux"))
    network.promise("row falls", "column falls", counted(facts, "column", at_least=True))
    network.promise("column selected", "column falls", replace(ahead(facts, "mux", "column"), hi_ps=None))
    network.promise("column falls", "row rises", counted(facts, "row_hold"))
    network.promise("row rises", "column rises", counted(facts, plus=1, at_least=True))
    network.promise("column falls", "column rises", counted(facts, "column_cap", at_most=True))
    network.promise("column rises", "address released", counted(facts, at_least=True))
    network.promise("row rises", "next row falls", counted(facts, "precharge", at_least=True))
    network.promise("column rises", "next row falls", counted(facts, "column_rest", at_least=True))
    # The address is let go of one flip-flop early, so whatever was on the bus stands this long before the row strobe.
    network.promise("address frozen", "row falls", counted(facts, plus=SYNCHRONISER))
    for net, edge, event in (
        ("ras_n", "row falls", "RASf"),
        ("ras_n", "row rises", "RASr"),
        ("cas_n", "column falls", "CASf"),
        ("cas_n", "column rises", "CASr"),
        ("ma", "column selected", "row address ends"),
        ("ma", "column selected", "column address"),
        ("ma", "address released", "column address ends"),
        ("ma", "address frozen", "row address"),
    ):
        drive(network, facts, net, edge, event)
    next_access(network, facts, write=False)
    return Scene(network, chip, "any access", "whatever the bus does", "", True)


def _row_alone(facts: Facts, chip: Chip) -> Scene:
    """Precharge is not left to the rest of a column strobe: the bus may have broken off before there was one."""
    network = Network()
    network.promise("row rises", "next row falls", counted(facts, "precharge", at_least=True))
    drive(network, facts, "ras_n", "row rises", "RASr")
    drive(network, facts, "ras_n", "next row falls", "next RASf")
    return Scene(network, chip, "any access", "whatever the bus does", "no column strobe", False)


def _whatever_then_refresh(facts: Facts, chip: Chip) -> Scene:
    """A refresh of the bus may end the column strobe and begin at one edge; the row's set-up rests the strobes."""
    network = Network()
    network.promise("row rises", "column rises", counted(facts, plus=1, at_least=True))
    network.promise("row rises", "next turn", counted(facts, "precharge", at_least=True))
    network.promise("column rises", "next turn", counted(facts, at_least=True))
    drive(network, facts, "ras_n", "row rises", "RASr")
    drive(network, facts, "cas_n", "column rises", "CASr")
    refresh(network, facts, "next ")
    return Scene(network, chip, "any access", "refresh", "whatever the bus does", False)
