"""The records that pass between the rooms: design, ticks, ports, delays, margins, outcomes.

Takes nothing; gives frozen records only. Must not know how any of them was found. Times are integer picoseconds,
`_ticks` are periods of the device clock.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from enum import Enum
from typing import Literal

from rowkeeper.reading.figures import Source, Window

__all__ = [
    "ArbitrationSum",
    "BenchOutcome",
    "ClaimOutcome",
    "Constraint",
    "Delays",
    "Design",
    "Drive",
    "Finding",
    "FindingGroup",
    "FitOutcome",
    "LevelMargin",
    "LevelNeed",
    "Levels",
    "Margin",
    "NetDelay",
    "Note",
    "OriginalDelay",
    "OriginalLimit",
    "OriginalReport",
    "OriginalStage",
    "PinRow",
    "Plan",
    "PortBit",
    "Ports",
    "RefreshBounds",
    "Settling",
    "Status",
    "Term",
    "TickTable",
    "Verdict",
]


class Status(Enum):
    """What became of one check. NOT_RUN is never counted as passed."""

    PASSED = "passed"
    FAILED = "failed"
    NOT_RUN = "not run"


@dataclass(frozen=True, slots=True)
class TickTable:
    """Every tick of the generated sequencer, in periods of the device clock.

    Tick 0 of an access is the clock edge at which the row strobe falls. The rules are in `logic/sequencer.py`.
    """

    style: Literal["counted", "straight"]
    row_setup: int  # refresh row stands this long before a refresh strobe falls
    mux: int  # row address gives way to column address, after the row strobe fell
    column: int  # earliest column strobe, after the row strobe fell
    row_hold: int  # row strobe rises this long after the column strobe fell
    write_lead: int  # write enable falls this long before the column strobe of a write
    give_up: int  # neither RD nor WR by then: the access ends as a row-only cycle
    column_cap: int  # the column strobe ends this long after it fell, whatever the bus does
    column_rest: int  # column strobe high at least, before an access; before a refresh its row is set up meanwhile
    refresh_low: int  # row strobe low in a refresh
    precharge: int  # row strobe high at least, before it may fall again
    standby: int  # age at which a refresh of our own is wanted while the bus is quiet
    forced: int  # age at which a refresh of our own is made whatever the bus does
    reset_settle: int  # RESET low this long: the bus is quiet
    pause: int  # after configuration, before the first strobe
    warm_up_cycles: int  # refresh strobes before the first access

    @property
    def row_end(self) -> int:
        """Row strobe rises this many ticks after it fell, in a read on time."""
        return self.column + self.row_hold

    @property
    def rest(self) -> int:
        """Both strobes have rested this many ticks before the row strobe falls again."""
        return max(self.precharge, self.column_rest)

    @property
    def service(self) -> int:
        """Most ticks from `forced` being reached to the fall of the refresh strobe, from any state; it can happen.

        Worst path: an access begins in the tick before; its write comes at the last tick at which it may (`row_end`),
        write enable leads the column strobe, which is held until the row strobe may rise and one tick more; the row
        strobe has rested one tick by then; the rest of precharge (or of the column strobe), one idle tick, the row's
        set-up. The claim `any-bound` proves it, and one tick less is broken.
        """
        write = self.row_end + self.write_lead + self.row_hold + 1
        return write + max(self.precharge - 3, self.column_rest - 2, 0) + 2 + self.row_setup

    def legal_gap(self, drought_ticks: int) -> int:
        """Most ticks between falls of the refresh strobe on a bus that is never `drought_ticks` without relief.

        Relief: a refresh request, or a quiet tick with the sequencer idle. Worst path: relief one tick before
        `standby` does nothing; the next comes a whole drought later. The claim `legal-bound` proves it, for `forced`
        at least as large.
        """
        return self.standby + drought_ticks + 2 + self.row_setup


@dataclass(frozen=True, slots=True)
class Design:
    """What the logic is built from: sizes, window, which bus lines are wired, ticks. No picoseconds."""

    name: str
    row_bits: int
    column_bits: int
    refresh_bits: int  # width of the row counter; rows to refresh = 2 ** refresh_bits
    address_bits: int
    window_bits: int  # high address bits compared by the window decode
    window_value: int  # what they must equal
    has_busreq: bool
    has_busack: bool
    has_reset: bool
    standby: bool
    ticks: TickTable


@dataclass(frozen=True, slots=True)
class PortBit:
    """One bit of a logic port and the board net it is: port `ma`, index 3 is net `ma3`. index None: a scalar."""

    port: str
    index: int | None
    net: str
    direction: Literal["input", "output"]

    @property
    def verilog(self) -> str:
        return self.port if self.index is None else f"{self.port}[{self.index}]"


@dataclass(frozen=True, slots=True)
class Ports:
    """Every bit of the top module, in port order."""

    bits: tuple[PortBit, ...]


@dataclass(frozen=True, slots=True)
class NetDelay:
    """Delay of one net inside the device, without what it passes through on the board.

    Input: pin to the first flip-flop (set-up included). Output: clock at the pin to the signal at the pin.
    """

    net: str
    direction: Literal["input", "output"]
    window: Window
    source: Source


@dataclass(frozen=True, slots=True)
class Delays:
    """Device delays per net, and whether they come from the router or from the family's figures."""

    nets: Mapping[str, NetDelay]
    routed: bool


