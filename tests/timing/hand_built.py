"""Two small boards built by hand, for tests of the timing room: no file and no catalogue is read.

The figures are those of the sheets named beside them; where a test wants another figure it replaces it.
"""

from dataclasses import replace
from fractions import Fraction

from rowkeeper.reading.board import (
    Arrest,
    Bank,
    Board,
    BusFamily,
    BusFormula,
    BusGrade,
    BusTraffic,
    Chip,
    ClockSpec,
    Device,
    GivenTicks,
    IoLevels,
    Net,
    Part,
    PathElement,
    Wiring,
)
from rowkeeper.reading.figures import Figure, Mark, Source

Z8400 = Source(Mark.SHEET, "Z8400/Z84C00 product specification", "pp. 37-39")
MK3880 = Source(Mark.SHEET, "MK3880 technical manual", "pp. 79-81")
MK4116 = Source(Mark.SHEET, "MK4116P-2/-3 sheet", "p. 3")
HYB4164 = Source(Mark.SHEET, "HYB 4164-1/-2/-3 sheet", "pp. 6-11 to 6-17")
SHEET = Source(Mark.SHEET, "sheet")
NO_LEVELS = IoLevels(None, None, None, None, None, SHEET)


def ns(value: str | int | float | None) -> int | None:
    """Nanoseconds as written in a sheet, to picoseconds."""
    return None if value is None else int(Fraction(str(value)) * 1000)


def figures(source: Source, **spans: tuple[object, object]) -> dict[str, Figure]:
    """`tRAS=(150, 10000)` in nanoseconds, minimum and maximum. An underscore pair stands for brackets."""
    found = {}
    for name, (lo, hi) in spans.items():
        symbol = name.replace("__", "(", 1) + ")" if "__" in name else name
        found[symbol] = Figure(symbol, ns(lo), ns(hi), source)  # type: ignore[arg-type]
    return found


def formula(symbol: str, terms: tuple[str, ...], offset_ns: int, source: Source) -> BusFormula:
    return BusFormula(symbol, terms, offset_ns * 1000, source)


HIGH, LOW = ("TwCh", "TfC"), ("TwCl", "TrC")

GRADE_4MHZ = BusGrade(
    "4 MHz",
    figures(
        Z8400,
        TcC=(250, None), TwCh=(110, None), TwCl=(110, None), TfC=(None, 30), TrC=(None, 30),
        TdCr__A=(None, 110), TdCf__MREQf=(None, 85), TdCr__MREQr=(None, 85), TdCf__MREQr=(None, 85),
        TdCf__RDf=(None, 95), TdCr__RDr=(None, 85), TdCf__RDr=(None, 85), TdCr__M1f=(None, 100),
        TdCr__M1r=(None, 100), TdCf__WRf=(None, 80), TdCf__WRr=(None, 80), TdCf__D=(None, 150),
        TsD__Cr=(35, None), TsD__Cf=(50, None), ThD=(0, None), TsBUSREQ=(50, None),
        TdCr__BUSACKf=(None, 100), TdCf__BUSACKr=(None, 90), TsRESET=(60, None),
    ),
    {
        f.symbol: f
        for f in (
            formula("TdA(MREQf)", HIGH, -65, Z8400),
            formula("TwMREQl", ("TcC",), -30, Z8400),
            formula("TwMREQh", HIGH, -20, Z8400),
            formula("TdCTr(A)", LOW, -50, Z8400),
            formula("TwWR", ("TcC",), -30, Z8400),
            formula("TdD(WRf)", ("TcC",), -170, Z8400),
            formula("TdWRr(D)", LOW, -70, Z8400),
        )
    },
)  # fmt: skip

GRADE_2_5MHZ = BusGrade(
    "2.5 MHz",
    figures(
        MK3880,
        TcC=(400, None), TwCh=(180, 200000), TwCl=(180, 2000), TfC=(None, 30), TrC=(None, 30),
        TdCr__A=(None, 145), TdCf__MREQf=(None, 100), TdCr__MREQr=(None, 100), TdCf__MREQr=(None, 100),
        TdCf__RDf=(None, 130), TdCr__RDr=(None, 100), TdCf__RDr=(None, 110), TdCr__M1f=(None, 130),
        TdCr__M1r=(None, 130), TdCf__WRf=(None, 90), TdCf__WRr=(None, 100), TdCf__D=(None, 230),
        TsD__Cr=(50, None), TsD__Cf=(60, None), ThD=(0, None), TsBUSREQ=(80, None),
        TdCr__BUSACKf=(None, 120), TdCf__BUSACKr=(None, 110), TsRESET=(90, None),
    ),
    {
        f.symbol: f
        for f in (
            formula("TdA(MREQf)", HIGH, -75, MK3880),
            formula("TwMREQl", ("TcC",), -40, MK3880),
            formula("TwMREQh", HIGH, -30, MK3880),
            formula("TdCTr(A)", LOW, -40, MK3880),
            formula("TwWR", ("TcC",), -40, MK3880),
            formula("TdD(WRf)", ("TcC",), -210, MK3880),
            formula("TdWRr(D)", LOW, -80, MK3880),
        )
    },
)  # fmt: skip

