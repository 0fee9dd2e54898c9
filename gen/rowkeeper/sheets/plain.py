"""Foreign text made harmless, and net names as people write them.

Takes any text; gives one line without control characters, or text that cannot end a comment. Must not know which
file the text goes to beyond that.
"""

import unicodedata

__all__ = ["comment_text", "is_active_low", "net_label", "net_letters", "one_line"]

# Cc control, Cf invisible format (text direction among them), Cs lone surrogates, Co private, Cn unassigned
# (not allowed in XML among them), Zl and Zp line and paragraph separators.
_UNSEEN = frozenset({"Cc", "Cf", "Cs", "Co", "Cn", "Zl", "Zp"})


def one_line(text: str) -> str:
    """The text on one line: everything that cannot be seen becomes a space, and runs of spaces become one."""
    seen = "".join(" " if unicodedata.category(letter) in _UNSEEN else letter for letter in text)
    return " ".join(seen.split())


def comment_text(text: str) -> str:
    """Text that stays inside a comment of Verilog, a constraint file, XML, C or a shell.

    Printable ASCII only; no backslash (it joins lines in C), no backtick or dollar sign, no `/*` or `*/`, no double
    hyphen (it ends an XML comment), no angle bracket.
    """
    spaced = "".join(letter if _stays(letter) else "?" for letter in one_line(text))
    for ending in ("*/", "/*", "--"):
        while ending in spaced:
            spaced = spaced.replace(ending, f"{ending[0]} {ending[1]}")
    return spaced


def _stays(letter: str) -> bool:
    return " " <= letter <= "~" and letter not in "\\`$<>"


def is_active_low(net: str) -> bool:
    """Whether a net name ends like an active-low one: `ras_n`."""
    return net.endswith("_n") and len(net) > len("_n")


def net_letters(net: str) -> str:
    """The capitals of a net name without its polarity: `ras_n` gives RAS, for a drawing that sets an overbar."""
    return one_line(net.removesuffix("_n") if is_active_low(net) else net).upper()


def net_label(net: str) -> str:
    """A net name as text writes it: `ras_n` gives /RAS, `ma3` gives MA3."""
    return f"/{net_letters(net)}" if is_active_low(net) else net_letters(net)
