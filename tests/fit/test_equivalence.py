"""Equal, different, not proved: on circuits of two flip-flops."""

from rowkeeper.contract import PortBit, Ports, Status
from rowkeeper.fit.equivalence import Answer, equivalence

PORTS = Ports(
    (
        PortBit("clk", None, "clk", "input"),
        PortBit("a", None, "a", "input"),
        PortBit("y", None, "y", "output"),
    )
)

CIRCUIT = r"""
module \rowkeeper_logic
  wire input 1 \clk
  wire input 2 \a
  wire output 3 \y
  attribute \init 1'0
  wire \kept
  wire \next
  cell $xor \mix
    parameter \A_SIGNED 0
    parameter \B_SIGNED 0
    parameter \A_WIDTH 1
    parameter \B_WIDTH 1
    parameter \Y_WIDTH 1
    connect \A \a
    connect \B \kept
    connect \Y \next
  end
  cell $dff \keep
    parameter \WIDTH 1
    parameter \CLK_POLARITY 1'1
    connect \CLK \clk
    connect \D \next
    connect \Q \kept
  end
  connect \y \kept
end
"""


def test_a_circuit_equals_itself() -> None:
    """Every register and every output is compared, and all agree."""
    found = equivalence(CIRCUIT, CIRCUIT, PORTS)
    assert (found.answer, found.status, found.unproven) == (Answer.EQUAL, Status.PASSED, ())
    assert found.points >= 1


def test_another_gate_is_a_difference() -> None:
    """An or in the place of an exclusive or shows within a few clocks."""
    found = equivalence(CIRCUIT, CIRCUIT.replace("cell $xor", "cell $or"), PORTS)
    assert (found.answer, found.status) == (Answer.DIFFERENT, Status.FAILED)


def test_another_start_value_is_a_difference() -> None:
    """The induction step alone would pass this."""
    found = equivalence(CIRCUIT, CIRCUIT.replace("init 1'0", "init 1'1"), PORTS)
    assert found.answer is Answer.DIFFERENT


def test_a_difference_too_far_from_the_start_is_unproven_not_shown() -> None:
    """Where only the step fails, the words do not claim a difference."""
    late = CIRCUIT.replace("  connect \\y \\kept\n", _chain("  connect \\y \\c12\n"))
    found = equivalence(late, late.replace("connect \\y \\c12", "connect \\y 1'0"), PORTS)
    assert (found.answer, found.status) == (Answer.UNPROVEN, Status.FAILED)
    assert "not shown to differ" in found.detail


def test_a_comparison_that_could_not_run_is_not_a_pass() -> None:
    """Other ports, other circuit: no answer, and not passed."""
    found = equivalence(CIRCUIT, "module \\something\nend\n", PORTS)
    assert (found.answer, found.points) == (Answer.UNPROVEN, 0)
    assert found.status is Status.FAILED


def _chain(end: str) -> str:
    """Thirteen flip-flops in a row that a 1 runs through, with a last line of its own."""
    text = ""
    for i in range(13):
        data = f"\\c{i - 1}" if i else "1'1"
        text += f"  attribute \\init 1'0\n  wire \\c{i}\n  cell $dff \\f{i}\n    parameter \\WIDTH 1\n"
        text += "    parameter \\CLK_POLARITY 1'1\n    connect \\CLK \\clk\n"
        text += f"    connect \\D {data}\n    connect \\Q \\c{i}\n  end\n"
    return text + end
