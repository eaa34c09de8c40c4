"""A table that splits into several where a terminal is too narrow, instead of squeezing its columns."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field

from rich import box
from rich.cells import cell_len
from rich.console import Console, ConsoleOptions, RenderResult
from rich.table import Table
from rich.text import Text

from designer.report.style import TERMINAL

PADDING = 2
"""Blank characters between two columns."""


@dataclass(frozen=True, slots=True)
class Column:
    """A column of cells, all as plain text."""

    head: str
    cells: tuple[str, ...]
    right: bool = True
    widest: int = 30
    """Longer text is folded."""

    @property
    def width(self) -> int:
        """Characters that it needs, folded where it is longer than allowed."""
        return min(self.widest, max(cell_len(text) for text in (self.head, *self.cells)))


@dataclass(frozen=True, slots=True)
class Grid:
    """Columns that stay (left and right) and columns that may go to a further table (middle).

    Cells that end in "!" are emphasised on a terminal. Renders with rich; without a terminal it is plain text.
    """

    left: tuple[Column, ...]
    middle: tuple[Column, ...]
    right: tuple[Column, ...] = ()
    sections: frozenset[int] = field(default_factory=frozenset)
    """Rows after which a line is drawn."""

    def blocks(self, width: int) -> Iterator[tuple[Column, ...]]:
        """Yield the columns of each table that fits a width in characters; at least one middle column each."""
        room = width - sum(column.width + PADDING for column in (*self.left, *self.right)) - 1
        taken: list[Column] = []
        used = 0
        for column in self.middle:
            if taken and used + column.width + PADDING > room:
                yield tuple(taken)
                taken, used = [], 0
            taken.append(column)
            used += column.width + PADDING
        yield tuple(taken)

    def __rich_console__(self, console: Console, options: ConsoleOptions) -> RenderResult:
        """Render as one or more tables for the width that there is."""
        for index, middle in enumerate(self.blocks(options.max_width)):
            if index:
                yield Text("")
            yield _table((*self.left, *middle, *self.right), self.sections)


def _table(columns: Sequence[Column], sections: frozenset[int]) -> Table:
    """Return a rich table of plain columns."""
    table = Table(box=box.SIMPLE_HEAD, pad_edge=False, padding=(0, 1), header_style=TERMINAL["head"])
    for column in columns:
        # A head as wide as its column allows wraps at spaces; only a longer word is cut in pieces.
        table.add_column(
            Text(column.head, style=TERMINAL["head"]),
            justify="right" if column.right else "left",
            max_width=column.widest,
            min_width=min(column.width, 6),
            overflow="fold",
        )
    for row in range(len(columns[0].cells)):
        cells = [_cell(column.cells[row]) for column in columns]
        table.add_row(*cells, end_section=row in sections)
    return table


def _cell(text: str) -> Text:
    return Text(text, style=TERMINAL["off"] if text.endswith("!") else "")
