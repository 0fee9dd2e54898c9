"""Records made by hand for the tests of the sheets room. The pin numbers are invented; no real package is meant."""

from rowkeeper.contract import (
    ArbitrationSum,
    BenchOutcome,
    ClaimOutcome,
    Finding,
    FitOutcome,
    Margin,
    Note,
    PinRow,
    Plan,
    RefreshBounds,
    Status,
    Term,
    TickTable,
    Verdict,
)
from rowkeeper.reading.figures import Mark, Source
from rowkeeper.sheets.facts import HANDLING, NOT_PROVEN, PathRow, SheetFacts
from rowkeeper.sheets.stamp import Stamp, short_digest

DIGEST = "3f9a0c51d27be84610aa5b7c9e0d4f2286b1c3d5e7f90a1b2c3d4e5f60718293"
STAMP = Stamp("0.1.0", "loom-16k", "B", DIGEST)

SHEET = Source(Mark.SHEET, "UM0080", "table 7")
CHIP = Source(Mark.COPY, "MK4116 data sheet", "p. 4")
MEMORY = Source(Mark.MEMORY)
ROUTED = Source(Mark.ROUTED)
BOARD_FILE = Source(Mark.BOARD)

TICKS = TickTable(
    style="counted",
    row_setup=3,
    mux=4,
    column=6,
    row_hold=12,
    write_lead=2,
    give_up=60,
    column_cap=900,
    column_rest=8,
    refresh_low=17,
    precharge=12,
    standby=1100,
    forced=1490,
    reset_settle=80,
    pause=200_000,
    warm_up_cycles=8,
)

COLUMN_FALL = Term("column strobe falls, tick 6", 59_997, 60_003, 59_997, BOARD_FILE)
MUX = Term("memory address changes, tick 4", 39_998, 40_002, -40_002, BOARD_FILE)
CLOCK_TO_STROBE = Term("clock to strobe pin", 4_100, 9_300, 4_100, ROUTED)
CLOCK_TO_ADDRESS = Term("clock to address pin", 4_000, 12_045, -12_045, ROUTED)
BUFFER_SKEW = Term("between two packages of AHCT541", -4_500, 4_500, -4_500, MEMORY)

TASC = Margin(
    symbol="tASC",
    cycle="memory read",
    neighbour="after refresh",
    sense="min",
    kind="hard",
    required_ps=-10_000,
    earliest_ps=7_550,
    latest_ps=27_000,
    margin_ps=17_550,
    terms=(COLUMN_FALL, MUX, CLOCK_TO_STROBE, CLOCK_TO_ADDRESS, BUFFER_SKEW),
    source=CHIP,
    from_memory=True,
)
TCAC = Margin(
    symbol="tCAC",
    cycle="opcode fetch",
    neighbour="any",
    sense="max",
    kind="hard",
    required_ps=100_000,
    earliest_ps=None,
    latest_ps=91_250,
    margin_ps=8_750,
    terms=(Term("from column strobe to sampled data", 0, 91_250, 91_250, SHEET),),
    source=CHIP,
    from_memory=False,
    note="the sheet rates it with two TTL loads",
)
TRCD = Margin("tRCD", "opcode fetch", "", "max", "reference", 50_000, 58_000, 62_000, -12_000, (), CHIP, False)
TRP = Margin(
    "tRP", "memory write", "before opcode fetch", "min", "hard", 100_000, 98_000, None, -2_000, (), CHIP, False
)
MARGINS = (TASC, TCAC, TRCD)

ARBITRATION = ArbitrationSum(
    event="end of grant",
    notice="BUSREQ rises",
    available=(Term("BUSREQ high to MREQ low", 600_000, None, 600_000, SHEET),),
    needed=(Term("refresh in progress, to its end", None, 470_000, 470_000, Source(Mark.DERIVED)),),
    margin_ps=130_000,
)

