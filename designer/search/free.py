"""Bounds for constants that a brief leaves "free": the continuous formulas turned round.

Continuous motion is only a guide (steps and rounding move the measures), so every bound is widened and then
rounded outward to two significant figures.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, replace
from itertools import product

from designer.brief.model import Brief, Choice, Loop, Target
from designer.errors import Fault, InputError
from designer.motion.closed_form import constants_for
from designer.motion.rule import SEARCHABLE

WIDEN = 1.15
"""Bounds go this factor beyond what the continuous formulas say."""
AROUND_TODAY = 2.0
"""Where targets say nothing: from today's value over this to today's value times this."""
USUAL_AIRTIMES = (0.25, 2.0)
"""Seconds; where neither targets nor today say how long a jump lasts."""
USUAL_FALL_FACTORS = (1.0, 3.0)
LONGEST_STEP_MS = 33
GRAINS = 7
"""How many powers of two a free grain tries."""

Interval = tuple[float, float]


def round_outward(low: float, high: float, digits: int = 2) -> Interval:
    """Return bounds at least as wide with so many significant figures; both must be above 0."""

    def to(value: float, whole: object) -> float:
        place = math.floor(math.log10(value)) - digits + 1
        steps = whole(round(value / 10.0**place, 9))  # type: ignore[operator]
        return float(f"{steps}e{place}")

    return to(low, math.floor), to(high, math.ceil)


def _about(target: Target) -> Interval:
    """Return between what values a target's measure will have to be."""
    if target.aim is not None:
        slack = max(2.0 * target.within, 0.1 * abs(target.aim))
        return target.aim - slack, target.aim + slack
    low, high = target.at_least, target.at_most
    if low is None:
        low = 0.5 * (high or 0.0)
    return low, 2.0 * low if high is None else high


def _hull(intervals: list[Interval]) -> Interval | None:
    """Return the smallest interval that holds all of them, its lower end above 0; None of none."""
    kept = [(low, high) for low, high in intervals if high > 0.0]
    if not kept:
        return None
    high = max(high for _, high in kept)
    return max(min(low for low, _ in kept), 0.05 * high), high


def _targeted(brief: Brief, measure: str, shift: float = 0.0) -> list[Interval]:
    found = [t for jump in brief.jumps for t in jump.targets if t.measure == measure]
    return [(low - shift, high - shift) for low, high in map(_about, found)]


@dataclass(frozen=True, slots=True)
class _Wanted:
    """What targets, features and today say about the flight; None where they say nothing."""

    apex: Interval | None
    airtime: Interval | None
    reach: Interval | None
    """max_gap less edge_allowance, length."""
    gravity: Interval | None


def _wanted(brief: Brief) -> _Wanted:
    edge = brief.base.edge_allowance if brief.base is not None else 0.0
    rise = brief.base.step_up if brief.base is not None else 0.0
    apex = _targeted(brief, "apex") + _targeted(brief, "step_top", rise)
    if not apex:
        reach = [ledge.height + ledge.margin - rise for ledge in brief.ledges if ledge.must == "reach"]
        below = [ledge.height - ledge.margin - rise for ledge in brief.ledges if ledge.must == "stay-out"]
        if reach:
            apex = [(max(reach), max([*below, 1.25 * max(reach)]))]
        elif below:
            apex = [(0.5 * min(below), min(below))]
    gaps = _targeted(brief, "max_gap", edge) + _targeted(brief, "sure_gap", edge)
    gaps += [
        (0.8 * (gap.width - edge), 1.25 * (gap.width - edge))
        for gap in brief.gaps
        if gap.must == "cross" or not gaps
    ]
    return _Wanted(
        _hull(apex),
        _hull(_targeted(brief, "airtime")),
        _hull(gaps),
        _hull(_targeted(brief, "effective_gravity")),
    )


def _given(choice: Choice) -> Interval | None:
    """Return between what a constant may be; None where it is free."""
    if choice.values is not None:
        return choice.values[0], choice.values[-1]
    return None if choice.low is None or choice.high is None else (choice.low, choice.high)


def _today(brief: Brief, name: str) -> Interval | None:
    value = None if brief.today is None else getattr(brief.today, name)
    return None if not value else (value / AROUND_TODAY, value * AROUND_TODAY)


def _fault(brief: Brief, name: str, needs: str) -> InputError:
    return InputError(
        Fault(
            place=brief.name,
            field=f"search.{name}",
            value='"free"',
            allowed=f"bounds that follow from the brief: for {name} that takes {needs}",
            fix=f"add one of them, or give bounds: {name} = {{ from = …, to = …, every = … }}",
        )
    )


def _span(values: list[float]) -> Interval:
    return min(values), max(values)


