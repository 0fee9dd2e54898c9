"""The network of promises: windows, terms, contradictions; judged by linear programming and another graph library."""

import random

import networkx
import numpy
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.optimize import linprog

from rowkeeper.reading.figures import Mark, Source, Window
from rowkeeper.timing.network import SAME, ContradictionError, Network, Promise, minus

SHEET = Source(Mark.SHEET, "a sheet", "p. 1")


def promise(lo: int | None, hi: int | None, name: str = "promise") -> Promise:
    return Promise(name, lo, hi, SHEET)


def chain(*spans: tuple[int | None, int | None]) -> Network:
    """Events 0, 1, 2, ... one promise apart."""
    network = Network()
    for i, (lo, hi) in enumerate(spans):
        network.promise(str(i), str(i + 1), promise(lo, hi, f"step {i}"))
    return network


def test_promises_in_a_row_add_up() -> None:
    """Two delays one after the other are the sum of their ends."""
    assert Window(3, 12) == chain((1, 5), (2, 7)).window("0", "2")


def test_a_direct_promise_tightens_the_sum() -> None:
    """A width beside two edges counts, not the edges alone."""
    network = chain((0, 85), (0, 85))
    network.promise("0", "2", promise(110, None, "width"))
    assert Window(110, 170) == network.window("0", "2")


def test_backwards_is_the_negative() -> None:
    """The window of b before a is that of a before b turned round."""
    network = chain((1, 5), (2, 7))
    assert Window(-12, -3) == network.window("2", "0")


def test_nothing_bounds_an_open_side() -> None:
    """A promise without a minimum leaves the earliest open."""
    network = chain((None, 5))
    assert (network.earliest("0", "1"), network.latest("0", "1").total_ps) == (None, 5)  # type: ignore[union-attr]


def test_terms_add_up_to_the_bound() -> None:
    """Each term is signed as it is added; the earliest of b - a takes the later way off."""
    network = Network()
    network.promise("clock", "strobe", promise(4, 26, "strobe path"))
    network.promise("clock", "address", promise(4, 25, "address path"))
    bound = network.earliest("address", "strobe")
    assert bound is not None
    assert {t.name: t.used_ps for t in bound.terms} == {"strobe path": 4, "address path": -25}
    assert bound.total_ps == -21


def test_the_lower_end_has_its_own_source() -> None:
    """A minimum nobody publishes is marked, and only where it is the end that counts."""
    unpublished = Source(Mark.UNPUBLISHED)
    network = Network()
    network.promise("a", "b", Promise("delay", 0, 9, SHEET, unpublished))
    early, late = network.earliest("a", "b"), network.latest("a", "b")
    assert early is not None
    assert late is not None
    assert [unpublished, SHEET] == [early.terms[0].source, late.terms[0].source]


def test_two_names_for_one_instant_are_no_term() -> None:
    """An alias costs nothing and is not shown."""
    network = chain((1, 5))
    network.promise("1", "other name", SAME)
    bound = network.latest("0", "other name")
    assert bound is not None
    assert [t.name for t in bound.terms] == ["step 0"]


def test_ticks_tell_how_a_bound_moves() -> None:
    """A counted span says what one more tick would add at the end that is used."""
    network = Network()
    network.promise("a", "b", Promise("4 ticks", 36, 44, SHEET, None, (("mux", 1),), 9, 11))
    early, late = network.earliest("a", "b"), network.latest("a", "b")
    assert early is not None
    assert late is not None
    assert [early.per_tick, late.per_tick] == [{"mux": 9}, {"mux": 11}]


def test_a_delay_taken_off_is_turned_round() -> None:
    """The difference of two delays uses the other end of the second."""
    assert (minus(promise(2, 9)).lo_ps, minus(promise(2, 9)).hi_ps) == (-9, -2)


def test_a_contradiction_is_shown_as_its_loop() -> None:
    """Promises that cannot all be kept are named with their sources."""
    network = chain((0, 5), (0, 5))
    network.promise("0", "2", promise(11, None, "width"))
    with pytest.raises(ContradictionError, match=r"step . \(a sheet p. 1\).*") as caught:
        network.check()
    assert caught.value.bound.total_ps == -1
    assert {"step 0", "step 1", "width"} == {t.name for t in caught.value.bound.terms}


