"""`with`: what a team shares, read first; the brief's own keys win. One level deep."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from designer.brief import lines
from designer.brief.keys import LISTS, TABLES

_DEEP = ("search", "today", "targets")
"""Tables of a jump that are joined key by key, too."""


@dataclass(frozen=True, slots=True)
class Source:
    """One file of a brief, as it was read."""

    name: str
    """For messages: "yard.toml"."""
    raw: Mapping[str, Any]
    places: lines.Places
    folder: Path | None
    """Where names of other files in it start; None for a text without a file."""


@dataclass(frozen=True, slots=True)
class Found:
    """Where a key stands."""

    source: Source
    path: lines.Path
    """The key's path in that file: a list may begin in the other one."""
    spot: lines.Spot


class Sources:
    """The brief's own file and the shared one that it names: their tables joined, their lines apart."""

    def __init__(self, own: Source, shared: Source | None = None) -> None:
        self.own = own
        self.shared = shared
        self.raw = own.raw if shared is None else joined(shared.raw, own.raw)
        self._files = (own,) if shared is None else (own, shared)

    def find(self, path: lines.Path) -> Found | None:
        """Return where a key stands; None where no file has it."""
        for source, inside in self._insides(path):
            spot = source.places.find(inside)
            if spot is not None:
                return Found(source, inside, spot)
        return None

    def nearest(self, path: lines.Path) -> Found | None:
        """Return where a key stands, else the innermost table around it that a file has."""
        for length in range(len(path), 0, -1):
            found = self.find(path[:length])
            if found is not None:
                return found
        return None

    def order(self, source: Source) -> int:
        """Return 0 for the brief's own file, 1 for the shared one."""
        return self._files.index(source)

    def _insides(self, path: lines.Path) -> list[tuple[Source, lines.Path]]:
        """Return what a path of the joined tables is in each file that may have it."""
        if self.shared is None or len(path) < 2 or not isinstance(path[1], int):
            return [(source, path) for source in self._files]
        before = self.shared.raw.get(str(path[0]))
        count = len(before) if isinstance(before, list) and path[0] in LISTS else 0
        if path[1] < count:
            return [(self.shared, path)]
        return [(self.own, (path[0], path[1] - count, *path[2:]))]


def joined(shared: Mapping[str, Any], own: Mapping[str, Any]) -> dict[str, Any]:
    """Return the tables of two files as one: keys of the second win, lists of tables follow each other."""
    result = {**shared, **own}
    for key in shared.keys() & own.keys():
        first, second = shared[key], own[key]
        if key in TABLES:
            result[key] = _over(first, second)
        elif key == "jumps":
            result[key] = _jumps(first, second)
        elif key in LISTS and isinstance(first, list) and isinstance(second, list):
            result[key] = first + second
    result.pop("with", None)
    # The order of the file decides between equals: jumps of the shared file come first, as everything of it.
    return result


def _over(first: object, second: object) -> object:
    return {**first, **second} if isinstance(first, dict) and isinstance(second, dict) else second


def _jumps(first: object, second: object) -> object:
    """Return [jumps] of two files as one: a jump that both have is joined key by key."""
    if not isinstance(first, dict) or not isinstance(second, dict):
        return second
    result = {**first, **second}
    for name in first.keys() & second.keys():
        jump = _over(first[name], second[name])
        if isinstance(jump, dict) and isinstance(first[name], dict):
            for part in _DEEP:
                if part in first[name] and part in second[name]:
                    jump[part] = _over(first[name][part], second[name][part])
        result[name] = jump
    return result
