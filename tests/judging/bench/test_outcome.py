"""What a bench prints, and what becomes of it: nothing silent counts as passed."""

from dataclasses import replace

from judging.bench.handmade import loom
from rowkeeper.contract import Status
from rowkeeper.judging.bench.outcome import outcome_of, read_report
from rowkeeper.judging.bench.scenario import scenarios
from rowkeeper.judging.bench.waves import wave_text

GOOD = "check tRP 3 0 500\nreads 7\nchecks 10\nbus_ps 123\nPASS\n"
BROKEN = "violation 5000 tRP 90000 100000\nreads 7\nchecks 10\nbus_ps 123\nFAIL\n"


def status(text: str) -> tuple[Status, str]:
    outcome = outcome_of(loom(), read_report(text), "mix", "compiled", "logic", "min")
    return outcome.status, outcome.detail


def test_a_run_that_printed_pass_with_checks_has_passed() -> None:
    assert status(GOOD) == (Status.PASSED, "")


def test_a_run_without_a_datum_checked_has_failed() -> None:
    assert status(GOOD.replace("reads 7", "reads 0")) == (Status.FAILED, "no data was ever checked")


def test_a_run_that_printed_nothing_has_failed() -> None:
    assert status("") == (Status.FAILED, "no data was ever checked")


def test_a_run_that_was_cut_off_has_failed() -> None:
    assert status(GOOD.replace("PASS\n", "")) == (Status.FAILED, "the run did not come to its end")


def test_the_first_violation_is_told_with_its_document() -> None:
    assert status(BROKEN) == (Status.FAILED, "at 5000 ps: tRP 90000 ps against 100000 ps [MK4116 sheet p. 3]")


def test_a_violation_outranks_the_word_pass() -> None:
    assert status(BROKEN.replace("FAIL", "PASS"))[0] is Status.FAILED


def test_a_broken_assumption_cites_the_bus() -> None:
    text = "violation 9 mreq_high 1000 110000\nreads 1\nFAIL\n"
    expected = "at 9 ps: TwMREQh 1000 ps against 110000 ps [Z8400 product specification pp. 37-39]"
    assert status(text) == (Status.FAILED, expected)


def test_lost_contents_are_told_in_words() -> None:
    text = "violation 9 tREF 3000000000 2000000000\nreads 1\nFAIL\n"
    assert "a row was left too long without refresh" in status(text)[1]


def test_events_and_waves_are_read_back() -> None:
    report = read_report("event 5 ras_n 0\nwave 5 ras_n 0\nwave 7 ma 33\nviolation 6 tRP 1 2\n")
    assert report.events == ("5 ras_n 0",)
    assert report.waves == ((5, "ras_n", 0), (7, "ma", 33))


def test_a_wave_dump_marks_the_violation() -> None:
    report = read_report("wave 5 ras_n 0\nwave 7 ma 33\nviolation 6 tRP 1 2\n")
    assert wave_text(report).splitlines() == [
        "$timescale 1 ps $end",
        "$scope module board $end",
        "$var wire 16 ! ma $end",
        '$var wire 1 " ras_n $end',
        "$var wire 1 # violation_tRP $end",
        "$upscope $end",
        "$enddefinitions $end",
        "#5",
        '0"',
        "#6",
        "1#",
        "#7",
        "b100001 !",
        "#1006",
        "0#",
    ]


def test_a_run_without_violations_has_no_wave_dump() -> None:
    assert wave_text(read_report(GOOD)) == ""


def test_a_board_without_grants_or_resets_is_not_asked_to_meet_them() -> None:
    worst = replace(loom().at_worst, grant_max_ps=0, reset_max_ps=0)
    names = [scenario.name for scenario in scenarios(replace(loom(), at_worst=worst))]
    assert names == ["warm-up", "march-c", "idle", "mix"]
