"""Rules, ticks and bands in words: what a programmer or a designer reads beside the numbers."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from designer.brief.model import Block, Brief, Ceiling, Feature, Gap
from designer.motion.rule import Constants, FrameTime, How, Integrator, LandingTest, Mode, Place, Rule, Second
from designer.motion.simulate import trace
from designer.objective.table import as_flown
from designer.objective.verdict import FeatureVerdict
from designer.report.findings import failing_clause, kind_of

ROUND = {
    Mode.NEAREST_EVEN: "round_half_even({x})",
    Mode.NEAREST_AWAY: "round_half_away_from_zero({x})",
    Mode.NEAREST_UP: "floor({x} + 0.5)",
    Mode.TOWARD_ZERO: "truncate({x})",
    Mode.DOWN: "floor({x})",
    Mode.UP: "ceiling({x})",
}
"""How each mode reads; x is counted in grains."""

OWN_GRAVITY = "own_gravity"
"""What pseudo-code calls the gravity of a jump that has a factor on the game's one."""

NO_VALUE = "–"
"""What stands where there is no number."""


def number(value: float | None, digits: int = 10) -> str:
    """Return a number as short as can be, without an exponent for everyday sizes: "1462.5", "0.125"."""
    if value is None or math.isnan(value):
        return NO_VALUE
    if math.isinf(value):
        return "none"
    text = f"{value:.{digits}g}"
    if "e" in text and 1e-9 < abs(value) < 1e15:
        decimals = max(0, digits - 1 - math.floor(math.log10(abs(value))))
        text = f"{value:.{decimals}f}"
        text = text.rstrip("0").rstrip(".") if "." in text else text
    return text.replace("-", "−")


def _plain(value: float) -> str:
    """Return a number for code: with a hyphen as its sign."""
    return number(value).replace("−", "-")


def _snap(x: str, grain: float, mode: Mode) -> str:
    q = _plain(grain)
    inside = x if grain == 1.0 else f"{x} / {q}"
    whole = ROUND[mode].format(x=inside)
    return whole if grain == 1.0 else f"{whole} * {q}"


def _step_line(brief: Brief, rule: Rule, constants: Constants) -> str:
    """Say where the step comes from."""
    nominal = brief.nominal(constants)
    here = f"h = {_plain(nominal.step)}"
    match rule.frame_time:
        case FrameTime.EXACT:
            how = "" if brief.aim_at is None else "h = 1 / rate"
        case FrameTime.WHOLE_MS_DOWN:
            how = "h = max(1, floor(1000 / rate)) / 1000"
        case FrameTime.WHOLE_MS_NEAREST:
            how = "h = max(1, floor(1000 / rate + 0.5)) / 1000"
    return f"{how}   # {nominal.name}: {here}" if how else f"{here}   # {nominal.name}"


def _velocity_lines(rule: Rule, constants: Constants) -> list[str]:
    """Say how v becomes u."""
    gravity = _plain(constants.gravity) if constants.gravity_factor == 1.0 else OWN_GRAVITY
    lines = []
    if constants.fall_factor != 1.0:
        lines.append(f"g = {gravity} if v > 0 else {gravity} * {_plain(constants.fall_factor)}")
    pull = "g" if constants.fall_factor != 1.0 else gravity
    if rule.launch_gravity:
        lines.append(f"a = {pull} * h")
    else:
        lines.append(f"a = 0 if first_step else {pull} * h")
    lines.append("u = v - a")
    if constants.terminal_speed is not None:
        lines.append(f"u = max(u, -{_plain(constants.terminal_speed)})")
    return lines


def _move_line(rule: Rule, moved: str) -> str:
    match rule.integrator:
        case Integrator.EXPLICIT:
            return "y = y + v * h"
        case Integrator.SEMI_IMPLICIT:
            return f"y = y + {moved} * h"
        case Integrator.AVERAGE:
            return f"y = y + 0.5 * (v + {moved}) * h"


def _landing_lines(rule: Rule) -> list[str]:
    tolerance = _plain(rule.contact_tolerance)
    lines = [f"landed when y <= {tolerance} and y is lower than a step ago"]
    if rule.landing_test is LandingTest.SWEPT:
        lines.append("the landing counts where that step's segment crosses 0")
    else:
        lines.append("the landing counts at the end of that step")
    return lines


