"""Aims that are too many for the constants that may move, named before any search.

All of it in continuous time (see `designer.search.aims`), so nothing is said where aims agree within their
tolerances and what the build's steps may add to them.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import combinations
from statistics import median

import numpy as np

from designer.brief.model import Brief
from designer.brief.units import plain
from designer.search.aims import Aim, System, system_of

FREED = ("fall_factor", "run_speed", "launch_speed", "gravity", "gravity_factor")
"""What may be set free to make room, in this order."""
REMEDIES = 2
"""So many ways out are told."""
SANE = {"fall_factor": (0.2, 5.0), "gravity_factor": (0.2, 5.0)}
"""Between what a factor is worth telling."""
AGREE = 1.0
"""With so many tolerances left, or fewer, aims agree."""
NUMBERS = {2: "two", 3: "three", 4: "four", 5: "five", 6: "six", 7: "seven", 8: "eight", 9: "nine"}


def overdetermined(brief: Brief) -> tuple[str, ...]:
    """Return a sentence on each lot of aims that the constants of [search] cannot serve together.

    Bounds are no aims. Empty where the brief has no [search], where there are enough constants, and where the
    aims agree as they stand. Jumps that share constants are compared two by two.
    """
    if brief.search is None and not brief.variables:
        return ()
    system = system_of(brief)
    if not system.aims:
        return ()
    said, at_odds = [], set()
    for jump in brief.jumps:
        own = [aim for aim in system.aims if aim.jump == jump.name]
        conflict = _worst(system, own)
        if conflict is not None:
            at_odds.add(jump.name)
            words = _within_a_jump(system, own, conflict)
            said.append(f"{jump.name}: {words}" if brief.several else words)
    left = [jump.name for jump in brief.jumps if jump.name not in at_odds]
    return (*said, *_between_jumps(system, left))


@dataclass(frozen=True, slots=True)
class _Conflict:
    """Aims that hang together and disagree."""

    aims: tuple[Aim, ...]
    off: float
    """How many tolerances each of them is off at best."""


def _worst(system: System, aims: Sequence[Aim], needs: Sequence[str] = ()) -> _Conflict | None:
    """Return the worst conflict among some aims; None where all agree within tolerances."""
    found = []
    for circuit in system.circuits(aims, needs):
        x = system.solve(circuit)
        beyond, _ = system.least_worst(circuit, system.tolerances(circuit, x))
        if beyond > 1.0 + 1e-9:
            within = np.array([aim.target.within for aim in circuit])
            plain, _ = system.least_worst(circuit, within)
            found.append(_Conflict(circuit, plain))
    return max(found, key=lambda one: one.off, default=None)


def _within_a_jump(system: System, own: Sequence[Aim], conflict: _Conflict) -> str:
    """Return the sentence on aims of one jump."""
    moving = system.unknowns(conflict.aims)
    group = [aim for aim in own if set(system.unknowns([aim])) <= set(moving)]
    if not moving:
        return f"{_alone(system, conflict)}{_ways_out(system, conflict.aims, 'or drop the aim')}"
    if len(group) > len(moving):
        names = _joined([_name(aim) for aim in group])
        constants = "one constant" if len(moving) == 1 else f"{_count(len(moving))} constants"
        head = f"{names} are {_count(len(group))} aims for {constants} ({_joined(moving)})"
    else:
        group = list(conflict.aims)
        names = _joined([_name(aim) for aim in group])
        head = f"{names} hang together, whatever {_joined(moving)} {'is' if len(moving) == 1 else 'are'}"
    return f"{head}: {_told(system, conflict)}{_ways_out(system, group, 'or drop one')}"


def _alone(system: System, conflict: _Conflict) -> str:
    """Return the words for one aim that nothing moves."""
    (aim,) = conflict.aims
    value = system.values([aim], system.solve([aim]))[0]
    return (
        f"{_name(aim)} is aimed at {aim.target.text}, but nothing that may move changes it: it comes to "
        f"{_figure(value)}, {conflict.off:.2g} tolerances off"
    )


def _told(system: System, conflict: _Conflict) -> str:
    """Return what the others of a conflict make of its last aim, and how far off all are at best."""
    several = len({aim.jump for aim in conflict.aims}) > 1
    last, value = _least_changed(system, conflict.aims)
    others = [aim for aim in conflict.aims if aim is not last]
    given = _joined([f"{_name(aim, several)} {_figure(aim.value)}" for aim in others])
    makes = "makes" if len(others) == 1 else "make"
    each = "both end" if len(conflict.aims) == 2 else "each ends"
    return (
        f"{given} {makes} {_name(last, several)} {_figure(value)}, not {last.target.text}; at best {each} "
        f"{conflict.off:.2g} tolerances off"
    )


def _least_changed(system: System, circuit: Sequence[Aim]) -> tuple[Aim, float]:
    """Return the aim that the others of a circuit move least from what is wanted (the last of equals), and to
    what value."""
    found = []
    for place, aim in enumerate(circuit):
        others = [one for one in circuit if one is not aim]
        value = system.values([aim], system.solve(others))[0]
        found.append((round(abs(math.log(value / aim.value)), 6), -place, value))
    _, place, value = min(found)
    return circuit[-place], value


def _ways_out(system: System, group: Sequence[Aim], otherwise: str) -> str:
    """Return what to set free so that all of a group can hold, with the values that do it."""
    ways = []
    for jump in dict.fromkeys(aim.jump for aim in reversed(group)):
        for constant in FREED:
            part = system.parts[jump][constant]
            if constant == "gravity_factor" and len(system.parts) == 1:
                continue
            if not part.unknowns or len(system.parts) > 1:
                way = _way(system, group, jump, constant)
                if way is not None:
                    ways.append(way)
    if otherwise == "or drop one" and len(group) - system.rank(group) > 1:
        otherwise = "or drop some"
    free = " or ".join(ways[:REMEDIES])
    return f". Free {free}, {otherwise}." if free else f". {otherwise.removeprefix('or ').capitalize()}."


def _way(system: System, group: Sequence[Aim], jump: str, constant: str) -> str | None:
    """Return "fall_factor (about 1.78, with gravity 15 and launch_speed 6)"; None where it is no way out."""
    several = len(system.parts) > 1
    if several and constant == "gravity":
        return None  # a game has one gravity; a jump's own is its gravity_factor
    freed = system.freed(jump, constant)
    if freed.rank(group) <= system.rank(group):
        return None  # it moves already, or these aims do not see it
    x = freed.solve(group)
    values = freed.values(group, x)
    if any(abs(v - aim.value) > AGREE * aim.target.within for v, aim in zip(values, group, strict=True)):
        return None
    found = freed.constants(jump, x)
    low, high = SANE.get(constant, (0.0, math.inf))
    if not low <= found[constant] <= high:
        return None
    moved = freed.unknowns(group)
    beside = [
        f"{name} {_figure(found[name], 3)}"
        for name, one in freed.parts[jump].items()
        if name != constant and set(one.unknowns) & set(moved)
    ]
    shown = f"{constant} for {jump}" if several else constant
    return f"{shown} (about {_figure(found[constant], 3)}{', with ' + _joined(beside) if beside else ''})"


def _between_jumps(system: System, names: Sequence[str]) -> Iterator[str]:
    """Yield sentences on jumps that agree each with itself but not with one another."""
    pairs: dict[tuple[str, str], _Conflict] = {}
    for first, second in combinations(names, 2):
        aims = [aim for aim in system.aims if aim.jump in (first, second)]
        conflict = _worst(system, aims, (first, second))
        if conflict is not None:
            pairs[first, second] = conflict
    by_gravity = {pair: one for pair, one in pairs.items() if _only_gravity(system, one)}
    if by_gravity:
        yield _one_gravity(system, by_gravity)
    for pair, conflict in pairs.items():
        if pair not in by_gravity:
            yield _shared_otherwise(system, pair, conflict)


def _shared_otherwise(system: System, pair: tuple[str, str], conflict: _Conflict) -> str:
    """Return the sentence on two jumps that share more than gravity."""
    moving = set(system.unknowns(conflict.aims))
    group = [aim for aim in system.aims if aim.jump in pair and set(system.unknowns([aim])) <= moving]
    names = _joined([_name(aim, True) for aim in conflict.aims])
    return (
        f"{names} hang together, since {_joined(pair)} share {_joined(_shared(system, conflict))}: "
        f"{_told(system, conflict)}{_ways_out(system, group, 'or drop one')}"
    )


def _shared(system: System, conflict: _Conflict) -> list[str]:
    """Return the unknowns on which aims of both jumps of a conflict depend."""
    first, second = dict.fromkeys(aim.jump for aim in conflict.aims)
    sides = [
        set(system.unknowns([aim for aim in conflict.aims if aim.jump == jump])) for jump in (first, second)
    ]
    return [name for name in system.start if name in sides[0] & sides[1]]


def _only_gravity(system: System, conflict: _Conflict) -> bool:
    """Return whether gravity alone ties the jumps of a conflict, so that each by itself asks for one."""
    return _shared(system, conflict) == ["gravity"]


def _one_gravity(system: System, pairs: dict[tuple[str, str], _Conflict]) -> str:
    """Return the sentence on jumps whose aims ask for gravities too far apart."""
    names = [name for name in system.parts if any(name in pair for pair in pairs)]
    wants: dict[str, float] = {}
    aims: dict[str, list[Aim]] = {}
    for (first, second), conflict in pairs.items():
        for jump in (first, second):
            aims.setdefault(jump, [aim for aim in conflict.aims if aim.jump == jump])
            wants.setdefault(jump, math.exp(system.solve(aims[jump])["gravity"]))
    asked = []
    for jump in names:
        by = _joined([f"{_name(aim)} {_figure(aim.value)}" for aim in aims[jump]])
        asked.append(f"{jump} ({by}) asks for {_figure(wants[jump])}")
    off = _joined([f"{_joined(pair)} by {conflict.off:.2g}" for pair, conflict in pairs.items()])
    return (
        f"one gravity cannot serve the aims of {_joined(names)}: {', '.join(asked)}; at best they stay "
        f"tolerances off, {off}. Free {_factors(pairs, wants)}, or drop an aim."
    )


def _factors(pairs: dict[tuple[str, str], _Conflict], wants: dict[str, float]) -> str:
    """Return gravity factors that part the jumps which are at odds with most others."""
    left, apart = dict(pairs), []
    while left:
        odds = {jump: sum(jump in pair for pair in left) for jump in wants}
        middle = median(wants.values())
        most = max(odds, key=lambda jump: (odds[jump], abs(math.log(wants[jump] / middle))))
        apart.append(most)
        left = {pair: one for pair, one in left.items() if most not in pair}
    kept = [value for jump, value in wants.items() if jump not in apart]
    common = math.sqrt(min(kept) * max(kept))
    return _joined([f"gravity_factor for {jump} (about {wants[jump] / common:.2f})" for jump in apart])


def _name(aim: Aim, several: bool = False) -> str:
    return f"{aim.jump}'s {aim.target.measure}" if several else aim.target.measure


def _figure(value: float, digits: int = 4) -> str:
    """Return a number with a few significant figures and no exponent."""
    return plain(float(f"{value:.{digits}g}"))


def _count(number: int) -> str:
    return NUMBERS.get(number, str(number))


def _joined(words: Sequence[str]) -> str:
    return words[0] if len(words) == 1 else f"{', '.join(words[:-1])} and {words[-1]}"
