"""The strict subset of YAML: mappings, lists and one-line scalars, every one with its place.

Takes the text of a file; gives a tree of `Scalar`, `Listing` and `Block` nodes in which every scalar is still text, or
every reason why not. Tags, anchors, aliases, merges, duplicate keys, block scalars, directives, several documents and
deep nesting are refused. Built on the event stream under `yaml.compose`, which still shows anchors where `compose`
has already followed them. Must not know what any key means.
"""

from collections.abc import Iterator
from dataclasses import dataclass
from typing import TypeAlias

import yaml

from rowkeeper.reading.position import Position
from rowkeeper.reading.problems import Problems, quoted

__all__ = ["Block", "Listing", "Node", "Scalar", "places_of", "read_tree"]

_DEEPEST = 12
_MOST_NODES = 20_000
_RAW_WIDTH = 200


@dataclass(frozen=True, slots=True)
class Scalar:
    """One value, as text. `quoted`: it stood in quotes."""

    text: str
    at: Position
    quoted: bool = False


@dataclass(frozen=True, slots=True)
class Listing:
    """A list of nodes."""

    items: "tuple[Node, ...]"
    at: Position


@dataclass(frozen=True, slots=True)
class Block:
    """A mapping: keys in file order, each once."""

    entries: "tuple[tuple[Scalar, Node], ...]"
    at: Position


Node: TypeAlias = Scalar | Listing | Block


class _TooMuchError(Exception):
    """The file is beyond what a description can need; reading stops."""


class _Builder:
    """Turns parse events into nodes, noting what the subset does not allow."""

    def __init__(self, text: str, file: str, problems: Problems) -> None:
        self._text = text
        self._file = file
        self._problems = problems
        self._events: Iterator[yaml.Event] = iter(yaml.parse(text, Loader=yaml.SafeLoader))
        self._count = 0
        self.broken = False  # the tree no longer says what the file says: checking it on would mislead

    def _at(self, event: yaml.Event) -> Position:
        start, end = event.start_mark, event.end_mark
        assert start is not None  # the pure Python parser always sets both
        assert end is not None
        raw = self._text[start.index : end.index].split("\n", 1)[0][:_RAW_WIDTH]
        return Position(self._file, start.line + 1, start.column + 1, raw)

    def document(self) -> Node | None:
        """The one document of the file, or None when it is empty."""
        root: Node | None = None
        documents = 0
        for event in self._events:
            if isinstance(event, yaml.DocumentStartEvent):
                documents += 1
                self._head(event, documents)
                node = self._node(next(self._events), 1)
                root = node if documents == 1 else root
        return root

    def _head(self, event: yaml.DocumentStartEvent, documents: int) -> None:
        if event.version or event.tags:
            self._problems.add(self._at(event), "a YAML directive stands here", "delete the line that begins with %")
        if documents > 1:
            self.broken = True
            self._problems.add(
                self._at(event), "a second document begins here", "keep one document per file: delete this `---`"
            )

    def _node(self, event: yaml.Event, depth: int) -> Node:
        self._count += 1
        at = self._at(event)
        if depth > _DEEPEST:
            self._problems.add(at, f"nested deeper than {_DEEPEST} levels", "no description needs that: flatten it")
            raise _TooMuchError
        if self._count > _MOST_NODES:
            self._problems.add(at, f"more than {_MOST_NODES} values", "no description needs that many: shorten it")
            raise _TooMuchError
        self._refuse_references(event, at)
        if isinstance(event, yaml.ScalarEvent):
            return self._scalar(event, at)
        if isinstance(event, yaml.SequenceStartEvent):
            return self._listing(at, depth)
        if isinstance(event, yaml.MappingStartEvent):
            return self._block(at, depth)
        return Scalar("", at)  # an alias, already refused

    def _refuse_references(self, event: yaml.Event, at: Position) -> None:
        if isinstance(event, yaml.AliasEvent):
            self._problems.add(at, f"an alias ({quoted(f'*{event.anchor}')}) stands here", "write the value out")
            self.broken = True
            return
        anchor, tag = getattr(event, "anchor", None), getattr(event, "tag", None)
        if anchor:
            self._problems.add(at, f"an anchor ({quoted(f'&{anchor}')}) stands here", "delete it")
        if tag:
            self._problems.add(at, f"a tag ({quoted(tag)}) stands here", "delete it: every value is read as text")

    def _scalar(self, event: yaml.ScalarEvent, at: Position) -> Scalar:
        if event.style in ("|", ">"):
            self.broken = True
            self._problems.add(at, f"a text block (`{event.style}`) stands here", "write the text on one line")
        elif event.start_mark and event.end_mark and event.start_mark.line != event.end_mark.line:
            self.broken = True
            self._problems.add(
                at, "this value runs over several lines", "write it on one line; perhaps a colon or a quote is missing"
            )
        return Scalar(event.value, at, event.style in ("'", '"'))

    def _listing(self, at: Position, depth: int) -> Listing:
        items: list[Node] = []
        while not isinstance(event := next(self._events), yaml.SequenceEndEvent):
            items.append(self._node(event, depth + 1))
        return Listing(tuple(items), at)

    def _block(self, at: Position, depth: int) -> Block:
        entries: list[tuple[Scalar, Node]] = []
        seen: dict[str, Position] = {}
        while not isinstance(event := next(self._events), yaml.MappingEndEvent):
            key = self._node(event, depth + 1)
            value = self._node(next(self._events), depth + 1)
            if self._accepts(key, seen):
                assert isinstance(key, Scalar)
                seen[key.text] = key.at
                entries.append((key, value))
        return Block(tuple(entries), at)

    def _accepts(self, key: Node, seen: dict[str, Position]) -> bool:
        if not isinstance(key, Scalar):
            self.broken = True
            self._problems.add(key.at, "a key must be a plain word", "write `word: value`")
            return False
        if key.text == "<<":
            self.broken = True
            self._problems.add(key.at, "a merge (`<<`) stands here", "write the keys out")
            return False
        if key.text in seen:
            self._problems.add(
                key.at,
                f"the key {quoted(key.text)} stands twice: first in line {seen[key.text].line}",
                "keep one of the two",
            )
            return False
        return True