REFRESH = RefreshBounds(
    drought_ticks=340,
    legal_gap_ticks=1_440,
    any_gap_ticks=1_556,
    rows=128,
    interval_ps=2_000_000_000,
    running_age_ps=672_000_000,
    legal_age_ps=1_843_200_000,
    any_age_ps=1_991_680_000,
    terms=(Term("128 gaps of 1556 ticks", None, 1_991_680_000, 1_991_680_000, Source(Mark.DERIVED)),),
)

NOTES = (
    Note("tRC", "the sheet promises 375 ns up to 70 °C and derates the temperature below that"),
    Note("AHCT541", "no minimum delay is published: the earliest is taken as 0"),
)

PLAN = Plan(TICKS, 9_999, 10_001, MARGINS, (ARBITRATION,), REFRESH, NOTES, routed=True)

CLAIM = ClaimOutcome(
    claim="precharge kept",
    sentence="The row strobe is high for at least the precharge ticks before it falls again.",
    subject="logic",
    status=Status.PASSED,
    assertions=3,
    assumptions=("reset is held for three bus clocks",),
    certificate=41,
    covered=True,
    spoiled_caught=True,
)
BENCH = BenchOutcome("march", "compiled", "logic", "all max", Status.PASSED, 131_072, 90_000_000_000)
FIT = FitOutcome(
    Status.PASSED, "set_io clk 15\n", b"\x7e\xaa\x99\x7e", "", "module top; endmodule\n", 231, 1280, "171", None
)

PASSED = Verdict(
    Status.PASSED,
    (
        Finding("margin", "tASC min", Status.PASSED, "worst of 12 situations: memory read, after refresh", 17_550),
        Finding("arbitration", "end of grant", Status.PASSED, "notice: BUSREQ rises", 130_000),
        Finding("refresh", "age of the oldest row", Status.PASSED, "128 rows", 8_320_000),
        Finding("claim", "precharge kept (logic)", Status.PASSED, "3 assertions, certificate of 41 clauses re-checked"),
        Finding("bench", "march, all max (logic, compiled)", Status.PASSED, "131072 checks"),
        Finding("fit", "place and route", Status.PASSED, "231 of 1280 cells, 171 MHz"),
    ),
)
MIXED = Verdict(
    Status.FAILED,
    (
        Finding("margin", "tRP min", Status.FAILED, "worst of 3 situations: memory write, before opcode fetch", -2_000),
        Finding("claim", "precharge kept (netlist)", Status.NOT_RUN, "the prover gave up after 200 s"),
        Finding("bench", "march, all max (logic, icarus)", Status.NOT_RUN, "iverilog is not installed"),
        Finding("fit", "place and route", Status.PASSED, "231 of 1280 cells, 171 MHz"),
    ),
)

_SUPPLY = {1: "VCCIO_3", 6: "VCCIO_3", 23: "VCCIO_3", 31: "VCCIO_2", 38: "VCCIO_2", 58: "VCCIO_1", 88: "VCCIO_0"}
_CORE = (11, 35, 61, 92)
_GROUND = (5, 14, 32, 39, 55, 70, 76, 98)
_CONFIG = {43: "CDONE", 44: "CRESET_B", 45: "SPI_SDO", 46: "SPI_SDI", 48: "SPI_SCK", 49: "SPI_SS_B", 50: "VCC_SPI"}
_LEFT = ("ma0", "ma1", "ma2", "ma3", "ma4", "ma5", "ma6")
_STROBES = ("ras_n", "cas_n", "we_n", "read_n", "enable_n")
_LINES = ("m1_n", "mreq_n", "rfsh_n", "rd_n", "wr_n", "busreq_n", "busack_n", "reset_n")
_ADDRESS = tuple(f"a{bit}" for bit in range(16))


def _wired() -> dict[int, PinRow]:
    free = [pin for pin in range(1, 101) if pin not in {*_SUPPLY, *_CORE, *_GROUND, *_CONFIG}]
    names = [*_LEFT, *_STROBES, "clk", *_LINES, *_ADDRESS]
    spread = [free[place * 2] if place < 20 else free[place + 20] for place in range(len(names))]
    return {pin: _signal(pin, name) for pin, name in zip(spread, names, strict=True)}


