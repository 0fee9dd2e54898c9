"""The numbers of the bench against sums done by hand."""

import pytest

from judging.bench.handmade import LOOM_DESIGN, kiln, kiln_design, loom, loom_windows, windows_for
from rowkeeper.judging.bench.parameters import NO_LIMIT, parameters_of

LOOM = parameters_of(loom(), LOOM_DESIGN, loom_windows())
KILN = parameters_of(kiln(), kiln_design(), windows_for(kiln_design()))


def test_the_widths_of_the_table_follow_the_real_clock() -> None:
    """4 MHz, duty at least 48 %: TwCh + TfC - 20 = 0.48 x 250 - 20 = 100 ns, less what 100 ppm take."""
    assert 99_980 <= LOOM["TwMREQh"] <= 100_000
    assert 219_970 <= LOOM["TwMREQl"] <= 220_000


def test_bus_figures_are_even_and_inside_the_table() -> None:
    """Device clock edges are odd, so no two of them ever meet."""
    assert (LOOM["TdCr_A_LO"], LOOM["TdCr_A_HI"]) == (0, 110_000)
    assert all(low % 2 == 0 and high % 2 == 0 for low, high in LOOM.inputs)


def test_periods_stay_within_the_tolerance() -> None:
    """100 MHz at 50 ppm: 9,999,500.02 to 10,000,500.02 fs, rounded inwards."""
    assert (LOOM["DEVICE_FAST_FS"], LOOM["DEVICE_SLOW_FS"]) == (9_999_501, 10_000_500)


def test_limits_are_those_of_the_chip() -> None:
    assert (LOOM["LIMIT_tASC"], LOOM["LIMIT_tCAS_max"], LOOM["LIMIT_tRRH"]) == (-10_000, 10_000_000, NO_LIMIT)


def test_code_runs_outside_the_window_where_there_is_room() -> None:
    assert (LOOM["CODE_BASE"], LOOM["CODE_SIZE"]) == (0, 4096)
    assert (KILN["CODE_BASE"], KILN["CODE_SIZE"]) == (0, 4)


@pytest.mark.parametrize(("board", "rows", "size"), [(LOOM, 128, 16_384), (KILN, 256, 65_536)])
def test_sizes(board: object, rows: int, size: int) -> None:
    values = LOOM if board is LOOM else KILN
    assert (values["ROWS"], values["WINDOW_SIZE"]) == (rows, size)


def test_the_long_pause_is_longer_than_the_refresh_interval() -> None:
    assert LOOM["IDLE_PS"] > LOOM["REFRESH_PS"]
    assert KILN["IDLE_PS"] > KILN["REFRESH_PS"]


def test_the_long_reset_lasts_fifty_milliseconds() -> None:
    assert LOOM["LONG_RESET_PS"] == 50 * 10**9


def test_the_longest_grant_fits_the_board_file() -> None:
    """100 us at 4 MHz are 400 clocks, of which two go with asking and leaving."""
    assert LOOM["GRANT_CLOCKS"] == 398
    assert KILN["GRANT_CLOCKS"] == 48
