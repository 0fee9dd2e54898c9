"""What stands on the board now, beside its replacement, for a terminal.

Takes an `OriginalReport`; gives text of at most 100 columns, times in nanoseconds. Must not know how a window was
found.
"""

from collections.abc import Sequence

from rowkeeper.contract import OriginalDelay, OriginalLimit, OriginalReport
from rowkeeper.sheets.columns import paragraph, table
from rowkeeper.sheets.quantities import nanoseconds, signed_nanoseconds
from rowkeeper.sheets.tables import MEMORY_MARK, lines_text, source_text

__all__ = ["original_text"]


def original_text(report: OriginalReport) -> str:
    """Each delay network step by step, then limit by limit the old board and the new one."""
    return lines_text(*map(_delay, report.delays), _limits(report.limits), _sources(report))


def _sources(report: OriginalReport) -> list[str]:
    found = [source for delay in report.delays for source in delay.sources]
    found += [limit.source for limit in report.limits]
    texts = dict.fromkeys(map(source_text, found))
    return [
        "Sources of the original and its limits:",
        *(line for text in texts for line in paragraph(text, "- ", "  ")),
    ]


def _delay(delay: OriginalDelay) -> list[str]:
    mark = f" {MEMORY_MARK}" if delay.from_memory else ""
    title = f"The original: {delay.name.replace('_', ' ')}, {delay.edge} edge: {delay.network}{mark}"
    rows = [(stage.name, _end(stage.earliest_ps, "never"), _end(stage.latest_ps, "NEVER")) for stage in delay.stages]
    if delay.nominal_ps is not None:
        rows.append(("a usual part, which nobody promises", nanoseconds(delay.nominal_ps), ""))
    texts = [delay.never, *delay.remarks]
    if delay.from_memory:
        texts.append(f"{MEMORY_MARK} rests on a figure from memory")
    notes = [line for text in texts if text for line in paragraph(text, "  - ", "    ")]
    return [*paragraph(title, hanging="    "), *table(("counted", "earliest", "latest"), rows, right=(1, 2)), *notes]


def _end(end_ps: int | None, without: str) -> str:
    return without if end_ps is None else nanoseconds(end_ps)


def _limits(limits: Sequence[OriginalLimit]) -> list[str]:
    rows = [
        (
            f"{limit.symbol} {limit.sense}" + (" (ref)" if limit.kind == "reference" else ""),
            limit.what,
            nanoseconds(limit.required_ps),
            _window(limit.original_earliest_ps, limit.original_latest_ps),
            _margin(limit.original_margin_ps),
            _window(limit.replacement_earliest_ps, limit.replacement_latest_ps),
            _margin(limit.replacement_margin_ps),
        )
        for limit in limits
    ]
    headings = ("limit", "what", "required", "original", "margin", "replacement", "margin")
    notes = dict.fromkeys(f"{limit.symbol} {limit.sense}: {limit.note}" for limit in limits if limit.note)
    key = (
        "Where the original's margin is below zero, or none, the sheets never promised it: the old board lived on what "
        "usual parts do. (ref) a reference point of the sheet, not a limit."
    )
    return [
        "Limit by limit, in ns:",
        *table(headings, rows, right=(2, 4, 6)),
        *paragraph(key),
        *(line for note in notes for line in paragraph(note, "- ", "  ")),
    ]


def _window(lo_ps: int | None, hi_ps: int | None) -> str:
    return f"{_end(lo_ps, 'open')} .. {_end(hi_ps, 'open')}"


def _margin(margin_ps: int | None) -> str:
    return "none" if margin_ps is None else signed_nanoseconds(margin_ps)
