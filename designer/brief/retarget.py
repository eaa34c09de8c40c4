"""Other targets in the text of a brief: its comments, its order and everything else stay as they are."""

from __future__ import annotations

import re
from collections.abc import Mapping

from designer.brief.lines import Path, Places
from designer.brief.model import Brief, Target
from designer.brief.units import plain

_WISHES = ("aim", "at_least", "at_most")


def target_path(brief: Brief, jump: str, measure: str) -> Path:
    """Return where a target stands in a brief: in [targets], or in the targets of a jump in [jumps]."""
    return ("jumps", jump, "targets", measure) if brief.several else ("targets", measure)


def stands(text: str, path: Path) -> bool:
    """Return whether a text has a target, as one value, a table of its own or dotted keys."""
    return Places(text).find(path) is not None


def with_aims(text: str, changed: Mapping[Path, Target]) -> str:
    """Return the text with these targets, by path (see `target_path`), in place of its own ones.

    Each must stand in the text, which must be TOML. Whoever calls reads the result again and compares: an
    unusual way of writing a table may defeat this.
    """
    for path, target in changed.items():
        text = _one(text, path, target)
    return text


def _one(text: str, path: Path, target: Target) -> str:
    places = Places(text)
    own = places.find(path)
    aim, within = _number(target.aim), _number(target.within)
    if own is not None and own.text:
        weight = f", weight = {_number(target.weight)}" if target.weight != 1.0 else ""
        value = f"{{ aim = {aim}, within = {within}{weight} }}"
        return _swap(text, own.line, str(path[-1]), own.text, (str(path[-1]), value))
    # A table of its own, or dotted keys: a line each, edited from the last to the first, so that lines stay.
    said = [name for name in _WISHES if places.find((*path, name)) is not None]
    for name in sorted([*said, "within"], key=lambda name: -_line(places, (*path, name))):
        spot = places.find((*path, name))
        if spot is not None:
            new = {"within": ("within", within), said[0] if said else "aim": ("aim", aim)}.get(name)
            text = _swap(text, spot.line, name, spot.text, new)
    return text


def _line(places: Places, path: Path) -> int:
    spot = places.find(path)
    return 0 if spot is None else spot.line


def _swap(text: str, line: int, key: str, value: str, new: tuple[str, str] | None) -> str:
    """Put another key and value where "key = value" starts on a line; None takes the pair away."""
    lines = text.split("\n")
    rest = "\n".join(lines[line - 1 :])
    pair = rf"(?P<quote>[\"']?){re.escape(key)}(?P=quote)(?P<equals>\s*=\s*){re.escape(value)}"
    if new is None:
        rest = re.sub(rf"[\w.\-\"' ]*(?<![\w-]){pair}", "", rest, count=1)
    else:
        rest = re.sub(rf"(?<![\w-]){pair}", lambda m: f"{new[0]}{m['equals']}{new[1]}", rest, count=1)
    return "\n".join([*lines[: line - 1], rest])


def _number(value: float | None) -> str:
    """Return a number that is read back as the same double."""
    return "0" if value is None else plain(value) if float(plain(value)) == value else repr(value)
