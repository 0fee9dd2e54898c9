"""A copy of a good board, changed to something that cannot work, gives a sentence an engineer can act on."""

from pathlib import Path

import pytest

from rowkeeper import cli

BOARDS = Path(__file__).parents[2] / "boards"


def run(capsys: pytest.CaptureFixture[str], *arguments: str) -> tuple[int, str, str]:
    with pytest.raises(SystemExit) as stop:
        cli.main(arguments)
    out, err = capsys.readouterr()
    return int(stop.value.code or 0), out, err


def changed(folder: Path, old: str, new: str) -> str:
    text = (BOARDS / "loom-16k.yaml").read_text(encoding="utf-8")
    assert old in text
    path = folder / "loom-16k.yaml"
    path.write_text(text.replace(old, new, 1), encoding="utf-8")
    return str(path)


WORKED_OUT = [
    ("clock: {frequency: 4 MHz", "clock: {frequency: 4.5 MHz", "TcC (bus clock)", "27.8 ns short"),
    ("{min: 48 %, max: 52 %}", "{min: 40 %, max: 60 %}", "TwCh (bus clock)", "20.0 ns short"),
    ("rise: {max: 10 ns}", "rise: {max: 40 ns}", "TrC (bus clock)", "10.0 ns too long"),
    ("frequency: 100 MHz", "frequency: 50 MHz", "tCAC (opcode fetch)", "short"),
    ("chip: 4116-15", "chip: 4116-20", "tRAC (opcode fetch)", "short"),
    ("wait: {max: 0 ns}", "wait: {max: 12 us}", "tCAS (any access)", "too long"),
    # 2 ticks of 9.999, 1.0 at least for the address; the row strobe 4.1 + 6.11 + 9.5 + 3.44 + 1.93 x 22 ohm x 90 pF at
    # most: -5.97 ns where 20 are asked.
    ("strobes: auto", "strobes: {mux: 2, column: 3}", "tRAH (any access)", "26.0 ns short"),
    ("strobes: auto", "strobes: {style: straight}", "strobe style straight", "counted"),
]


@pytest.mark.parametrize(("old", "new", "limit", "amount"), WORKED_OUT)
def test_design_that_cannot_work(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], old: str, new: str, limit: str, amount: str
) -> None:
    """Exit 1; the limit is named, and by how much it is missed."""
    code, out, _ = run(capsys, "generate", changed(tmp_path, old, new), "--out", str(tmp_path / "out"), "--quiet")
    sentence = next(line for line in out.splitlines() if line.startswith(f"refused: {limit}"))
    assert code == 1
    assert amount in sentence
    assert not (tmp_path / "out").exists()


def test_grant_without_notice(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Without BUSREQ a refresh of our own can run into the access after a grant; the mending wire is named."""
    text = (BOARDS / "loom-16k.yaml").read_text(encoding="utf-8")
    line = next(line for line in text.splitlines() if "net: busreq_n" in line)
    code, out, _ = run(capsys, "generate", changed(tmp_path, line, ""), "--out", str(tmp_path / "out"), "--quiet")
    assert code == 1
    assert "refused: end of a grant: after BUSACK rising (BUSREQ is not wired)" in out
    assert "wire BUSREQ to the device" in out


@pytest.mark.parametrize(
    ("symbol", "old", "new", "limit"),
    [
        ("tRAH", "tRAH: {min: [20 ns", "tRAH: {min: [90 ns", "tRAH"),
        ("interval", "interval: 2 ms", "interval: 200 us", ""),
    ],
)
def test_own_chip_file_beside_the_board(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], symbol: str, old: str, new: str, limit: str
) -> None:
    """A chip file beside the board takes the place of the catalogue's, and its figures decide."""
    catalogue = Path(__file__).parents[2] / "gen" / "rowkeeper" / "catalog" / "chips"
    text = next(t for path in sorted(catalogue.glob("*.yaml")) if "4116-15" in (t := path.read_text(encoding="utf-8")))
    assert old in text, symbol
    (tmp_path / "chips").mkdir()
    (tmp_path / "chips" / "mine.yaml").write_text(text.replace(old, new), encoding="utf-8")
    board = changed(tmp_path, "revision: B", "revision: C")
    code, out, _ = run(capsys, "generate", board, "--out", str(tmp_path / "out"), "--quiet")
    assert code == 1
    assert any(line.startswith("refused: ") and limit in line for line in out.splitlines())


WRONG = [
    ("max: 100 us", "max: 100 nS", ":12:18: `nS` is not a unit of time"),
    ("net: ras_n, pin: 51", "net: ras_n, pin: 52", "pin 52 is used twice"),
    ("net: ras_n, pin: 51", "net: ras_n, pin: 6", "pin 6 (VCCIO_3) is a supply pin"),
    ("net: busreq_n, pin: 7", "net: busreq_n, pin: 5", "pin 5 (GND) is a ground pin"),
]


@pytest.mark.parametrize(("old", "new", "message"), WRONG)
def test_board_file_that_is_wrong(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], old: str, new: str, message: str
) -> None:
    """Exit 2; nothing on stdout; the place, the line and the fix on stderr."""
    code, out, err = run(capsys, "generate", changed(tmp_path, old, new), "--out", str(tmp_path / "out"))
    assert (code, out) == (2, "")
    assert message in err
    assert "fix: " in err
    assert not (tmp_path / "out").exists()


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        (("margins", "no-such-file.yaml"), "no-such-file.yaml"),
        (("parts", "no-such-part"), "the catalogue has no 'no-such-part'"),
        (("margins",), "Missing argument"),
        (("bake", "cake"), "No such command"),
        (("simulate", "x.yaml", "--seed", "0"), "--seed"),
    ],
)
def test_call_that_is_wrong(capsys: pytest.CaptureFixture[str], arguments: tuple[str, ...], message: str) -> None:
    """Exit 2, and a line that says what is wrong."""
    code, out, err = run(capsys, *arguments)
    assert (code, out) == (2, "")
    assert message in err


def test_unknown_limit(capsys: pytest.CaptureFixture[str]) -> None:
    """`--explain` of a limit that is not there lists those that are."""
    code, _, err = run(capsys, "margins", str(BOARDS / "loom-16k.yaml"), "--explain", "tXX", "--quiet")
    assert code == 2
    assert "tRAH" in err


def test_bug_of_ours(capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch) -> None:
    """An exception is our own bug: exit 4, one line, no traceback."""
    from rowkeeper.run import commands

    monkeypatch.setattr(commands, "parts", lambda *_: 1 / 0)
    code, _, err = run(capsys, "parts")
    assert code == 4
    assert err.startswith("rowkeeper: a bug of ours: ZeroDivisionError in test_impossible_boards.py:")
    assert err.count("\n") == 1
