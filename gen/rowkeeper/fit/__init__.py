"""Into the device: constraints, synthesis, routing, programming file, routed delays and netlist, pin table.

Takes a board, ports and RTLIL; gives a `FitOutcome` and `PinRow` records. Must not know refresh, ticks or sheets.
"""
