"""One block of a file, read key by key.

Takes a node of the tree; gives its values converted, and notes unknown keys (with the nearest name), missing keys and
values of the wrong shape. Must not know which file it reads.
"""

from collections.abc import Callable, Iterable
from fractions import Fraction
from typing import Generic, TypeVar

from rowkeeper.reading.position import Position
from rowkeeper.reading.problems import Problems, listed, nearest, quoted
from rowkeeper.reading.tree import Block, Listing, Node, Scalar

__all__ = ["Section", "Span", "one_of", "read_listing", "read_scalars", "read_span"]

T = TypeVar("T")
Q = TypeVar("Q", int, Fraction)


class Section:
    """A block with its allowed keys. `whole` tells whether everything read through it so far was right."""

    def __init__(
        self,
        node: Node,
        what: str,
        problems: Problems,
        required: Iterable[str] = (),
        optional: Iterable[str] = (),
    ) -> None:
        self.what = what
        self.at = node.at
        self.problems = problems
        self._before = len(problems)
        self._entries: dict[str, Node] = {}
        required = tuple(required)
        if not isinstance(node, Block):
            keys = required or tuple(optional)
            problems.add(
                node.at, f"{what} must be a block of keys", f"write `{{{', '.join(f'{key}: ...' for key in keys)}}}`"
            )
            return
        self._sort(node, required, tuple(optional))

    def _sort(self, node: Block, required: tuple[str, ...], optional: tuple[str, ...]) -> None:
        allowed = required + optional
        guessed: set[str] = set()
        for key, value in node.entries:
            if key.text in allowed:
                self._entries[key.text] = value
                continue
            missing = [name for name in allowed if name not in {k.text for k, _ in node.entries}]
            guess = nearest(key.text, missing) or nearest(key.text, allowed)
            guessed.add(guess or "")
            fix = f"did you mean `{guess}`?" if guess else f"the keys here are {listed(allowed, 'and')}"
            self.problems.add(key.at, f"{self.what} has no key {quoted(key.text)}", fix)
        for name in required:
            if name not in self._entries and name not in guessed:
                self.problems.add(self.at, f"{self.what} lacks the key `{name}`", f"add `{name}:`")

    @property
    def whole(self) -> bool:
        """No problem was noted since this section was opened."""
        return len(self.problems) == self._before

    def has(self, key: str) -> bool:
        """The key stands in the file."""
        return key in self._entries

    def node(self, key: str) -> Node | None:
        """What stands under a key, whatever its shape."""
        return self._entries.get(key)

    def at_key(self, key: str) -> Position:
        """The place of a key's value, or of the section when the key is missing."""
        node = self._entries.get(key)
        return node.at if node is not None else self.at

    def scalar(self, key: str) -> Scalar | None:
        """The one value under a key, or None; a list or block there is a problem."""
        node = self._entries.get(key)
        if node is None or isinstance(node, Scalar):
            return node
        self.problems.add(node.at, f"`{key}` takes one value", f"write `{key}: value`")
        return None

    def take(self, key: str, convert: Callable[[Scalar, Problems], T], default: T) -> T:
        """The value under a key, converted; `default` when it is missing or has the wrong shape."""
        scalar = self.scalar(key)
        return default if scalar is None else convert(scalar, self.problems)

    def items(self, key: str) -> tuple[Node, ...]:
        """The nodes of the list under a key; empty when it is missing."""
        node = self._entries.get(key)
        return () if node is None else read_listing(node, f"`{key}`", self.problems)


class Span(Generic[Q]):
    """A minimum and a maximum, each possibly missing."""

    def __init__(self, low: Q | None, high: Q | None) -> None:
        self.low: Q | None = low
        self.high: Q | None = high


def read_listing(node: Node, what: str, problems: Problems) -> tuple[Node, ...]:
    """The items of a list; anything else is a problem."""
    if isinstance(node, Listing):
        return node.items
    problems.add(node.at, f"{what} must be a list", "write `[first, second]`, or one `- entry` per line")
    return ()


def read_scalars(node: Node, what: str, problems: Problems) -> tuple[Scalar, ...]:
    """The values of a list of plain values."""
    found: list[Scalar] = []
    for item in read_listing(node, what, problems):
        if isinstance(item, Scalar):
            found.append(item)
        else:
            problems.add(item.at, f"{what} takes plain values only", "write one value per entry")
    return tuple(found)


def read_span(
    node: Node | None,
    what: str,
    problems: Problems,
    convert: Callable[[Scalar, Problems], Q],
    required: tuple[str, ...] = ("min", "max"),
) -> Span[Q]:
    """`{min: ..., max: ...}` with the minimum not above the maximum; keys not in `required` are refused."""
    if node is None:
        return Span(None, None)
    section = Section(node, what, problems, required)
    low = section.scalar("min")
    high = section.scalar("max")
    span = Span(
        None if low is None else convert(low, problems),
        None if high is None else convert(high, problems),
    )
    if section.whole and low and high and span.low is not None and span.high is not None and span.low > span.high:
        problems.add(
            low.at, f"{what}: min {low.text} is over max {high.text}", f"write `min: {high.text}, max: {low.text}`"
        )
    return span


def one_of(scalar: Scalar, names: Iterable[str], what: str, problems: Problems) -> str | None:
    """The scalar's text if it is one of the names, else None with the nearest name in the fix."""
    known = tuple(names)
    if scalar.text in known:
        return scalar.text
    guess = None if any(c.isdigit() for c in scalar.text) else nearest(scalar.text, known)  # 5 MHz is not like 2.5 MHz
    if len(known) == 1:
        fix = f"write `{known[0]}`"
    elif guess:
        fix = f"did you mean `{guess}`? The choices are {listed(known)}"
    else:
        fix = f"the choices are {listed(known)}"
    problems.add(scalar.at, f"{quoted(scalar.text)} is not a known {what}", fix)
    return None
