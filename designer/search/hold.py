"""From a candidate, a little different in one thing: its own measures become aims, others are set anew."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace
from difflib import get_close_matches
from fractions import Fraction

from designer.brief.model import Brief, JumpBrief, Target
from designer.brief.units import Limits, Misread, Units
from designer.errors import Fault, InputError
from designer.motion.measures import MEASURES
from designer.motion.rule import CONSTANT_NAMES
from designer.objective.verdict import Verdict

DIGITS = 12
"""Significant digits of a held aim, as of every measured number in a document."""

Place = tuple[str, str]
"""A jump's name and a measure."""


def held(brief: Brief, verdict: Verdict | None, hold: Sequence[str], settings: Sequence[str]) -> Brief:
    """Return the brief with other aims; everything else is as it was.

    Each measure of `hold` ("apex", of several jumps "walk.apex") is aimed at what it is for the verdict's
    constants at the nominal rate; each "measure=value" of `settings` at that value, written as in a brief.
    Either takes the place of the bounds that the brief may have for the measure. Tolerances and weights stay:
    the rate spread counts in tolerances too, and with a smaller one the set that changes least over the rates
    (mostly the one to be held) would win over what is asked for.

    Raises InputError with every fault: nothing to hold from, an unknown name, a measure without a target (so
    without a tolerance), one that is named twice or both held and set, a value that cannot be read, a jump
    that does not land.
    """
    faults: list[Fault] = []
    aims: dict[Place, Target] = {}
    if hold and verdict is None:
        faults.append(
            Fault("--hold", "", ", ".join(hold), "a set to hold it from", "add --from with the set: --from B")
        )
    for name in hold:
        place = _place(brief, "--hold", name, faults)
        if place is not None and not _twice(aims, place, "--hold", name, faults) and verdict is not None:
            value = _nominal(verdict, place)
            if value is None:
                words = f"a measure that this set has; its {place[0]} does not land at the nominal rate"
                faults.append(Fault("--hold", name, "", words, "hold from a set that lands"))
            else:
                aims[place] = _aimed(_target(brief, place), float(f"{value:.{DIGITS}g}"))
    for setting in settings:
        name, equals, text = (part.strip() for part in setting.partition("="))
        if not equals:
            words = "measure=value: --set changes what a measure is aimed at"
            faults.append(Fault("--set", setting, "", words, "write, say, --set airtime=0.80"))
            continue
        place = _place(brief, "--set", name, faults)
        if place is not None and not _twice(aims, place, "--set", name, faults):
            try:
                aims[place] = _aimed(_target(brief, place), _read(brief, place[1], text))
            except Misread as misread:
                fix = misread.fix or f"write {name}={misread.better}"
                faults.append(Fault("--set", name, text, misread.allowed, fix))
    if faults:
        raise InputError(*faults)
    return replace(brief, jumps=tuple(_with(jump, aims) for jump in brief.jumps))


def changed(before: Brief, after: Brief) -> Mapping[Place, Target]:
    """Return the targets of a brief that another one has otherwise, by jump and measure."""
    return {
        (jump.name, new.measure): new
        for old_jump, jump in zip(before.jumps, after.jumps, strict=True)
        for old, new in zip(old_jump.targets, jump.targets, strict=True)
        if old != new
    }


def _with(jump: JumpBrief, aims: Mapping[Place, Target]) -> JumpBrief:
    targets = tuple(aims.get((jump.name, target.measure), target) for target in jump.targets)
    return replace(jump, targets=targets)


def _aimed(target: Target, value: float) -> Target:
    return replace(target, aim=value, at_least=None, at_most=None)


def _target(brief: Brief, place: Place) -> Target:
    jump = next(one for one in brief.jumps if one.name == place[0])
    return next(one for one in jump.targets if one.measure == place[1])


def _nominal(verdict: Verdict, place: Place) -> float | None:
    jump = next(one for one in verdict.jumps if one.name == place[0])
    return jump.nominal.measures.get(place[1])


def _twice(aims: Mapping[Place, Target], place: Place, option: str, name: str, faults: list[Fault]) -> bool:
    """Note a measure that was named before."""
    if place not in aims:
        return False
    words = "each measure once, either held or set"
    faults.append(Fault(option, name, "", words, f"leave one of them out: {name} is named already"))
    return True


def _place(brief: Brief, option: str, name: str, faults: list[Fault]) -> Place | None:
    """Return which measure of which jump a name means; None with a fault where it means none or several."""
    head, dot, tail = name.rpartition(".")
    measure = tail.strip()
    targets = {(jump.name, target.measure) for jump in brief.jumps for target in jump.targets}
    jumps = [jump.name for jump in brief.jumps]
    if measure not in MEASURES:
        faults.append(_unknown(option, name, measure))
        return None
    if dot and head.strip() not in jumps:
        words = "a jump: " + ", ".join(jumps) if brief.several else "the measure alone: there is one jump"
        close = get_close_matches(head, jumps, 1)
        faults.append(Fault(option, name, "", words, f"write {close[0] + '.' if close else ''}{measure}"))
        return None
    places = [(jump, measure) for jump in ([head.strip()] if dot else jumps) if (jump, measure) in targets]
    if len(places) == 1:
        return places[0]
    if places:
        words = f"a jump's name before it, since {len(places)} jumps have a target on {measure}"
        faults.append(Fault(option, name, "", words, f"write {places[0][0]}.{measure}"))
        return None
    table = f"the targets of {head or jumps[0]}" if brief.several else "[targets]"
    has = ", ".join(_shown(brief, one) for one in sorted(targets)) or "none"
    words = f"a measure with a tolerance; the brief has targets on {has}"
    fix = f"add {measure} = {{ aim = …, within = … }} to {table}"
    faults.append(Fault(option, name, "", words, fix))
    return None


def _shown(brief: Brief, place: Place) -> str:
    return f"{place[0]}.{place[1]}" if brief.several else place[1]


def _unknown(option: str, name: str, measure: str) -> Fault:
    if measure in CONSTANT_NAMES:
        words = f"a measure; {measure} is a constant"
        return Fault(option, name, "", words, f"to fix it, write {measure} = … with one value in [search]")
    close = get_close_matches(measure, MEASURES, 1)
    fix = f"write {name[: len(name) - len(measure)]}{close[0]}" if close else "use one of these names"
    return Fault(option, name, "", f"a measure: {', '.join(MEASURES)}", fix)


def _read(brief: Brief, measure: str, text: str) -> float:
    """Return an aim as a brief would have it; Misread says what is wrong."""
    units = Units(brief.length_unit, {key: Fraction(value) for key, value in brief.lengths.items()})
    try:
        value: object = float(text)
    except ValueError:
        value = text
    return float(Limits(MEASURES[measure], 0, beyond=True).read(value, units))
