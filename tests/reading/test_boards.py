"""The shipped boards, typed; overrides and digests; the schema; random damage."""

import json
from fractions import Fraction
from importlib import resources
from pathlib import Path

import jsonschema
import pytest
import yaml
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from rowkeeper.reading import read_board, read_board_text
from rowkeeper.reading.board import Board
from rowkeeper.reading.problems import Problems, Refused
from rowkeeper.reading.tree import Block, Listing, Node, Scalar, read_tree

BOARDS = Path(__file__).parents[2] / "boards"
LOOM = (BOARDS / "loom-16k.yaml").read_bytes()
SCHEMA = json.loads((resources.files("rowkeeper") / "catalog" / "board.schema.json").read_text(encoding="utf-8"))


def loom() -> Board:
    return read_board(BOARDS / "loom-16k.yaml")


def test_loom() -> None:
    """What the loom's file says, typed and exact."""
    board = loom()
    assert (board.file, board.slug, board.revision) == ("loom-16k.yaml", "loom-16k", "B")
    assert board.bus_clock.frequency_hz == 4_000_000
    assert (Fraction(12, 25), Fraction(13, 25)) == (board.bus_clock.duty_min, board.bus_clock.duty_max)
    assert (board.at_worst.grant_max_ps, board.at_worst.reset_max_ps) == (100_000_000, None)
    assert (board.at_worst.wait_max_ps, board.at_worst.reset_aligned) == (0, False)
    assert board.at_worst.power_on_reset_min_ps == 250 * 10**9
    (bank,) = board.banks
    assert (bank.chip.name, bank.chips, bank.base, bank.size) == ("4116-15", 8, 0xC000, 16384)
    assert board.device_clock.frequency_hz == 100_000_000
    assert board.strobes.mux is None


def test_kiln() -> None:
    """What the kiln's file says."""
    board = read_board(BOARDS / "kiln-64k.yaml")
    (bank,) = board.banks
    assert (bank.chip.name, bank.base, bank.size, bank.chip.refresh_rows) == ("4164-15-256row", 0, 65536, 256)
    assert board.grade.name == "2.5 MHz"
    assert board.at_worst.grant_max_ps == 20_000_000


def test_wiring_of_the_loom() -> None:
    """Every net with its path, in file order, path nets without a pin."""
    nets = {net.name: net for net in loom().wiring.nets}
    assert len(nets) == 38
    assert [element.kind for element in nets["ras_n"].through] == ["part", "series", "load"]
    assert nets["ras_n"].through[1].series_milliohm == 22_000
    assert nets["ras_n"].through[2].load_ff == 90_000
    assert (nets["data_out"].pin, nets["data_out"].side) == ("", "path")
    assert {net.side for net in nets.values() if net.pin} == {"input", "output"}


def test_every_value_has_its_place() -> None:
    """Dotted names lead to line and column."""
    board = loom()
    lines = LOOM.decode().split("\n")
    for name in ("bus.clock.frequency", "memory.0.window.base", "wiring.3.pin", "refresh.standby"):
        place = board.places[name]
        assert lines[place.line - 1][place.column - 1 :].startswith(place.raw)


def test_the_same_board_without_busreq() -> None:
    """BUSREQ may stay unwired; the board is read, and simply has no such net."""
    text = b"".join(line for line in LOOM.splitlines(keepends=True) if b"net: busreq_n" not in line)
    board = read_board_text(text, "loom-16k.yaml", None)
    assert "busreq_n" not in {net.name for net in board.wiring.nets}


def test_no_folder_leaks_into_the_board(tmp_path: Path) -> None:
    """The same bytes in another folder give the same board but for the places, which name the file as it was given."""
    other = tmp_path / "a folder é" / "loom-16k.yaml"
    other.parent.mkdir()
    other.write_bytes(LOOM)
    assert loom().digest == read_board(other).digest
    assert read_board(other).file == "loom-16k.yaml"


def test_ticks_given_by_hand() -> None:
    """Some given, the others free."""
    text = LOOM.replace(b"strobes: auto", b"strobes: {style: counted, mux: 4, column: auto}")
    ticks = read_board_text(text, "loom-16k.yaml", None).strobes
    assert (ticks.style, ticks.mux, ticks.column, ticks.row_end) == ("counted", 4, None, None)


# --- overrides and digest ----------------------------------------------------------------------------------------


def beside(tmp_path: Path, old: str, new: str) -> Board:
    """The loom with its own chip table beside it."""
    (tmp_path / "chips").mkdir()
    table = (resources.files("rowkeeper") / "catalog" / "chips" / "4116.yaml").read_text(encoding="utf-8")
    assert old in table
    (tmp_path / "chips" / "mine.yaml").write_text(table.replace(old, new), encoding="utf-8")
    (tmp_path / "loom-16k.yaml").write_bytes(LOOM)
    return read_board(tmp_path / "loom-16k.yaml")


