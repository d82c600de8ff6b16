"""The report on a terminal: rich renders the page's blocks; nothing a user wrote is read as markup."""

from __future__ import annotations

import io
from collections.abc import Iterator, Sequence

from rich import box
from rich.console import Console, Group, RenderableType
from rich.padding import Padding
from rich.panel import Panel
from rich.rule import Rule
from rich.table import Column
from rich.table import Table as Grid
from rich.text import Text

from millreason.report.page import (
    Block,
    Box,
    Fields,
    Fold,
    Gallery,
    Item,
    Items,
    Page,
    Pair,
    Picture,
    Say,
    Section,
    Table,
)

_STYLES = {
    "good": "green",
    "note": "cyan",
    "caution": "yellow",
    "warning": "bold red",
    "stop": "bold red",
    "plain": "",
}
_SIDE_BY_SIDE = 108


def terminal(page: Page, full: bool, width: int, colour: bool) -> str:
    """Return the page as text of a given width; the short form holds what is needed at the machine."""
    target = io.StringIO()
    console = Console(
        file=target,
        width=width,
        force_terminal=colour,
        no_color=not colour,
        color_system="standard" if colour else None,
        markup=False,
        emoji=False,
        highlight=False,
        legacy_windows=False,
        _environ={},
    )
    for part in _parts(page, full, width):
        console.print(part)
    return "\n".join(line.rstrip() for line in target.getvalue().splitlines()) + "\n"


def _parts(page: Page, full: bool, width: int) -> Iterator[RenderableType]:
    yield Rule(style="dim")
    yield Text(page.title, style="bold")
    yield Text.assemble((page.verdict_text, _STYLES[page.tone] or "bold"), f": {page.summary}" if page.summary else "")
    for section in page.sections:
        blocks = section.blocks if full else section.brief
        if blocks:
            yield from _section(section, blocks, width)
    yield Rule(style="dim")
    for line in page.footer if full else page.footer[-2:]:
        yield Text(line, style="dim")
    if not full:
        yield Text("More: --full shows every rule and number; --form html --out FILE for paper.", style="dim")


def _section(section: Section, blocks: Sequence[Block], width: int) -> Iterator[RenderableType]:
    yield Text("")
    yield Text(section.title.upper(), style="bold underline")
    kept = [block for block in _unpaired(blocks) if not isinstance(block, Picture | Gallery)]
    while kept:
        first = kept.pop(0)
        if width >= _SIDE_BY_SIDE and isinstance(first, Fields) and kept and isinstance(kept[0], Fields):
            second = kept.pop(0)
            pair = Grid.grid(Column(ratio=1), Column(ratio=1), expand=True, padding=(0, 2))
            pair.add_row(block_text(first), block_text(second))
            yield pair
        else:
            yield block_text(first)


def _unpaired(blocks: Sequence[Block]) -> Iterator[Block]:
    for block in blocks:
        yield from (*block.left, *block.right) if isinstance(block, Pair) else (block,)


def block_text(block: Block) -> RenderableType:
    """Return one block as something rich can print."""
    if isinstance(block, Fields):
        return _titled(block.title, _fields(block))
    if isinstance(block, Table):
        return _titled(block.title, _table(block))
    if isinstance(block, Items):
        return _titled(block.title, _items(block))
    if isinstance(block, Box):
        lines = Text("\n").join(Text(line) for line in block.lines)
        return Panel(
            lines,
            title=Text(block.title),
            border_style=_STYLES[block.tone],
            box=box.SQUARE,
            title_align="left",
        )
    if isinstance(block, Fold):
        return Group(
            Text(block.title, style="bold"),
            Padding(Group(*(block_text(inner) for inner in block.blocks)), (0, 0, 0, 2)),
        )
    return Text(block.text) if isinstance(block, Say) else Text("")


def _titled(title: str, body: RenderableType) -> RenderableType:
    return Group(Text(title, style="bold"), body) if title else body


def _fields(block: Fields) -> Grid:
    grid = Grid.grid(Column(no_wrap=True, style="dim"), Column(ratio=1), padding=(0, 2, 0, 0))
    for label, value in block.rows:
        grid.add_row(Text(label), Text(value))
    return grid


def _table(block: Table) -> Grid:
    grid = Grid(box=box.SIMPLE_HEAD, pad_edge=False, padding=(0, 1, 0, 0), show_edge=False)
    for place, name in enumerate(block.head):
        right = place in block.numbers
        grid.add_column(Text(name), justify="right" if right else "left", overflow="fold")
    for row in block.rows:
        grid.add_row(*(Text(cell) for cell in row))
    return grid


def _items(block: Items) -> Grid:
    grid = Grid.grid(Column(no_wrap=True), Column(ratio=1), padding=(0, 1, 0, 0))
    for number, entry in enumerate(block.entries, 1):
        grid.add_row(Text(f"{number}." if block.numbered else "-"), _item(entry))
    return grid


def _item(entry: Item) -> RenderableType:
    head = Text.assemble((f"{entry.mark}: ", _STYLES[entry.tone] or "bold") if entry.mark else "", entry.text)
    return Group(head, *(Text(line, style="dim") for line in entry.details)) if entry.details else head
