"""What may stand in names and sentences of a board file, so that nothing in them can act elsewhere.

Takes scalars; gives their text, or notes a character or word that Verilog, HTML, a shell or a path could take for its
own. Must not know what is named.
"""

import re

from rowkeeper.reading.position import Position
from rowkeeper.reading.problems import Problems, quoted
from rowkeeper.reading.tree import Scalar

__all__ = ["VERILOG_WORDS", "check_slug", "designator", "designator_range", "meeting_place", "sentence", "title"]

# Reserved words of IEEE 1364-2005, and those SystemVerilog (IEEE 1800) adds that a person may well choose.
VERILOG_WORDS = frozenset(
    """always and assign automatic begin buf bufif0 bufif1 case casex casez cell cmos config deassign default defparam
    design disable edge else end endcase endconfig endfunction endgenerate endmodule endprimitive endspecify endtable
    endtask event for force forever fork function generate genvar highz0 highz1 if ifnone incdir include initial inout
    input instance integer join large liblist library localparam macromodule medium module nand negedge nmos nor
    noshowcancelled not notif0 notif1 or output parameter pmos posedge primitive pull0 pull1 pulldown pullup
    pulsestyle_ondetect pulsestyle_onevent rcmos real realtime reg release repeat rnmos rpmos rtran rtranif0 rtranif1
    scalared showcancelled signed small specify specparam strong0 strong1 supply0 supply1 table task time tran tranif0
    tranif1 tri tri0 tri1 triand trior trireg unsigned use uwire vectored wait wand weak0 weak1 while wire wor xnor xor
    alias assert bit byte chandle checker class clocking const constraint context continue cover do enum export extends
    final global import int interface local logic longint modport new null package packed priority private program
    property protected pure rand ref return sequence shortint shortreal static string struct super this type typedef
    union unique var virtual void with""".split()  # noqa: SIM905 - two hundred quotes would hide the words
)

# No percent sign: a Verilog format string would act on it. No equals sign: a spreadsheet would.
_MARKS_IN_TITLES = frozenset(" ,.()+-:°µΩ")
_MARKS_IN_SENTENCES = _MARKS_IN_TITLES | frozenset("_;")
_LAST_LATIN = "\u024f"
_LONGEST = 120
_SLUG = re.compile(r"[a-z0-9][a-z0-9-]{0,62}", re.ASCII)
_DESIGNATOR = re.compile(r"[A-Z]{1,3}[1-9][0-9]{0,3}", re.ASCII)
_DESIGNATOR_PARTS = re.compile(r"([A-Z]{1,3})([1-9][0-9]{0,3})", re.ASCII)
_MEETING = re.compile(
    r"[A-Z]{1,3}[1-9][0-9]{0,3}(-[A-Z]{1,3}[1-9][0-9]{0,3})?\.[A-Z0-9]{1,4}(\+[A-Z0-9]{1,4})*", re.ASCII
)


def _plain(scalar: Scalar, marks: frozenset[str], what: str, problems: Problems) -> str:
    text = scalar.text
    strange = next((c for c in text if not ((c.isalnum() and c <= _LAST_LATIN) or c in marks)), None)
    if not text.strip():
        problems.add(scalar.at, f"{what} is empty", "write a few words")
    elif len(text) > _LONGEST:
        problems.add(scalar.at, f"{what} is longer than {_LONGEST} characters", "shorten it")
    elif strange is not None:
        shown = "".join(sorted(marks - {" "}))
        problems.add(scalar.at, f"{what} holds {quoted(strange)}", f"use letters, digits, spaces and {shown}")
    elif not text[0].isalnum():
        problems.add(scalar.at, f"{what} begins with {quoted(text[0])}", "begin with a letter or a digit")
    elif ".." in text:
        problems.add(scalar.at, f"{what} holds `..`, as a path does", "use single dots")
    elif text.strip().lower() in VERILOG_WORDS:
        problems.add(scalar.at, f"{quoted(text)} is a reserved word of Verilog", "choose another name")
    return text


def title(scalar: Scalar, problems: Problems) -> str:
    """A name for people: letters, digits and a few plain marks."""
    return _plain(scalar, _MARKS_IN_TITLES, "this name", problems)


def sentence(scalar: Scalar, problems: Problems) -> str:
    """A line for the fitter: as a title, with a few marks more."""
    return _plain(scalar, _MARKS_IN_SENTENCES, "this line", problems)


def designator(scalar: Scalar, problems: Problems) -> str:
    """The designator of a part on the board, `U22`."""
    if _DESIGNATOR.fullmatch(scalar.text) is None:
        problems.add(scalar.at, f"{quoted(scalar.text)} is not a designator", "write one such as `U22`")
        return ""
    return scalar.text


def designator_range(scalar: Scalar, problems: Problems) -> tuple[str, int]:
    """Designators that follow each other, `U10-U17`, and how many they are; one alone is `U10`."""
    first, _, last = scalar.text.partition("-")
    ends = [_DESIGNATOR_PARTS.fullmatch(end) for end in (first, last or first)]
    if ends[0] is None or ends[1] is None or ends[0][1] != ends[1][1] or int(ends[0][2]) > int(ends[1][2]):
        problems.add(scalar.at, f"{quoted(scalar.text)} is not a range of designators", "write one such as `U10-U17`")
        return "", 0
    return scalar.text, int(ends[1][2]) - int(ends[0][2]) + 1


def meeting_place(scalar: Scalar, problems: Problems) -> str:
    """Where a net arrives on the board: `U5.4`, `U10-U17.4` (the same pin of several parts), `U6.1+19`."""
    if _MEETING.fullmatch(scalar.text) is None:
        problems.add(
            scalar.at,
            f"{quoted(scalar.text)} is not a place on the board",
            "write designator and pin, as `U5.4`, `U10-U17.4` or `U6.1+19`",
        )
        return ""
    return scalar.text


def check_slug(slug: str, file: str, problems: Problems) -> None:
    """The file's base name without its ending names the output folder and the Verilog module."""
    at = Position(file, 0, 0)
    if _SLUG.fullmatch(slug) is None:
        problems.add(
            at, f"the file name {quoted(slug)} cannot name the output", "use small letters, digits and hyphens only"
        )
    elif slug in VERILOG_WORDS:
        problems.add(at, f"the file name {quoted(slug)} is a reserved word of Verilog", "choose another file name")