def test_a_file_beside_the_board_comes_first(tmp_path: Path) -> None:
    """The owner's own table is used, and the board says so."""
    board = beside(tmp_path, "tRAH: {min: [20 ns, 25 ns]}", "tRAH: {min: [22 ns, 25 ns]}")
    assert board.banks[0].chip.limits["tRAH"].lo_ps == 22_000
    assert board.overrides == ("4116-15 (chips/mine.yaml)",)
    assert loom().overrides == ()
    assert board.digest != loom().digest


def test_a_wrong_file_beside_the_board_is_refused_there(tmp_path: Path) -> None:
    """Catalogue files are read as strictly as board files, with their own places."""
    with pytest.raises(Refused) as caught:
        beside(tmp_path, "tRAH: {min: [20 ns, 25 ns]}", "tRAH: {min: [20, 25 ns]}")
    (problem, *_) = caught.value.problems
    assert Path(problem.at.file).name == "mine.yaml"
    assert problem.message == "this time has no unit"


@pytest.mark.parametrize(
    ("old", "new", "message"),
    [
        ("kind: chip", "kind: bus", "this folder holds files of kind chip"),
        ("min: [100 ns, 120 ns]", "min: [100 ns]", "tRP min has 1 values for 2 columns"),
        ("tRP: {min:", "tRP: {typical:", "tRP has no key `typical`"),
        ("source: practice}", "source: hearsay}", "`hearsay` is not a known source of this file"),
        ("{mark: memory}", "{mark: sheet}", "this source names no document"),
        ("tOFF: {min: 0 ns,", "tOFF: {min: 90 ns,", "tOFF: min 90 ns is over max 40 ns"),
        ("column_sources: [sheet, sheet]", "column_sources: [sheet]", "1 sources for 2 columns"),
    ],
)
def test_wrong_catalogue_files(tmp_path: Path, old: str, new: str, message: str) -> None:
    """One mistake in a table is named with its message."""
    with pytest.raises(Refused) as caught:
        beside(tmp_path, old, new)
    assert message in [problem.message for problem in caught.value.problems]


OWN_FILES = [
    # kind, shipped file, text, exchanged for, message
    ("buses", "m1-refresh", "TwCh + TfC - 75 ns,", "TwCx + TfC,", "`TwCx + TfC` is not a sum of clock terms"),
    ("buses", "m1-refresh", "assumptions:\n", "assumptions: none\nnotes:\n", "`assumptions` must be a block of keys"),
    ("buses", "m1-refresh", "figures:\n", "figures: none\nnotes:\n", "a table must be a block of keys"),
    ("buses", "m1-refresh", "formulas:\n", "formulas: none\nnotes:\n", "`formulas` must be a block of keys"),
    ("buses", "m1-refresh", "sources:\n", "sources: none\nnotes:\n", "`sources` must be a block of keys"),
    ("buses", "m1-refresh", "ThD: {min: 0 ns, note:", "ThD: {note:", "ThD has neither min nor max"),
    ("devices", "ice40hx1k-vq100", "{pin: 2, name", "{pin: 1, name", "pin 1 stands twice"),
    ("devices", "ice40hx1k-vq100", "pins: 100}", "pins: 99}", "100 pins listed, the package has 99"),
    ("devices", "ice40hx1k-vq100", "role: io, bank: \"2\"}\n  - {pin: 27", "role: bus}\n  - {pin: 27",
     "`bus` is not a known pin role"),
    ("devices", "ice40hx1k-vq100", "  output_pad:", "  outputpad:", "the figure `output_pad` is missing"),
    ("devices", "ice40hx1k-vq100", "family: ice40", "family: ice50", "`ice50` is not a known device family"),
    ("parts", "SN74LS244", "role: buffer", "role: latch", "`latch` is not a known role"),
    ("parts", "SN74LS244", "channels: 8", "channels: -8", "`-8` is not a whole number"),
    ("parts", "SN74LS244", "supply: {nominal: 5 V, max: 5.25 V}", "supply: 5 V", "`supply` must be a block of keys"),
]  # fmt: skip


@pytest.mark.parametrize(("kind", "file", "old", "new", "message"), OWN_FILES, ids=[row[4] for row in OWN_FILES])
def test_wrong_files_of_every_kind(tmp_path: Path, kind: str, file: str, old: str, new: str, message: str) -> None:
    """Bus, device and part files beside a board are refused with the place of the mistake."""
    text = (resources.files("rowkeeper") / "catalog" / kind / f"{file}.yaml").read_text(encoding="utf-8")
    assert text.count(old) == 1
    (tmp_path / kind).mkdir()
    (tmp_path / kind / f"{file}.yaml").write_text(text.replace(old, new), encoding="utf-8")
    with pytest.raises(Refused) as caught:
        read_board_text(LOOM, "loom-16k.yaml", tmp_path)
    assert message in [problem.message for problem in caught.value.problems]
    assert {Path(problem.at.file).parent.name for problem in caught.value.problems} == {kind}


