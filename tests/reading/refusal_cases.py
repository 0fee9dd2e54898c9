"""Wrong board files, each made from a good one by exchanging one piece of text.

The refusals they get stand in `refusals.txt`, in the same order, to be read as a person at the bench would.
"""

from dataclasses import dataclass

__all__ = ["CASES", "Case"]

LOOM = "loom-16k"
KILN = "kiln-64k"


@dataclass(frozen=True, slots=True)
class Case:
    """`old` stands exactly once in the good file and is exchanged for `new`."""

    name: str
    old: str
    new: str
    base: str = LOOM


_RAS = (
    "{net: ras_n, pin: 51, meets: U10-U17.4, through: [{buffer: SN74AHCT541, designator: U22}, {series: 22 ohm}, "
    "{load: 90 pF}]}"
)
_MREQ = "{net: mreq_n, pin: 1, meets: X1.21, through: [{translator: SN74LVC245A, designator: U24}]}"
_BANK = "{bank: 0, chip: 4116-15, chips: 8, sockets: U10-U17, window: {base: 0xC000, size: 16 KiB}}"
_BUSACK = "  - {net: busack_n, pin: 8, meets: X1.26, through: [{translator: SN74LVC245A, designator: U24}]}\n"
_RESET = "  - {net: reset_n, pin: 9, meets: X1.27, through: [{translator: SN74LVC245A, designator: U24}]}\n"
_ENABLE = "{buffer: SN74LVC1G07, designator: U27}, {load: 45 pF}"
_CLK = "{net: clk, pin: 15, meets: Y1.3, through: [{direct: 3.3 V}, {load: 10 pF}]}"

