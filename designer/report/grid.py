"""A table that splits into several where a terminal is too narrow, instead of squeezing its columns."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field, replace

from rich import box
from rich.cells import cell_len
from rich.console import Console, ConsoleOptions, RenderResult
from rich.table import Table
from rich.text import Text

from designer.report.style import TERMINAL

ONE_LINE = 12
"""Longest head that stays on one line where its cells are narrower."""
FOLDED = 12
"""What columns at the right may be narrowed to before a table splits."""
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
    def lined_up(self) -> tuple[str, ...]:
        """The cells, with a blank where others have a "!", so that figures stand under each other."""
        if not self.right or not any(text.endswith("!") for text in self.cells):
            return self.cells
        return tuple(text if text.endswith("!") else f"{text}\u00a0" for text in self.cells)

    @property
    def width(self) -> int:
        """Characters that it needs: its cells as they are where allowed, a long head on two lines."""
        head = cell_len(self.head)
        if head > ONE_LINE:
            head = max([-(-head // 2), *(cell_len(word) for word in self.head.split())])
        return min(self.widest, max([head, *(cell_len(text) for text in self.lined_up)]))


@dataclass(frozen=True, slots=True)
class Grid:
    """Columns that stay (left and right) and columns that may go to a further table (middle).

    Cells that end in "!" are emphasised on a terminal; elsewhere it renders as plain text.
    """

    left: tuple[Column, ...]
    middle: tuple[Column, ...]
    right: tuple[Column, ...] = ()
    sections: frozenset[int] = field(default_factory=frozenset)
    """Rows after which a line is drawn."""

    def layout(self, width: int) -> tuple[list[tuple[Column, ...]], tuple[Column, ...]]:
        """Return the middle columns of each table that fits a width in characters, and the columns at right.

        Rather than split, the columns at right are folded. Split tables have about equally many columns, and
        at least one middle column each, even where that is too wide.
        """
        folded = tuple(replace(column, widest=min(column.widest, FOLDED)) for column in self.right)
        for count in range(1, len(self.middle) + 1):
            size = -(-len(self.middle) // count)
            found = [self.middle[i : i + size] for i in range(0, len(self.middle), size)]
            for right in (self.right, folded):
                if all(self._needs(block, right) <= width for block in found):
                    return found, right
        return [(column,) for column in self.middle], folded

    def _needs(self, block: Sequence[Column], right: Sequence[Column]) -> int:
        """Return the width of a table with these columns in the middle and at right."""
        return sum(column.width + PADDING for column in (*self.left, *block, *right)) + 1

    def __rich_console__(self, console: Console, options: ConsoleOptions) -> RenderResult:
        """Render as one or more tables for the width that there is."""
        blocks, right = self.layout(options.max_width)
        for index, middle in enumerate(blocks):
            if index:
                yield Text("")
            yield _table((*self.left, *middle, *right), self.sections)


def _table(columns: Sequence[Column], sections: frozenset[int]) -> Table:
    """Return a rich table of plain columns."""
    table = Table(
        box=box.SIMPLE_HEAD, pad_edge=False, padding=(0, PADDING - 1, 0, 0), header_style=TERMINAL["head"]
    )
    for column in columns:
        # A head as wide as its column allows wraps at spaces; only a longer word is cut in pieces.
        table.add_column(
            Text(column.head, style=TERMINAL["head"]),
            justify="right" if column.right else "left",
            max_width=column.width,
            min_width=min(column.width, 6),
            overflow="fold",
        )
    for row in range(len(columns[0].cells)):
        cells = [_cell(column.lined_up[row]) for column in columns]
        table.add_row(*cells, end_section=row in sections)
    return table


def _cell(text: str) -> Text:
    return Text(text, style=TERMINAL["off"] if text.endswith("!") else "")
