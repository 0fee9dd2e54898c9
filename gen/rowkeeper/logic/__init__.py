"""The generated logic: one file per part of the board it takes the place of.

Takes a `contract.Design`; gives RTLIL text and Verilog text. Must not know picoseconds, board files or devices.
"""
