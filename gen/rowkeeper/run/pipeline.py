"""The whole line: board, plan, logic, fit, plan again, proofs, bench.

Takes a typed board; gives a `Work` that grows from step to step. Fitting feeds back: the plan is judged again with the
routed delays, and made again where they break it, at most three rounds. Must not know any rule of the trade.
"""

from collections.abc import Callable, Mapping
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass, replace
from typing import Literal

from rowkeeper.contract import (
    BenchOutcome,
    ClaimOutcome,
    Delays,
    Design,
    Finding,
    FitOutcome,
    Plan,
    Status,
    Verdict,
)
from rowkeeper.fit.fitting import fit
from rowkeeper.fit.power_up import power_up
from rowkeeper.judging.bench.compiled import BuildError, CompiledBench, build
from rowkeeper.judging.bench.icarus import agree, build_icarus
from rowkeeper.judging.bench.outcome import not_run
from rowkeeper.judging.bench.scenario import CORNERS, scenarios
from rowkeeper.judging.claims.bounds import Bounds
from rowkeeper.judging.claims.catalogue import claims
from rowkeeper.judging.claims.proving import ShortTexts, prove_all
from rowkeeper.judging.claims.short import shortened
from rowkeeper.judging.level_verdict import level_findings
from rowkeeper.judging.verdict import bench_findings, claim_findings, fit_findings, plan_findings, verdict_of
from rowkeeper.logic.emit import rtlil_text
from rowkeeper.logic.invariants import probe_text
from rowkeeper.logic.replacement import ports_of
from rowkeeper.logic.spoiled import variants
from rowkeeper.logic.verilog import verilog_text
from rowkeeper.reading.board import Board
from rowkeeper.reading.figures import Window
from rowkeeper.run.progress import Progress
from rowkeeper.timing.bus_in_ticks import bus_in_ticks
from rowkeeper.timing.levels import levels_of
from rowkeeper.timing.paths import default_delays, net_windows
from rowkeeper.timing.plan import design_of, judge, settle
from rowkeeper.tools import TimedOut, ToolMissing, available

__all__ = ["Subject", "Work", "benched", "fitted", "planned", "proved", "verdict"]

Subject = Literal["logic", "netlist"]
_ROUNDS = 3


@dataclass(frozen=True, slots=True)
class Work:
    """What has been found so far for one board."""

    board: Board
    plan: Plan
    design: Design
    rtlil: str
    fit: FitOutcome | None = None
    claims: tuple[ClaimOutcome, ...] = ()
    bench: tuple[BenchOutcome, ...] = ()

    @property
    def subjects(self) -> Mapping[Subject, str]:
        """What is judged: the logic, and the routed netlist once there is one."""
        netlist: dict[Subject, str] = {}
        if self.fit is not None and self.fit.netlist_rtlil:
            netlist["netlist"] = self.fit.netlist_rtlil
        return {"logic": self.rtlil, **netlist}

    @property
    def windows(self) -> Mapping[str, Window]:
        """Total delay of every net, with the router's figures once there are any."""
        return net_windows(self.board, self.delays)

    @property
    def delays(self) -> Delays:
        """The router's delays, or those assumed before routing."""
        if self.fit is not None and self.fit.delays is not None:
            return self.fit.delays
        return default_delays(self.board)


def planned(board: Board, progress: Progress) -> Work:
    """Choose the ticks with the delays assumed before routing."""
    with progress.step("plan"):
        return _with_plan(board, settle(board, default_delays(board)))


def _with_plan(board: Board, plan: Plan) -> Work:
    design = design_of(board, plan.ticks)
    return Work(board, plan, design, rtlil_text(design))


def fitted(work: Work, progress: Progress) -> Work:
    """Place and route; judge the plan with the routed delays; plan again where they break it."""
    with progress.step("fit"):
        for _ in range(_ROUNDS):
            outcome = fit(work.board, work.design, ports_of(work.design), work.rtlil, progress.say)
            work = replace(work, fit=outcome)
            if outcome.delays is None:
                return work
            plan = judge(work.board, work.plan.ticks, outcome.delays)
            work = replace(work, plan=plan)
            if plan.holds:
                return work
            again = settle(work.board, outcome.delays)
            if again.ticks == plan.ticks:
                return work
            work = _with_plan(work.board, again)
        return work


