"""Texts that try to break out of the file they are put in."""

SCRIPT = "<script>alert(1)</script>"
COMMENT_END = "a */ module evil; endmodule /* b"
NEW_LINE = "one\r\nmodule evil; endmodule\n"
FORMULA = "=cmd|' /C calc'!A0"
MARKUP_END = "x --> <img src=x onerror=y> <!-- --"
ATTRIBUTE = "\" onload='x' & \u2028 \u202e \x00 \x1b[31m \ufffe"
TEMPLATE = "{{ 7 * 7 }}{% raw %} ${HOME} `id` $(id) \\"

ALL = (SCRIPT, COMMENT_END, NEW_LINE, FORMULA, MARKUP_END, ATTRIBUTE, TEMPLATE)
