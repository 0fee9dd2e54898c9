"""A board made by hand for the tests of the sheets room: only what the sheet shows is filled."""

from fractions import Fraction

from rowkeeper.reading.board import (
    Arrest,
    Bank,
    Board,
    BusFamily,
    BusGrade,
    BusTraffic,
    Chip,
    ClockSpec,
    Device,
    GivenTicks,
    IoLevels,
    Part,
    Wiring,
)
from rowkeeper.reading.figures import Figure, Mark, Source
from sheets.records import DIGEST

_SOURCE = Source(Mark.PRACTICE)
_LEVELS = IoLevels(None, None, None, None, None, _SOURCE)
_FIGURE = Figure("", None, None, _SOURCE)

CHIP = Chip(
    name="4116-15",
    title="16K x 1, 150 ns",
    words=16384,
    width=1,
    row_bits=7,
    column_bits=7,
    refresh_rows=128,
    refresh_row_bits=7,
    refresh_ps=2_000_000_000,
    refresh_source=_SOURCE,
    pause_ps=0,
    warm_up_cycles=8,
    warm_up_source=_SOURCE,
    limits={},
    strobe_levels=_LEVELS,
    address_levels=_LEVELS,
    output_levels=_LEVELS,
    strobe_pf_max=10,
    address_pf_max=5,
    supplies=("VDD 10.8 to 13.2 V", "VCC 4.5 to 5.5 V", "VBB -4.5 to -5.5 V"),
    pins={},
    notes=("VBB must never be above VSS while VDD is up.", "Pin 8 is +12 V."),
)
BUFFER = Part("SN74LS244", "buffer", "buffer", 8, 5000, _FIGURE, None, None, None, _LEVELS, _LEVELS, 5)
FAMILY = BusFamily(
    name="m1-refresh",
    title="8-bit bus with M1, MREQ and RFSH (UM0080)",
    data_width=8,
    address_bits=16,
    bus_refresh_row_bits=7,
    grades={},
    traffic=BusTraffic(21, 19, 5, 3, 2, _SOURCE),
    assumptions={"reset length": "RESET stays low for at least three bus clocks."},
    output_levels=_LEVELS,
    input_levels=_LEVELS,
    source=_SOURCE,
)
DEVICE = Device(
    name="ice40hx1k-vq100",
    title="iCE40 HX1K",
    family="ice40",
    router_arguments=(),
    package="vq100",
    package_pins=100,
    cells=1280,
    pins={},
    input_pad=_FIGURE,
    output_pad=_FIGURE,
    before_routing_input=_FIGURE,
    before_routing_output=_FIGURE,
    flip_flop_window=_FIGURE,
    levels=_LEVELS,
    configuration_typical_ps=53_000_000_000,
    configuration_source=_SOURCE,
    volatile=False,
    supplies=("3.3 V", "1.2 V"),
)


def clock(frequency_hz: int) -> ClockSpec:
    """A clock of that frequency; the rest does not show on the sheet."""
    return ClockSpec(Fraction(frequency_hz), Fraction(100), Fraction(48, 100), Fraction(52, 100), 10_000, 10_000)


BOARD = Board(
    file="loom-16k.yaml",
    slug="loom-16k",
    name="Loom card memory, 16 KB",
    revision="B",
    bus=FAMILY,
    grade=BusGrade("4 MHz", {}, {}),
    bus_clock=clock(4_000_000),
    at_worst=Arrest(0, 100_000_000, "silent", None, False, 0, {}),
    banks=(Bank(0, CHIP, 8, 0xC000, 16384),),
    row_from="counter",
    standby="own-timer",
    device=DEVICE,
    device_clock=clock(100_000_000),
    strobes=GivenTicks(),
    wiring=Wiring((), ("U1, U2", "U3"), ("U19",), ("U31\n(AHCT541)",)),
    digest=DIGEST,
    places={},
)
