"""Command line. Heavy modules are imported inside the commands, so that `--help` and `check` stay quick."""

from __future__ import annotations

import errno
import os
import signal
import sys
import traceback
from pathlib import Path
from typing import Annotated, Any

import typer

from weather.errors import OpenHourError, UserError

app = typer.Typer(
    no_args_is_help=True, add_completion=False, pretty_exceptions_enable=False, rich_markup_mode="rich"
)

StudyFile = Annotated[Path, typer.Argument(help="Study file (TOML).", show_default=False)]
OutFolder = Annotated[
    str,
    typer.Option(
        "--out",
        "-o",
        help="Folder for report, workbook and tables; made if absent.",
        metavar="FOLDER",
        show_default=False,
    ),
]


def _folder(out: str) -> Path:
    if not out.strip():
        raise UserError('--out: is empty; name a folder, "." for this one')
    return Path(out)


HELP = (
    "Light and heat of a crop under glass or film, hour by hour through a season.\n\n"
    "Compares coverings and screens for one place and one crop: PAR and NIR that reach and are absorbed by "
    "the crop, what the night sky takes, what the heating must deliver.\n\n"
    "Start with [bold]canopy-budget new my.toml[/bold], look with [bold]check[/bold], compute with "
    "[bold]run[/bold]; or see a finished example with [bold]demo[/bold]."
)


@app.callback(help=HELP)
def _root() -> None:
    """Hold the commands together."""


@app.command()
def demo(out: OutFolder) -> None:
    """Compute the example: five coverings for a tomato house on a real weather year."""
    from reports.commands import run_demo

    run_demo(_folder(out))


@app.command()
def new(file: Annotated[Path, typer.Argument(help="Where to write it.", show_default=False)]) -> None:
    """Write a starter study with comments (never over an existing file)."""
    from reports.studyfiles import write_starter

    write_starter(file)
    typer.echo(f"{file}: starter study written; look with: canopy-budget check {file}")


@app.command()
def check(file: StudyFile) -> None:
    """Read a study and say in a few lines what will be computed."""
    from reports.check_view import check_text

    typer.echo(check_text(file))


@app.command()
def run(file: StudyFile, out: OutFolder) -> None:
    """Compute a study: report.html, workbook.xlsx, CSV tables and run.json in one folder."""
    from reports.commands import run_study

    run_study(file, _folder(out))


@app.command()
def coverings(
    name: Annotated[str | None, typer.Argument(help="One covering in full.", show_default=False)] = None,
    as_json: Annotated[bool, typer.Option("--json", help="The library as JSON.")] = False,
    plot: Annotated[
        Path | None, typer.Option(help="Write an interactive page of its spectrum.", show_default=False)
    ] = None,
) -> None:
    """Show the library of coverings, or one covering in full."""
    from reports.commands import show_coverings

    show_coverings(name, as_json, plot)


@app.command()
def weather(
    file: Annotated[
        Path, typer.Argument(help="Weather file, or the name of a shipped year.", show_default=False)
    ],
    plot: Annotated[
        Path | None, typer.Option(help="Write an interactive page with figures.", show_default=False)
    ] = None,
    latitude: Annotated[
        float | None, typer.Option(help="Degrees north, if the file does not say.", show_default=False)
    ] = None,
    longitude: Annotated[
        float | None, typer.Option(help="Degrees east, if the file does not say.", show_default=False)
    ] = None,
    timezone: Annotated[
        str | None, typer.Option(help="IANA zone, if the file does not say.", show_default=False)
    ] = None,
) -> None:
    """Read a weather file and report its quality, monthly climate and design temperatures."""
    from reports.weather_page import weather_command

    place = {"latitude": latitude, "longitude": longitude, "timezone": timezone}
    given = {key: value for key, value in place.items() if value is not None}
    typer.echo(weather_command(file, plot, **given))


@app.command()
def bands(
    temperature: Annotated[float, typer.Option(help="Temperature of the black surface, K.")],
    edges: Annotated[
        str | None, typer.Option(help="Band edges in µm, rising, with commas.", show_default=False)
    ] = None,
) -> None:
    """Show how a black surface shares its radiation over bands, and where its peak lies."""
    from reports.bands_view import bands_text

    typer.echo(bands_text(temperature, edges))


STOPPED = 130
CLOSED_PIPE = 141  # as a shell says it of a program whose reader went away


def main() -> None:
    """Run the command line: exit code 0 done, 2 bad input, 1 a fault of this program, 130 stopped."""
    for stream in (sys.stdout, sys.stderr):
        if hasattr(stream, "reconfigure"):  # names that the terminal cannot show come out as "?"
            stream.reconfigure(errors="replace")
    signal.signal(signal.SIGTERM, _stop)
    sys.exit(exit_code(sys.argv[1:] or ["--help"]))


def _stop(*_: object) -> None:
    raise KeyboardInterrupt


def exit_code(args: list[str]) -> int:
    """Run one command and return its exit code; every fault is said in one line."""
    try:
        done = app(args, prog_name="canopy-budget", standalone_mode=False)
        if sys.stdout is not None:
            sys.stdout.flush()
        if done == STOPPED:
            raise KeyboardInterrupt
    except UserError as error:
        return _say(str(error), 2)
    except OpenHourError as error:
        return _say(f"no report: {error}", 1)
    except (KeyboardInterrupt, typer.Abort):
        return _say("stopped; nothing was written", STOPPED)
    except BrokenPipeError:
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return CLOSED_PIPE
    except SystemExit as end:  # the command line library says so of a reader that went away
        return CLOSED_PIPE if end.code == 1 else int(end.code or 0)
    except Exception as error:
        if hasattr(error, "format_message"):  # the command line itself: unknown command or option
            return _say(_usage(error), 2)
        if isinstance(error, OSError) and error.errno == errno.ENOSPC:
            return _say("what this prints cannot be written: no space left", 2)
        if isinstance(error, OSError) and error.errno == errno.ENAMETOOLONG:
            return _say("a file name is longer than the system allows", 2)
        traceback.print_exc()
        return _say(f"this is a bug ({type(error).__name__}), not your input; nothing was written", 1)
    return 0


def _usage(error: Any) -> str:
    context = getattr(error, "ctx", None)
    path = context.command_path if context is not None else "canopy-budget"
    inner = path.partition(" ")[2]
    said = error.format_message().rstrip(".")
    return f"{inner + ': ' if inner else ''}{said[:1].lower()}{said[1:]}; see canopy-budget {inner} --help"


def _say(text: str, code: int) -> int:
    """Print one line that a terminal can show, and return the exit code."""
    line = "".join(sign if sign.isprintable() else " " for sign in text)
    print(f"canopy-budget: {' '.join(line.split())}", file=sys.stderr)
    return code
