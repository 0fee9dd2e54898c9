"""The limits: which two events each one is about, and what the sheet asks between them.

Takes a scene; gives the rules that apply to it. Most limits are one line of a table: symbol, from which event to
which, and the sentence of the sheet. Limits that need arithmetic of their own, of the bus, and of our sequencer are
functions. Must not know how a window is found.
"""

from collections.abc import Callable
from dataclasses import dataclass
from typing import Literal

from rowkeeper.reading.board import Chip
from rowkeeper.reading.figures import Figure, Mark, Source
from rowkeeper.timing.device import Facts, counted
from rowkeeper.timing.network import Promise
from rowkeeper.timing.scenes import Scene

__all__ = ["ABSENT_IS_FINE", "BETWEEN", "NOT_JUDGED", "WITHIN", "Rule", "asked_symbols", "rules_of"]


@dataclass(frozen=True, slots=True)
class Rule:
    """`later - earlier` is judged against `required`: the upper end for sense max, the lower end for min."""

    symbol: str
    earlier: str
    later: str
    sense: Literal["min", "max"]
    required: Promise
    kind: Literal["hard", "reference"] = "hard"
    note: str = ""


@dataclass(frozen=True, slots=True)
class _Line:
    symbol: str
    earlier: str
    later: str
    sentence: str
    sense: Literal["min", "max"] = "min"


_OURS = Source(Mark.DERIVED, "rules of the sequencer")

# Limits of the chip's sheet inside one cycle.
_WITHIN = (
    _Line("tRAS", "RASf", "RASr", "row strobe low"),
    _Line("tRAS", "RASf", "RASr", "row strobe low", "max"),
    _Line("tCAS", "CASf", "CASr", "column strobe low"),
    _Line("tCAS", "CASf", "CASr", "column strobe low", "max"),
    _Line("tRCD", "RASf", "CASf", "row strobe falls to column strobe falls"),
    _Line("tRSH", "CASf", "RASr", "column strobe falls to row strobe rises"),
    _Line("tCSH", "RASf", "CASr", "row strobe falls to column strobe rises"),
    _Line("tASR", "row address", "RASf", "row address before the row strobe falls"),
    _Line("tRAH", "RASf", "row address ends", "row address after the row strobe falls"),
    _Line("tASC", "column address", "CASf", "column address before the column strobe falls"),
    _Line("tCAH", "CASf", "column address ends", "column address after the column strobe falls"),
    _Line("tAR", "RASf", "column address ends", "column address after the row strobe falls"),
    _Line("tWCS", "WEf", "CASf", "write enable before the column strobe, for an early write"),
    _Line("tWCH", "CASf", "WEr", "write enable after the column strobe falls"),
    _Line("tWCR", "RASf", "WEr", "write enable after the row strobe falls"),
    _Line("tWP", "WEf", "WEr", "write enable low"),
    _Line("tRWL", "WEf", "RASr", "write enable falls to row strobe rises"),
    _Line("tCWL", "WEf", "CASr", "write enable falls to column strobe rises"),
    _Line("tDS", "DIN", "CASf", "data before the column strobe, in an early write"),
    _Line("tDH", "CASf", "DIN ends", "data after the column strobe, in an early write"),
    _Line("tDHR", "RASf", "DIN ends", "data after the row strobe falls"),
)

# Limits of the chip's sheet between a cycle and the next.
_BETWEEN = (
    _Line("tASR", "next row address", "next RASf", "row address before the row strobe, once the outputs are free"),
    _Line("tRP", "RASr", "next RASf", "row strobe high"),
    _Line("tCRP", "CASr", "next RASf", "column strobe rises to row strobe falls"),
    _Line("tCPN", "CASr", "next CASf", "column strobe high outside page cycles"),
    _Line("tRPC", "RASr", "next CASf", "row strobe rises to column strobe falls"),
    _Line("tRCS", "WEr", "next CASf", "write enable high before the column strobe of a read"),
    _Line("tRCH", "CASr", "next WEf", "write enable high after the column strobe of a read"),
    _Line("tRRH", "RASr", "next WEf", "write enable high after the row strobe of a read"),
)

# Asked of every chip, and judged by functions below.
_BY_FUNCTION = ("tRC", "tRAC", "tCAC", "tOFF")
NOT_JUDGED = ("tT",)
# tRPC speaks of refreshes that begin with the column strobe; most sheets of these chips have none.
ABSENT_IS_FINE = ("tRPC",)

_Maker = Callable[[Scene, Facts], list[Rule]]


def asked_symbols() -> tuple[str, ...]:
    """Every symbol the chip's sheet is asked for."""
    return tuple(dict.fromkeys([*(line.symbol for line in _WITHIN + _BETWEEN), *_BY_FUNCTION]))


