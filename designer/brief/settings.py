"""Constants given in words beside a brief: `--set gravity=1580 --set "step=8 ms"`."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from decimal import Decimal
from difflib import get_close_matches
from fractions import Fraction

from designer.brief.choices import LIMITS, Reader
from designer.brief.model import Brief, Loop
from designer.brief.units import Misread, Units
from designer.errors import Fault, InputError
from designer.motion.rule import CONSTANT_NAMES, Constants


def with_settings(brief: Brief, base: Constants | None, settings: Sequence[str]) -> Constants:
    """Return the base with each "name=value" of `settings` in place of its own; values as in a brief.

    Raises InputError with every fault: an unknown name, a value that cannot be read, a constant that has no
    value anywhere.
    """
    found: dict[str, float | None] = {}
    faults: list[Fault] = []
    for setting in settings:
        name, equals, text = (part.strip() for part in setting.partition("="))
        if not equals:
            faults.append(_fault(setting, "", "name=value", "write, say, --set gravity=1580"))
        elif name not in CONSTANT_NAMES:
            close = get_close_matches(name, CONSTANT_NAMES, 1)
            known = ", ".join(CONSTANT_NAMES)
            fix = f"write {close[0]}={text}" if close else "use one of these names"
            faults.append(_fault(name, text, f"a constant: {known}", fix))
        else:
            try:
                found[name] = _read(brief, name, text)
            except Misread as misread:
                better = misread.better.strip('"')
                fix = misread.fix or f"write {name}={better}"
                faults.append(_fault(name, text, misread.allowed, fix))
    wanted = (
        ("gravity", "launch_speed") if brief.loop is Loop.EACH_FRAME else ("gravity", "launch_speed", "step")
    )
    if not faults:
        faults += [
            _fault(
                name,
                "",
                f"a value; neither [today] nor [search] says what {name} is",
                f"add --set {name}=…, or {name} to [today]",
            )
            for name in wanted
            if found.get(name, None if base is None else getattr(base, name)) is None
        ]
    if faults:
        raise InputError(*faults)
    if base is None:
        numbers = {name: value for name, value in found.items() if value is not None}
        return Constants(**numbers)
    return replace(base, **found)  # type: ignore[arg-type]


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