_SYNTAX_FIXES = (
    ("mapping values are not allowed", "put the value in quotes if it holds `: `, or mend the indentation"),
    ("could not find expected ':'", "write `key: value`, with a space after the colon"),
    ("found undefined tag handle", "delete the tag: every value is read as text"),
    ("expected <block end>", "mend the indentation: entries of one block begin in the same column"),
    ("found unexpected end of stream", "close the quote or the bracket"),
    ("cannot start any token", "put the value in quotes"),
)


def _note_syntax(error: yaml.YAMLError, file: str, problems: Problems) -> None:
    """A file that is not YAML at all: the parser's reason, in its place."""
    mark, opened = getattr(error, "problem_mark", None), getattr(error, "context_mark", None)
    context = str(getattr(error, "context", None) or "")
    if "quoted scalar" in context and opened:
        at = Position(file, opened.line + 1, opened.column + 1)
        problems.add(at, "this quote is not closed", "close it in the same line")
        return
    at = Position(file, mark.line + 1, mark.column + 1) if mark else Position(file, 1, 1)
    if "flow" in context and opened:
        message = f"the bracket opened in line {opened.line + 1} is not closed before this, or a comma is missing"
        problems.add(at, message, "close the bracket, or put a comma between two entries")
        return
    reason = str(getattr(error, "problem", None) or "unreadable")
    fix = next((fix for key, fix in _SYNTAX_FIXES if key in reason), "mend this line")
    problems.add(at, f"this is not readable as YAML: {reason}", fix)


def read_tree(text: str, file: str, problems: Problems) -> Node | None:
    """The tree of a file, or None with the reasons noted. Some problems leave a tree that can still be checked on."""
    builder = _Builder(text, file, problems)
    try:
        root = builder.document()
    except yaml.YAMLError as error:
        if not builder.broken:  # else this is the same mistake seen twice
            _note_syntax(error, file, problems)
        return None
    except _TooMuchError:
        return None
    if root is None:
        problems.add(Position(file, 1, 1), "this file is empty", "write a description into it, or name the right file")
    return None if builder.broken else root


def places_of(node: Node, prefix: str = "") -> Iterator[tuple[str, Position]]:
    """Every node's dotted name (`bus.clock.frequency`, `wiring.3.pin`) and its place."""
    if prefix:
        yield prefix, node.at
    start = f"{prefix}." if prefix else ""
    if isinstance(node, Block):
        for key, value in node.entries:
            yield from places_of(value, start + key.text)
    elif isinstance(node, Listing):
        for number, value in enumerate(node.items):
            yield from places_of(value, f"{start}{number}")