def rules_of(scene: Scene, facts: Facts) -> list[Rule]:
    """Every rule about this scene whose two events happen in it."""
    makers = (WITHIN if scene.within else ()) + BETWEEN
    rules = [rule for maker in makers for rule in maker(scene, facts)]
    return [rule for rule in rules if scene.network.holds(rule.earlier, rule.later)]


def _promised(figure: Figure) -> Promise:
    return Promise(figure.symbol, figure.lo_ps, figure.hi_ps, figure.source)


def _of_sheet(chip: Chip, lines: tuple[_Line, ...]) -> list[Rule]:
    rules = []
    for line in lines:
        figure = chip.limits.get(line.symbol)
        if figure is None or (figure.lo_ps if line.sense == "min" else figure.hi_ps) is None:
            continue
        rules.append(Rule(line.symbol, line.earlier, line.later, line.sense, _promised(figure), note=line.sentence))
    return rules


def chip_within(scene: Scene, _facts: Facts) -> list[Rule]:
    """Every limit of the chip's sheet inside one cycle."""
    return _of_sheet(scene.chip, _WITHIN)


def chip_between(scene: Scene, _facts: Facts) -> list[Rule]:
    """Every limit of the chip's sheet between two cycles. tRCH and tRRH speak of reads, tRCS of a write before one."""
    write = scene.cycle == "memory write"
    lines = tuple(line for line in _BETWEEN if not (write and line.symbol in ("tRCH", "tRRH")))
    if scene.neighbour == "refresh":  # its row comes from the counter, and is judged in its own cycle
        lines = tuple(line for line in lines if line.symbol != "tASR")
    if scene.neighbour == "memory write":
        lines = tuple(line for line in lines if line.symbol != "tRCS")
    return _of_sheet(scene.chip, lines)


def row_cycle(scene: Scene, facts: Facts) -> list[Rule]:
    """tRC, its own limit: row strobe falls to row strobe falls. Same path, same edge: its delay counts for nothing.

    Not asked of accesses the bus breaks off: no legal bus starts another so soon.
    """
    figure = scene.chip.limits.get("tRC")
    if figure is None or figure.lo_ps is None or scene.cycle == "any access":
        return []
    events = ("MREQf", "next MREQf") if facts.ticks.style == "straight" else ("row falls", "next row falls")
    return [Rule("tRC", *events, "min", _promised(figure), note="one random cycle")]


def column_delay(scene: Scene, _facts: Facts) -> list[Rule]:
    """tRCD maximum: a reference point. Beyond it tCAC decides the access, and that is judged on its own."""
    figure = scene.chip.limits.get("tRCD")
    if figure is None or figure.hi_ps is None or scene.cycle == "any access":
        return []
    note = "reference point only: beyond it the access is ruled by tCAC"
    return [Rule("tRCD", "RASf", "CASf", "max", _promised(figure), "reference", note)]


def data_in_time(scene: Scene, facts: Facts) -> list[Rule]:
    """tRAC and tCAC as data at the bus: TsD(Cr) before Cr of a fetch, TsD(Cf) before Cf of a read."""
    figure = facts.board.grade.figures.get("TsD(Cr)" if scene.cycle == "opcode fetch" else "TsD(Cf)")
    if figure is None or figure.lo_ps is None:
        return []
    asked = _promised(figure)
    note = "data on the bus before it is taken"
    rules = [Rule(s, f"data {s}", "sample", "min", asked, note=note) for s in ("tRAC", "tCAC")]
    return [*rules, Rule(figure.symbol, "buffer drives", "sample", "min", asked, note="data buffer driving in time")]


def data_held(_scene: Scene, facts: Facts) -> list[Rule]:
    """tOFF and ThD: chip and buffer keep data on the bus from the edge at which it is taken, and until RD has risen."""
    figure = facts.board.grade.figures.get("ThD")
    if figure is None or figure.lo_ps is None:
        return []
    asked = _promised(figure)
    rules = []
    for symbol, event in (("tOFF", "data decays"), ("ThD", "buffer floats")):
        rules.append(Rule(symbol, "sample", event, "min", asked, note="data on the bus after it is taken"))
        rules.append(Rule(f"{symbol}(RDr)", "RDr", event, "min", asked, note="data on the bus until RD has risen"))
    return rules


def turnaround(_scene: Scene, facts: Facts) -> list[Rule]:
    """Our data buffer is off before the next driver, which may start as soon as its own strobe falls."""
    nothing = Promise("no overlap", 0, None, facts.clock_source)
    return [Rule("turnaround", "buffer floats", "next driver", "min", nothing, note="data buffer off the bus")]