CASES = (
    # --- the text itself
    Case("tab", "  family: m1-refresh", "\tfamily: m1-refresh"),
    Case("null-character", "revision: B", "revision: B\x00"),
    Case("escape-character", "revision: B", "revision: B\x1b[31m"),
    Case("text-that-turns-around", "revision: B", "revision: B\u202e"),
    Case("byte-order-mark", "# yaml-language-server", "\ufeff# yaml-language-server"),
    Case("not-utf-8", "Loom card memory", "Loom card m\udce9mory"),
    # --- the subset of YAML
    Case("anchor", "standby: own-timer", "standby: &idle own-timer"),
    Case("alias", "standby: own-timer", "standby: *idle"),
    Case("tag", "standby: own-timer", "standby: !!str own-timer"),
    Case("merge", "  row_from: counter", "  <<: {standby: none}\n  row_from: counter"),
    Case("duplicate-key", "  standby: own-timer", "  standby: own-timer\n  standby: none"),
    Case("second-document", "strobes: auto", "strobes: auto\n---"),
    Case("directive", "# yaml-language-server", "%YAML 1.2\n---\n# yaml-language-server"),
    Case("text-block", "strobes: auto", "strobes: |\n  auto"),
    Case("deep-nesting", "{max: 0 ns}", "[[[[[[[[[[[[0 ns]]]]]]]]]]]]"),
    Case("open-bracket", "window: {base: 0xC000, size: 16 KiB}}", "window: {base: 0xC000, size: 16 KiB}"),
    Case("open-quote", '"Loom card memory, 16 KB"', '"Loom card memory, 16 KB'),
    Case("missing-space", "  part: ice40hx1k-vq100\n", "  part:ice40hx1k-vq100\n"),
    Case("list-as-key", "strobes: auto", "[strobes]: auto"),
    # --- keys
    Case("unknown-key", "tolerance: 100 ppm", "tolerence: 100 ppm"),
    Case("unknown-section", "refresh:\n", "refersh:\n"),
    Case("key-of-nothing-like-it", "revision: B", "revision: B, zzz: 1"),
    Case("missing-key", ", sockets: U10-U17", ""),
    Case("missing-section", "strobes: auto\n", ""),
    Case("block-for-a-value", "grade: 4 MHz", "grade: {name: 4 MHz}"),
    Case("value-for-a-block", "rise: {max: 10 ns}", "rise: 10 ns"),
    Case("value-for-a-list", f"memory:\n  - {_BANK}", "memory: 4116-15"),
    Case("empty-list", f"memory:\n  - {_BANK}", "memory: []"),
    # --- quantities
    Case("missing-unit", "rise: {max: 10 ns}", "rise: {max: 10}"),
    Case("siemens", "rise: {max: 10 ns}", "rise: {max: 10 nS}"),
    Case("unknown-unit", "rise: {max: 10 ns}", "rise: {max: 10 nanos}"),
    Case("negative-time", "rise: {max: 10 ns}", "rise: {max: -10 ns}"),
    Case("part-of-a-picosecond", "rise: {max: 10 ns}", "rise: {max: 0.0001 ns}"),
    Case("two-points", "rise: {max: 10 ns}", "rise: {max: 1.0.0 ns}"),
    Case("words-for-a-time", "rise: {max: 10 ns}", "rise: {max: fast}"),
    Case("min-over-max", "{min: 48 %, max: 52 %}", "{min: 55 %, max: 45 %}"),
    Case("whole-period", "{min: 48 %, max: 52 %}", "{min: 48 %, max: 100 %}"),
    Case("clock-of-zero", "clock: {frequency: 100 MHz", "clock: {frequency: 0 MHz"),
    Case("megahertz-in-small-letters", "clock: {frequency: 100 MHz", "clock: {frequency: 100 mhz"),
    Case("tolerance-beyond-reason", "tolerance: 50 ppm", "tolerance: 500000 ppm"),
    Case("decimal-kilobyte", "size: 16 KiB", "size: 16 KB"),
    Case("yes-in-other-words", "aligned: no", "aligned: false"),
    Case("count-in-words", "chips: 8,", "chips: eight,"),
    Case("address-in-other-notation", "base: 0xC000", "base: $C000"),
    # --- the catalogue
    Case("unknown-chip", "chip: 4116-15", "chip: 4116-17"),
    Case("chip-of-two-kinds", "chip: 4164-15-256row", "chip: 4164-15", KILN),
    Case("chip-of-nothing-like-it", "chip: 4116-15", "chip: qqqqqq"),
    Case("unknown-grade", "grade: 4 MHz", "grade: 5 MHz"),
    Case("unknown-family", "family: m1-refresh", "family: m1-refesh"),
    Case("unknown-device", "part: ice40hx1k-vq100", "part: ice40hx4k-vq100"),
    Case("unknown-part", "buffer: SN74LS244", "buffer: SN74LS241"),
    Case("translator-called-buffer", f"{_MREQ}", _MREQ.replace("translator:", "buffer:")),
    # --- memory and refresh
    Case("row-of-seven-bits", "row_from: counter", "row_from: bus", KILN),
    Case("row-from-bus", "row_from: counter", "row_from: bus"),
    Case("row-from-chip", "row_from: counter", "row_from: chip"),
    Case("unknown-row-source", "row_from: counter", "row_from: countre"),
    Case("window-larger-than-chips", "size: 16 KiB", "size: 32 KiB"),
    Case("window-smaller-than-chips", "size: 16 KiB", "size: 8 KiB"),
    Case("window-not-aligned", "base: 0xC000", "base: 0xA000"),
    Case("window-beyond-the-bus", "base: 0xC000", "base: 0x10000"),
    Case("too-few-chips", "chips: 8, sockets: U10-U17", "chips: 4, sockets: U10-U13"),
    Case("sockets-not-as-many-as-chips", "sockets: U10-U17", "sockets: U10-U16"),
    Case("sockets-that-run-backwards", "sockets: U10-U17", "sockets: U17-U10"),
    Case("second-bank", _BANK, f"{_BANK}\n  - {_BANK.replace('bank: 0', 'bank: 1').replace('0xC000', '0x8000')}"),
    Case("banks-overlap", _BANK, f"{_BANK}\n  - {_BANK.replace('bank: 0', 'bank: 1')}"),
    Case("ticks-out-of-order", "strobes: auto", "strobes: {mux: 6, column: 4}"),
    Case("tick-that-is-no-number", "strobes: auto", "strobes: {mux: 4.5}"),
    Case("tick-of-zero", "strobes: auto", "strobes: {mux: 0}"),
    Case("strobes-in-other-words", "strobes: auto", "strobes: automatic"),
    # --- arrests
    Case("unlimited-wait", "wait: {max: 0 ns}", "wait: {max: unlimited}"),
    Case("grant-without-master", "{max: 100 us, master: silent}", "{max: 100 us}"),
    Case("grant-without-busack", _BUSACK, ""),
    Case("reset-without-reset-line", _RESET, ""),
    # --- wiring
    Case("unknown-net", "net: ras_n", "net: ras"),
    Case("net-that-is-a-verilog-word", "net: ras_n", "net: wire"),
    Case("address-net-too-many", "net: a15", "net: a16"),
    Case("net-twice", _RAS, f"{_RAS}\n  - {_RAS.replace('51', '62').replace('U10-U17.4', 'X9.1')}"),
    Case("net-missing", f"  - {_RAS}\n", ""),
    Case("net-without-path", _RAS, "{net: ras_n, pin: 51, meets: U10-U17.4}"),
    Case("net-with-empty-path", _RAS, "{net: ras_n, pin: 51, meets: U10-U17.4, through: []}"),
    Case(
        "data-path-without-path",
        "{net: data_in, meets: U10-U17.2, through: [{direct: 5 V}, {load: 50 pF}]}",
        "{net: data_in, meets: U10-U17.2}",
    ),
    Case("data-path-with-pin", "{net: data_in, meets", "{net: data_in, pin: 62, meets"),
    Case("net-without-pin", "{net: ras_n, pin: 51,", "{net: ras_n,"),
    Case("pin-used-twice", "net: cas_n, pin: 52", "net: cas_n, pin: 51"),
    Case("pin-that-is-a-supply", "net: cas_n, pin: 52", "net: cas_n, pin: 58"),
    Case("pin-that-is-ground", "net: cas_n, pin: 52", "net: cas_n, pin: 55"),
    Case("pin-of-the-flash-memory", "net: cas_n, pin: 52", "net: cas_n, pin: 48"),
    Case("pin-that-stays-open", "net: cas_n, pin: 52", "net: cas_n, pin: 76"),
    Case("pin-beyond-the-package", "net: cas_n, pin: 52", "net: cas_n, pin: 101"),
    Case("clock-on-a-plain-pin", "net: clk, pin: 15", "net: clk, pin: 16"),
    Case("place-that-is-none", "meets: U10-U17.4,", "meets: somewhere,"),
    Case("place-met-twice", "meets: X1.22", "meets: X1.21"),
    Case("wrong-pin-of-the-chip", "meets: U10-U17.15", "meets: X9.1"),
    Case(
        "designator-missing",
        "{translator: SN74LVC245A, designator: U24}]}\n  - {net: m1_n",
        "{translator: SN74LVC245A}]}\n  - {net: m1_n",
    ),
    Case("designator-that-is-none", "{buffer: SN74LS244, designator: U6}", "{buffer: SN74LS244, designator: ../U6}"),
    Case("package-with-two-names", "{buffer: SN74LS244, designator: U6}", "{buffer: SN74LS244, designator: U23}"),
    Case(
        "package-too-small",
        "{net: ma0, pin: 57, meets: U10-U17.5, through: [{buffer: SN74AHCT541, designator: U23}",
        "{net: ma0, pin: 57, meets: U10-U17.5, through: [{buffer: SN74LVC1G07, designator: U30}, "
        "{buffer: SN74LVC1G07, designator: U30}",
    ),
    Case("entry-of-two-kinds", _ENABLE, "{direct: 3.3 V, load: 45 pF}"),
    Case("entry-of-unknown-kind", _ENABLE, "{drect: 3.3 V}, {load: 45 pF}"),
    Case("load-in-the-middle", _ENABLE, "{load: 45 pF}, {direct: 3.3 V}"),
    Case("load-missing", _ENABLE, "{direct: 3.3 V}"),
    Case("load-of-a-bulk-capacitor", _ENABLE, "{direct: 3.3 V}, {load: 100000 pF}"),
    Case("load-below-the-chips", _RAS, _RAS.replace("90 pF", "40 pF")),
    Case("load-beyond-the-sheet", "designator: U6}, {load: 45 pF}", "designator: U6}, {load: 100 pF}"),
    Case("series-of-a-pull-up", _RAS, _RAS.replace("22 ohm", "4.7 kohm")),
    Case("wire-to-no-supply", _ENABLE, "{direct: 4 V}, {load: 45 pF}"),
    # --- levels
    Case("bus-line-straight-in", _MREQ, "{net: mreq_n, pin: 1, meets: X1.21, through: [{direct: 5 V}]}"),
    Case(
        "bus-line-through-a-5-v-buffer",
        _MREQ,
        "{net: mreq_n, pin: 1, meets: X1.21, through: [{buffer: SN74AHCT541, designator: U30}]}",
    ),
    Case(
        "translator-with-cmos-thresholds",
        _MREQ,
        _MREQ.replace("SN74LVC245A, designator: U24", "SN74LVC8T245-BA, designator: U34"),
    ),
    Case("strobe-straight-out", _RAS, _RAS.replace("{buffer: SN74AHCT541, designator: U22}", "{direct: 3.3 V}")),
    Case("wire-at-the-supply-of-the-other-side", _ENABLE, "{direct: 5 V}, {load: 45 pF}"),
    Case("bus-wire-at-3-v", "meets: U10-U17.2, through: [{direct: 5 V}", "meets: U10-U17.2, through: [{direct: 3.3 V}"),
    Case("buffer-in-a-memory-socket", "{buffer: SN74LS244, designator: U6}", "{buffer: SN74LS244, designator: U12}"),
    Case("revision-that-is-a-block", "revision: B", "revision: [B]"),
    Case("grant-master-of-another-kind", "master: silent", "master: refreshes"),
    Case("device-clock-missing", "  clock: {frequency: 100 MHz, tolerance: 50 ppm}\n", ""),
    Case(
        "bus-clock-missing",
        "  clock: {frequency: 4 MHz, tolerance: 100 ppm, duty: {min: 48 %, max: 52 %}, "
        "rise: {max: 10 ns}, fall: {max: 10 ns}}\n",
        "",
    ),
    Case("parts-list-with-a-block", "    - U3, the refresh counter", "    - {U3: the refresh counter}"),
    Case("net-of-nothing-like-it", "net: ras_n", "net: qqqq"),
    Case("oscillator-for-5-v", _CLK, _CLK.replace("3.3 V", "5 V")),
    # --- names
    Case("name-with-quotes", '"Loom card memory, 16 KB"', "'Loom \"card\"'"),
    Case("name-with-markup", '"Loom card memory, 16 KB"', '"<b>Loom</b>"'),
    Case("name-that-is-a-path", '"Loom card memory, 16 KB"', '"..-..-loom"'),
    Case("name-with-a-slash", '"Loom card memory, 16 KB"', '"boards/loom"'),
    Case("name-with-a-format", '"Loom card memory, 16 KB"', '"Loom 100%d"'),
    Case("name-with-a-line-end", '"Loom card memory, 16 KB"', '"Loom\\nendmodule"'),
    Case("name-that-is-a-verilog-word", '"Loom card memory, 16 KB"', "endmodule"),
    Case("name-that-is-empty", '"Loom card memory, 16 KB"', '""'),
    Case("name-without-end", '"Loom card memory, 16 KB"', f'"{"Loom " * 30}"'),
    Case("name-that-a-spreadsheet-runs", "revision: B", 'revision: "-1+1"'),
    Case("part-line-with-markup", "    - U3, the refresh counter", '    - "<script>U3</script>"'),
)
