"""The judges: claims proved or broken, a bench that runs the design, and the verdict with its not-run rule.

Takes the records of `contract` and RTLIL text; gives outcomes and a verdict. Must not know how logic or timing got
there.
"""

__all__: list[str] = []
