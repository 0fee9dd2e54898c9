"""Boards made by hand for the tests of the bench: figures of the 4116-15, the HYB 4164-2 and the Z8400 at two speeds.

The bench is tried on these so that it stands on its own; the shipped boards go through it in tests of the whole.
"""

import dataclasses
from fractions import Fraction

from rowkeeper.contract import Design, TickTable
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
    Wiring,
)
from rowkeeper.reading.figures import Figure, Mark, Source, Window

__all__ = ["LOOM_DESIGN", "kiln", "kiln_design", "loom", "loom_windows", "windows_for"]

SHEET = Source(Mark.SHEET, "MK4116 sheet", "p. 3")
BUS = Source(Mark.SHEET, "Z8400 product specification", "pp. 37-39")
LEVELS = IoLevels(2700, 800, 2400, 400, 5500, SHEET)

CHIP_4116 = (
    "tRC 375 tRAS 150:10000 tRP 100 tRCD 25:50 tASR 0 tRAH 20 tASC -10 tCAH 45 tAR 95 tRSH 100 tCSH 150 tCAS 100:10000 "
    "tRCS 0 tRCH 0 tWCS -20 tWCH 45 tWP 45 tWCR 95 tRWL 60 tCWL 60 tDS 0 tDH 45 tDHR 95 tOFF 0:40 tCRP -20 "
    "tRAC :150 tCAC :100 tCPN 0"
)
CHIP_4164 = (
    "tRC 280 tRAS 150:10000 tRP 100 tRCD 30:50 tASR 0 tRAH 20 tASC 0 tCAH 45 tAR 95 tRSH 100 tCSH 150 tCAS 100:10000 "
    "tRCS 0 tRCH 0 tWCS -10 tWCH 45 tWP 45 tWCR 110 tRWL 50 tCWL 50 tDS 0 tDH 45 tDHR 110 tOFF 0:40 tCPN 50 "
    "tRAC :150 tCAC :100"
)
GRADE_4 = (
    "TdCr(A) 110 TdCr(Az) 90 TdCf(MREQf) 85 TdCr(MREQr) 85 TdCf(MREQr) 85 TdCf(RDf) 95 TdCr(RDr) 85 TdCf(RDr) 85 "
    "TdCr(RDf) 85 TdCr(M1f) 100 TdCr(M1r) 100 TdCr(RFSHf) 130 TdCr(RFSHr) 120 TdCf(WRf) 80 TdCf(WRr) 80 TdCr(WRf) 65 "
    "TdCr(IORQf) 75 TdCf(IORQf) 85 TdCr(IORQr) 85 TdCf(IORQr) 85 TdCf(D) 150 TdCr(Dz) 90 TdCr(CTz) 80 "
    "TdCr(BUSACKf) 100 TdCf(BUSACKr) 90"
)
NEEDS_4 = "TsD(Cr) 35 TsD(Cf) 50 ThD 0 TsBUSREQ 50 TsRESET 60"
GRADE_2_5 = (
    "TdCr(A) 145 TdCr(Az) 110 TdCf(MREQf) 100 TdCr(MREQr) 100 TdCf(MREQr) 100 TdCf(RDf) 130 TdCr(RDr) 100 "
    "TdCf(RDr) 110 TdCr(RDf) 100 TdCr(M1f) 130 TdCr(M1r) 130 TdCr(RFSHf) 180 TdCr(RFSHr) 150 TdCf(WRf) 90 "
    "TdCf(WRr) 100 TdCr(WRf) 80 TdCr(IORQf) 90 TdCf(IORQf) 110 TdCr(IORQr) 100 TdCf(IORQr) 110 TdCf(D) 230 "
    "TdCr(Dz) 90 TdCr(CTz) 100 TdCr(BUSACKf) 120 TdCf(BUSACKr) 110"
)
NEEDS_2_5 = "TsD(Cr) 50 TsD(Cf) 60 ThD 0 TsBUSREQ 80 TsRESET 90"
FORMULAS = {
    "TdA(MREQf)": (("TwCh", "TfC"), (-65, -75)),
    "TwMREQl": (("TcC",), (-30, -40)),
    "TwMREQh": (("TwCh", "TfC"), (-20, -30)),
    "TdCTr(A)": (("TwCl", "TrC"), (-50, -40)),
    "TwWR": (("TcC",), (-30, -40)),
    "TdD(WRf)": (("TcC",), (-170, -210)),
    "TdWRr(D)": (("TwCl", "TrC"), (-70, -80)),
}


