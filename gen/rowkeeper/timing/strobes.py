"""What the sequencer makes of a request: when it is seen, which strobes follow, and what must rest before the next.

Takes `Facts` and a network that holds the bus's events; adds the device's and the chip's. The building blocks of
`scenes`. Must not know cases or limits.
"""

from rowkeeper.timing.bus import CycleKind
from rowkeeper.timing.device import SYNCHRONISER, Facts, counted, drive, sample
from rowkeeper.timing.network import SAME, Network
from rowkeeper.timing.paths import travel

__all__ = ["follow", "is_straight", "next_access", "next_cycle", "refresh", "requests", "row_strobe"]

_SEEN = (
    *(("MREQf", "mreq_n"), ("MREQr", "mreq_n"), ("RDf", "rd_n"), ("RDr", "rd_n"), ("WRf", "wr_n")),
    *(("M1f", "m1_n"), ("M1r", "m1_n"), ("next MREQf", "mreq_n"), ("next M1f", "m1_n")),
)


def is_straight(facts: Facts) -> bool:
    """Whether the row strobe is MREQ itself, passed through the device without a clock."""
    return facts.ticks.style == "straight"


def row_strobe(network: Network, facts: Facts, edge: str, line: str, event: str) -> None:
    """The row strobe moves with a clock edge of the device, or with the bus where it is passed straight through."""
    if is_straight(facts):
        travel(network, line, event, facts.paths["mreq_n"].then(facts.paths["ras_n"]))
    else:
        drive(network, facts, "ras_n", edge, event)


def requests(network: Network, facts: Facts) -> None:
    """When the device sees the lines of both cycles."""
    for event, net in _SEEN:
        if network.holds(event):
            sample(network, facts, net, event, f"{event} seen")
    for event in ("A", "A ends", "next A"):
        if network.holds(event):
            travel(network, event, f"{event} arrives", facts.paths["a"])
    for prefix in ("", "next "):
        if network.holds(f"{prefix}MREQf seen"):
            network.promise(f"{prefix}MREQf seen", f"{prefix}on time", counted(facts, plus=SYNCHRONISER))


def refresh(network: Network, facts: Facts, prefix: str) -> None:
    """A refresh: the row goes out at once, the row strobe follows after `row_setup`."""
    span = counted(facts, "row_setup")
    network.promise(f"{prefix}turn", f"{prefix}row falls", span)
    row_strobe(network, facts, f"{prefix}row falls", f"{prefix}MREQf", f"{prefix}RASf")
    if prefix:
        return
    drive(network, facts, "ma", "turn", "row address")
    network.promise("row falls", "row rises", counted(facts, "refresh_low"))
    row_strobe(network, facts, "row rises", "MREQr", "RASr")
    network.promise("row rises", "address released", counted(facts, plus=1, at_least=True))
    drive(network, facts, "ma", "address released", "row address ends")


def next_cycle(network: Network, facts: Facts, follower: CycleKind) -> None:
    """The neighbour: its strobes start on time or later."""
    if follower == "interrupt acknowledge":
        return
    start = "next turn" if follower == "refresh" else "next row falls"
    network.promise("next on time", start, counted(facts, at_least=True))
    if follower == "refresh":
        refresh(network, facts, "next ")
    else:
        next_access(network, facts, follower == "memory write")
    if follower == "memory write":
        return
    # Another reader may drive the bus as soon as RD falls.
    if network.holds("next RDf"):
        network.promise("next RDf", "next driver", SAME)


def next_access(network: Network, facts: Facts, write: bool) -> None:
    row_strobe(network, facts, "next row falls", "next MREQf", "next RASf")
    network.promise("next row falls", "next go", counted(facts, "column", at_least=True))
    if write:
        network.promise("next go", "next column falls", counted(facts, "write_lead", at_least=True))
        drive(network, facts, "we_n", "next go", "next WEf")
        if network.holds("next D"):
            network.promise("next D", "next driver", SAME)
    else:
        network.promise("next go", "next column falls", SAME)
    drive(network, facts, "cas_n", "next column falls", "next CASf")


def follow(network: Network, facts: Facts, last: str) -> None:
    """Rest kept by the sequencer before the next strobe, whatever the bus asks; the address outputs follow at once.

    A refresh of the bus is prepared from the very edge at which the column strobe rises.
    """
    network.promise(last, "address followed", counted(facts, plus=1))
    drive(network, facts, "ma", "address followed", "next row address")
    if is_straight(facts):  # nothing holds the next row strobe back
        return
    for start in ("next turn", "next row falls"):
        if network.holds(start):
            network.promise("row rises", start, counted(facts, "precharge", at_least=True))
            if last == "column rises":
                rest = () if start == "next turn" else ("column_rest",)
                network.promise(last, start, counted(facts, *rest, at_least=True))
            break
