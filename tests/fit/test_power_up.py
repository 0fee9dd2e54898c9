"""From power to valid strobes."""

from dataclasses import replace

from fit.boards import TICKS, board
from rowkeeper.fit.power_up import power_up


def test_the_sum_holds_configuration_pause_and_warm_up() -> None:
    """53 ms of configuration, 20,000 ticks of 10 ns at 50 ppm slow, and eight refreshes."""
    found = power_up(board(), TICKS)
    assert [term.used_ps for term in found.terms[:2]] == [53_000_000_000, 200_010_001]
    assert sum(term.used_ps for term in found.terms) == found.total_ps
    assert found.reset_min_ps - found.total_ps == found.margin_ps


def test_a_typical_figure_never_decides_in_our_favour() -> None:
    """Short enough with the typical figure is not proved, and says so."""
    found = power_up(board(), TICKS)
    assert not found.exceeds
    assert found.remark.startswith("not proved: the configuration time is typical only")


def test_a_reset_shorter_than_even_the_typical_sum_fails() -> None:
    """A machine that starts after 10 ms cannot wait for 53 ms of configuration."""
    whole = board()
    hasty = replace(whole, at_worst=replace(whole.at_worst, power_on_reset_min_ps=10_000_000_000))
    found = power_up(hasty, TICKS)
    assert found.exceeds
    assert found.remark.startswith("too long even with the typical figure")
    assert found.margin_ps < 0