def proved(work: Work, progress: Progress) -> Work:
    """Prove every claim on every subject."""
    with progress.step("prove"):
        probe = probe_text(work.design)
        short = shortened(work.design)
        texts = ShortTexts(probe_text(short), variants(short))
        bounds = Bounds(**bus_in_ticks(work.board, work.delays, work.plan))
        outcomes = prove_all(claims(work.design, bounds), probe, work.subjects, texts, progress.say)
        return replace(work, claims=outcomes)


def benched(work: Work, progress: Progress, seed: int, subjects: Mapping[Subject, str], icarus: bool) -> Work:
    """Run every scenario at every corner on each subject, compiled, and the emitted bench in Icarus where it is."""
    with progress.step("bench"), ThreadPoolExecutor(max_workers=2) as pool:
        jobs: list[Callable[[], list[BenchOutcome]]] = []
        for subject, rtlil in subjects.items():
            jobs += _compiled_jobs(work, subject, rtlil, seed, progress)
        if icarus and available("iverilog"):
            jobs += [lambda: _icarus(work, seed, progress)]
        found = list(pool.map(lambda job: job(), jobs))
    return replace(work, bench=tuple(outcome for outcomes in found for outcome in outcomes))


def _compiled_jobs(
    work: Work, subject: Subject, rtlil: str, seed: int, progress: Progress
) -> list[Callable[[], list[BenchOutcome]]]:
    """One job per corner; the program is built before, once."""
    try:
        bench = build(work.board, work.design, rtlil, work.windows, subject)
    except (ToolMissing, BuildError, TimedOut) as error:
        reason = str(error)
        chosen = scenarios(work.board)
        return [lambda: [not_run(scenario.name, "compiled", subject, "every", reason) for scenario in chosen]]
    return [lambda corner=corner: _corner(work, bench, corner, seed, progress) for corner in CORNERS]  # type: ignore[misc]


def _corner(work: Work, bench: CompiledBench, corner: str, seed: int, progress: Progress) -> list[BenchOutcome]:
    outcomes = []
    for scenario in scenarios(work.board):
        outcome = bench.run(scenario, corner, seed)
        progress.say(f"bench {outcome.scenario}, {corner}, {bench.subject}: {outcome.status.value}")
        outcomes.append(outcome)
    return outcomes


def _icarus(work: Work, seed: int, progress: Progress) -> list[BenchOutcome]:
    """The emitted bench in Icarus: every scenario short, and event by event against the compiled bench."""
    try:
        theirs = build_icarus(work.board, work.design, verilog_text(work.design), work.windows)
        ours = build(work.board, work.design, work.rtlil, work.windows)
    except (ToolMissing, BuildError, TimedOut) as error:
        return [not_run("mix", "icarus", "logic", "random", str(error))]
    chosen = [scenario for scenario in scenarios(work.board) if scenario.name in ("mix", "grants")]
    outcomes = []
    for scenario in chosen:
        outcome = agree(ours, theirs, scenario, "random", seed)
        progress.say(f"bench {outcome.scenario}: {outcome.status.value}")
        outcomes.append(outcome)
    return outcomes


def _power_up(work: Work) -> list[Finding]:
    """A typical configuration time can show that power-up takes too long, never that it is short enough."""
    found = power_up(work.board, work.plan.ticks)
    return [Finding("fit", "power to valid strobes", Status.FAILED, found.remark)] if found.exceeds else []


def verdict(work: Work, expected: tuple[str, ...]) -> Verdict:
    """Everything found, and what was asked for and gave nothing. `expected`: groups that must be there."""
    findings = [*plan_findings(work.plan, routed_wanted="fit" in expected), *level_findings(levels_of(work.board))]
    if work.fit is not None:
        findings += fit_findings(work.fit)
        findings += _power_up(work)
    findings += claim_findings(work.claims)
    findings += bench_findings(work.bench)
    groups = {finding.group for finding in findings}
    missing = [(group, f"every {group}") for group in expected if group not in groups]
    return verdict_of(findings, missing)  # type: ignore[arg-type]
