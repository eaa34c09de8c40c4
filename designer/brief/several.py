"""[jumps]: several jumps that share one gravity, step and grain, as they stand in the file."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from difflib import get_close_matches
from typing import Any

from designer.brief.choices import Link, Path
from designer.brief.fields import Context
from designer.brief.keys import JUMP_CONSTANTS, KNOWN, unknown_key
from designer.brief.model import Target
from designer.brief.schema import check_table, wrong_shape
from designer.brief.targets import read_targets
from designer.brief.units import Misread
from designer.motion.rule import CONSTANT_NAMES, Second

_NAME = re.compile(r"[^\W_](?:[\w -]*[\w-])?")
_PARTS = ("search", "today", "second")

Wrong = list[tuple[Path, Misread]]


@dataclass(frozen=True, slots=True)
class ReadJump:
    """One of [jumps.NAME] as it stands there; what it does not name is settled in `terms`."""

    name: str
    search: Mapping[str, Any] = field(default_factory=dict)
    """A Choice, a Link or (step_up, edge_allowance) a number for each constant that its search names."""
    today: Mapping[str, float] = field(default_factory=dict)
    """What its today names; infinity for no terminal speed."""
    targets: tuple[Target, ...] = ()
    weight: float = 1.0
    like: str | None = None
    second: Second | None = None
    has_search: bool = False
    has_today: bool = False


def read_jumps(raw: object, context: Context) -> tuple[list[ReadJump], Wrong]:
    """Return the jumps in file order and what is wrong in them, with paths; faulty parts are left out."""
    if not isinstance(raw, dict):
        words = "a table for each jump: [jumps.walk] alone on a line, its search, targets … below it"
        return [], [(("jumps",), Misread(words, fix="write [jumps.walk], with the name of the jump"))]
    if not raw:
        words = "at least one jump: [jumps.walk] alone on a line, its search, targets … below it"
        return [], [(("jumps",), Misread(words, fix="add a jump, or take [jumps] out"))]
    wrong: Wrong = []
    jumps = []
    folded: dict[str, str] = {}
    for name, table in raw.items():
        problem = _name_problem(name, folded)
        if problem is not None:
            wrong.append((("jumps", name), problem))
        folded.setdefault(name.casefold(), name)
        if problem is None or isinstance(table, dict):
            jump, found = _read_jump(name, table, context)
            jumps.append(jump)
            wrong += found if problem is None else []
    wrong += _like_faults(jumps) + _link_faults(jumps)
    return jumps, wrong


def _name_problem(name: str, folded: Mapping[str, str]) -> Misread | None:
    if name in KNOWN["jumps.*"]:
        words = f"a jump's name first: {name} belongs to one jump, in [jumps.NAME]"
        return Misread(words, fix=f"write [jumps.walk], with the jump's name, and below it {name} = …")
    if name in CONSTANT_NAMES or name in ("name", "today"):
        return Misread(f"a name that means nothing else; {name} does", fix=f"call it, say, {name}-jump")
    if len(name) > 40 or _NAME.fullmatch(name) is None:
        words = "a name of letters, digits, -, _ and spaces, up to 40 signs, so that --set walk.run_speed=300"
        return Misread(words + " can be typed", fix="choose such a name, as in [jumps.walk]")
    if name.casefold() in folded:
        words = f'a name of its own for each jump; "{folded[name.casefold()]}" differs only in capitals'
        return Misread(words, fix="give one of them another name")
    return None


def _read_jump(name: str, raw: object, context: Context) -> tuple[ReadJump, Wrong]:
    at: Path = ("jumps", name)
    if not isinstance(raw, dict):
        return ReadJump(name), [(at, wrong_shape("jumps.*", raw))]
    rest = {key: value for key, value in raw.items() if key not in (*_PARTS, "targets")}
    table, wrong = check_table("jumps.*", rest, at, context)
    parts: dict[str, Any] = {}
    for part in _PARTS:
        if part in raw:
            parts[part], found = check_table(f"jumps.*.{part}", raw[part], (*at, part), context)
            wrong += found
    targets: tuple[Target, ...] = ()
    if "targets" in raw:
        targets, found = read_targets(raw["targets"], (*at, "targets"), context.reader, wanted=False)
        wrong += found
    second = parts.get("second")
    return ReadJump(
        name=name,
        search=_named(parts.get("search")),
        today=_named(parts.get("today")),
        targets=targets,
        weight=1.0 if table is None else table.weight,
        like=None if table is None else table.like,
        second=None if second is None else Second(second.launch_speed, second.when, second.how),
        has_search="search" in raw,
        has_today="today" in raw,
    ), wrong


def _named(table: Any | None) -> dict[str, Any]:
    """Return the constants that a table names."""
    if table is None:
        return {}
    found = {name: getattr(table, name) for name in JUMP_CONSTANTS}
    return {name: value for name, value in found.items() if value is not None}


def unknown_jump(name: str, names: Sequence[str]) -> Misread:
    """Return what to say of a name that no jump has."""
    known = ", ".join(names)
    lowered = {one.casefold(): one for one in names}
    close = get_close_matches(name.casefold(), list(lowered), 1, cutoff=0.5)
    fix = f"{lowered[close[0]]} is probably meant" if close else f"name one of these, or add [jumps.{name}]"
    return Misread(f"the name of a jump of [jumps]: {known}; there is no {name}", fix=fix)


def _like_faults(jumps: Sequence[ReadJump]) -> Wrong:
    """Return a fault for each like that leads nowhere, and one for each circle of them."""
    likes = {jump.name: jump.like for jump in jumps}
    wrong: Wrong = []
    told: set[str] = set()
    for jump in jumps:
        path: Path = ("jumps", jump.name, "like")
        if jump.like is not None and jump.like not in likes:
            wrong.append((path, unknown_jump(jump.like, list(likes))))
            continue
        chain, at = [jump.name], jump.like
        while at is not None and at in likes and at not in chain:
            chain.append(at)
            at = likes[at]
        if at == jump.name and at not in told:
            told.update(chain)
            words = (
                f"a jump that in the end names its own constants; this goes round: {' → '.join((*chain, at))}"
            )
            wrong.append((path, Misread(words, fix="take one like out of the circle")))
    return wrong


def _link_faults(jumps: Sequence[ReadJump]) -> Wrong:
    """Return a fault for each link to a jump that is not there, and one for each circle of links."""
    by_name = {jump.name: jump for jump in jumps}
    wrong: Wrong = []
    told: set[tuple[str, str]] = set()
    for jump in jumps:
        for constant, link in jump.search.items():
            if not isinstance(link, Link):
                continue
            path: Path = ("jumps", jump.name, "search", constant, "of")
            if link.of not in by_name:
                wrong.append((path, unknown_jump(link.of, list(by_name))))
                continue
            chain, at = [jump.name], follows(by_name[jump.name], constant)
            while at is not None and at in by_name and at not in chain:
                chain.append(at)
                at = follows(by_name[at], constant)
            if at == jump.name and (at, constant) not in told:
                told.update((name, constant) for name in chain)
                around = " → ".join((*chain, at))
                words = f"a link that ends at a jump with a {constant} of its own; this goes round: {around}"
                wrong.append((path, Misread(words, fix=f"give one of them a {constant} of its own")))
    return wrong


def follows(jump: ReadJump, constant: str) -> str | None:
    """Return the jump whose constant this one takes: by a link, or by like where it names none itself."""
    own = jump.search.get(constant)
    if own is not None:
        return own.of if isinstance(own, Link) else None
    return None if constant in jump.today else jump.like


def split_set(
    raw: object, names: Sequence[str], at: Path, context: Context
) -> tuple[object, dict[str, Mapping[str, float]], Wrong]:
    """Return one of [[sets]] without its tables for jumps, what those name, and what is wrong in them."""
    if not isinstance(raw, dict):
        return raw, {}, []
    rest: dict[str, object] = {}
    parts: dict[str, Mapping[str, float]] = {}
    wrong: Wrong = []
    for key, value in raw.items():
        if key in names:
            if not isinstance(value, dict):
                words = f"a table in braces with what the set has for {key}"
                wrong.append(((*at, key), Misread(words, better="{ launch_speed = … }")))
                continue
            table, found = check_table("sets.*", value, (*at, key), context)
            parts[key] = _named(table)
            wrong += found
        elif isinstance(value, dict) and key not in KNOWN["sets"]:
            unknown = unknown_jump(key, names) if names else unknown_key("sets", key)
            wrong.append(((*at, key), unknown))
        else:
            rest[key] = value
    return rest, parts, wrong
