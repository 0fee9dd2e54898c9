"""The proof engine: RTLIL to and-inverter graph, induction, PDR, certificates re-checked by a second solver, traces.

Takes RTLIL text; gives verdicts that rest on a check by z3 and on nothing else. Must not know what is being claimed.
"""