def _second_lines(second: Second | None, constants: Constants) -> tuple[str, list[str]]:
    """Say when a second jump acts, and what it does to v: how it starts, and its lines in each step."""
    if second is None:
        return "", []
    speed = _plain(second.launch_speed)
    made = f"v = {speed}" if second.how is How.SET else f"v = v + {speed}"
    if second.when is None:
        when = "second_jump and v <= 0 and not first_step"
        return "; second_jump = true", [f"if {when}: {made}; second_jump = false"]
    when = f"second_jump and n * h >= {_plain(second.when)}"
    note = "   # n: whole steps since the launch"
    return "; second_jump = true", [f"if {when}: {made}; second_jump = false{note}"]


def pseudo_code(brief: Brief, rule: Rule, constants: Constants) -> list[str]:
    """Return the update rule as a few lines of pseudo-code with these constants, only the parts in use.

    The brief has one jump, or is the view of one.
    """
    second, again = _second_lines(brief.jumps[0].second, constants)
    rounded = constants.grain > 0.0
    carry = rounded and rule.rounding.carry
    start = f"y = 0; v = {_plain(constants.launch_speed)}" + ("; e = 0" if carry else "")
    start += second
    body = again + _velocity_lines(rule, constants)
    if carry:
        body += ["t = u + e", f"w = {_snap('t', constants.grain, rule.rounding.mode)}", "e = t - w"]
    elif rounded:
        body.append(f"w = {_snap('u', constants.grain, rule.rounding.mode)}")
    moved = "w" if rounded and rule.rounding.at is Place.BEFORE_MOVE else "u"
    body.append(_move_line(rule, moved))
    if rule.position.grain > 0.0:
        body.append(f"y = {_snap('y', rule.position.grain, rule.position.mode)}")
    body.append("v = w" if rounded else "v = u")
    head = [_step_line(brief, rule, constants)]
    if constants.gravity_factor != 1.0:
        gravity, factor = _plain(constants.gravity), _plain(constants.gravity_factor)
        head.append(f"{OWN_GRAVITY} = {gravity} * {factor}   # formed once")
    return [*head, start, "each step:"] + [f"    {line}" for line in [*body, *_landing_lines(rule)]]


@dataclass(frozen=True, slots=True)
class Tick:
    """One step as a debugger would show it."""

    tick: int
    v_before: float
    """Length/s, upward positive."""
    u: float
    """The velocity after gravity and limit, before rounding."""
    v_after: float
    y_after: float
    """Length."""


def first_ticks(brief: Brief, constants: Constants, n: int = 4) -> list[Tick]:
    """Return the first n steps at the nominal rate; fewer where the jump is over sooner.

    With a second jump in the air also the two steps in which it acts.
    """
    second = brief.jumps[0].second
    step = brief.nominal(constants).step
    constants = as_flown(constants)
    if second is None:
        flight = trace(brief.rule, constants, step, max_steps=n)
    else:
        flight = trace(brief.rule, constants, step, second=second)
    rows = list(range(1, min(n, len(flight.y) - 1) + 1))
    if flight.second_step is not None:
        rows += [i for i in (flight.second_step, flight.second_step + 1) if n < i < len(flight.y)]
    return [
        Tick(i, float(flight.v[i - 1]), float(flight.unrounded[i]), float(flight.v[i]), float(flight.y[i]))
        for i in rows
    ]


def feature_sentence(feature: Feature, found: FeatureVerdict) -> str:
    """Return where a demand fails: "“billboard” opens or is short of its margin at 201–250 Hz"."""
    kind, bands = kind_of(feature), found.failing
    return failing_clause(kind, feature.must, feature.name, bands, most=len(bands), margin=feature.margin)


def by_text(brief: Brief, by: Sequence[str]) -> str:
    """Return the jumps that a feature binds: "walk, sprint", "every jump"."""
    return "every jump" if len(by) == len(brief.jumps) > 1 else ", ".join(by)


DEMANDS = {"stay-out": "stay out of", "stay-under": "stay under"}
"""How demands read where they are more than the word itself."""


def demand_text(feature: Feature, unit: str = "") -> str:
    """Return a demand for a table: "reach 110, margin 2"; "cross 380 to −40, margin 5"."""
    size = feature.width if isinstance(feature, Gap) else feature.height
    text = f"{DEMANDS.get(feature.must, feature.must)} {number(size)}{' ' + unit if unit else ''}"
    if isinstance(feature, Block):
        text += f" high, {number(feature.length)} long"
    if isinstance(feature, Ceiling) and feature.body_height:
        text += f" with {number(feature.body_height)} above"
    if isinstance(feature, Gap) and feature.far_level:
        text += f" to {number(feature.far_level)}"
    return text + (f", margin {number(feature.margin)}" if feature.margin else "")
