"""What the page is made of: sections of paragraphs, tables, figures. Plain text; the template escapes it."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Any, ClassVar, Literal

Spec = dict[str, Any]


@dataclass(frozen=True)
class Mark:
    """How one candidate, or one path of energy, looks: colour, dash and symbol."""

    name: str
    colour: str
    dash: str = "solid"
    symbol: str = "circle"
    pattern: str = ""
    kind: Literal["line", "block", "point"] = "line"


@dataclass(frozen=True)
class Row:
    """One row of a table: its heading (with a candidate's mark, if any) and ready texts."""

    label: str
    cells: tuple[str, ...]
    mark: Mark | None = None
    strong: bool = False


@dataclass(frozen=True)
class Table:
    """A table: caption, headings with units below them, rows."""

    shape: ClassVar[str] = "table"
    caption: str
    head: tuple[str, ...]
    rows: tuple[Row, ...]
    units: tuple[str, ...] = ()
    folded: bool = False  # behind a click: the numbers of a figure
    words: bool = False  # cells hold text rather than numbers


@dataclass(frozen=True)
class Text:
    """Paragraphs; `lead` are the sentences that answer the section's question."""

    shape: ClassVar[str] = "text"
    lines: tuple[str, ...]
    lead: bool = False


@dataclass(frozen=True)
class Points:
    """A list of statements."""

    shape: ClassVar[str] = "points"
    lines: tuple[str, ...]


@dataclass(frozen=True)
class Figure:
    """One drawing: specs for the browser (one, or one per candidate), key, and the same in words."""

    shape: ClassVar[str] = "figure"
    slug: str
    title: str
    describe: str
    specs: tuple[Spec, ...]
    key: tuple[Mark, ...] = ()
    height: int = 360
    per_candidate: bool = False
    half: bool = False  # stands beside its neighbour on a wide screen
    note: str = ""
    toggles: bool = False  # the key hides and shows candidates


@dataclass(frozen=True)
class Listing:
    """A text shown as it is, behind a click."""

    shape: ClassVar[str] = "listing"
    title: str
    text: str


Block = Text | Points | Table | Figure | Listing


@dataclass(frozen=True)
class Each:
    """Blocks that exist once per candidate; the reader chooses which one is shown."""

    shape: ClassVar[str] = "each"
    blocks: tuple[tuple[Block, ...], ...]


@dataclass(frozen=True)
class Chooser:
    """The place in a section where a reader chooses the candidate shown in detail."""

    shape: ClassVar[str] = "chooser"
    label: str


@dataclass(frozen=True)
class Section:
    """One question of the report and its answer."""

    slug: str
    title: str
    question: str
    blocks: tuple[Block | Each | Chooser, ...] = field(default=())
