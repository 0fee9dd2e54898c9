"""The delay file and the walk over it, on a file small enough to add up by hand."""

import pytest

from rowkeeper.contract import PortBit, Ports
from rowkeeper.fit.delays import routed_delays
from rowkeeper.fit.sdf import SdfError, read_sdf
from rowkeeper.reading.figures import Mark, Window

PORTS = Ports(
    (
        PortBit("clk", None, "clk", "input"),
        PortBit("d", None, "d", "input"),
        PortBit("q", 0, "q0", "output"),
    )
)

# clk: 700 to the buffer, 617 through it, 308 to `first` and 318 to `last`.
# d: 500, a table of 400, 600, set-up 335 at `first`; or straight 900, set-up 468.
# first to last: 540 + 1000 + 335. last to q: 540 + 250.
SMALL = r"""
(DELAYFILE
  (TIMESCALE 1ps)
  (CELL
    (CELLTYPE "top")
    (INSTANCE )
    (DELAY
      (ABSOLUTE
        (INTERCONNECT clk\$sb_io/D_IN_0 gb/USER_SIGNAL_TO_GLOBAL_BUFFER (700:700:700) (700:700:700))
        (INTERCONNECT gb/GLOBAL_BUFFER_OUTPUT first/CLK (308:308:308) (308:308:308))
        (INTERCONNECT gb/GLOBAL_BUFFER_OUTPUT last/CLK (318:318:318) (318:318:318))
        (INTERCONNECT d\$sb_io/D_IN_0 table/I0 (499.2:500:500) (480:490:490))
        (INTERCONNECT table/O first/I3 (600:600:600) (590:590:590))
        (INTERCONNECT d\$sb_io/D_IN_0 first/I0 (900:900:900) (900:900:900))
        (INTERCONNECT first/O last/I3 (1000:1000:1000) (1000:1000:1000))
        (INTERCONNECT last/O q\[0\]\$sb_io/D_OUT_0 (249.5:249.5:249.5) (240:240:240))
      )
    )
  )
  (CELL
    (CELLTYPE "SB_GB")
    (INSTANCE gb)
    (IOPATH USER_SIGNAL_TO_GLOBAL_BUFFER GLOBAL_BUFFER_OUTPUT (617:617:617) (617:617:617))
  )
  (CELL
    (CELLTYPE "ICESTORM_LC")
    (INSTANCE table)
    (IOPATH I0 O (400:400:400) (380:380:380))
  )
  (CELL
    (CELLTYPE "ICESTORM_LC")
    (INSTANCE first)
    (IOPATH CLK O (540:540:540) (540:540:540))
    (SETUPHOLD (posedge I0) (posedge CLK) (468:468:468) (0:0:0))
    (SETUPHOLD (posedge I3) (posedge CLK) (335:335:335) (0:0:0))
  )
  (CELL
    (CELLTYPE "ICESTORM_LC")
    (INSTANCE last)
    (IOPATH CLK O (540:540:540) (540:540:540))
    (SETUPHOLD (posedge I3) (posedge CLK) (335:335:335) (0:0:0))
  )
)
"""


def test_every_arc_is_read_and_rounded_outwards() -> None:
    """Both edges count; fractions of a picosecond widen the span."""
    file = read_sdf(SMALL)
    assert (len(file.wires), len(file.through), len(file.set_ups)) == (8, 4, 3)
    into_table = next(arc for arc in file.wires if arc.end == "table/I0")
    assert (into_table.lo_ps, into_table.hi_ps) == (480, 500)


def test_an_input_counts_to_its_slowest_flip_flop_with_set_up() -> None:
    """500 + 400 + 600 + 335 through the table beats 900 + 468 straight."""
    found = routed_delays(read_sdf(SMALL), PORTS).delays.nets["d"]
    assert found.window == Window(-10, 1835)


def test_an_output_counts_from_the_clock_at_the_first_flip_flop() -> None:
    """10 of skew, 540 clock to output, 250 of wire, rounded up."""
    found = routed_delays(read_sdf(SMALL), PORTS).delays.nets["q0"]
    assert found.window == Window(0, 800)
    assert found.source.mark is Mark.ROUTED


def test_the_clock_arrives_over_its_buffer() -> None:
    """700 + 617 + 308 at the first flip-flop, 10 later at the last."""
    assert routed_delays(read_sdf(SMALL), PORTS).clock_arrival == Window(1625, 1635)


def test_the_slowest_register_path_counts_the_skew() -> None:
    """540 + 1000 + 335, less the 10 by which the last clock is late."""
    assert routed_delays(read_sdf(SMALL), PORTS).slowest_ps == 1865


def test_the_clock_itself_is_no_delay() -> None:
    """Only data nets have a figure."""
    assert sorted(routed_delays(read_sdf(SMALL), PORTS).delays.nets) == ["d", "q0"]


@pytest.mark.parametrize(
    ("right", "wrong"),
    [
        ("(TIMESCALE 1ps)", "(TIMESCALE 1ns)"),
        ("(IOPATH I0 O (400:400:400) (380:380:380))", "(IOPATH I0 O (400::400) (380::380))"),
        ("(posedge CLK) (468:468:468)", "(negedge CLK) (468:468:468)"),
        ("(INTERCONNECT table/O first/I3 (600:600:600) (590:590:590))", "(INTERCONNECT table/O first/I3)"),
    ],
)
def test_what_is_not_understood_is_never_skipped(right: str, wrong: str) -> None:
    """A delay in an unknown form would silently make a path shorter."""
    assert right in SMALL
    with pytest.raises(SdfError):
        read_sdf(SMALL.replace(right, wrong))


def test_an_output_that_no_flip_flop_drives_is_refused() -> None:
    """No path is not a delay of 0."""
    cut = SMALL.replace("(INTERCONNECT last/O q", "(INTERCONNECT nothing/O q")
    with pytest.raises(SdfError, match="no path to `q0`"):
        routed_delays(read_sdf(cut), PORTS)


def test_a_loop_of_logic_is_refused() -> None:
    """A path without an end has no longest delay."""
    loop = SMALL.replace("(INTERCONNECT table/O first/I3", "(INTERCONNECT table/O table/I0")
    with pytest.raises(SdfError, match="loop of logic"):
        routed_delays(read_sdf(loop), PORTS)
