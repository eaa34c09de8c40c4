"""Where in a TOML text each key stands, and how its value is written there; tomllib does not tell."""

from __future__ import annotations

import tomllib
from bisect import bisect_right
from dataclasses import dataclass

Path = tuple[str | int, ...]

_SPACE, _BREAKS = " \t", "\r\n"


@dataclass(frozen=True, slots=True)
class Spot:
    """A place in a text."""

    line: int
    """From 1."""
    text: str
    """The value as written; empty for a table, whose header says its name only."""


class Places:
    """The spots of all keys of a text that tomllib accepts: tables, list elements, keys in braces too."""

    def __init__(self, text: str) -> None:
        self.spots: dict[Path, Spot] = {}
        self._text = text
        self._starts = [0, *(at + 1 for at, sign in enumerate(text) if sign == "\n")]
        self._at = 0
        self._counts: dict[Path, int] = {}
        self._scan()

    def find(self, path: Path) -> Spot | None:
        """Return where a key stands; None where the text does not have it."""
        return self.spots.get(path)

    def nearest(self, path: Path) -> Spot | None:
        """Return where a key stands, else the innermost table around it that the text has."""
        for length in range(len(path), 0, -1):
            if path[:length] in self.spots:
                return self.spots[path[:length]]
        return None

    def _scan(self) -> None:
        table: Path = ()
        while True:
            self._skip(breaks=True)
            if self._at >= len(self._text):
                return
            if self._text[self._at] == "[":
                table = self._header()
            else:
                self._pair(table)

    def _skip(self, *, breaks: bool) -> None:
        """Go past spaces and comments, and line breaks too where asked."""
        text = self._text
        while self._at < len(text):
            if text[self._at] in _SPACE or (breaks and text[self._at] in _BREAKS):
                self._at += 1
            elif text[self._at] == "#":
                end = text.find("\n", self._at)
                self._at = len(text) if end < 0 else end
            else:
                return

    def _line(self, position: int) -> int:
        return bisect_right(self._starts, position)

    def _header(self) -> Path:
        start = self._at
        double = self._text.startswith("[[", start)
        self._at += 2 if double else 1
        keys = self._key()
        self._at += 2 if double else 1
        path = self._resolve(keys[:-1] if double else keys)
        for length in range(1, len(path)):
            self.spots.setdefault(path[:length], Spot(self._line(start), ""))
        if double:
            path += (keys[-1],)
            self.spots.setdefault(path, Spot(self._line(start), ""))
            count = self._counts.get(path, 0)
            self._counts[path] = count + 1
            path += (count,)
        self.spots[path] = Spot(self._line(start), "")
        return path

    def _resolve(self, keys: list[str]) -> Path:
        """Return the path of keys in a header; where one names a list of tables, its last table is meant."""
        path: Path = ()
        for key in keys:
            path += (key,)
            if path in self._counts:
                path += (self._counts[path] - 1,)
        return path

    def _key(self) -> list[str]:
        """Read a bare, quoted or dotted key; stop before what follows it."""
        keys: list[str] = []
        while True:
            self._skip(breaks=False)
            start = self._at
            if self._text[start] in "\"'":
                self._string()
                keys.append(_unquote(self._text[start : self._at]))
            else:
                while self._text[self._at].isalnum() or self._text[self._at] in "-_":
                    self._at += 1
                keys.append(self._text[start : self._at])
            self._skip(breaks=False)
            if self._text[self._at] != ".":
                return keys
            self._at += 1

    def _pair(self, table: Path) -> None:
        line = self._line(self._at)
        path = table + tuple(self._key())
        self._at += 1  # the equals sign
        self._skip(breaks=False)
        for length in range(len(table) + 1, len(path)):
            self.spots.setdefault(path[:length], Spot(line, ""))
        start = self._at
        self._value(path)
        self.spots[path] = Spot(line, self._text[start : self._at].rstrip())

    def _value(self, path: Path) -> None:
        first = self._text[self._at]
        if first in "\"'":
            self._string()
        elif first == "[":
            self._array(path)
        elif first == "{":
            self._inline(path)
        else:
            while self._at < len(self._text) and self._text[self._at] not in ",]}#\r\n":
                self._at += 1

    def _string(self) -> None:
        """Go past a string, the opening mark under the cursor."""
        mark, text = self._text[self._at], self._text
        fence = mark * 3 if text.startswith(mark * 3, self._at) else mark
        self._at += len(fence)
        while not text.startswith(fence, self._at):
            self._at += 2 if mark == '"' and text[self._at] == "\\" else 1
        self._at += len(fence)
        while len(fence) == 3 and text.startswith(mark, self._at):
            self._at += 1  # up to two more marks may close a string of three

    def _array(self, path: Path) -> None:
        self._at += 1
        index = 0
        while True:
            self._skip(breaks=True)
            if self._text[self._at] == "]":
                self._at += 1
                return
            if self._text[self._at] == ",":
                self._at += 1
                continue
            start = self._at
            self._value((*path, index))
            self.spots[(*path, index)] = Spot(self._line(start), self._text[start : self._at].rstrip())
            index += 1

    def _inline(self, path: Path) -> None:
        self._at += 1
        while True:
            self._skip(breaks=True)
            if self._text[self._at] == "}":
                self._at += 1
                return
            if self._text[self._at] == ",":
                self._at += 1
                continue
            self._pair(path)


def _unquote(text: str) -> str:
    """Return what a quoted key says; tomllib knows the escapes."""
    return str(tomllib.loads(f"key = {text}")["key"])
