"""How a search tells what it is doing; the command line draws a bar from it."""

from __future__ import annotations

from typing import Protocol


class Progress(Protocol):
    """Anything that wants to hear how far a search is. Called from the searching thread only."""

    def update(self, stage: str, done: int, total: int) -> None:
        """Tell that `done` of `total` of a stage is behind us; stage is for a person: "Scanning the grid"."""


class Silent:
    """A listener that does nothing."""

    def update(self, stage: str, done: int, total: int) -> None:
        """Ignore it."""
