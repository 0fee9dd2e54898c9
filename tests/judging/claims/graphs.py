"""Small and-inverter graphs by hand."""

from rowkeeper.judging.proof.aiger import Aiger

__all__ = ["counter", "latch", "toggle"]


def latch(graph: Aiger, index: int) -> int:
    """The literal of a latch."""
    return 2 * (graph.inputs + 1 + index)


def counter() -> Aiger:
    """Two bits that count 0, 1, 2, 0, ... while the input is high: state 3 is never reached.

    Variables: 1 the input `go`, 2 and 3 the bits `low` and `high`.
    """
    go, low, high = 2, 4, 6
    gates = [
        (low ^ 1, high ^ 1),  # 4: state 0
        (8, go),  # 5: to state 1
        (low, high ^ 1),  # 6: state 1
        (12, go),  # 7: to state 2
        (high, low ^ 1),  # 8: state 2
        (low, go ^ 1),  # 9: low stays
        (high, go ^ 1),  # 10: high stays
        (10 ^ 1, 18 ^ 1),  # 11: neither
        (14 ^ 1, 20 ^ 1),  # 12: neither
        (low, high),  # 13: state 3
    ]
    return Aiger(
        inputs=1,
        nexts=(22 ^ 1, 24 ^ 1),
        outputs=(26 ^ 1, high ^ 1, 26),
        bads=(),
        constraints=(),
        gates=tuple(gates),
        input_names={0: "go"},
        latch_names={0: "low", 1: "high"},
        output_names={0: "claim_never_three", 1: "claim_never_two", 2: "three"},
    )


def toggle() -> Aiger:
    """One latch that toggles: 1 in every other tick."""
    return Aiger(
        inputs=0,
        nexts=(3,),
        outputs=(2,),
        bads=(),
        constraints=(),
        gates=(),
        input_names={},
        latch_names={0: "q"},
        output_names={0: "q"},
    )