def test_a_copy_can_grow_alone() -> None:
    """Cases of one scene share what comes before them and nothing after."""
    first = chain((0, 9))
    second = first.copy()
    second.promise("0", "1", promise(3, None))
    assert [Window(0, 9), Window(3, 9)] == [first.window("0", "1"), second.window("0", "1")]


def random_promises(seed: int) -> list[tuple[int, int, int | None, int | None]]:
    """Up to eight events and fourteen promises around a hidden schedule, a few of them too tight to keep."""
    rng = random.Random(seed)
    count = rng.randint(3, 8)
    times = [rng.randint(0, 100) for _ in range(count)]
    found = []
    for _ in range(rng.randint(count, 14)):
        a, b = rng.sample(range(count), 2)
        apart = times[b] - times[a] + (rng.randint(-20, 20) if rng.random() < 0.05 else 0)
        lo = apart - rng.randint(0, 30) if rng.random() < 0.8 else None
        hi = apart + rng.randint(0, 30) if rng.random() < 0.8 else None
        found.append((a, b, lo, hi))
    return found


def network_of(promises: list[tuple[int, int, int | None, int | None]]) -> Network:
    network = Network()
    for a, b, lo, hi in promises:
        network.promise(str(a), str(b), promise(lo, hi))
    return network


def inequalities(promises: list[tuple[int, int, int | None, int | None]]) -> tuple[numpy.ndarray, numpy.ndarray]:
    rows, limits = [], []
    for a, b, lo, hi in promises:
        for sign, limit in ((1, hi), (-1, None if lo is None else -lo)):
            if limit is not None:
                row = numpy.zeros(8)
                row[b] += sign
                row[a] -= sign
                rows.append(row)
                limits.append(limit)
    return numpy.array(rows).reshape(-1, 8), numpy.array(limits)


@pytest.mark.parametrize("batch", range(10))
def test_windows_agree_with_linear_programming(batch: int) -> None:
    """Outside judge: scipy's linear programming (HiGHS) on the same promises, 300 random networks in all."""
    for seed in range(batch * 30, batch * 30 + 30):
        promises = random_promises(seed)
        rows, limits = inequalities(promises)
        a, b = promises[0][0], promises[0][1]
        network = network_of(promises)
        for sign in (1, -1):
            cost = numpy.zeros(8)
            cost[b], cost[a] = -sign, sign
            answer = linprog(cost, A_ub=rows, b_ub=limits, bounds=[(None, None)] * 8)
            if answer.status == 2:
                with pytest.raises(ContradictionError):
                    network.check()
                continue
            network.check()
            bound = network.latest(str(a), str(b)) if sign == 1 else network.earliest(str(a), str(b))
            expected = None if answer.status == 3 else round(-sign * answer.fun)
            assert expected == (None if bound is None else bound.total_ps), seed


def test_contradictions_agree_with_another_graph_library() -> None:
    """Outside judge: networkx finds a negative loop in the same 300 networks or in none of them."""
    for seed in range(300):
        promises = random_promises(seed)
        graph = networkx.DiGraph()
        for a, b, lo, hi in promises:
            for start, end, weight in ((a, b, hi), (b, a, None if lo is None else -lo)):
                if weight is not None and weight < graph.get_edge_data(start, end, {"weight": 10**9})["weight"]:
                    graph.add_edge(start, end, weight=weight)
        expected = networkx.negative_edge_cycle(graph)
        try:
            network_of(promises).check()
            found = False
        except ContradictionError as error:
            found = error.bound.total_ps < 0
        assert expected == found, seed


@given(st.integers(0, 10_000), st.integers(0, 7), st.integers(0, 7), st.integers(0, 40))
def test_one_more_promise_never_widens_a_window(seed: int, a: int, b: int, width: int) -> None:
    """Whatever is promised besides, a window only grows tighter."""
    network = network_of(random_promises(seed))
    start, end = str(a), str(b)
    if a == b or not network.holds(start, end):
        return
    try:
        network.check()
        before = network.window(start, end)
        more = network.copy()
        more.promise(start, end, promise(None, width))
        more.check()
    except ContradictionError:
        return
    after = more.window(start, end)
    assert after.hi_ps is not None
    assert before.hi_ps is None or after.hi_ps <= before.hi_ps
    assert before.lo_ps is None or (after.lo_ps is not None and after.lo_ps >= before.lo_ps)
