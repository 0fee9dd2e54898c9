"""A board record for the tests of this room, made by hand around the catalogue's own device."""

from dataclasses import replace
from fractions import Fraction

from rowkeeper.contract import Design, Ports, TickTable
from rowkeeper.logic.replacement import ports_of
from rowkeeper.reading import catalogue
from rowkeeper.reading.board import Arrest, Board, ClockSpec, GivenTicks, Net, PathElement, Wiring
from rowkeeper.reading.position import Position

FILE = "boards/loom-16k.yaml"

TICKS = TickTable("counted", 4, 4, 6, 12, 1, 60, 900, 3, 17, 12, 600, 1480, 79, 20000, 8)
DESIGN = Design("loom", 7, 7, 7, 16, 2, 3, True, True, True, True, TICKS)
PORTS = ports_of(DESIGN)

_LINES = {"mreq_n": "1", "m1_n": "2", "rd_n": "3", "wr_n": "4", "busreq_n": "7", "busack_n": "8", "reset_n": "9"}
_ADDRESS = ["78", "79", "80", "81", "82", "83", "85", "86", "87", "91", "93", "94", "95", "96", "97", "99"]
_STROBES = {"ras_n": "51", "cas_n": "52", "we_n": "53", "read_n": "54", "enable_n": "56"}
_MEMORY = ["57", "59", "60", "64", "65", "66", "68", "69"]

PINS = (
    {"clk": "15"}
    | _LINES
    | {f"a{i}": pin for i, pin in enumerate(_ADDRESS)}
    | _STROBES
    | {f"ma{i}": pin for i, pin in enumerate(_MEMORY)}
)


def path(name: str) -> tuple[PathElement, ...]:
    """What a net of that name passes through on these boards."""
    if name == "clk":
        return (PathElement("direct"), PathElement("load", load_ff=10_000))
    if name in _STROBES or name.startswith("ma"):
        buffer = PathElement("part", catalogue.part("SN74AHCT541"), "U22")
        return (buffer, PathElement("series", series_milliohm=33_000), PathElement("load", load_ff=90_000))
    return (PathElement("part", catalogue.part("SN74LVC245A"), "U24"),)


def nets(ports: Ports = PORTS) -> tuple[Net, ...]:
    """Every net of the ports, one per line of the wiring from line 40 on."""
    made = []
    for number, bit in enumerate(ports.bits):
        at, pin_at = Position(FILE, 40 + number, 5), Position(FILE, 40 + number, 21)
        made.append(Net(bit.net, bit.direction, PINS[bit.net], f"X1.{number}", path(bit.net), at, pin_at))
    return tuple(made)


def board(wiring: tuple[Net, ...] | None = None) -> Board:
    """The loom board with this wiring, or with its own."""
    bus = catalogue.bus("m1-refresh")
    clock = ClockSpec(Fraction(4_000_000), Fraction(100), Fraction(48, 100), Fraction(52, 100), 10_000, 10_000)
    oscillator = ClockSpec(Fraction(100_000_000), Fraction(50), Fraction(1, 2), Fraction(1, 2), 0, 0)
    return Board(
        file=FILE,
        slug="loom-16k",
        name="Loom card memory, 16 KB",
        revision="B",
        bus=bus,
        grade=bus.grades["4 MHz"],
        bus_clock=clock,
        at_worst=Arrest(0, 100_000_000, "silent", None, False, 250_000_000_000, {}),
        banks=(),
        row_from="counter",
        standby="own-timer",
        device=catalogue.device("ice40hx1k-vq100"),
        device_clock=oscillator,
        strobes=GivenTicks(),
        wiring=Wiring(nets() if wiring is None else wiring, (), (), ()),
        digest="0123456789abcdef" * 4,
        places={},
    )


def faster(base: Board, megahertz: int) -> Board:
    """The same board with another oscillator."""
    return replace(base, device_clock=replace(base.device_clock, frequency_hz=Fraction(megahertz * 1_000_000)))
