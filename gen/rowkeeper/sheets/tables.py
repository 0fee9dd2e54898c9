"""Tables of the margins for a terminal: worst first, and one limit explained as a sum.

Takes margins; gives text of at most 100 columns, times in nanoseconds. Must not know how a margin
was found.
"""

from collections.abc import Iterable, Sequence

from rowkeeper.contract import Margin, Term
from rowkeeper.reading.figures import Mark, Source
from rowkeeper.sheets.columns import paragraph, table
from rowkeeper.sheets.quantities import nanoseconds, signed_nanoseconds, window

__all__ = ["MEMORY_MARK", "explain_text", "lines_text", "margin_text", "source_text", "term_row", "worst_first"]

MEMORY_MARK = "*"
_HEADINGS = ("margin", "limit", "required", "earliest", "latest", "cycle", "neighbour", "source")


def lines_text(*blocks: Iterable[str]) -> str:
    """Blocks of lines as text, an empty line between blocks."""
    kept = [list(block) for block in blocks]
    return "\n\n".join("\n".join(block) for block in kept if block) + "\n"


def worst_first(margins: Iterable[Margin]) -> list[Margin]:
    """Hard limits first, the smallest margin first, equal ones by name."""
    return sorted(margins, key=lambda m: (m.kind != "hard", m.margin_ps, m.symbol, m.sense, m.cycle, m.neighbour))


def worst_per_limit(margins: Iterable[Margin]) -> list[Margin]:
    """Of each limit only its worst situation."""
    chosen: dict[tuple[str, str, str], Margin] = {}
    for margin in worst_first(margins):
        chosen.setdefault((margin.kind, margin.symbol, margin.sense), margin)
    return list(chosen.values())


def margin_text(margins: Sequence[Margin], every: bool = False) -> str:
    """Margins worst first, in ns: of each limit its worst situation, or every situation."""
    chosen = worst_first(margins) if every else worst_per_limit(margins)
    if not chosen:
        return "NOT RUN: no margin was computed.\n"
    sources = _Sources()
    rows = [_margin_row(margin, sources) for margin in chosen]
    key = ["Times in ns. margin = earliest - required (min) or required - latest (max); below zero it fails."]
    if any(margin.from_memory for margin in chosen):
        key += [f"{MEMORY_MARK} rests on a figure from memory, confirmed in no document at hand."]
    if any(margin.kind == "reference" for margin in chosen):
        key += ["(ref) a reference point of the sheet, not a limit: shown, never judged."]
    keys = [line for text in key for line in paragraph(text, hanging="  ")]
    return lines_text(table(_HEADINGS, rows, right=(0, 2, 3, 4)), keys, sources.lines())


def _margin_row(margin: Margin, sources: "_Sources") -> tuple[str, ...]:
    mark = f" {MEMORY_MARK}" if margin.from_memory else ""
    kind = " (ref)" if margin.kind == "reference" else ""
    fails = " FAILS" if margin.kind == "hard" and margin.margin_ps < 0 else ""
    return (
        signed_nanoseconds(margin.margin_ps),
        f"{margin.symbol} {margin.sense}{mark}{kind}{fails}",
        nanoseconds(margin.required_ps),
        _end(margin.earliest_ps),
        _end(margin.latest_ps),
        margin.cycle,
        margin.neighbour,
        sources.number(margin.source),
    )


class _Sources:
    """Numbers the documents in the order of their first use."""

    def __init__(self) -> None:
        self._numbers: dict[str, int] = {}

    def number(self, source: Source) -> str:
        return f"[{self._numbers.setdefault(source_text(source), len(self._numbers) + 1)}]"

    def lines(self) -> list[str]:
        heads = {text: f"[{number}] ".rjust(5) for text, number in self._numbers.items()}
        listed = [line for text, head in heads.items() for line in paragraph(text, head, " " * len(head))]
        return ["Sources of the limits:", *listed] if listed else []


def source_text(source: Source) -> str:
    """A source with how far it can be trusted, where that is not plain from its name."""
    name = str(source)
    plain = source.mark in (Mark.SHEET, Mark.MEMORY) or name == source.mark.value
    return name if plain else f"{name} ({source.mark.value})"


def explain_text(margins: Sequence[Margin], symbol: str) -> str:
    """Each situation of one limit as a sum to be followed on a pocket calculator, worst first.

    An unknown symbol gets the list of the known ones.
    """
    chosen = worst_first(margin for margin in margins if margin.symbol.casefold() == symbol.casefold())
    if not chosen:
        known = ", ".join(dict.fromkeys(margin.symbol for margin in margins)) or "none"
        return lines_text(paragraph(f"No limit is called {symbol}. Known here: {known}."))
    return lines_text(*(_explained(margin) for margin in chosen))


def _explained(margin: Margin) -> list[str]:
    end_ps = margin.earliest_ps if margin.sense == "min" else margin.latest_ps
    word = "earliest" if margin.sense == "min" else "latest"
    place = f"{margin.cycle}; {margin.neighbour}" if margin.neighbour else margin.cycle
    kind = "" if margin.kind == "hard" else ", reference point only"
    lines = paragraph(f"{margin.symbol} {margin.sense}{kind}: {place}", hanging="    ")
    rows = [*map(term_row, margin.terms), ("=", _end(end_ps), f"{word}, from the terms above", "")]
    required = ("-", nanoseconds(margin.required_ps), "required", source_text(margin.source))
    if margin.sense == "max":
        rows += [("", nanoseconds(margin.required_ps), "required", source_text(margin.source))]
        rows += [("-", _end(end_ps), word, "")]
    else:
        rows += [required]
    rows += [("=", nanoseconds(margin.margin_ps), "margin", "")]
    lines += table(("", "ns", "what", "source"), rows, right=(1,))
    total_ps = sum(term.used_ps for term in margin.terms)
    if margin.terms and end_ps is not None and total_ps != end_ps:
        lines += paragraph(f"ATTENTION: the terms add up to {nanoseconds(total_ps)} ns, not to {word}.")
    if margin.from_memory:
        lines += paragraph(f"{MEMORY_MARK} a term rests on a figure from memory.")
    return lines + (paragraph(f"Note: {margin.note}", hanging="      ") if margin.note else [])


def _end(end_ps: int | None) -> str:
    return "open" if end_ps is None else nanoseconds(end_ps)


def term_row(term: Term) -> tuple[str, str, str, str]:
    """One term of a sum: sign, ns, name with its window, source."""
    sign = "-" if term.used_ps < 0 else "+"
    mark = MEMORY_MARK if term.source.mark is Mark.MEMORY else ""
    both = f" ({window(term.lo_ps, term.hi_ps)})" if (term.lo_ps, term.hi_ps) != (None, None) else ""
    return (sign, nanoseconds(abs(term.used_ps)) + mark, term.name + both, source_text(term.source))
