"""Words in, words and exit status out."""

from __future__ import annotations

import contextlib
import gc
import io
import sys
from collections.abc import Iterator
from pathlib import Path
from typing import Annotated

import typer

from fieldfit import __version__
from fieldfit.errors import InputError
from fieldfit.progress import bar_on_terminal

app = typer.Typer(
    add_completion=False,
    no_args_is_help=True,
    pretty_exceptions_enable=False,
    help="From field readings of flow and pressure to what has become of a pipe.",
    epilog="Example: fieldfit assess sample_data/kiln_cooling",
)

NO_ANSWER = 1
BAD_INPUT = 2
INTERRUPTED = 130
"""What typer ends with after Ctrl-C."""


def _show_version(wanted: bool) -> None:
    """Print the version and stop."""
    if wanted:
        typer.echo(f"fieldfit {__version__}")
        raise typer.Exit


@app.callback()
def common(
    version: Annotated[
        bool, typer.Option("--version", callback=_show_version, is_eager=True, help="Print the version.")
    ] = False,
) -> None:
    """From field readings of flow and pressure to what has become of a pipe."""


@app.command(epilog="Example: fieldfit assess kiln-supply 2026-05-12.csv --json finding.json")
def assess(
    section: Annotated[Path, typer.Argument(help="Folder of the test section, or its section.toml.")],
    logs: Annotated[list[Path] | None, typer.Argument(help="Logs to use instead of the folder's own.")] = None,
    out: Annotated[Path, typer.Option("--out", help="Folder for the reports.")] = Path("reports"),
    json: Annotated[Path | None, typer.Option("--json", help="Write the record to this file too.")] = None,
) -> None:
    """Work back from a log to the pipe's roughness and C, and say what it means."""
    from fieldfit.assessment import assess as run
    from fieldfit.report.files import write_json, write_reports
    from fieldfit.report.summary import summary

    finding = run(section, *(logs or ()))
    with _writing("--out", out):
        written = write_reports(finding, out)
    if json is not None:
        with _writing("--json", json):
            written = (*written, write_json(finding, json))
    typer.echo(summary(finding))
    for path in written:
        typer.echo(f"Written: {path}", err=True)
    if not finding.answered:
        raise typer.Exit(NO_ANSWER)


@app.command(epilog="Example: fieldfit accept heron-lane 2026-05-06.csv")
def accept(
    section: Annotated[Path, typer.Argument(help="Folder of the test section, or its section.toml with a [contract].")],
    logs: Annotated[list[Path] | None, typer.Argument(help="Logs to use instead of the folder's own.")] = None,
    out: Annotated[Path, typer.Option("--out", help="Folder for the certificate.")] = Path("reports"),
) -> None:
    """Hold a pipe as built against its contract: pass, fail, or what would decide."""
    from fieldfit.handover import accept as run
    from fieldfit.report.certificate import handover_summary
    from fieldfit.report.files import write_handover

    handover = run(section, *(logs or ()))
    with _writing("--out", out):
        written = write_handover(handover, out)
    typer.echo(handover_summary(handover))
    for path in written:
        typer.echo(f"Written: {path}", err=True)
    if handover.outcome != "pass":
        raise typer.Exit(NO_ANSWER)


@app.command(epilog="Example: fieldfit screen kiln-supply 2026-05-12.csv --json screening.json")
def screen(
    section: Annotated[Path, typer.Argument(help="Folder of the test section, or its section.toml.")],
    logs: Annotated[list[Path] | None, typer.Argument(help="Logs to use instead of the folder's own.")] = None,
    out: Annotated[Path, typer.Option("--out", help="Folder for the page.")] = Path("reports"),
    json: Annotated[Path | None, typer.Option("--json", help="Write the record to this file too.")] = None,
) -> None:
    """Look at a log before any fit: what became of every row, and whether it is good enough to assess."""
    from fieldfit.report.screening.files import write_screen_json, write_screening
    from fieldfit.report.screening.summary import screen_summary
    from fieldfit.screening import screen_logs

    finding = screen_logs(section, *(logs or ()))
    with _writing("--out", out):
        written = write_screening(finding, out)
    if json is not None:
        with _writing("--json", json):
            written = (*written, write_screen_json(finding, json))
    typer.echo(screen_summary(finding))
    for path in written:
        typer.echo(f"Written: {path}", err=True)
    if not finding.good:
        raise typer.Exit(NO_ANSWER)


