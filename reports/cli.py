"""Command line."""

from __future__ import annotations

import typer

app = typer.Typer(no_args_is_help=True, add_completion=False)


@app.callback()
def _root() -> None:
    """Light, heat and night-sky budget of crops under glass and film, hour by hour."""


def main() -> None:
    """Run the command line."""
    app()
