"""The engine on a two-bit counter: what is proved, refused, found and replayed."""

import pytest

from judging.claims.graphs import counter, latch, toggle
from rowkeeper.judging.proof.abc import pdr, search
from rowkeeper.judging.proof.aiger import read_aiger, reduced, write_aiger
from rowkeeper.judging.proof.certificate import CertificateError, certify
from rowkeeper.judging.proof.formula import Frames
from rowkeeper.judging.proof.induction import induct
from rowkeeper.judging.proof.simulate import from_state, idle_row, replay, state_after
from rowkeeper.judging.proof.trace import as_words, vcd_text

INVARIANT = "# Inductive invariant\n.i 2\n.o 1\n.ilb lo0 lo1\n.ob inv\n11 1\n.e\n"


def _claim(name: str) -> dict[str, int]:
    return {name: counter().output(name)}


def test_a_written_file_is_read_back() -> None:
    """Inputs, next states, gates and bad states survive; the format is that of the AIGER report."""
    graph = counter()
    back = read_aiger(write_aiger(graph, [26], [2]))
    gates = tuple((max(pair), min(pair)) for pair in graph.gates)
    assert (graph.inputs, graph.nexts, gates) == (back.inputs, back.nexts, back.gates)
    assert (back.bads, back.constraints) == ((26,), (2,))


def test_other_formats_are_refused() -> None:
    """The ASCII variant, and a latch that does not start at 0."""
    with pytest.raises(ValueError, match="not a binary AIGER file"):
        read_aiger(b"aag 0 0 0 0 0\n")
    with pytest.raises(ValueError, match="does not start at 0"):
        read_aiger(b"aig 1 0 1 0 0\n2 1\n")


def test_an_inductive_assertion_is_proved() -> None:
    """State 3 has no predecessor but itself."""
    assert induct(counter(), _claim("claim_never_three"), []) is None


def test_a_false_assertion_is_named() -> None:
    """State 2 is reached from state 1, and the step says so."""
    step = induct(counter(), _claim("claim_never_two"), [])
    assert step is not None
    assert (step.where, step.broken) == ("step", ("claim_never_two",))


def test_an_assertion_false_at_the_start_is_named() -> None:
    """What is 0 in the first tick fails there."""
    step = induct(toggle(), {"q": 2}, [])
    assert step is not None
    assert step.where == "start"


def test_an_assumption_is_used() -> None:
    """With the input low for ever the counter never leaves 0, but only with the helper that it is 0."""
    asserted = {"claim": counter().output("claim_never_two"), "lemma": latch(counter(), 0) ^ 1}
    assert induct(counter(), asserted, [2 ^ 1]) is None
    assert induct(counter(), asserted, []) is not None


def test_z3_tells_true_from_false() -> None:
    """The solver behind every verdict: a contradiction has no model, a free choice has one."""
    frames = Frames(toggle(), [2])
    a = frames.new()
    frames.require(a)
    model = frames.solve()
    assert model is not None
    assert model.value(a)
    frames.require(-a)
    assert frames.solve() is None


def test_a_good_certificate_counts_its_clauses() -> None:
    """One clause: never both bits."""
    assert certify(counter(), INVARIANT, [26], []) == 1


def test_clauses_of_the_last_timeframe_are_no_proof() -> None:
    """The header that PDR leaves when it ran out of time."""
    text = INVARIANT.replace("# Inductive invariant", '# Clauses of the last timeframe for "graph"')
    with pytest.raises(CertificateError, match="no invariant"):
        certify(counter(), text, [26], [])


@pytest.mark.parametrize(
    ("cube", "why"),
    [("-0", "does not hold at the start"), ("-1", "leads out of the invariant"), ("1", "wrong length")],
)
def test_a_broken_certificate_is_refused(cube: str, why: str) -> None:
    """A clause that is false at the start, one that is not kept, a line that does not fit."""
    with pytest.raises(CertificateError, match=why):
        certify(counter(), INVARIANT.replace("11 1", f"{cube} 1"), [26], [])


def test_a_certificate_that_allows_the_bad_state_is_refused() -> None:
    """An invariant of nothing at all."""
    with pytest.raises(CertificateError, match="holds a bad state"):
        certify(counter(), INVARIANT.replace("11 1\n", ""), [26], [])


def test_an_unknown_latch_is_refused() -> None:
    """A file for another graph."""
    with pytest.raises(CertificateError, match="not in the graph"):
        certify(counter(), INVARIANT.replace("lo1", "lo7"), [26], [])


def test_pdr_finds_an_invariant_that_z3_confirms() -> None:
    """Bad: the toggle is 1 in two ticks running (by a second latch that remembers)."""
    answer = pdr(counter(), [26], [], 10)
    assert answer.invariant is not None
    assert certify(counter(), answer.invariant, [26], []) >= 1


def test_a_search_finds_the_shortest_way() -> None:
    """State 2 after two ticks with the input high; the replay shows it in the third."""
    graph = counter()
    answer = search(graph, [graph.output("claim_never_two") ^ 1], [], 10, 10)
    assert answer.trace is not None
    seen = [values["claim_never_two"] for values in replay(graph, answer.trace)]
    assert seen == [True, True, False]


def test_a_search_without_a_find_says_nothing() -> None:
    """No trace is no proof: the answer is empty."""
    answer = search(counter(), [26], [], 10, 10)
    assert (answer.trace, answer.invariant) == (None, None)


def test_a_late_start_is_a_reachable_state() -> None:
    """After one tick with the input high the graph starts at 1, and the claim breaks one tick later."""
    graph = counter()
    state = state_after(graph, "1", 1)
    assert state == [1, 0]
    late = from_state(graph, state)
    assert [values["claim_never_two"] for values in replay(late, ["1", "1"])] == [True, False]


def test_a_reduced_graph_keeps_its_claims() -> None:
    """Only what the claim depends on is left, and it is still proved."""
    graph = counter()
    small = reduced(graph, [graph.output("claim_never_three")])
    assert induct(small, {"c": small.output("claim_never_three")}, []) is None
    assert small.latches == 2
    assert reduced(toggle(), []).latches == 0


def test_lines_at_rest_are_high() -> None:
    """Active-low lines rest at 1, `late` bits and addresses at 0."""
    assert idle_row(counter()) == "0"


def test_a_trace_is_a_wave_file() -> None:
    """Vectors are put together, only changes are written, no date and no tool."""
    ticks = [{"a": True, "b[0]": True, "b[1]": False}, {"a": True, "b[0]": False, "b[1]": True}]
    assert as_words(ticks[0]) == {"a": (1, 1), "b": (2, 1)}
    text = vcd_text(ticks, "shown")
    assert '$var wire 2 " b [1:0] $end' in text
    assert text.endswith('#0\n1!\nb1 "\n#1\nb10 "\n#2\n')
    assert "date" not in text