def _gravity_and_launch(
    brief: Brief, wanted: _Wanted, gravity: Interval | None, launch: Interval | None, fall: Interval
) -> tuple[Interval, Interval]:
    """Return bounds of both, taking as given those that are."""
    flights = [(1.0 + 1.0 / math.sqrt(f)) for f in fall]  # airtime = flight · launch_speed / gravity
    apex, airtime = wanted.apex, wanted.airtime
    if gravity is None and wanted.gravity is not None:
        gravity = wanted.gravity
    if gravity is None and launch is None:
        if apex is None and airtime is None:
            pair = _today(brief, "gravity"), _today(brief, "launch_speed")
            if pair[0] is None or pair[1] is None:
                raise _fault(brief, "gravity", "a target on apex or airtime, a ledge, or [today]")
            return pair[0], pair[1]
        if apex is None or airtime is None:
            now = _today(brief, "gravity")
            if now is None and apex is None:
                raise _fault(brief, "gravity", "a target on apex as well, or [today]")
            if now is None:
                airtime = USUAL_AIRTIMES
            else:
                gravity = now
    if gravity is None and launch is None and apex is not None and airtime is not None:
        pairs = [constants_for(a, t, f) for a, t, f in product(apex, airtime, fall)]
        return _span([float(g) for g, _ in pairs]), _span([float(v) for _, v in pairs])
    if gravity is None and launch is not None:
        found = [v * v / (2.0 * a) for v, a in product(launch, apex or ())]
        found += [f * v / t for f, v, t in product(flights, launch, airtime or ())]
        gravity = _span(found) if found else _today(brief, "gravity")
    if launch is None and gravity is not None:
        found = [math.sqrt(2.0 * g * a) for g, a in product(gravity, apex or ())]
        found += [g * t / f for g, t, f in product(gravity, airtime or (), flights)]
        launch = _span(found) if found else _today(brief, "launch_speed")
    if gravity is None or launch is None:
        name = "gravity" if gravity is None else "launch_speed"
        raise _fault(brief, name, "a target on apex or airtime, a ledge, or [today]")
    return gravity, launch


def _run_speed(brief: Brief, wanted: _Wanted, gravity: Interval, launch: Interval) -> Interval:
    airtime = wanted.airtime or (2.0 * launch[0] / gravity[1], 2.0 * launch[1] / gravity[0])
    if wanted.reach is not None:
        return wanted.reach[0] / airtime[1], wanted.reach[1] / airtime[0]
    now = _today(brief, "run_speed")
    if now is None:
        raise _fault(brief, "run_speed", "a target on max_gap or sure_gap, a gap, or [today]")
    return now


def _grains(brief: Brief, gravity: Interval, steps: list[float]) -> tuple[float, ...]:
    """Return 0 and the powers of two that make sense.

    The largest is such that the lowest gravity still moves the velocity by half a grain in the shortest step
    (below, nearest modes never slow); at a 64th of it rounding hardly shows.
    """
    top = math.floor(math.log2(2.0 * gravity[0] * min(steps)))
    found = {0.0, *(2.0**k for k in range(top - GRAINS + 1, top + 1))}
    if brief.today is not None:
        found.add(brief.today.grain)
    return tuple(sorted(found))


def _echo(name: str, choice: Choice) -> str:
    if choice.values is not None:
        listed = [f"{1000 * v:g} ms" if name == "step" else f"{v:g}" for v in choice.values]
        text = (
            ", ".join(listed) if len(listed) <= 12 else f"{listed[0]} to {listed[-1]} ({len(listed)} points)"
        )
    else:
        text = f"{choice.low:g} to {choice.high:g}"
    return f'{name} = "free" became {text}'


def _between(bounds: Interval) -> Choice:
    low, high = round_outward(bounds[0] / WIDEN, bounds[1] * WIDEN)
    return Choice(None, low, high, f"{low:g} to {high:g}")


def derive_free(brief: Brief, choices: Mapping[str, Choice]) -> tuple[dict[str, Choice], tuple[str, ...]]:
    """Return the choices with every "free" one bounded, and a sentence on what each became.

    Raises InputError where neither targets, features nor today bound one.
    """
    found = dict(choices)
    free = [name for name in SEARCHABLE if choices[name].is_free]
    if not free:
        return found, ()
    wanted = _wanted(brief)
    if "fall_factor" in free:
        low, high = USUAL_FALL_FACTORS
        found["fall_factor"] = Choice(None, low, high, f"{low:g} to {high:g}")
    fall = _given(found["fall_factor"]) or USUAL_FALL_FACTORS
    gravity, launch = _gravity_and_launch(
        brief, wanted, _given(choices["gravity"]), _given(choices["launch_speed"]), fall
    )
    bounds = {"gravity": gravity, "launch_speed": launch}
    if "run_speed" in free:
        bounds["run_speed"] = _run_speed(brief, wanted, gravity, launch)
    landing = launch[0] * math.sqrt(fall[0]), launch[1] * math.sqrt(fall[1])
    bounds["terminal_speed"] = 0.6 * landing[0], landing[1]
    for name in free:
        if name in bounds:
            found[name] = _between(bounds[name])
    if "step" in free and brief.loop is Loop.FIXED:
        steps = {ms / 1000.0 for ms in range(1, LONGEST_STEP_MS + 1)}
        if brief.today is not None and brief.today.step is not None:
            steps.add(brief.today.step)
        found["step"] = replace(choices["step"], values=tuple(sorted(steps)))
    if "grain" in free:
        nominal = [brief.aim_at.step] if brief.aim_at is not None else list(found["step"].values or ())
        every = [rate.step for rate in brief.rates.supported] + nominal
        lowest = _given(found["gravity"]) or gravity
        found["grain"] = replace(choices["grain"], values=_grains(brief, lowest, every))
    return found, tuple(_echo(name, found[name]) for name in free)
