"""The one exception that means "the user can mend this"; anything else is a bug."""

from __future__ import annotations

from difflib import get_close_matches


class UserError(Exception):
    """Bad input: one short message that says where, what was found, what is allowed.

    The command line prints it without a traceback and ends with exit code 2.
    """


class OpenHourError(Exception):
    """An hour of the heat balance that no route could close: exit code 1 with diagnostics."""


def nearest(name: str, known: list[str] | tuple[str, ...]) -> str:
    """Return ' (did you mean "x"?)' for the closest known name, or '' when none is near."""
    hits = get_close_matches(name, list(known), n=1, cutoff=0.5)
    return f' (did you mean "{hits[0]}"?)' if hits else ""