def _figures(text: str, source: Source, only_max: bool = False) -> dict[str, Figure]:
    words = text.split()
    figures = {}
    for symbol, value in zip(words[::2], words[1::2], strict=True):
        low, _, high = value.partition(":")
        if only_max:
            low, high = "", low
        figures[symbol] = Figure(symbol, int(low) * 1000 if low else None, int(high) * 1000 if high else None, source)
    return figures


def _chip(name: str, text: str, bits: int, interval_ps: int) -> Chip:
    limits = _figures(text, SHEET)
    if name == "4116-15":
        limits["tRC"] = dataclasses.replace(limits["tRC"], note="rates the cycle for 0 to 70 C only")
    return Chip(
        name, name, 1 << 2 * bits, 1, bits, bits, 1 << bits, bits, interval_ps, SHEET, 200_000_000, 8, SHEET, limits,
        LEVELS, LEVELS, LEVELS, 10, 5, (), {},
    )  # fmt: skip


def _grade(name: str, delays: str, needs: str, column: int) -> BusGrade:
    formulas = {s: BusFormula(s, terms, offsets[column] * 1000, BUS) for s, (terms, offsets) in FORMULAS.items()}
    return BusGrade(name, _figures(delays, BUS, only_max=True) | _figures(needs, BUS), formulas)


def _clock(hertz: int, ppm: int, edge_ns: int = 10) -> ClockSpec:
    return ClockSpec(
        Fraction(hertz), Fraction(ppm), Fraction(48, 100), Fraction(52, 100), edge_ns * 1000, edge_ns * 1000
    )


def _board(slug: str, grade: BusGrade, bus_hz: int, device_hz: int, bank: Bank, grant_ps: int) -> Board:
    family = BusFamily(
        "m1-refresh", "bus", 8, 16, 7, {grade.name: grade}, BusTraffic(21, 19, 5, 3, 2, BUS), {}, LEVELS, LEVELS, BUS
    )
    arrest = Arrest(0, grant_ps, "silent", None, False, 250 * 10**9, {})
    figure = Figure("none", 0, 0, SHEET)
    device = Device(
        "device", "device", "ice40", (), "vq100", 100, 1280, {}, figure, figure, figure, figure, figure, LEVELS, 0, BUS,
        True, (),
    )  # fmt: skip
    return Board(
        f"{slug}.yaml", slug, slug, "A", family, grade, _clock(bus_hz, 100), arrest, (bank,), "counter", "own-timer",
        device, _clock(device_hz, 50), GivenTicks(), Wiring((), (), (), ()), "0" * 64, {},
    )  # fmt: skip


def loom() -> Board:
    """16 KB of 4116-15 at 0xC000 on a 4 MHz bus, oscillator 100 MHz."""
    bank = Bank(0, _chip("4116-15", CHIP_4116, 7, 2 * 10**9), 8, 0xC000, 16384)
    return _board("loom", _grade("4 MHz", GRADE_4, NEEDS_4, 0), 4_000_000, 100_000_000, bank, 100_000_000)


def kiln() -> Board:
    """64 KB of the 256-row 4164 over the whole space of a 2.5 MHz bus, oscillator 50 MHz."""
    bank = Bank(0, _chip("4164-15-256row", CHIP_4164, 8, 4 * 10**9), 8, 0, 65536)
    return _board("kiln", _grade("2.5 MHz", GRADE_2_5, NEEDS_2_5, 1), 2_500_000, 50_000_000, bank, 20_000_000)


LOOM_TICKS = TickTable("counted", 4, 4, 6, 12, 1, 60, 900, 3, 17, 12, 600, 1480, 79, 20000, 8)
LOOM_DESIGN = Design("loom", 7, 7, 7, 16, 2, 3, True, True, True, True, LOOM_TICKS)


def kiln_design() -> Design:
    ticks = TickTable("counted", 2, 2, 4, 7, 1, 40, 450, 4, 10, 7, 250, 730, 66, 10000, 8)
    return Design("kiln", 8, 8, 8, 16, 0, 0, True, True, True, True, ticks)


def windows_for(design: Design) -> dict[str, Window]:
    """Round figures for every net: translators and pads in, pads and buffers out."""
    lines = ("mreq_n", "m1_n", "rd_n", "wr_n", "busreq_n", "busack_n", "reset_n")
    windows = {net: Window(1_500, 16_000) for net in (*lines, *(f"a{i}" for i in range(16)))}
    strobes = ("ras_n", "cas_n", "we_n", "enable_n", *(f"ma{i}" for i in range(design.row_bits)))
    windows |= {net: Window(3_000, 20_000) for net in strobes}
    return windows | {
        "data_in": Window(0, 2_000),
        "data_out": Window(0, 18_000),
        "read_n": Window(1_000, 45_000),
    }


def loom_windows() -> dict[str, Window]:
    return windows_for(LOOM_DESIGN)