# --- what timing gives -------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class Term:
    """One promise on the path of a margin. `used_ps` is signed, as it is added up."""

    name: str
    lo_ps: int | None
    hi_ps: int | None
    used_ps: int
    source: Source


@dataclass(frozen=True, slots=True)
class Margin:
    """One limit in one situation. margin = earliest - required (min) or required - latest (max)."""

    symbol: str
    cycle: str
    neighbour: str
    sense: Literal["min", "max"]
    kind: Literal["hard", "reference"]
    required_ps: int
    earliest_ps: int | None
    latest_ps: int | None
    margin_ps: int
    terms: tuple[Term, ...]
    source: Source
    from_memory: bool
    note: str = ""


@dataclass(frozen=True, slots=True)
class Note:
    """Something a person should know that is not a failure: a derating, a missing minimum, a typical value."""

    topic: str
    text: str


@dataclass(frozen=True, slots=True)
class ArbitrationSum:
    """The sum that shows a refresh of our own is over before the next access. All terms in picoseconds."""

    event: str
    notice: str
    available: tuple[Term, ...]
    needed: tuple[Term, ...]
    margin_ps: int


@dataclass(frozen=True, slots=True)
class RefreshBounds:
    """Gaps between refresh strobes in ticks and the ages that follow, against the chip's interval.

    `drought_ticks`: the longest a legal bus runs without asking for a refresh, counted from its last request or from
    the last tick at which it was quiet and our sequencer idle.
    """

    drought_ticks: int
    legal_gap_ticks: int
    any_gap_ticks: int
    rows: int
    interval_ps: int
    running_age_ps: int
    legal_age_ps: int
    any_age_ps: int
    terms: tuple[Term, ...]


@dataclass(frozen=True, slots=True)
class Plan:
    """A judged set of ticks: all margins, worst first."""

    ticks: TickTable
    tick_lo_ps: int
    tick_hi_ps: int
    margins: tuple[Margin, ...]
    arbitration: tuple[ArbitrationSum, ...]
    refresh: RefreshBounds
    notes: tuple[Note, ...]
    routed: bool

    @property
    def worst_ps(self) -> int:
        return min(m.margin_ps for m in self.margins if m.kind == "hard")

    @property
    def holds(self) -> bool:
        sums = all(a.margin_ps >= 0 for a in self.arbitration)
        hard = all(m.margin_ps >= 0 for m in self.margins if m.kind == "hard")
        if any(note.topic == "refused" for note in self.notes):
            return False
        return sums and hard and self.refresh.any_age_ps <= self.refresh.interval_ps