def test_digest_sees_every_byte() -> None:
    """Even a comment changes the digest: it is a digest of the file, not of its meaning."""
    changed = read_board_text(LOOM + b"# more\n", "loom-16k.yaml", None)
    assert changed.digest != loom().digest
    assert len(changed.digest) == 64


# --- the schema for editors --------------------------------------------------------------------------------------


def as_text(node: Node) -> object:
    """The tree with every scalar as text, as our reader sees it."""
    if isinstance(node, Scalar):
        return node.text
    if isinstance(node, Listing):
        return [as_text(item) for item in node.items]
    return {key.text: as_text(value) for key, value in node.entries}


@pytest.mark.parametrize("name", ["loom-16k", "kiln-64k"])
def test_schema_accepts_the_boards(name: str) -> None:
    """Both as an editor types the values and as text."""
    jsonschema.Draft202012Validator.check_schema(SCHEMA)
    text = (BOARDS / f"{name}.yaml").read_text(encoding="utf-8")
    root = read_tree(text, name, Problems())
    assert isinstance(root, Block)
    jsonschema.validate(yaml.safe_load(text), SCHEMA)
    jsonschema.validate(as_text(root), SCHEMA)


def every_block(value: object) -> list[dict[str, object]]:
    if isinstance(value, dict):
        return [value, *(b for v in value.values() for b in every_block(v))]
    return [b for v in value for b in every_block(v)] if isinstance(value, list) else []


def test_schema_rejects_unknown_keys() -> None:
    """In every kind of block of the file, a kind being its set of keys."""
    validator = jsonschema.Draft202012Validator(SCHEMA)
    kinds = {tuple(block): number for number, block in enumerate(every_block(yaml.safe_load(LOOM)))}
    assert len(kinds) > 20
    for kind, number in kinds.items():
        document = yaml.safe_load(LOOM)
        every_block(document)[number]["unheard_of"] = "1"
        assert not validator.is_valid(document), kind


@pytest.mark.parametrize(
    ("old", "new"),
    [
        (b"rise: {max: 10 ns}", b"rise: {max: 10}"),
        (b"rise: {max: 10 ns}", b"rise: {max: 10 nS}"),
        (b"standby: own-timer", b"standby: mine"),
        (b"net: ras_n", b"net: wire"),
        (b"meets: U10-U17.4", b"meets: somewhere"),
        (b"{direct: 3.3 V}, {load: 10 pF}", b"{direct: 3.3 V, load: 10 pF}"),
        (b'"Loom card memory, 16 KB"', b'"<b>Loom</b>"'),
    ],
)
def test_schema_rejects_what_the_reader_rejects(old: bytes, new: bytes) -> None:
    """An editor marks the commonest mistakes before we do."""
    with pytest.raises(jsonschema.ValidationError):
        jsonschema.validate(yaml.safe_load(LOOM.replace(old, new)), SCHEMA)


# --- random damage -----------------------------------------------------------------------------------------------


def outcome(data: bytes) -> None:
    """A board, or a refusal whose every problem can be shown. Anything else fails the test."""
    try:
        read_board_text(data, "loom-16k.yaml", None)
    except Refused as refused:
        shown = str(refused)
        if "fix: " not in shown or not shown.startswith("loom-16k.yaml"):
            pytest.fail(shown)


DAMAGE = settings(max_examples=25, deadline=None, suppress_health_check=[HealthCheck.too_slow])


@DAMAGE
@given(st.integers(0, len(LOOM) - 1), st.integers(0, 255))
def test_one_byte_changed(place: int, byte: int) -> None:
    """Any byte in any place."""
    outcome(LOOM[:place] + bytes([byte]) + LOOM[place + 1 :])


@DAMAGE
@given(st.integers(0, len(LOOM)), st.integers(0, 400))
def test_a_piece_deleted(start: int, length: int) -> None:
    """Any piece cut out."""
    outcome(LOOM[:start] + LOOM[start + length :])


@DAMAGE
@given(st.data())
def test_lines_exchanged(data: st.DataObject) -> None:
    """Any two lines change places."""
    lines = LOOM.split(b"\n")
    i, j = (data.draw(st.integers(0, len(lines) - 1)) for _ in range(2))
    lines[i], lines[j] = lines[j], lines[i]
    outcome(b"\n".join(lines))


@DAMAGE
@given(st.data())
def test_values_exchanged(data: st.DataObject) -> None:
    """Any two words change places: the shape stays right, the meaning does not."""
    words = LOOM.split(b" ")
    i, j = (data.draw(st.integers(0, len(words) - 1)) for _ in range(2))
    words[i], words[j] = words[j], words[i]
    outcome(b" ".join(words))


@DAMAGE
@given(st.binary(max_size=300))
def test_any_bytes(data: bytes) -> None:
    """Bytes that never were a board."""
    outcome(data)