@app.command(epilog="Example: fieldfit trend mill-rise --out reports")
def trend(
    section: Annotated[Path, typer.Argument(help="Folder of the test section, or its section.toml.")],
    logs: Annotated[list[Path] | None, typer.Argument(help="Logs to use instead of the folder's own.")] = None,
    out: Annotated[Path, typer.Option("--out", help="Folder for the reports.")] = Path("reports"),
    json: Annotated[Path | None, typer.Option("--json", help="Write the record to this file too.")] = None,
) -> None:
    """Say how fast a pipe worsens, and when it falls short, from all its campaigns together."""
    from fieldfit.report.files import write_json, write_trend
    from fieldfit.report.trend_summary import trend_summary
    from fieldfit.trend import trend as run

    finding = run(section, *(logs or ()))
    with _writing("--out", out):
        written = write_trend(finding, out)
    if json is not None:
        with _writing("--json", json):
            written = (*written, write_json(finding, json))
    typer.echo(trend_summary(finding))
    for path in written:
        typer.echo(f"Written: {path}", err=True)
    if not finding.ageing:
        raise typer.Exit(NO_ANSWER)


@app.command(epilog="Example: fieldfit plan lantern-row --out plan")
def plan(
    section: Annotated[Path, typer.Argument(help="Folder of the test section, or its section.toml with a [plan].")],
    out: Annotated[Path, typer.Option("--out", help="Folder for the plan and the test sheet.")] = Path("reports"),
) -> None:
    """Say before the trip what a test would tell, and write the sheet to take along."""
    from fieldfit.decisions.planning import plan_test
    from fieldfit.field.section_file import read_section
    from fieldfit.report.files import write_plan
    from fieldfit.report.plan_sheets import plan_summary

    found = plan_test(read_section(section))
    with _writing("--out", out):
        written = write_plan(found, out)
    typer.echo(plan_summary(found))
    for path in written:
        typer.echo(f"Written: {path}", err=True)
    if not found.reached:
        raise typer.Exit(NO_ANSWER)


@app.command(epilog="Example: fieldfit start kiln-supply")
def start(
    folder: Annotated[Path, typer.Argument(help="Folder of the new test section; made when it is not there.")],
) -> None:
    """Write a commented section file to fill in."""
    from fieldfit.field.blank_section import write_blank_section

    path = write_blank_section(folder)
    typer.echo(f"Written: {path}")
    called = f'"{folder}"' if " " in str(folder) else str(folder)
    typer.echo(f"Fill it in, put the log beside it, then run: fieldfit assess {called}")


@contextlib.contextmanager
def _writing(option: str, place: Path) -> Iterator[None]:
    """Put a failure to write into words."""
    try:
        yield
    except OSError as error:
        seen = f"it cannot be written ({error.strerror or error})"
        raise InputError(seen, f"Name another place with {option}.", str(place)) from None


@contextlib.contextmanager
def _few_collections() -> Iterator[None]:
    """Look for garbage less often: what the libraries load stays, and going through it again costs an eighth."""
    usual = gc.get_threshold()
    gc.set_threshold(200_000, 20, 20)
    try:
        yield
    finally:
        gc.set_threshold(*usual)


def main(argv: list[str] | None = None) -> int:
    """Run a command and return its exit status.

    Parameters
    ----------
    argv : list of str, optional
        Words after the program's name; those of the process by default.

    Returns
    -------
    int
        0 an answer was reached; 1 the readings allow none; 2 bad input or usage, or it was stopped.
    """
    for stream in (sys.stdout, sys.stderr):
        if isinstance(stream, io.TextIOWrapper):
            # A terminal that lacks a letter of a name shows a question mark instead.
            stream.reconfigure(errors="replace")
    try:
        with bar_on_terminal(), _few_collections():
            app(args=sys.argv[1:] if argv is None else argv, prog_name="fieldfit")
    except InputError as error:
        typer.echo(f"{error}", err=True)
        return BAD_INPUT
    except OSError as error:
        typer.echo(f"The answer cannot be printed: {error.strerror or error}.", err=True)
        return BAD_INPUT
    except SystemExit as end:
        return _status(end)
    return 0


def _status(end: SystemExit) -> int:
    """Return the exit status that the end of a command means."""
    if end.code == INTERRUPTED:
        typer.echo("Stopped.", err=True)
        return BAD_INPUT
    return end.code if isinstance(end.code, int) else 0
