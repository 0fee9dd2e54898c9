"""The bench that is shipped: a folder of plain Verilog that needs Icarus and nothing of ours.

Takes a board, a design and net windows; gives file names and contents. Names in the files come from the fixed list of
ports and data sheet symbols only. Must not know how the logic was made.
"""

from collections.abc import Mapping

from rowkeeper.contract import Design
from rowkeeper.judging.bench.parameters import CHECKS, DELAYS, INPUT_LINES, NO_LIMIT, Parameters, parameters_of
from rowkeeper.judging.bench.scenario import scenarios
from rowkeeper.judging.bench.templating import fill_in
from rowkeeper.reading.board import Board
from rowkeeper.reading.figures import Window

__all__ = ["emit_bench"]

_PLAIN = ("checks.vh", "memory.vh", "board.vh", "bus.vh", "cycles.vh", "program.vh", "run.sh")
# What is run again at the ends of every window: short, and it holds every kind of cycle.
_AT_THE_ENDS = ("mix",)


def emit_bench(board: Board, design: Design, windows: Mapping[str, Window]) -> Mapping[str, bytes]:
    """Every file of `bench/`, by name."""
    parameters = parameters_of(board, design, windows)
    names = tuple(scenario.name for scenario in scenarios(board))
    ends = tuple(name for name in names if name in _AT_THE_ENDS)
    plan = (("random", names), ("min", ends), ("max", ends))
    texts = {name: fill_in(f"{name}.j2") for name in _PLAIN}
    texts["bench.v"] = fill_in("bench.v.j2", ports=_ports(parameters), plan=plan)
    texts["parameters.vh"] = _parameters_text(parameters)
    return {name: text.encode() for name, text in sorted(texts.items())}


def _ports(parameters: Parameters) -> list[dict[str, str]]:
    """Port of the logic, and what of the bench it meets."""
    wired = [line for line in INPUT_LINES if line in parameters.lines]
    ports = [{"name": "clk", "meets": "clk"}]
    ports += [{"name": line, "meets": f"line_in[{line.removesuffix('_n').upper()}]"} for line in wired]
    ports.append({"name": "a", "meets": "address_in"})
    outputs = (("ras_n", "RAS"), ("cas_n", "CAS"), ("we_n", "WE"), ("read_n", "READ"), ("enable_n", "ENABLE"))
    ports += [{"name": name, "meets": f"logic_out[{number}]"} for name, number in outputs]
    return [*ports, {"name": "ma", "meets": "logic_out[OUTPUTS-1:MEMORY_ADDRESS]"}]


def _number(value: int) -> str:
    if value == NO_LIMIT:
        return "NONE"
    return f"{'-' if value < 0 else ''}64'sd{abs(value)}"


def _parameters_text(parameters: Parameters) -> str:
    values = dict(parameters.values)
    ends = {f"{delay}_{end}" for delay in DELAYS for end in ("LO", "HI")}
    numbers = [(name, _number(value)) for name, value in parameters.values if name not in ends]
    delays = [{"name": delay, "lo": values[f"{delay}_LO"], "hi": values[f"{delay}_HI"]} for delay in DELAYS]
    inputs = [(net, lo, hi) for net, (lo, hi) in zip(parameters.input_nets, parameters.inputs, strict=True)]
    outputs = [(net, lo, hi) for net, (lo, hi) in zip(parameters.output_nets, parameters.outputs, strict=True)]
    return fill_in("parameters.vh.j2", numbers=numbers, checks=CHECKS, delays=delays, inputs=inputs, outputs=outputs)
