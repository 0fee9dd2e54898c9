"""The claims: each one English sentence, a checker over the pins, a cover, and a spoiled design it must fail on.

Takes a `contract.Design` and the RTLIL text of its probe view; gives harnesses as RTLIL text. Must not know solvers,
nor how the logic works beyond the names of its probes.
"""