@dataclass(frozen=True, slots=True)
class LevelMargin:
    """One wire between a driver and a receiver, at the worst supply of each; millivolts throughout.

    A margin is None where one of the two sheets gives no figure: `note` says so. `highest_mv` is the most that the
    driver can put on the pin, `limit_mv` what the pin stands. `mend`: what would mend it, empty where all is well.
    `pulled_up`: for an open-drain output, whether the parts list names a pull-up for the net; None for any other.
    """

    net: str
    driver: str
    receiver: str
    pin_class: str
    voh_mv: int | None
    vih_mv: int | None
    vol_mv: int | None
    vil_mv: int | None
    high_margin_mv: int | None
    low_margin_mv: int | None
    highest_mv: int | None
    limit_mv: int | None
    driver_source: Source
    receiver_source: Source
    from_memory: bool
    direction: str = ""
    mend: str = ""
    note: str = ""
    pulled_up: bool | None = None

    @property
    def over_mv(self) -> int:
        """By how much the highest voltage is above what the pin stands; 0 where it is not, or not known."""
        if self.highest_mv is None or self.limit_mv is None:
            return 0
        return max(0, self.highest_mv - self.limit_mv)

    @property
    def holds(self) -> bool:
        """No known margin is below zero, no pin is beyond its absolute maximum, no open drain lacks its pull-up."""
        known = [m for m in (self.high_margin_mv, self.low_margin_mv) if m is not None]
        return all(m >= 0 for m in known) and self.over_mv == 0 and self.pulled_up is not False


@dataclass(frozen=True, slots=True)
class LevelNeed:
    """A net whose two ends do not fit each other straight: what would happen, and which family mends it.

    `straight_mv`: the smaller margin without any part between; `straight_over_mv`: how far the receiver's pin would be
    driven beyond its absolute maximum. `stands`: the parts the board file has there, empty where it has none.
    """

    net: str
    direction: str
    straight_mv: int | None
    straight_over_mv: int
    wanted: str
    stands: str


@dataclass(frozen=True, slots=True)
class Drive:
    """What an output of the replacement has to drive: inputs, load, swing, and the current in its edges.

    `edge_ua`: at most, limited by the series resistor alone, for this net; None without one. `series_lo_milliohm` to
    `series_hi_milliohm`: values to try with a scope, never a result.
    """

    net: str
    inputs: int
    load_ff: int
    swing_mv: int
    series_milliohm: int
    edge_ua: int | None
    together: int
    series_lo_milliohm: int
    series_hi_milliohm: int
    note: str
    source: Source


@dataclass(frozen=True, slots=True)
class Settling:
    """One estimate of how often a first flip-flop is still undecided when the second one looks.

    MTBF = exp(C2 x dt) / (fclk x fdata x C1). `years` is rounded for people. `borrowed`: the constants belong to
    another family than the device's, so that the figure shows a scale and decides nothing.
    """

    constants: str
    source: Source
    c1_fs: int
    c2_per_us: int
    clock_hz: int
    data_hz: int
    resolve_ps: int
    years: str
    borrowed: bool


@dataclass(frozen=True, slots=True)
class Levels:
    """Everything electrical of one board: wires, drives, and the synchronisers."""

    wires: tuple[LevelMargin, ...]
    needs: tuple[LevelNeed, ...]
    drives: tuple[Drive, ...]
    settling: tuple[Settling, ...]

    @property
    def holds(self) -> bool:
        return all(wire.holds for wire in self.wires)


@dataclass(frozen=True, slots=True)
class OriginalStage:
    """One step of a delay network's window: what is counted so far. `latest_ps` None: it may never switch."""

    name: str
    earliest_ps: int | None
    latest_ps: int | None