BUS = BusFamily(
    name="m1-refresh",
    title="8-bit bus with M1, MREQ and a refresh after every opcode fetch",
    data_width=8,
    address_bits=16,
    bus_refresh_row_bits=7,
    grades={"2.5 MHz": GRADE_2_5MHZ, "4 MHz": GRADE_4MHZ},
    traffic=BusTraffic(21, 19, 5, 3, 2, Source(Mark.DERIVED, "UM0080")),
    assumptions={},
    output_levels=NO_LEVELS,
    input_levels=NO_LEVELS,
    source=SHEET,
)

CHIP_4116_15 = Chip(
    name="4116-15", title="16K x 1", words=16384, width=1, row_bits=7, column_bits=7, refresh_rows=128,
    refresh_row_bits=7, refresh_ps=2 * 10**9, refresh_source=MK4116, pause_ps=200 * 10**6, warm_up_cycles=8,
    warm_up_source=MK4116,
    limits=figures(
        MK4116,
        tRC=(375, None), tRAC=(None, 150), tCAC=(None, 100), tOFF=(0, 40), tT=(3, 35), tRP=(100, None),
        tRAS=(150, 10000), tRSH=(100, None), tCAS=(100, 10000), tCSH=(150, None), tRCD=(25, 50), tCRP=(-20, None),
        tASR=(0, None), tRAH=(20, None), tASC=(-10, None), tCAH=(45, None), tAR=(95, None), tRCS=(0, None),
        tRCH=(0, None), tWCS=(-20, None), tWCH=(45, None), tWP=(45, None), tWCR=(95, None), tRWL=(60, None),
        tCWL=(60, None), tDS=(0, None), tDH=(45, None), tDHR=(95, None), tCPN=(0, None),
    ),
    strobe_levels=NO_LEVELS, address_levels=NO_LEVELS, output_levels=NO_LEVELS, strobe_pf_max=10, address_pf_max=5,
    supplies=(), pins={},
)  # fmt: skip

CHIP_4164_15 = replace(
    CHIP_4116_15, name="4164-15-256row", title="64K x 1", words=65536, row_bits=8, column_bits=8, refresh_rows=256,
    refresh_row_bits=8, refresh_ps=4 * 10**9, refresh_source=HYB4164, warm_up_source=HYB4164,
    limits=figures(
        HYB4164,
        tRC=(280, None), tRAC=(None, 150), tCAC=(None, 100), tOFF=(None, 40), tT=(3, 35), tRP=(100, None),
        tRAS=(150, 10000), tRSH=(100, None), tCSH=(150, None), tCAS=(100, None), tRCD=(30, 50), tASR=(0, None),
        tRAH=(20, None), tASC=(0, None), tCAH=(45, None), tAR=(95, None), tRCS=(0, None), tRCH=(0, None),
        tWCH=(45, None), tWP=(45, None), tWCR=(110, None), tWCS=(-10, None), tRWL=(50, None), tCWL=(50, None),
        tDS=(0, None), tDH=(45, None), tDHR=(110, None), tCPN=(50, None),
    ),
)  # fmt: skip


def part(name: str, delay: tuple[object, object], skew: object = None, enable: object = None, disable: object = None,
         kind: str = "buffer") -> Part:  # fmt: skip
    """A buffer with nanoseconds as its sheet prints them."""

    def figure(symbol: str, lo: object, hi: object) -> Figure | None:
        return None if hi is None else Figure(symbol, ns(lo), ns(hi), Source(Mark.SHEET, name))  # type: ignore[arg-type]

    first = figure("delay", *delay)
    assert first is not None
    return Part(
        name, name, kind, 8, 5000, first, figure("enable", None, enable), figure("disable", None, disable),  # type: ignore[arg-type]
        figure("skew", None, skew), NO_LEVELS, NO_LEVELS, 10,
    )  # fmt: skip


