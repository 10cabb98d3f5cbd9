"""Command line. Heavy modules are imported inside the commands, so that `--help` and `check` stay quick."""

from __future__ import annotations

import sys
import traceback
from pathlib import Path
from typing import Annotated

import typer

from weather.errors import OpenHourError, UserError

app = typer.Typer(
    no_args_is_help=True, add_completion=False, pretty_exceptions_enable=False, rich_markup_mode="rich"
)

StudyFile = Annotated[Path, typer.Argument(help="Study file (TOML).", show_default=False)]
OutFolder = Annotated[
    Path, typer.Option("--out", "-o", help="Folder for report, workbook and tables.", show_default=False)
]


@app.callback()
def _root() -> None:
    """Light and heat of a crop under glass or film, hour by hour through a season.

    Compares coverings and screens for one place and one crop: PAR and NIR that reach and are absorbed
    by the crop, what the night sky takes, what the heating must deliver.

    Start with [bold]canopy-budget new my.toml[/bold], look with [bold]check[/bold], compute with
    [bold]run[/bold]; or see a finished example with [bold]demo[/bold].
    """


@app.command()
def demo(out: OutFolder) -> None:
    """Compute the example: five coverings for a tomato house on a real weather year."""
    from reports.commands import run_demo

    run_demo(out)


@app.command()
def new(file: Annotated[Path, typer.Argument(help="Where to write it.", show_default=False)]) -> None:
    """Write a starter study with comments (never over an existing file)."""
    from reports.studyfiles import write_starter

    write_starter(file)
    typer.echo(f"{file}: starter study written; look with: canopy-budget check {file}")


@app.command()
def check(file: StudyFile) -> None:
    """Read a study and say in a few lines what will be computed."""
    from reports.studyfiles import check_text

    typer.echo(check_text(file))


@app.command()
def run(file: StudyFile, out: OutFolder) -> None:
    """Compute a study: report.html, workbook.xlsx, CSV tables and run.json in one folder."""
    from reports.commands import run_study

    run_study(file, out)


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


def main() -> None:
    """Run the command line: exit code 0 done, 2 bad input, 1 a fault of this program."""
    try:
        app()
    except UserError as error:
        print(f"canopy-budget: {error}", file=sys.stderr)
        sys.exit(2)
    except OpenHourError as error:
        print(f"canopy-budget: no report: {error}", file=sys.stderr)
        sys.exit(1)
    except KeyboardInterrupt:
        print("canopy-budget: stopped; nothing was written", file=sys.stderr)
        sys.exit(130)
    except Exception as error:
        traceback.print_exc()
        kind = type(error).__name__
        print(f"canopy-budget: this is a bug ({kind}), not your input; nothing was written", file=sys.stderr)
        sys.exit(1)
