"""The command line.

Takes arguments; gives data on stdout, talk on stderr, and an exit code: 0 passed, 1 the design fails a check, 2 the
board file or the call is wrong, 3 something did not run, 4 a bug of ours. Must not know any rule of the trade.
"""

import sys
import traceback
from collections.abc import Callable, Sequence
from pathlib import Path
from types import ModuleType
from typing import TYPE_CHECKING, NoReturn

import click

from rowkeeper import __version__, tools
from rowkeeper.reading.problems import Refused
from rowkeeper.run.output import OutputRefused, UnknownNameError
from rowkeeper.run.progress import Progress

if TYPE_CHECKING:
    from rowkeeper.run.commands import Answer

__all__ = ["main"]

_BOARD = click.argument("board", type=click.Path(path_type=Path))
_JSON = click.option("--json", "as_json", is_flag=True, help="Data for machines on stdout.")
_QUIET = click.option("--quiet", is_flag=True, help="No talk on stderr.")
_OUT = click.option(
    "--out",
    type=click.Path(path_type=Path, file_okay=False),
    default=Path("out"),
    show_default=True,
    help="Folder that receives a folder per board.",
)


def _progress(quiet: bool) -> Progress:
    progress = Progress(None if quiet else sys.stderr)
    tools.on_first_run(progress.say)
    return progress


def _commands() -> ModuleType:
    """The rooms behind the quick commands, loaded only when one runs: help and refusals stay quick."""
    from rowkeeper.run import commands

    return commands


def _what_if() -> ModuleType:
    from rowkeeper.run import what_if

    return what_if


def _line() -> ModuleType:
    """The rooms behind the long commands: logic, solvers and tools are loaded for these alone."""
    from rowkeeper.run import line

    return line


def _finish(answer: "Answer") -> NoReturn:
    click.echo(answer.text, nl=not answer.text.endswith("\n"))
    raise SystemExit(answer.code)


@click.group(context_settings={"help_option_names": ["-h", "--help"]})
@click.version_option(__version__, prog_name="rowkeeper")
def _cli() -> None:
    """From one board file to proven, fitted logic for a dynamic memory board.

    Exit codes: 0 passed, 1 the design fails a check, 2 the board file or the call is wrong, 3 something did not run,
    4 a bug of ours.
    """


@_cli.command()
@_BOARD
@_OUT
@_JSON
@_QUIET
def generate(board: Path, out: Path, as_json: bool, quiet: bool) -> None:
    """Everything: logic, margins, proofs, bench, fit and sheet, with a verdict at the end."""
    _finish(_line().generate(board, out, as_json, _progress(quiet)))


@_cli.command()
@_BOARD
@click.option("--explain", metavar="LIMIT", help="Show every term of one limit, such as tRP.")
@click.option("--routed", is_flag=True, help="Place and route first and judge with the router's delays.")
@click.option("--vary", metavar="WHAT", help="What if: clock=2..8MHz, chip=4116-15,4116-20 or chip=all.")
@click.option("--picture", type=click.Path(path_type=Path, dir_okay=False), help="With --vary: also draw it, as SVG.")
@_JSON
@_QUIET
def margins(
    board: Path, explain: str | None, routed: bool, vary: str | None, picture: Path | None, as_json: bool, quiet: bool
) -> None:
    """Every timing limit with its margin, worst first."""
    if vary is not None:
        if explain is not None or routed:
            raise click.UsageError("--vary goes with neither --explain nor --routed")
        _finish(_what_if().vary(board, vary, picture, as_json, _progress(quiet)))
    if picture is not None:
        raise click.UsageError("--picture draws what --vary finds: give --vary")
    _finish(_commands().margins(board, explain, routed, as_json, _progress(quiet)))


@_cli.command()
@_BOARD
@click.option("--logic", "only_logic", is_flag=True, help="Only the logic, not the routed netlist.")
@_JSON
@_QUIET
def prove(board: Path, only_logic: bool, as_json: bool, quiet: bool) -> None:
    """Prove every claim, on the logic and on the routed netlist."""
    _finish(_line().prove(board, only_logic, as_json, _progress(quiet)))


@_cli.command()
@_BOARD
@click.option("--netlist", is_flag=True, help="Run the routed netlist instead of the logic.")
@click.option("--seed", type=click.IntRange(min=1), default=1, show_default=True)
@click.option("--no-icarus", is_flag=True, help="Only the compiled bench.")
@click.option("--junit", type=click.Path(path_type=Path, dir_okay=False), help="Also write JUnit XML to this file.")
@_JSON
@_QUIET
def simulate(
    board: Path, netlist: bool, seed: int, no_icarus: bool, junit: Path | None, as_json: bool, quiet: bool
) -> None:
    """Run the bench: bus model at its worst against a memory that forgets."""
    _finish(_line().simulate(board, netlist, seed, not no_icarus, junit, as_json, _progress(quiet)))


@_cli.command()
@_BOARD
@_OUT
@_JSON
@_QUIET
def sheet(board: Path, out: Path, as_json: bool, quiet: bool) -> None:
    """Write the pin list and the assembly sheet only; the sheet says what was not run."""
    _finish(_line().sheet(board, out, as_json, _progress(quiet)))


@_cli.command()
@click.argument("name", required=False)
@_JSON
def parts(name: str | None, as_json: bool) -> None:
    """List the catalogue, or every figure of one entry with its source."""
    _finish(_commands().parts(name, as_json))


def main(arguments: Sequence[str] | None = None) -> NoReturn:
    """Run the command line and exit."""
    raise SystemExit(_guarded(lambda: _cli.main(args=arguments, prog_name="rowkeeper", standalone_mode=False)))


def _guarded(command: Callable[[], object]) -> int:
    """Turn every way a command can end into an exit code; a user never sees a traceback."""
    try:
        code = command()
    except Refused as refused:
        click.echo(str(refused), err=True)
        return 2
    except (OutputRefused, UnknownNameError) as refused:
        click.echo(f"rowkeeper: {refused}", err=True)
        return 2
    except click.exceptions.Exit as stop:
        return stop.exit_code
    except click.ClickException as wrong:
        wrong.show()
        return 2
    except (KeyboardInterrupt, click.Abort):
        click.echo("rowkeeper: stopped; nothing was written", err=True)
        return 3
    except tools.ToolMissing as missing:
        click.echo(f"rowkeeper: not run: {missing}", err=True)
        return 3
    except tools.TimedOut as late:
        click.echo(f"rowkeeper: not run: {late}", err=True)
        return 3
    except BrokenPipeError:
        return 3
    except SystemExit as stop:
        return int(stop.code or 0)
    except Exception as bug:
        where = traceback.extract_tb(bug.__traceback__)[-1]
        place = f"{Path(where.filename).name}:{where.lineno}"
        click.echo(f"rowkeeper: a bug of ours: {type(bug).__name__} in {place}: {bug}", err=True)
        return 4
    return code if isinstance(code, int) else 0
