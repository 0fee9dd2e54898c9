"""The numbers of one bench: board and design as whole picoseconds and counts, under the names both engines use.

Takes a board, a design and the window of every net; gives an ordered table of names and integers. Must not know C++,
Verilog or how a window was found.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction

from rowkeeper.contract import Design
from rowkeeper.reading.board import Board, Chip
from rowkeeper.reading.figures import Window

__all__ = [
    "CHECKS",
    "DELAYS",
    "INPUT_LINES",
    "NO_LIMIT",
    "OUTPUT_LINES",
    "Parameters",
    "parameters_of",
]

NO_LIMIT = -1_000_000_000_000_000_000

INPUT_LINES = ("mreq_n", "m1_n", "rd_n", "wr_n", "busreq_n", "busack_n", "reset_n")
OUTPUT_LINES = ("ras_n", "cas_n", "we_n", "read_n", "enable_n")

# Every check of the bench, in the order of their numbers: the memory's limits, the data read, the assumptions.
_MEMORY_CHECKS = (
    *("tRC", "tRAS_min", "tRAS_max", "tRP", "tCRP", "tRPC", "tRCD", "tASR", "tRAH", "tASC", "tCAH", "tAR", "tRSH"),
    *("tCSH", "tCAS_min", "tCAS_max", "tCPN", "tRCS", "tRCH", "tRRH", "tWCS", "tWCH", "tWCR", "tWP", "tRWL", "tCWL"),
    *("tDS", "tDH", "tDHR", "tREF", "pause", "wake_up", "enable"),
)
_DATA_CHECKS = ("data_setup", "data_hold", "data", "contention")
ASSUMPTIONS = (
    *("m1_before_mreq", "mreq_high", "mreq_low", "address_before_mreq", "data_before_write", "grant_silent"),
    *("reset_silent", "reset_length", "drought"),
)
CHECKS = _MEMORY_CHECKS + _DATA_CHECKS + ASSUMPTIONS

_LEAST = (
    *("tRP", "tCRP", "tRPC", "tRCD", "tASR", "tRAH", "tASC", "tCAH", "tAR", "tRSH", "tCSH", "tCPN", "tRCS", "tRCH"),
    *("tRRH", "tWCS", "tWCH", "tWCR", "tWP", "tRWL", "tCWL", "tDS", "tDH", "tDHR", "tRC"),
)
_DELAYS = (
    *("TdCr(A)", "TdCr(Az)", "TdCf(MREQf)", "TdCr(MREQr)", "TdCf(MREQr)", "TdCf(RDf)", "TdCr(RDf)", "TdCr(RDr)"),
    *("TdCf(RDr)", "TdCr(M1f)", "TdCr(M1r)", "TdCr(RFSHf)", "TdCr(RFSHr)", "TdCf(WRf)", "TdCr(WRf)", "TdCf(WRr)"),
    *("TdCr(IORQf)", "TdCf(IORQf)", "TdCr(IORQr)", "TdCf(IORQr)", "TdCf(D)", "TdCr(Dz)", "TdCr(CTz)"),
    *("TdCr(BUSACKf)", "TdCf(BUSACKr)"),
)
DELAYS = tuple(symbol.replace("(", "_").replace(")", "") for symbol in _DELAYS)
_SEPARATIONS = ("TdA(MREQf)", "TwMREQl", "TwMREQh", "TdCTr(A)", "TwWR", "TdD(WRf)", "TdWRr(D)")
_NEEDS = ("TsD(Cr)", "TsD(Cf)", "ThD", "TsBUSREQ", "TsRESET")

_PS = 10**12
_FS = 10**15
_LONG_RESET_PS = 50 * 10**9


@dataclass(frozen=True, slots=True)
class Parameters:
    """`values`: name and number in the order both engines list them. `input_nets`, `output_nets`: names in net order.

    `inputs`, `outputs`: the window of each net in that order, in whole picoseconds.
    """

    values: tuple[tuple[str, int], ...]
    input_nets: tuple[str, ...]
    output_nets: tuple[str, ...]
    inputs: tuple[tuple[int, int], ...]
    outputs: tuple[tuple[int, int], ...]
    lines: tuple[str, ...]

    def __getitem__(self, name: str) -> int:
        return dict(self.values)[name]


def parameters_of(board: Board, design: Design, windows: Mapping[str, Window]) -> Parameters:
    """Every number of the bench for the first bank of `board`. A net without a window is our own bug: ValueError."""
    lines = _wired(design)
    input_nets = INPUT_LINES + tuple(f"a{i}" for i in range(design.address_bits))
    output_nets = OUTPUT_LINES + tuple(f"ma{i}" for i in range(max(design.row_bits, design.column_bits)))
    absent = set(INPUT_LINES) - set(lines)
    inputs = tuple((0, 0) if net in absent else _even(*_window(windows, net, 0)) for net in input_nets)
    outputs = tuple(_window(windows, net, 1) for net in output_nets)
    values = [
        *_sizes(board, design, len(input_nets), len(output_nets)),
        *_limits(board.banks[0].chip),
        *_clocks(board),
        *_bus(board),
        *_paths(windows),
        *_lengths(board, design),
    ]
    return Parameters(tuple(values), input_nets, output_nets, inputs, outputs, lines)


def _wired(design: Design) -> tuple[str, ...]:
    present = {"busreq_n": design.has_busreq, "busack_n": design.has_busack, "reset_n": design.has_reset}
    return tuple(line for line in INPUT_LINES if present.get(line, True))


def _window(windows: Mapping[str, Window], net: str, least: int) -> tuple[int, int]:
    window = windows.get(net)
    if window is None or window.hi_ps is None:
        raise ValueError(f"net {net} has no delay window")
    lo = max(window.lo_ps or 0, least)
    return lo, max(window.hi_ps, lo)


def _even(lo: int, hi: int) -> tuple[int, int]:
    """Rounded inwards to even picoseconds: no bus event may fall on an edge of the device clock, which is odd."""
    low, high = lo + lo % 2, hi - hi % 2
    return low, max(low, high)


def _up(value: int) -> int:
    return value + value % 2


def _sizes(board: Board, design: Design, inputs: int, outputs: int) -> list[tuple[str, int]]:
    bank = board.banks[0]
    base, size = bank.base, bank.size
    outside = base > 0 or base + size < 1 << board.bus.address_bits
    code_base = 0 if base > 0 else base + size if outside else base
    # Code inside the memory stays on four rows: more would refresh what the refresh forgets.
    code_size = min(4096, 1 << ((base or size).bit_length() - 1)) if outside else 4
    return [
        ("INPUTS", inputs),
        ("OUTPUTS", outputs),
        ("ADDRESS_BITS", design.address_bits),
        ("ADDRESS_MASK", (1 << design.address_bits) - 1),
        ("MEMORY_ADDRESS_BITS", max(design.row_bits, design.column_bits)),
        ("ROWS", 1 << bank.chip.row_bits),
        ("COLUMNS", 1 << bank.chip.column_bits),
        ("REFRESH_ROWS", bank.chip.refresh_rows),
        ("REFRESH_PS", bank.chip.refresh_ps),
        ("PAUSE", bank.chip.pause_ps),
        ("WAKE_UP_CYCLES", bank.chip.warm_up_cycles),
        ("WINDOW_BASE", base),
        ("WINDOW_SIZE", size),
        ("CODE_BASE", code_base),
        ("CODE_SIZE", code_size),
    ]


def _limits(chip: Chip) -> list[tuple[str, int]]:
    """The sheet's limits. A cycle time that only rates the ambient temperature is counted, not failed."""

    def low(symbol: str) -> int:
        figure = chip.limits.get(symbol)
        return NO_LIMIT if figure is None or figure.lo_ps is None else figure.lo_ps

    def high(symbol: str) -> int:
        figure = chip.limits.get(symbol)
        return NO_LIMIT if figure is None or figure.hi_ps is None else figure.hi_ps

    values = [(f"LIMIT_{symbol}", low(symbol)) for symbol in _LEAST]
    for symbol in ("tRAS", "tCAS"):
        values += [(f"LIMIT_{symbol}_min", low(symbol)), (f"LIMIT_{symbol}_max", high(symbol))]
    values += [("LIMIT_tRCD_max", high("tRCD")), ("LIMIT_tRAC", high("tRAC")), ("LIMIT_tCAC", high("tCAC"))]
    values += [("LIMIT_tOFF_min", max(low("tOFF"), 0))]
    cycle = chip.limits.get("tRC")
    return [*values, ("TRC_RATED", int(cycle is not None and "rates the cycle" in cycle.note))]


