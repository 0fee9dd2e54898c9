"""The typed board: what one board file and the catalogue say, every value with its place.

Takes nothing (records only); gives `Board` and the catalogue records it refers to. Times are integer picoseconds,
frequencies exact fractions of a hertz, voltages integer millivolts. Must not know ticks, logic or tools.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction
from typing import Literal

from rowkeeper.reading.figures import Figure, Mark, Source
from rowkeeper.reading.position import NOWHERE, Position

__all__ = [
    "Arrest",
    "Bank",
    "Board",
    "BusFamily",
    "BusFormula",
    "BusGrade",
    "BusTraffic",
    "Chip",
    "ClockSpec",
    "Device",
    "DevicePin",
    "FixedPin",
    "GivenTicks",
    "IoLevels",
    "LogicFamily",
    "LogicLevel",
    "Net",
    "Original",
    "Part",
    "PartPins",
    "PathElement",
    "RcDelay",
    "Wiring",
]


_UNSOURCED = Source(Mark.MEMORY)


# --- catalogue ---------------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class IoLevels:
    """Levels of one pin class in millivolts; `None` where the sheet gives nothing."""

    vih_min_mv: int | None
    vil_max_mv: int | None
    voh_min_mv: int | None
    vol_max_mv: int | None
    abs_max_mv: int | None
    source: Source


@dataclass(frozen=True, slots=True)
class Chip:
    """A memory chip of one speed grade.

    `limits` maps a data sheet symbol (tRC, tRAS, ...) to its figure. `refresh_rows` rows want refresh within
    `refresh_ps`. `pause_ps` and `warm_up_cycles` are due before first use.
    """

    name: str
    title: str
    words: int
    width: int
    row_bits: int
    column_bits: int
    refresh_rows: int
    refresh_row_bits: int
    refresh_ps: int
    refresh_source: Source
    pause_ps: int
    warm_up_cycles: int
    warm_up_source: Source
    limits: Mapping[str, Figure]
    strobe_levels: IoLevels
    address_levels: IoLevels
    output_levels: IoLevels
    strobe_pf_max: int
    address_pf_max: int
    supplies: tuple[str, ...]
    pins: Mapping[str, str]  # chip pin number (text) to signal name
    notes: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class BusFormula:
    """A promise or demand of the bus that the sheet gives as a formula: the sum of `terms` plus `offset_ps`.

    Terms are names of clock quantities: TcC, TwCh, TwCl, TrC, TfC, each possibly several times.
    """

    symbol: str
    terms: tuple[str, ...]
    offset_ps: int
    source: Source
    note: str = ""


@dataclass(frozen=True, slots=True)
class BusGrade:
    """One column of a bus family's AC table.

    `figures`: delays (max, min where published), the bus's own set-up and hold demands, clock limits.
    `formulas`: promises evaluated on the real clock.
    """

    name: str
    figures: Mapping[str, Figure]
    formulas: Mapping[str, BusFormula]


@dataclass(frozen=True, slots=True)
class BusTraffic:
    """What a legal bus can do between two of its refreshes, in clocks and machine cycles.

    `gap_clocks`: longest single gap between refresh strobes, running without waits or grants.
    `sweep_clocks`: longest gap that can repeat. `gap_machine_cycles`: grants can fall after each of these in a gap.
    `reset_settle_clocks`: RESET low this long and the bus is silent. `reset_restart_clocks`: from the clock edge that
    sees RESET high to the T1 of the first fetch.
    """

    gap_clocks: int
    sweep_clocks: int
    gap_machine_cycles: int
    reset_settle_clocks: int
    reset_restart_clocks: int
    source: Source


@dataclass(frozen=True, slots=True)
class BusFamily:
    """A bus family: how the bus works, and its AC table per grade.

    `assumptions` maps the name of each thing assumed of a legal bus to its English sentence.
    """

    name: str
    title: str
    data_width: int
    address_bits: int
    bus_refresh_row_bits: int
    grades: Mapping[str, BusGrade]
    traffic: BusTraffic
    assumptions: Mapping[str, str]
    output_levels: IoLevels
    input_levels: IoLevels
    source: Source
    supply_max_mv: int = 5250


@dataclass(frozen=True, slots=True)
class DevicePin:
    """One pin of a package. `role`: io, clock (io with a global buffer), supply, ground, config, none."""

    number: str
    name: str
    role: Literal["io", "clock", "supply", "ground", "config", "none"]
    bank: str = ""


@dataclass(frozen=True, slots=True)
class Device:
    """A programmable device in one package.

    `input_pad`, `output_pad`: pad delays in picoseconds that the router's figures do not hold.
    `before_routing_*`: what is assumed of the fabric until the router has spoken.
    """

    name: str
    title: str
    family: Literal["ice40"]
    router_arguments: tuple[str, ...]
    package: str
    package_pins: int
    cells: int
    pins: Mapping[str, DevicePin]
    input_pad: Figure
    output_pad: Figure
    before_routing_input: Figure
    before_routing_output: Figure
    flip_flop_window: Figure
    levels: IoLevels
    configuration_typical_ps: int
    configuration_source: Source
    volatile: bool
    supplies: tuple[str, ...]
    notes: tuple[str, ...] = ()
    pins_source: Source = _UNSOURCED
    pads_together: Figure | None = (
        None  # one input pad and one output pad, where that is less than the two bounds added
    )


@dataclass(frozen=True, slots=True)
class FixedPin:
    """A pin that carries no net of its own: enable, direction, supply. `tie`: what it wants, in words."""

    pin: str
    name: str
    tie: str


@dataclass(frozen=True, slots=True)
class PartPins:
    """The pins of a package. `channels`: input pin and output pin of each, in the order they are used up."""

    channels: tuple[tuple[str, str], ...]
    fixed: tuple[FixedPin, ...]
    source: Source


@dataclass(frozen=True, slots=True)
class Part:
    """A buffer, translator or gate that a net passes through; `delay`, `enable`, `disable` in picoseconds.

    `skew`: the most that two outputs of one package differ, where the sheet says so. The delay holds up to
    `load_rated_pf`; each picofarad beyond may cost `load_slope_ps` more (None: the sheet does not tell).
    """

    name: str
    title: str
    kind: Literal["buffer", "translator"]
    channels: int
    supply_mv: int
    delay: Figure
    enable: Figure | None
    disable: Figure | None
    skew: Figure | None
    input_levels: IoLevels
    output_levels: IoLevels
    input_pf_max: int
    notes: tuple[str, ...] = ()
    load_rated_pf: int = 50
    load_slope_ps: int | None = None
    load_source: Source = _UNSOURCED
    pins: PartPins | None = None


@dataclass(frozen=True, slots=True)
class LogicLevel:
    """A voltage, as millivolts plus a share of the supply: one of the two is zero."""

    millivolts: int = 0
    of_supply: Fraction = Fraction(0)

    def at(self, supply_mv: int) -> Fraction:
        """Exact millivolts at this supply."""
        return self.millivolts + self.of_supply * supply_mv


@dataclass(frozen=True, slots=True)
class LogicFamily:
    """A logic family as a resistor and a capacitor meet it: what it drives, and where its inputs switch.

    Each pair is a lower and an upper end. `rising`: where an input on its way up is taken for high; `falling`: on its
    way down for low. `high`, `low`: what an output drives, behind `high_milliohm`, `low_milliohm`. An input that is
    low sources up to `input_low_ua`; one that is high sinks up to `input_high_ua`. `nominal` is threshold, high and
    low of a usual part: shown, never judged. `slowest_edge_ps_per_v`: None where the sheet sets no limit.
    """

    name: str
    title: str
    supply_min_mv: int
    supply_max_mv: int
    rising: tuple[LogicLevel, LogicLevel]
    falling: tuple[LogicLevel, LogicLevel]
    high: tuple[LogicLevel, LogicLevel]
    low: tuple[LogicLevel, LogicLevel]
    high_milliohm: tuple[int, int]
    low_milliohm: tuple[int, int]
    input_low_ua: int
    input_high_ua: int
    slowest_edge_ps_per_v: int | None
    schmitt: bool
    nominal: tuple[LogicLevel, LogicLevel, LogicLevel] | None
    threshold_source: Source
    output_source: Source
    resistance_source: Source
    current_source: Source
    notes: tuple[str, ...] = ()

    @property
    def sources(self) -> tuple[Source, ...]:
        """Every source a delay through this family can rest on."""
        return self.threshold_source, self.output_source, self.resistance_source, self.current_source


# --- board file --------------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class ClockSpec:
    """A clock as the board has it. `duty_*`: share of the period from the rising to the falling reference point."""

    frequency_hz: Fraction
    tolerance_ppm: Fraction
    duty_min: Fraction
    duty_max: Fraction
    rise_max_ps: int
    fall_max_ps: int
    at: Position = NOWHERE


@dataclass(frozen=True, slots=True)
class Arrest:
    """What this machine can do to refresh at worst. `None` for a maximum means unlimited; 0 means never."""

    wait_max_ps: int
    grant_max_ps: int | None
    grant_master: Literal["silent", "none"]
    reset_max_ps: int | None
    reset_aligned: bool
    power_on_reset_min_ps: int
    at: Mapping[str, Position]


@dataclass(frozen=True, slots=True)
class Bank:
    """One bank: `chips` chips of one type side by side, answering in `size` bytes from `base`."""

    number: int
    chip: Chip
    chips: int
    base: int
    size: int
    at: Position = NOWHERE
    sockets: str = ""  # designators on the board, `U10-U17`
    chips_at: Position = NOWHERE
    base_at: Position = NOWHERE
    size_at: Position = NOWHERE


@dataclass(frozen=True, slots=True)
class GivenTicks:
    """Ticks given by hand, to be judged; `None` for each the planner may choose."""

    style: Literal["counted", "straight"] | None = None
    mux: int | None = None
    column: int | None = None
    row_end: int | None = None
    at: Position = NOWHERE


@dataclass(frozen=True, slots=True)
class PathElement:
    """One thing a net passes through, in order from driver to receiver.

    `kind`: part (with `part` and the board's designator `designator`), series (milliohms), load (femtofarads),
    direct (a plain wire between pins of one supply).
    """

    kind: Literal["part", "series", "load", "direct"]
    part: Part | None = None
    designator: str = ""
    series_milliohm: int = 0
    load_ff: int = 0
    at: Position = NOWHERE
    rail_mv: int = 0  # direct: the supply that both ends share


@dataclass(frozen=True, slots=True)
class Net:
    """One net of the replacement: logic net name, device pin, what it meets on the board, what it passes through.

    A net with an empty `pin` does not touch the device (the data path: `data_in`, `data_out`).
    `side`: input (bus to device), output (device to board), path (neither).
    """

    name: str
    side: Literal["input", "output", "path"]
    pin: str
    meets: str
    through: tuple[PathElement, ...]
    at: Position = NOWHERE
    pin_at: Position = NOWHERE
    meets_at: Position = NOWHERE


@dataclass(frozen=True, slots=True)
class Wiring:
    """All nets in board file order, and the parts the fitter must remove, keep and add."""

    nets: tuple[Net, ...]
    remove: tuple[str, ...]
    keep: tuple[str, ...]
    add: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class RcDelay:
    """A delay made by a resistor into a capacitor, as it stands on the board now. Tolerances are shares of one.

    `edge`: which way the signal at the receiving input moves when the delay counts. `gate_*`: gates behind it.
    """

    name: Literal["row_to_select", "select_to_column"]
    resistance_milliohm: int
    resistance_tolerance: Fraction
    capacitance_ff: int
    capacitance_tolerance: Fraction
    input: LogicFamily
    driver: LogicFamily
    edge: Literal["rising", "falling", "both"] = "both"
    gate_lo_ps: int = 0
    gate_hi_ps: int = 0
    at: Position = NOWHERE


@dataclass(frozen=True, slots=True)
class Original:
    """What stands on the board now, to compare with. `multiplexer_*`: from select to the address at the chips."""

    row_to_select: RcDelay
    select_to_column: RcDelay
    multiplexer_lo_ps: int = 0
    multiplexer_hi_ps: int | None = None
    at: Position = NOWHERE


@dataclass(frozen=True, slots=True)
class Board:
    """One board file, typed. `digest`: SHA-256 of the file's bytes together with every catalogue text it used.

    `file` is the base name only. `overrides`: catalogue entries taken from files beside the board. `places` maps the
    dotted name of every value (`bus.clock.frequency`, `wiring.3.pin`) to where it stands, under the path as given.
    """

    file: str
    slug: str
    name: str
    revision: str
    bus: BusFamily
    grade: BusGrade
    bus_clock: ClockSpec
    at_worst: Arrest
    banks: tuple[Bank, ...]
    row_from: Literal["counter", "bus", "chip"]
    standby: Literal["none", "own-timer"]
    device: Device
    device_clock: ClockSpec
    strobes: GivenTicks
    wiring: Wiring
    digest: str
    places: Mapping[str, Position]
    overrides: tuple[str, ...] = ()
    original: Original | None = None