LVC245 = part("SN74LVC245A", ("1.5", "6.3"), skew=1, kind="translator")
AHCT541 = part("SN74AHCT541", (1, "9.5"), skew=1)
LS244 = part("SN74LS244", (None, 18), enable=30, disable=25)


def device(input_ns: tuple[object, object] = (1, 10), output_ns: tuple[object, object] = (3, 15)) -> Device:
    """Pads and fabric in one figure each: nothing more is assumed before routing."""
    source = Source(Mark.PRACTICE, "planning")
    nothing = Figure("before routing", 0, 0, source)
    return Device(
        name="ice40hx1k-vq100", title="iCE40 HX1K", family="ice40", router_arguments=(), package="VQ100",
        package_pins=100, cells=1280, pins={},
        input_pad=Figure("input", ns(input_ns[0]), ns(input_ns[1]), source),  # type: ignore[arg-type]
        output_pad=Figure("output", ns(output_ns[0]), ns(output_ns[1]), source),  # type: ignore[arg-type]
        before_routing_input=nothing, before_routing_output=nothing,
        flip_flop_window=Figure("tSU", None, 0, source), levels=NO_LEVELS, configuration_typical_ps=53 * 10**9,
        configuration_source=source, volatile=True, supplies=(),
    )  # fmt: skip


def _through(*elements: tuple[Part, str] | tuple[int, int]) -> tuple[PathElement, ...]:
    found: list[PathElement] = []
    for one, other in elements:
        if isinstance(one, Part):
            found.append(PathElement("part", part=one, designator=str(other)))
        else:
            found.append(PathElement("series", series_milliohm=one * 1000))
            found.append(PathElement("load", load_ff=int(other) * 1000))
    return tuple(found)


def wiring(row_bits: int, busreq: bool = True) -> Wiring:
    """Bus through U1 to U3, strobes through U5, addresses through U6, data out through U4."""
    lines = ["mreq_n", "m1_n", "rd_n", "wr_n", *(["busreq_n"] if busreq else []), "busack_n", "reset_n"]
    nets = [Net("clk", "input", "1", "X1.3", (PathElement("direct"),))]
    nets += [Net(n, "input", f"{i + 2}", "J1", _through((LVC245, "U1"))) for i, n in enumerate(lines)]
    nets += [Net(f"a{i}", "input", f"{i + 20}", "J1", _through((LVC245, f"U{2 + i // 8}"))) for i in range(16)]
    strobes = ("ras_n", "cas_n", "we_n")
    nets += [Net(n, "output", f"{i + 40}", "U10", _through((AHCT541, "U5"), (12, 80))) for i, n in enumerate(strobes)]
    nets += [Net("read_n", "output", "45", "U4.1", _through((AHCT541, "U5")))]
    nets += [Net(f"ma{i}", "output", f"{i + 50}", "U10", _through((AHCT541, "U6"), (12, 40))) for i in range(row_bits)]
    nets += [Net("data_in", "path", "", "U10.2", (PathElement("direct"),))]
    nets += [Net("data_out", "path", "", "J1", _through((LS244, "U4")))]
    return Wiring(tuple(nets), (), (), ())


def clock(mhz: str, ppm: int = 100, duty: tuple[str, str] = ("0.48", "0.52"), edges_ns: int = 10) -> ClockSpec:
    return ClockSpec(
        Fraction(mhz) * 10**6, Fraction(ppm), Fraction(duty[0]), Fraction(duty[1]), edges_ns * 1000, edges_ns * 1000
    )


LOOM = Board(
    file="loom-16k.yaml", slug="loom-16k", name="Loom card memory", revision="B", bus=BUS, grade=GRADE_4MHZ,
    bus_clock=clock("4"),
    at_worst=Arrest(0, 100 * 10**6, "silent", None, False, 100 * 10**9, {}),
    banks=(Bank(0, CHIP_4116_15, 8, 0xC000, 16384),), row_from="counter", standby="own-timer",
    device=device(), device_clock=clock("100", ppm=50), strobes=GivenTicks(), wiring=wiring(7), digest="", places={},
)  # fmt: skip

KILN = replace(
    LOOM, file="kiln-64k.yaml", slug="kiln-64k", name="Kiln logger memory", grade=GRADE_2_5MHZ,
    bus_clock=clock("2.5"), at_worst=replace(LOOM.at_worst, grant_max_ps=20 * 10**6),
    banks=(Bank(0, CHIP_4164_15, 8, 0, 65536),), device_clock=clock("50", ppm=50), wiring=wiring(8),
)  # fmt: skip
