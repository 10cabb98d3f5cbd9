"""The library by name: coverings, screens, leaves and grounds, with where each figure comes from.

Names are generic. Looking names and rows up is light (standard library only); the optics are computed when a
record is asked for, and kept.
"""

from __future__ import annotations

from functools import cache
from typing import TYPE_CHECKING, Literal

from canopy import library_rows
from canopy.library_rows import Figure, Row

if TYPE_CHECKING:
    from canopy.optics import Covering, Ground, Leaf, Screen

__all__ = [
    "Figure",
    "Row",
    "covering",
    "covering_names",
    "ground",
    "ground_names",
    "leaf",
    "leaf_names",
    "row",
    "screen",
    "screen_names",
]

Wetting = Literal["film", "drops", "none"]


def covering_names() -> tuple[str, ...]:
    """Return the coverings of the library, in its order: glass, films, rigid plastics."""
    return library_rows.names("covering")


def screen_names() -> tuple[str, ...]:
    """Return the screens of the library."""
    return library_rows.names("screen")


def ground_names() -> tuple[str, ...]:
    """Return the grounds of the library."""
    return library_rows.names("ground")


def leaf_names() -> tuple[str, ...]:
    """Return the leaf types of the library."""
    from canopy import leaves

    return leaves.leaf_names()


def row(name: str) -> Row:
    """Return provenance, sources and figures (value, low, high) of a covering, screen or ground.

    Raises UserError for an unknown name.
    """
    return library_rows.row(name)


@cache
def covering(name: str, *, wet: Wetting | None = None, age_years: float = 0.0) -> Covering:
    """Return a covering as built; UserError for an unknown name.

    `wet` says how condensation lies on the inner face: "film", "drops", or "none" (the wet state equals the
    dry one); None takes what is usual for the covering. `age_years` lowers light as the row's `ageing` says.
    """
    entry = library_rows.table("covering", name)
    from canopy.library_build import build_covering

    return build_covering(entry, wet or entry["wetting"], age_years)


@cache
def screen(name: str) -> Screen:
    """Return a screen as drawn fabric; UserError for an unknown name."""
    library_rows.table("screen", name)
    from canopy.fabric import build_screen

    return build_screen(library_rows.row(name))


@cache
def ground(name: str) -> Ground:
    """Return a ground; UserError for an unknown name."""
    library_rows.table("ground", name)
    from canopy.fabric import build_ground

    return build_ground(library_rows.row(name))


def leaf(name: str) -> Leaf:
    """Return a leaf type; UserError for an unknown name."""
    from canopy import leaves

    return leaves.leaf(name)