def cycle_kind(scene: Scene, facts: Facts) -> list[Rule]:
    """M1 is known at the very edge that first sees MREQ, the flip-flop's aperture away: fetch or refresh is decided."""
    asked = Promise("aperture of the flip-flop of M1", facts.aperture_ps, None, facts.aperture.source)
    note = "M1 known when MREQ is first seen"
    rules = []
    if scene.cycle == "opcode fetch" and scene.within:
        rules.append(Rule("kind", "M1f arrives", "MREQf seen", "min", asked, note=note))
    if scene.neighbour == "refresh":
        rules.append(Rule("kind", "M1r arrives", "next MREQf seen", "min", asked, note=note))
    return rules


def address_captured(_scene: Scene, facts: Facts) -> list[Rule]:
    """The bus address stands at the last edge that loads it, which is the edge that first sees MREQ, and past it."""
    asked = Promise("set-up is in the path", 0, None, _OURS)
    kept = Promise("aperture of the address flip-flop", facts.aperture_ps, None, facts.aperture.source)
    return [
        Rule("address-captured", "A arrives", "MREQf seen", "min", asked, note="address stands before it is taken"),
        Rule("address-captured", "MREQf seen", "A ends arrives", "min", kept, note="address stands after it is taken"),
    ]


def seen_in_time(scene: Scene, _facts: Facts) -> list[Rule]:
    """RD or WR is known while the request is still there, and before the access is given up."""
    line = "WR" if scene.cycle == "memory write" else "RD"
    asked = Promise("no later", 0, None, _OURS)
    return [
        Rule(f"{line} seen", "go", "last start", "min", asked, note="before the request is over"),
        Rule("give up", "strobe known", "given up", "min", asked, note=f"{line} known before the access is given up"),
    ]


def column_capped(scene: Scene, _facts: Facts) -> list[Rule]:
    """The bus ends the column strobe; the cap that keeps tCAS maximum comes later, so data is never cut off."""
    asked = Promise("no earlier", 0, None, _OURS)
    last = "bus over" if scene.network.holds("bus over") else "request over"
    return [Rule("column cap", last, "capped", "min", asked, note="the bus ends the cycle before the cap")]


def grant_over(_scene: Scene, facts: Facts) -> list[Rule]:
    """BUSACK is known to have risen at the very edge that first sees MREQ, or the access would be left alone."""
    asked = Promise("aperture of the flip-flop of BUSACK", facts.aperture_ps, None, facts.aperture.source)
    note = "BUSACK known to be over when MREQ is first seen"
    return [Rule("grant over", "BUSACKr arrives", "next MREQf seen", "min", asked, note=note)]


def ready(scene: Scene, facts: Facts) -> list[Rule]:
    """Back at rest before the next request can be taken: its strobe is on time and its address was followed."""
    if scene.neighbour == "interrupt acknowledge" or facts.ticks.style == "straight":
        return []
    if scene.neighbour == "refresh":
        return _ready_for_refresh(scene, facts)
    note = "strobe rested before the next request is taken"
    row = f"row {note}"
    rules = [Rule("ready", "row rises", "next on time", "min", counted(facts, "precharge"), note=row)]
    last = "row rises"
    if scene.network.holds("column rises"):
        last = "column rises"
        rest = counted(facts, "column_rest")
        rules.append(Rule("ready", last, "next on time", "min", rest, note=f"column {note}"))
    followed = "address followed again before it is taken"
    return [*rules, Rule("ready", last, "next MREQf seen", "min", counted(facts, plus=1), note=followed)]


def _ready_for_refresh(scene: Scene, facts: Facts) -> list[Rule]:
    """Precharge is over, the last request was seen to end, and data is no longer wanted when the refresh is taken."""
    row = "row strobe rested before the next request is taken"
    rules = [Rule("ready", "row rises", "next on time", "min", counted(facts, "precharge"), note=row)]
    if scene.network.holds("column rises"):
        gone, over = "MREQ seen high before the next request is taken", "column strobe over before the refresh is taken"
        rules.append(Rule("ready", "MREQr seen", "next MREQf seen", "min", counted(facts, plus=2), note=gone))
        rules.append(Rule("ready", "row rises", "next MREQf seen", "min", counted(facts, plus=1), note=gone))
        no_later = Promise("no later", 0, None, _OURS)
        rules.append(Rule("ready", "column rises", "next on time", "min", no_later, note=over))
    return rules


WITHIN: tuple[_Maker, ...] = (
    *(chip_within, column_delay, data_in_time, data_held, cycle_kind),
    *(address_captured, seen_in_time, column_capped),
)
BETWEEN: tuple[_Maker, ...] = (chip_between, row_cycle, turnaround, grant_over, ready)
