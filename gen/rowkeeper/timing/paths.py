"""What a net passes through on its way, as promises in the order of travel.

Takes the board's wiring and the device's delays; gives the path of a net or of a group of nets. Series resistance
into a load settles within 1.93 R C, to the levels a memory sheet counts from, and may settle at once; the figure is
arithmetic on the board file. Must not know cycles, limits or ticks.
"""

from collections.abc import Mapping
from dataclasses import dataclass, replace

from rowkeeper.contract import Delays, NetDelay
from rowkeeper.reading.board import Board, Net, Part
from rowkeeper.reading.figures import Figure, Mark, Source, Window
from rowkeeper.timing.bus import from_figure
from rowkeeper.timing.network import UNPUBLISHED, Network, Promise

__all__ = [
    "Path",
    "default_delays",
    "group_path",
    "is_pad",
    "net_path",
    "net_windows",
    "part_of",
    "skew_between",
    "travel",
]


@dataclass(frozen=True, slots=True)
class Path:
    """`fast` holds the lower ends, `slow` the upper ends; for one net they are the same promises."""

    fast: tuple[Promise, ...]
    slow: tuple[Promise, ...]

    @property
    def lo_ps(self) -> int:
        return sum(p.lo_ps or 0 for p in self.fast)

    @property
    def hi_ps(self) -> int:
        return sum(p.hi_ps or 0 for p in self.slow)

    def then(self, other: "Path") -> "Path":
        """One path after the other."""
        return Path(self.fast + other.fast, self.slow + other.slow)


def travel(network: Network, start: str, end: str, path: Path) -> None:
    """A signal that leaves at `start` arrives at `end`."""
    if path.fast == path.slow:
        network.promise(start, end, *path.fast)
        return
    network.promise(start, end, *(replace(p, hi_ps=None) for p in path.fast))
    network.promise(start, end, *(replace(p, lo_ps=None) for p in path.slow))


def default_delays(board: Board) -> Delays:
    """What is assumed of the device's fabric until the router has spoken, per net. Pads are added by the paths."""
    device = board.device
    fabric = {"input": device.before_routing_input, "output": device.before_routing_output}
    nets: dict[str, NetDelay] = {}
    for net in board.wiring.nets:
        if net.side != "path" and net.pin:
            figure = fabric[net.side]
            window = Window(figure.lo_ps or 0, figure.hi_ps or 0)
            nets[net.name] = NetDelay(net.name, net.side, window, figure.source)
    return Delays(nets, routed=False)


def net_path(board: Board, delays: Delays, net: Net) -> Path:
    """The whole path of one net, board, pad and fabric in the order of travel."""
    inside, outside = _inside(delays, net.name), _outside(board, net)
    if net.side == "output":
        promises = (*inside, *_pad(net, board.device.output_pad), *outside)
    else:
        promises = (*outside, *(_pad(net, board.device.input_pad) if net.side == "input" else ()), *inside)
    return Path(promises, promises)


def group_path(board: Board, delays: Delays, names: str) -> Path:
    """The slowest and the fastest of all nets called `names`, or `names` and a number."""
    paths = [net_path(board, delays, net) for net in board.wiring.nets if _belongs(net.name, names)]
    if not paths:
        return Path((), ())
    fast = min(paths, key=lambda path: path.lo_ps)
    slow = max(paths, key=lambda path: path.hi_ps)
    return Path(fast.fast, slow.slow)


def net_windows(board: Board, delays: Delays) -> Mapping[str, Window]:
    """The window of every net from end to end, board and device together."""
    windows: dict[str, Window] = {}
    for net in board.wiring.nets:
        path = net_path(board, delays, net)
        windows[net.name] = Window(path.lo_ps, path.hi_ps)
    return windows


def part_of(board: Board, names: str) -> Part | None:
    """The last part that the net passes through."""
    for net in board.wiring.nets:
        if _belongs(net.name, names):
            parts = [element.part for element in net.through if element.part is not None]
            return parts[-1] if parts else None
    return None


def skew_between(board: Board, one: str, other: str) -> Figure | None:
    """How far two outputs may differ that are driven by one package and turn the same way, where the sheet says."""
    designators: list[str] = []
    figure: Figure | None = None
    for name in (one, other):
        parts = [e for net in board.wiring.nets if net.name == name for e in net.through if e.part is not None]
        if len(parts) != 1 or not parts[0].designator or parts[0].part is None:
            return None
        designators.append(parts[0].designator)
        figure = parts[0].part.skew
    return figure if designators[0] == designators[1] else None


def _belongs(net: str, names: str) -> bool:
    return net == names or (net.startswith(names) and net[len(names) :].strip("_").isdigit())


def _pad(net: Net, figure: Figure) -> tuple[Promise, ...]:
    """The pad of a net that touches the device: neither the fabric's figures nor the router's hold it."""
    return (from_figure(figure, f"{net.name}: pad"),) if net.pin else ()


def is_pad(promise: Promise) -> bool:
    """Whether this promise of a path is the device's pad."""
    return promise.name.endswith(": pad")


def _inside(delays: Delays, net: str) -> tuple[Promise, ...]:
    found = delays.nets.get(net)
    if found is None:
        return ()
    lo = found.window.lo_ps
    name = f"{net}: {'routed' if delays.routed else 'before routing'}"
    return (Promise(name, lo or 0, found.window.hi_ps, found.source, None if lo else UNPUBLISHED),)


def _outside(board: Board, net: Net) -> tuple[Promise, ...]:
    """Parts and settling of one net, driver to receiver."""
    promises: list[Promise] = []
    part: Part | None = None
    series_milliohm = 0
    load_ff = 0
    for element in (*net.through, None):
        if element is None or element.part is not None:
            promises += _loading(net.name, part, load_ff) + _settling(board, net.name, series_milliohm, load_ff)
            series_milliohm = load_ff = 0
        if element is None:
            break
        if element.part is not None:
            part = element.part
            place = f" {element.designator}" if element.designator else ""
            promises.append(from_figure(part.delay, f"{net.name}: {part.name}{place}"))
        series_milliohm += element.series_milliohm
        load_ff += element.load_ff
    return tuple(promises)


def _loading(net: str, part: Part | None, load_ff: int) -> list[Promise]:
    """What a load beyond the one the delay was measured at may cost, where the sheet lets it be worked out."""
    if part is None or part.load_slope_ps is None or load_ff <= part.load_rated_pf * 1000:
        return []
    hi_ps = -(-part.load_slope_ps * (load_ff - part.load_rated_pf * 1000) // 1000)
    return [Promise(f"{net}: load beyond {part.load_rated_pf} pF", 0, hi_ps, part.load_source)]


def _settling(board: Board, net: str, series_milliohm: int, load_ff: int) -> list[Promise]:
    """0 to 1.93 R C, rounded up to a picosecond; milliohm x femtofarad is 10 ** -6 ps.

    A memory sheet counts its times from VIL(max) and VIH(min). The longer way is the fall from 5.5 V to 0.8 V,
    ln(5.5 / 0.8) = 1.928 R C; a rise to 2.7 V at 4.4 V takes ln(4.4 / 1.7) = 0.951 R C.
    """
    if not series_milliohm or not load_ff:
        return []
    hi_ps = -(-193 * series_milliohm * load_ff // 10**8)
    ohm, picofarad = series_milliohm / 1000, load_ff / 1000
    source = Source(Mark.DERIVED, f"1.93 R C of {ohm:g} ohm and {picofarad:g} pF in {board.file}")
    return [Promise(f"{net}: settling", 0, hi_ps, source)]
