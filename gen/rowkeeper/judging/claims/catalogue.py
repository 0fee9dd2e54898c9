"""The list of all claims, and each one as a record to be proved.

Takes a `contract.Design` and the bus's Bounds; gives Claims. Must not know solvers.
"""

from dataclasses import dataclass

from rowkeeper.contract import Design
from rowkeeper.judging.claims.address import AddressStill, Hit
from rowkeeper.judging.claims.bounds import Bounds
from rowkeeper.judging.claims.checker import Checker
from rowkeeper.judging.claims.gaps import AnyBound
from rowkeeper.judging.claims.harness import harness_text
from rowkeeper.judging.claims.kind import Kind
from rowkeeper.judging.claims.legal import LegalBound, Served
from rowkeeper.judging.claims.refresh import Merged, RowSteps, WarmUp
from rowkeeper.judging.claims.short import shortened, shortened_bounds
from rowkeeper.judging.claims.strobes import (
    DataBuffer,
    DataHeld,
    EarlyWrite,
    NeverCut,
    NoColumnInRefresh,
    Order,
    Precharge,
)

__all__ = ["Claim", "claims"]

_ALL: tuple[type[Checker], ...] = (
    Order,
    AddressStill,
    NoColumnInRefresh,
    Precharge,
    NeverCut,
    RowSteps,
    Merged,
    AnyBound,
    LegalBound,
    WarmUp,
    EarlyWrite,
    DataBuffer,
    DataHeld,
    Kind,
    Hit,
    Served,
)


@dataclass(frozen=True, slots=True)
class Claim:
    """One claim about one design. `assertions`: how many statements its checker must hold."""

    name: str
    sentence: str
    assertions: int
    assumptions: tuple[str, ...]
    spoiled: str
    checker: type[Checker]
    design: Design
    bounds: Bounds

    def harness(self, probe_rtlil: str) -> str:
        """RTLIL of the harness around the probe view of this design."""
        return harness_text(self.design, probe_rtlil, self.checker, self.bounds)

    def short(self) -> "Claim":
        """The same claim about the design with short ticks."""
        design = shortened(self.design)
        return _claim(self.checker, design, shortened_bounds(design))


def claims(design: Design, bounds: Bounds) -> tuple[Claim, ...]:
    """All claims that apply to this design."""
    return tuple(_claim(checker, design, bounds) for checker in _ALL if checker is not LegalBound or design.standby)


def _claim(checker: type[Checker], design: Design, bounds: Bounds) -> Claim:
    return Claim(
        name=checker.name,
        sentence=checker.sentence,
        assertions=checker.assertions,
        assumptions=checker.assumptions,
        spoiled=checker.spoiled,
        checker=checker,
        design=design,
        bounds=bounds,
    )
