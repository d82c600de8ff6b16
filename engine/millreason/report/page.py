"""The parts of a page: sections of plain blocks that every form of the report can print."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from typing import ClassVar, Literal

Tone = Literal["plain", "good", "note", "caution", "warning", "stop"]


@dataclass(frozen=True)
class Fields:
    """Labels with their values."""

    kind: ClassVar[str] = "fields"
    rows: tuple[tuple[str, str], ...]
    title: str = ""


@dataclass(frozen=True)
class Table:
    """Rows under a head; the columns named in `numbers` stand to the right."""

    kind: ClassVar[str] = "table"
    head: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]
    numbers: frozenset[int] = frozenset()
    title: str = ""


@dataclass(frozen=True)
class Item:
    """One line of a list: a mark, a text, and smaller lines below it."""

    text: str
    details: tuple[str, ...] = ()
    mark: str = ""
    tone: Tone = "plain"


@dataclass(frozen=True)
class Items:
    """A list, numbered where the order counts."""

    kind: ClassVar[str] = "items"
    entries: tuple[Item, ...]
    numbered: bool = False
    title: str = ""


@dataclass(frozen=True)
class Box:
    """Something that must not be missed."""

    kind: ClassVar[str] = "box"
    title: str
    lines: tuple[str, ...]
    tone: Tone = "note"


@dataclass(frozen=True)
class Say:
    """A plain paragraph."""

    kind: ClassVar[str] = "say"
    text: str


@dataclass(frozen=True)
class Picture:
    """A drawing as SVG, and what it shows in words for those who cannot see it."""

    kind: ClassVar[str] = "picture"
    svg: str
    caption: str


@dataclass(frozen=True)
class Gallery:
    """Drawings that belong together; the first is the largest."""

    kind: ClassVar[str] = "gallery"
    pictures: tuple[Picture, ...]


@dataclass(frozen=True)
class Pair:
    """Two groups of blocks that stand side by side where there is room."""

    kind: ClassVar[str] = "pair"
    left: tuple[Block, ...]
    right: tuple[Block, ...]


@dataclass(frozen=True)
class Fold:
    """Detail that a reader opens on demand; on paper it is always open."""

    kind: ClassVar[str] = "fold"
    title: str
    blocks: tuple[Block, ...]


Block = Fields | Table | Items | Box | Say | Picture | Gallery | Pair | Fold


@dataclass(frozen=True)
class Section:
    """A titled part of the report.

    `brief` is what the short terminal form prints of it; None leaves the section out there.
    `after` is the key of the section behind which an added section takes its place.
    """

    key: str
    title: str
    blocks: tuple[Block, ...]
    brief: tuple[Block, ...] | None = None
    after: str = "lost"


@dataclass(frozen=True)
class Page:
    """The whole report."""

    title: str
    file: str
    verdict: str
    verdict_text: str
    tone: Tone
    summary: str
    sections: tuple[Section, ...]
    footer: tuple[str, ...]


def without_empty_columns(table: Table) -> Table:
    """Leave out the columns in which no row says anything."""
    kept = [place for place in range(len(table.head)) if any(row[place] for row in table.rows)]
    numbers = frozenset(new for new, place in enumerate(kept) if place in table.numbers)
    rows = tuple(tuple(row[place] for place in kept) for row in table.rows)
    return Table(tuple(table.head[place] for place in kept), rows, numbers, table.title)


def section(key: str, title: str, blocks: tuple[Block, ...], brief: tuple[Block, ...] | None = None) -> Section | None:
    """Return a section, or None where it would be empty."""
    return Section(key, title, blocks, brief) if blocks else None


def insert_sections(sections: Iterable[Section], more: Iterable[Section]) -> tuple[Section, ...]:
    """Put each added section behind the one it names, in the order given; else at the end."""
    added = list(more)
    result: list[Section] = []
    for section in sections:
        result.append(section)
        result.extend(extra for extra in added if extra.after == section.key)
    strays = [extra for extra in added if extra not in result]
    return (*result, *strays)


def present(*blocks: Block | None) -> tuple[Block, ...]:
    """Leave out what is missing or empty."""
    return tuple(block for block in blocks if block is not None and not _empty(block))


def _empty(block: Block) -> bool:
    if isinstance(block, Fields | Table):
        return not block.rows
    return isinstance(block, Items) and not block.entries