def _clocks(board: Board) -> list[tuple[str, int]]:
    values = []
    for name, clock in (("BUS", board.bus_clock), ("DEVICE", board.device_clock)):
        tolerance = clock.tolerance_ppm / 10**6
        fast = Fraction(_FS) / (clock.frequency_hz * (1 + tolerance))
        slow = Fraction(_FS) / (clock.frequency_hz * (1 - tolerance))
        values += [(f"{name}_FAST_FS", -int(-fast // 1)), (f"{name}_SLOW_FS", int(slow // 1))]
    duty = board.bus_clock
    values += [("DUTY_MIN_E4", -int(-duty.duty_min * 10_000 // 1)), ("DUTY_MAX_E4", int(duty.duty_max * 10_000 // 1))]
    return [*values, ("BUS_START", 2000), ("DEVICE_START", 1000)]


def _clock_terms(board: Board) -> dict[str, Fraction]:
    """Clock quantities at their worst on the board's own clock, in picoseconds."""
    clock = board.bus_clock
    period = Fraction(_PS) / (clock.frequency_hz * (1 + clock.tolerance_ppm / 10**6))
    return {
        "TcC": period,
        "TrC": Fraction(clock.rise_max_ps),
        "TfC": Fraction(clock.fall_max_ps),
        "TwCh": clock.duty_min * period - clock.fall_max_ps,
        "TwCl": (1 - clock.duty_max) * period - clock.rise_max_ps,
    }


def _identifier(symbol: str) -> str:
    return symbol.replace("(", "_").replace(")", "")


def _bus(board: Board) -> list[tuple[str, int]]:
    values: list[tuple[str, int]] = []
    for symbol in _DELAYS:
        figure = board.grade.figures.get(symbol)
        if figure is None or figure.hi_ps is None:
            raise ValueError(f"the bus grade has no {symbol}")
        low, high = _even(figure.lo_ps or 0, figure.hi_ps)
        values += [(f"{_identifier(symbol)}_LO", low), (f"{_identifier(symbol)}_HI", high)]
    terms = _clock_terms(board)
    for symbol in _SEPARATIONS:
        formula = board.grade.formulas[symbol]
        total = sum((terms[term] for term in formula.terms), Fraction(formula.offset_ps))
        values.append((_identifier(symbol), max(0, 2 * -int(-total // 2))))
    for symbol in _NEEDS:
        figure = board.grade.figures[symbol]
        values.append((_identifier(symbol), _up(figure.lo_ps or 0)))
    traffic = board.bus.traffic
    values += [("GAP_CLOCKS", traffic.gap_clocks), ("RESET_SETTLE_CLOCKS", traffic.reset_settle_clocks)]
    return [*values, ("RESET_RESTART_CLOCKS", traffic.reset_restart_clocks)]


def _paths(windows: Mapping[str, Window]) -> list[tuple[str, int]]:
    values = []
    for name, net in (("DATA_IN", "data_in"), ("DATA_OUT", "data_out")):
        low, high = _window(windows, net, 1)
        values += [(f"{name}_LO", low), (f"{name}_HI", high)]
    return values


def _lengths(board: Board, design: Design) -> list[tuple[str, int]]:
    """How long the scenarios are: `FEW_...` is the short run that Icarus makes by default."""
    t, worst, chip = design.ticks, board.at_worst, board.banks[0].chip
    tick = int(Fraction(_PS) / board.device_clock.frequency_hz)
    cycle = t.refresh_low + t.precharge + t.row_setup + 4
    ready = max((t.pause + t.warm_up_cycles * cycle) * tick, chip.pause_ps) + 5_000_000
    clock = Fraction(_PS) / board.bus_clock.frequency_hz
    idle = chip.refresh_ps * 3 // 2
    has_grant = worst.grant_max_ps != 0
    grant = int((idle if worst.grant_max_ps is None else worst.grant_max_ps) / clock) if has_grant else 0
    long_reset = _LONG_RESET_PS if worst.reset_max_ps is None else min(_LONG_RESET_PS, worst.reset_max_ps)
    return [
        ("READY_AT", _up(ready)),
        ("WAIT_CLOCKS", -int(-worst.wait_max_ps / clock // 1)),
        ("IDLE_PS", _up(idle)),
        ("HAS_GRANT", int(has_grant)),
        ("GRANT_CLOCKS", max(0, grant - 2)),
        ("LONG_RESET_PS", _up(long_reset)),
        ("LONG_RESETS", 4),
        ("FEW_RESET_PS", _up(min(idle, long_reset))),
        ("FEW_COLUMNS", min(8, 1 << chip.column_bits)),
        ("FEWER_COLUMNS", min(2, 1 << chip.column_bits)),
        ("STRIKES", 625),
        ("FEW_STRIKES", 40),
        ("GRANTS", 200),
        ("FEW_GRANTS", 12),
        ("MIX", 20_000),
        ("FEW_MIX", 400),
        ("TIME_OUT_PS", 60 * _PS),
    ]
