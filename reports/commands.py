"""What the heavier commands do: compute a study, the demo, show the library."""

from __future__ import annotations

import json
import sys
import tomllib
from pathlib import Path
from typing import TYPE_CHECKING

import typer

from canopy.studyfile import build_study, load_study
from reports.studyfiles import check_files, study_text

if TYPE_CHECKING:
    from canopy.studyfile import Study

DEMO_LABEL = "demo"


def run_study(path: Path, out: Path) -> None:
    """Read, compute and write one study; nothing is written before everything is computed."""
    study = load_study(path)
    check_files(study)
    _compute(study, out)


def run_demo(out: Path) -> None:
    """Compute the scenario that ships with the package, on the shipped Greensboro year."""
    text = study_text("demo")
    _compute(build_study(tomllib.loads(text), Path(), DEMO_LABEL, text.encode()), out)


def _compute(study: Study, out: Path) -> None:
    from reports.tables import check_out

    check_out(out)
    from canopy.simulate import simulate
    from reports.tables import write_all
    from reports.terminal import StageLine, result_table

    say = StageLine(sys.stderr)
    try:
        run = simulate(study, say)
        files = write_all(run, out, say)
    finally:
        say.done()
    typer.echo(result_table(run))
    typer.echo(f"\n{len(files)} files in {out}; open {out / 'report.html'}")


def show_coverings(name: str | None, as_json: bool, plot: Path | None) -> None:
    """Print the library, or one covering in full; with a file, write the page of its spectrum."""
    from reports import coverings_view
    from weather.errors import UserError

    if plot is not None and name is None:
        raise UserError("--plot: name the covering to plot, e.g. coverings glass-clear-4 --plot FILE")
    if as_json:
        rows = coverings_view.coverings_json()
        if name is not None:
            from canopy.library_rows import table

            table("covering", name)
            rows = [row for row in rows if row["name"] == name]
        typer.echo(json.dumps(rows, indent=1, ensure_ascii=False))
    elif name is None:
        typer.echo(coverings_view.coverings_table())
    else:
        typer.echo(coverings_view.covering_detail(name))
    if plot is not None and name is not None:
        coverings_view.covering_plot(name, plot)
        if not as_json:
            typer.echo(f"{plot}: spectrum written")
