"""Progress for people: a bar on a terminal, a line a stage elsewhere, nothing where JSON is wanted."""

from __future__ import annotations

import sys
from collections.abc import Iterator
from contextlib import contextmanager
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from rich.progress import Progress as RichProgress
    from rich.progress import TaskID

    from designer.search.progress import Progress


class Lines:
    """Writes each stage once; for logs and pipes."""

    def __init__(self) -> None:
        self._stage = ""

    def update(self, stage: str, done: int, total: int) -> None:
        """Write the stage's name where it is a new one."""
        if stage != self._stage:
            self._stage = stage
            print(f"{stage} …", file=sys.stderr)


class Bars:
    """Draws one bar that names its stage, how far it is and how long it still takes."""

    def __init__(self, bars: RichProgress) -> None:
        self._bars = bars
        self._stage = ""
        self._task: TaskID | None = None

    def update(self, stage: str, done: int, total: int) -> None:
        """Move the bar; a new stage replaces it. A total of 0 means that nobody knows."""
        if stage != self._stage or self._task is None:
            if self._task is not None:
                self._bars.remove_task(self._task)
            self._stage = stage
            self._task = self._bars.add_task(stage, total=total or None)
        self._bars.update(self._task, completed=done, total=total or None)


@contextmanager
def shown(wanted: bool) -> Iterator[Progress]:
    """Hand out a listener that shows progress on standard error until the block ends."""
    from designer.search.progress import Silent

    if not wanted:
        yield Silent()
        return
    if not sys.stderr.isatty():
        yield Lines()
        return
    from rich.console import Console
    from rich.progress import BarColumn, MofNCompleteColumn, Progress, TextColumn, TimeRemainingColumn

    columns = (TextColumn("{task.description}"), BarColumn(), MofNCompleteColumn(), TimeRemainingColumn())
    with Progress(*columns, console=Console(stderr=True), transient=True) as bars:
        yield Bars(bars)