def _signal(pin: int, name: str) -> PinRow:
    if name == "clk":
        return PinRow(str(pin), "GBIN5", name, "input", "3.3 V", "X1.3 oscillator 100 MHz", "plain wire", "")
    if name in _LEFT or name in _STROBES:
        package = "U31" if name in _STROBES else "U32"
        meets = "U19.19 (data out enable)" if name == "read_n" else f"U5 to U12, {name}"
        through = f"{package} SN74AHCT541 at 5.0 V, 33 ohm, load 80 pF"
        note = "pull-up 10 kohm to 3.3 V" if name in _STROBES else ""
        return PinRow(str(pin), "IO", name, "output", "3.3 V", meets, through, note)
    return PinRow(str(pin), "IO", name, "input", "3.3 V", f"J1.{pin}", "U33 SN74LVC245A at 3.3 V", "")


def pin_rows() -> tuple[PinRow, ...]:
    """A hundred pins: every net of the first board, supplies, ground, configuration, and open ones."""
    wired = _wired()
    return tuple(wired.get(pin) or _other(pin) for pin in range(1, 101))


def _other(pin: int) -> PinRow:
    if pin in _SUPPLY:
        return PinRow(str(pin), _SUPPLY[pin], "", "supply", "3.3 V", "", "", "100 nF close by")
    if pin in _CORE:
        return PinRow(str(pin), "VCC", "", "supply", "1.2 V", "", "", "100 nF close by")
    if pin in _GROUND:
        return PinRow(str(pin), "GND", "", "ground", "0 V", "", "", "")
    if pin in _CONFIG:
        return PinRow(str(pin), _CONFIG[pin], "", "config", "3.3 V", "", "", "")
    return PinRow(str(pin), "IO", "", "open", "", "", "", "leave open")


FACTS = SheetFacts(
    board_name="Loom card memory, 16 KB",
    revision="B",
    slug="loom-16k",
    digest=DIGEST,
    short_digest=short_digest(DIGEST),
    tool="rowkeeper 0.1.0",
    summary=(
        ("Memory", "8 × 4116-15, 16 KiB from 0xC000, 128 rows to refresh"),
        ("Bus", "8-bit bus with M1, MREQ and RFSH (UM0080), 4 MHz part at 4 MHz"),
        ("Device", "iCE40 HX1K, VQ100, 100 MHz clock"),
    ),
    passed=True,
    verdict="PASSED: 6 of 6 checks passed, 0 failed, 0 not run",
    device="iCE40 HX1K",
    package="VQ100",
    pins=pin_rows(),
    paths=(
        PathRow("DATA_IN", "U5 to U12, pin 2", "plain wire, load 50 pF"),
        PathRow("DATA_OUT", "U5 to U12, pin 14", "U19 SN74LS244 at 5.0 V, load 45 pF"),
    ),
    remove=("U1, U2 address multiplexers", "U3 row counter", "U4 delay line with R3, C7, C8"),
    keep=("U19 SN74LS244 data out buffer", "U5 to U12 memory chips", "Capacitors at each memory chip"),
    add=(
        "Pull-ups 10 kohm to 5 V on /RAS, /CAS, /WE behind the buffers",
        "Pull-up 10 kohm to 3.3 V on /ENABLE",
        "Pull-ups 10 kohm on /MREQ, /RD, /WR, /M1, /RFSH: they float in grant",
        "U31, U32 SN74AHCT541; U33 to U36 SN74LVC245A; 33 ohm in each line to the chips",
    ),
    handling=HANDLING,
    order=(
        "Programme the flash; compare its checksum with the manifest.",
        "Three-supply chips: -5 V comes on FIRST and goes off LAST, every time.",
        "Switch on without chips and measure each supply.",
    ),
    chips=("4116-15: VBB must never be above VSS while VDD is up.",),
    assumed=(
        "RESET, when it falls, stays low for at least three bus clocks.",
        "A bus grant goes to a master that leaves this memory alone.",
        "WAIT is never asserted during an access to this card.",
    ),
    not_proven=NOT_PROVEN,
    open_items=(),
    notes=("tRC: the sheet promises 375 ns up to 70 °C",),
)
