"""A wave dump (VCD, IEEE 1364) of the moments around the first violation of a run.

Takes the report of a run; gives text. Must not know which engine ran it.
"""

from rowkeeper.judging.bench.outcome import Report

__all__ = ["wave_text"]

_WIDTHS = {"address": 16, "ma": 16, "violation": 1}


def wave_text(report: Report) -> str:
    """The dump, times in picoseconds, with a pulse at the first violation; empty where nothing was kept."""
    if not report.waves or not report.violations:
        return ""
    first = report.violations[0]
    mark = f"violation_{first.check}"
    moved = [*report.waves, (first.at_ps, mark, 1), (first.at_ps + 1000, mark, 0)]
    signals = sorted({signal for _, signal, _ in moved})
    codes = {signal: chr(33 + number) for number, signal in enumerate(signals)}
    lines = ["$timescale 1 ps $end", "$scope module board $end"]
    lines += [f"$var wire {_WIDTHS.get(signal, 1)} {codes[signal]} {signal} $end" for signal in signals]
    lines += ["$upscope $end", "$enddefinitions $end"]
    now = -1
    for at_ps, signal, value in sorted(moved, key=lambda item: item[0]):
        if at_ps != now:
            lines.append(f"#{at_ps}")
            now = at_ps
        wide = signal in _WIDTHS
        lines.append(f"b{value:b} {codes[signal]}" if wide else f"{value}{codes[signal]}")
    return "\n".join(lines) + "\n"
