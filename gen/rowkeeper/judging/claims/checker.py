"""The base of every claim's checker: what must hold, the helper assertions, assumptions and the cover.

Takes a Scene; gives signals, each 1 while its statement holds. Must not know how they are proved.
"""

from abc import ABC, abstractmethod
from typing import ClassVar

from amaranth.hdl import Module, Signal, Value

from rowkeeper.judging.claims.bounds import Bounds
from rowkeeper.judging.claims.scene import Scene

__all__ = ["Checker"]


class Checker(ABC):
    """One claim. `assertions` is how many `must` its proof holds: one that got lost is noticed by this number."""

    name: ClassVar[str]
    sentence: ClassVar[str]
    assertions: ClassVar[int]
    assumptions: ClassVar[tuple[str, ...]] = ()
    spoiled: ClassVar[str]
    by_pdr: ClassVar[bool] = False  # no helpers: the invariant is PDR's own

    def __init__(self, m: Module, scene: Scene, bounds: Bounds) -> None:
        self.m = m
        self.scene = scene
        self.bounds = bounds
        self.musts: dict[str, Signal] = {}
        self.lemmas: dict[str, Signal] = {}
        self.assumed: dict[str, Signal] = {}
        self.covered = Signal(name="cover_seen")
        self.allowed = Signal(name="allowed_seen")
        self.check()

    @abstractmethod
    def check(self) -> None:
        """State everything."""

    def must(self, name: str, holds: Value | int) -> None:
        """A statement of the claim."""
        self._state(self.musts, "claim", name, holds)

    def lemma(self, name: str, holds: Value | int) -> None:
        """A helper assertion: proved beside the claim, to make it inductive."""
        self._state(self.lemmas, "lemma", name, holds)

    def assume(self, name: str, holds: Value | int) -> None:
        """What a bus promises; `name` begins with one of `assumptions`."""
        self._state(self.assumed, "assume", name, holds)

    def cover(self, seen: Value, allowed: Value | None = None) -> None:
        """A situation that shows the claim is about something; `allowed`: one that few ticks lead to, likewise."""
        self.m.d.comb += [self.covered.eq(seen), self.allowed.eq(seen if allowed is None else allowed)]

    def _state(self, where: dict[str, Signal], kind: str, name: str, holds: Value | int) -> None:
        signal = Signal(name=f"{kind}_{name}")
        self.m.d.comb += signal.eq(holds)
        where[signal.name] = signal
