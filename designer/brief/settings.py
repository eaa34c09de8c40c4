"""Constants given in words beside a brief: `--set gravity=1580 --set "step=8 ms"`."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace
from decimal import Decimal
from difflib import get_close_matches
from fractions import Fraction

from designer.brief.choices import LIMITS, Reader
from designer.brief.model import ONLY_JUMP, Brief, JumpBrief, Loop
from designer.brief.units import Misread, Units
from designer.errors import Fault, InputError
from designer.motion.rule import CONSTANT_NAMES, SHARED, Constants

ALONE = tuple(name for name in CONSTANT_NAMES if name != "gravity_factor")
"""Constants of a brief without [jumps]: there gravity needs no factor."""


def with_settings(brief: Brief, base: Constants | None, settings: Sequence[str]) -> Constants:
    """Return the base with each "name=value" of `settings` in place of its own; values as in a brief.

    For a brief with one jump; see `set_with_settings`.
    Raises InputError with every fault: an unknown name, a value that cannot be read, a constant that has no
    value anywhere.
    """
    return set_with_settings(brief, (base,), settings)[0]


def set_with_settings(
    brief: Brief, base: Sequence[Constants | None], settings: Sequence[str]
) -> tuple[Constants, ...]:
    """Return a set, one Constants a jump, with each "name=value" of `settings` in place of the base's own.

    Of several jumps, gravity, step and grain are everybody's and the others are named with their jump:
    "walk.launch_speed=600". A jump that takes a constant from another one (like, or a link) follows it.
    Raises InputError with every fault: an unknown name, an own constant without its jump, a value that cannot
    be read, a constant that has no value anywhere.
    """
    found: dict[tuple[int, str], float | None] = {}
    faults: list[Fault] = []
    for setting in settings:
        name, equals, text = (part.strip() for part in setting.partition("="))
        if not equals:
            faults.append(_fault(setting, "", "name=value", "write, say, --set gravity=1580"))
            continue
        jumps, constant, fault = _address(brief, name, text)
        if fault is not None:
            faults.append(fault)
            continue
        try:
            value = _read(brief, constant, text)
            found |= {(jump, constant): value for jump in jumps}
        except Misread as misread:
            better = misread.better.strip('"')
            fix = misread.fix or f"write {name}={better}"
            faults.append(_fault(name, text, misread.allowed, fix))
    faults += [] if faults else _missing(brief, base, found)
    if faults:
        raise InputError(*faults)
    found |= following(brief, base, found)
    return tuple(
        _changed(one, {name: value for (jump, name), value in found.items() if jump == index})
        for index, one in enumerate(base)
    )


def _changed(base: Constants | None, found: dict[str, float | None]) -> Constants:
    if base is None:
        return Constants(**{name: value for name, value in found.items() if value is not None})
    return replace(base, **found)  # type: ignore[arg-type]


def _address(brief: Brief, name: str, text: str) -> tuple[list[int], str, Fault | None]:
    """Return the places of the jumps that a name means and the constant, or the fault that is in it."""
    jumps = [jump.name for jump in brief.jumps]
    named = brief.several or jumps != [ONLY_JUMP]
    known = CONSTANT_NAMES if named else ALONE
    jump, dot, constant = name.partition(".") if named else ("", "", name)
    constant = constant if dot else name
    if dot and constant not in known:
        known = tuple(one for one in known if one not in SHARED)
    if constant not in known:
        close = get_close_matches(constant, known, 1)
        fix = f"write {jump + dot if dot else ''}{close[0]}={text}" if close else "use one of these names"
        return [], constant, _fault(name, text, f"a constant: {', '.join(known)}", fix)
    if dot and constant in SHARED:
        what = f"one {constant} for the whole game: gravity, step and grain are everybody's"
        return [], constant, _fault(name, text, what, f"write {constant}={text}")
    if dot and jump not in jumps:
        close = get_close_matches(jump, jumps, 1)
        fix = f"write {close[0]}.{constant}={text}" if close else "use one of these names"
        return [], constant, _fault(name, text, f"a jump: {', '.join(jumps)}", fix)
    if dot:
        return [jumps.index(jump)], constant, None
    if constant not in SHARED and len(jumps) > 1:
        what = f"a jump's name before it, since each has its own {constant}: {', '.join(jumps)}"
        return [], constant, _fault(name, text, what, f"write {jumps[0]}.{constant}={text}")
    return list(range(len(jumps))), constant, None


def _missing(
    brief: Brief, base: Sequence[Constants | None], found: Mapping[tuple[int, str], float | None]
) -> list[Fault]:
    """Return a fault for each constant that has no value anywhere."""
    wanted = ["gravity", "launch_speed", *(["step"] if brief.loop is Loop.FIXED else [])]
    faults: dict[str, Fault] = {}
    for index, (jump, one) in enumerate(zip(brief.jumps, base, strict=True)):
        for constant in wanted:
            if one is not None and getattr(one, constant) is not None:
                continue
            name = constant if constant in SHARED or len(base) == 1 else f"{jump.name}.{constant}"
            if (index, constant) not in found:
                faults[name] = _fault(
                    name,
                    "",
                    f"a value; neither [today] nor [search] says what {name} is",
                    f"add --set {name}=…, or {name} to [today]",
                )
    return list(faults.values())


def following(
    brief: Brief, base: Sequence[Constants | None], given: Mapping[tuple[int, str], float | None]
) -> dict[tuple[int, str], float | None]:
    """Return what becomes of constants that are another jump's, or that times a factor, when that is set.

    Keys are (place of the jump, constant). What is given itself stays as it is given.
    """
    found: dict[tuple[int, str], float | None] = {}
    for (leader, name), value in given.items():
        if name in SHARED:
            continue
        for index, one in enumerate(base):
            led = base[leader]
            if (index, name) in given or one is None or led is None:
                continue
            factor = _follows(brief, leader, index, name, getattr(led, name), getattr(one, name))
            if factor is not None:
                found[index, name] = value if value is None or factor == 1.0 else value * factor
    return found


def _follows(
    brief: Brief, leader: int, index: int, name: str, led: float | None, own: float | None
) -> float | None:
    """Return what a jump multiplies the leader's constant by for its own; None where it does not follow."""
    first, second = brief.jumps[leader], brief.jumps[index]
    head, tail = first.terms.get(name), second.terms.get(name)
    if head is None or tail is None:
        return 1.0 if led == own and first.name in _ancestors(brief, second) else None
    size = len(head.factors)
    if head.variable != tail.variable or tail.factors[:size] != head.factors:
        return None
    more = tail.factors[size:]
    if not more:
        return 1.0 if led == own and first.name in _ancestors(brief, second) else None
    owned = brief.variables[head.places[-1]].name.startswith(f"{first.name}.")
    if not owned or not led or own is None:
        return None
    ratio = own / led
    points = brief.variables[more[0]].choice.values if len(more) == 1 else None
    nearest = ratio if points is None else min(points, key=lambda point: abs(point - ratio))
    # The factor as written, without the noise of the division; one that the search may not use is kept.
    return nearest if abs(nearest - ratio) <= 1e-9 * abs(ratio) else ratio


def _ancestors(brief: Brief, jump: JumpBrief) -> list[str]:
    """Return the jumps that a jump is like, nearest first."""
    by_name = {one.name: one for one in brief.jumps}
    found: list[str] = []
    while jump.like is not None and jump.like in by_name and jump.like not in found:
        found.append(jump.like)
        jump = by_name[jump.like]
    return found


def _fault(name: str, value: str, allowed: str, fix: str) -> Fault:
    return Fault("--set", name, value, allowed, fix)


def _read(brief: Brief, name: str, text: str) -> float | None:
    """Return one constant's value; None for no terminal speed. Misread says what is wrong."""
    if name == "step" and brief.loop is Loop.EACH_FRAME:
        raise Misread(
            "nothing: this game steps once a frame, so the step is no constant",
            fix="leave it out; [rates] says at which steps the constants are shown",
        )
    units = Units(brief.length_unit, {key: Fraction(value) for key, value in brief.lengths.items()})
    try:
        plain: object = Decimal(text)
    except ArithmeticError:
        plain = text
    if name == "step":
        return Reader(units, brief.rule.frame_time).step(plain)
    limits = LIMITS[name]
    if limits.none and text.lower() == "none":
        return None
    return float(limits.read(plain, units))