@dataclass(frozen=True, slots=True)
class OriginalDelay:
    """The guaranteed window of one delay network for one edge. `never`: the corner in which it never switches."""

    name: str
    edge: Literal["rising", "falling"]
    network: str
    stages: tuple[OriginalStage, ...]
    earliest_ps: int | None
    latest_ps: int | None
    nominal_ps: int | None
    never: str
    remarks: tuple[str, ...]
    sources: tuple[Source, ...]
    from_memory: bool


@dataclass(frozen=True, slots=True)
class OriginalLimit:
    """One limit, met by what stands on the board now and by the replacement. None: no bound, or none known."""

    symbol: str
    what: str
    sense: Literal["min", "max"]
    kind: Literal["hard", "reference"]
    required_ps: int
    original_earliest_ps: int | None
    original_latest_ps: int | None
    original_margin_ps: int | None
    replacement_earliest_ps: int | None
    replacement_latest_ps: int | None
    replacement_margin_ps: int | None
    source: Source
    note: str = ""


@dataclass(frozen=True, slots=True)
class OriginalReport:
    """What the worn board was relying on, beside what the replacement keeps."""

    delays: tuple[OriginalDelay, ...]
    limits: tuple[OriginalLimit, ...]


# --- what the judges give ----------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class ClaimOutcome:
    """One claim on one subject (`logic` or `netlist`).

    `assertions`: how many assertions the proof held. `certificate`: clauses of the invariant re-checked by the
    second solver. `covered`, `spoiled_caught`: the guards against a vacuous proof; None where not asked for.
    """

    claim: str
    sentence: str
    subject: Literal["logic", "netlist"]
    status: Status
    assertions: int
    assumptions: tuple[str, ...]
    certificate: int | None
    covered: bool | None
    spoiled_caught: bool | None
    detail: str = ""
    trace_vcd: str = ""  # wave file of the first violation


@dataclass(frozen=True, slots=True)
class BenchOutcome:
    """One bench run: `engine` compiled or icarus, `subject` logic or netlist."""

    scenario: str
    engine: Literal["compiled", "icarus"]
    subject: Literal["logic", "netlist"]
    corner: str
    status: Status
    checks: int
    bus_ps: int
    detail: str = ""


@dataclass(frozen=True, slots=True)
class Constraint:
    """One pin assignment of the constraint file."""

    port: PortBit
    pin: str
    pull_up: bool


@dataclass(frozen=True, slots=True)
class FitOutcome:
    """What the router gave: files as bytes, size, speed, delays, plain Verilog of the routed netlist."""

    status: Status
    constraint_text: str
    programming: bytes
    netlist_rtlil: str
    netlist_verilog: str
    cells_used: int
    cells_total: int
    fmax_mhz: str
    delays: Delays | None
    detail: str = ""


@dataclass(frozen=True, slots=True)
class PinRow:
    """One package pin as the sheet shows it. `direction`: input, output, supply, ground, config or open."""

    pin: str
    function: str
    net: str
    direction: str
    level: str
    meets: str
    through: str
    note: str


# --- what it all comes to ----------------------------------------------------------------------------------------


FindingGroup = Literal["margin", "level", "arbitration", "refresh", "claim", "bench", "fit"]


@dataclass(frozen=True, slots=True)
class Finding:
    """One line of a verdict: one check, and what became of it. `margin_ps`: what is to spare, where it is a time."""

    group: FindingGroup
    name: str
    status: Status
    detail: str = ""
    margin_ps: int | None = None


@dataclass(frozen=True, slots=True)
class Verdict:
    """Every check of one run, in the order of the work. The rule for `status` is in `judging/verdict.py`."""

    status: Status
    findings: tuple[Finding, ...]

    @property
    def exit_code(self) -> int:
        """0 passed, 1 the design fails a check, 3 something did not run."""
        return {Status.PASSED: 0, Status.FAILED: 1, Status.NOT_RUN: 3}[self.status]

    def count(self, status: Status) -> int:
        """How many findings have this status."""
        return sum(finding.status is status for finding in self.findings)
