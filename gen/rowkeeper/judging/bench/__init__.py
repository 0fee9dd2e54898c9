"""The bench: memory and bus models in picoseconds, run compiled and in Icarus, and shipped with every board.

Takes a board, a design, RTLIL or Verilog text of the subject and the delay window of every net; gives outcomes and the
files of `bench/`. Must not know how logic or timing came to them.
"""

from rowkeeper.judging.bench.compiled import BuildError, CompiledBench, build, run_compiled
from rowkeeper.judging.bench.emit import emit_bench
from rowkeeper.judging.bench.icarus import IcarusBench, agree, build_icarus, run_icarus
from rowkeeper.judging.bench.scenario import CORNERS, Scenario, scenarios

__all__ = [
    "CORNERS",
    "BuildError",
    "CompiledBench",
    "IcarusBench",
    "Scenario",
    "agree",
    "build",
    "build_icarus",
    "emit_bench",
    "run_compiled",
    "run_icarus",
    "scenarios",
]
