"""The sheets room: text of tables, sheets, verdict files and stamps.

Takes plain records of `contract` and `reading`; gives text, never files. Must not know how a number was found.
"""

__all__: list[str] = []
