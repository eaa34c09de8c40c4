"""An independent twin of the update rule, written from its text, step by step and without any haste.

It shares no code with designer/: options are the words of a brief, rounding is Python's own `round`, `trunc`
and `decimal`, every step up to the longest flight is taken, and the landing is looked for afterwards.
Python floats are IEEE 754 binary64 and each operation is rounded once, so that equal means equal bits.
"""

from __future__ import annotations

import decimal
import math
from dataclasses import dataclass
from decimal import Decimal

DECIMAL_NAMES = {
    "nearest-away": decimal.ROUND_HALF_UP,
    "down": decimal.ROUND_FLOOR,
    "up": decimal.ROUND_CEILING,
}


@dataclass(frozen=True, slots=True)
class TwinRule:
    """The rule in the words of a brief."""

    integrator: str
    mode: str = "nearest-even"
    at: str = "end"
    carry: bool = False
    landing_test: str = "swept"
    launch_gravity: bool = True
    contact_tolerance: float = 1e-6
    position_grain: float = 0.0
    position_mode: str = "nearest-even"


@dataclass(frozen=True, slots=True)
class TwinJump:
    """What became of a jump; None where it does not land."""

    status: str
    steps: int | None = None
    apex: float | None = None
    apex_step: int | None = None
    fraction: float | None = None
    landing_velocity: float | None = None
    near_apex_steps: int | None = None
    airtime: float | None = None


def snap(x: float, q: float, mode: str) -> float:
    """mode(x/q)·q; no grain, no rounding."""
    if q == 0:
        return x
    ratio = x / q
    if mode == "nearest-even":
        whole = round(ratio)
    elif mode == "toward-zero":
        whole = math.trunc(ratio)
    elif mode == "nearest-up":
        whole = math.floor(ratio + 0.5)
    else:
        whole = int(Decimal(ratio).to_integral_value(DECIMAL_NAMES[mode]))
    return whole * q


def jump(
    rule: TwinRule,
    gravity: float,
    launch_speed: float,
    step: float,
    *,
    grain: float = 0.0,
    fall_factor: float = 1.0,
    terminal_speed: float = math.inf,
    level: float = 0.0,
) -> TwinJump:
    """One jump from height 0."""
    h = step
    longest = math.floor(30 / h + 0.5)
    ys, vs = [0.0], [launch_speed]
    e = 0.0
    landing = None
    started = level <= 0
    for n in range(1, longest + 1):
        y, v = ys[-1], vs[-1]
        g = gravity if v > 0 else gravity * fall_factor
        a = g * h
        if n == 1 and not rule.launch_gravity:
            a = 0.0
        u = v - a
        u = max(u, -terminal_speed)
        if rule.carry:
            t = u + e
            w = snap(t, grain, rule.mode)
            e = t - w
        else:
            w = snap(u, grain, rule.mode)
        m = u if rule.at == "end" else w
        if rule.integrator == "explicit":
            y_new = y + v * h
        elif rule.integrator == "semi-implicit":
            y_new = y + m * h
        else:
            y_new = y + 0.5 * (v + m) * h
        y_new = snap(y_new, rule.position_grain, rule.position_mode)
        ys.append(y_new)
        vs.append(w)
        # For a level above the take-off the test starts where the jump is first at or above it, n = 0 too.
        started = started or ys[n] >= level - rule.contact_tolerance or level - rule.contact_tolerance <= 0
        if started and ys[n] <= level + rule.contact_tolerance and ys[n] < ys[n - 1]:
            landing = n
            break
    if landing is None:
        return TwinJump(_never(vs, started))
    return _landed(rule, ys, vs, h, level)


def _never(vs: list[float], started: bool) -> str:
    """Which of the ways not to land."""
    stands = len(vs) > 1 and vs[-1] == vs[-2]
    if stands and vs[-1] > 0:
        return "never-slows"
    if not started:
        return "out-of-reach"
    return "hovers" if stands and vs[-1] == 0 else "too-long"


def _landed(rule: TwinRule, ys: list[float], vs: list[float], h: float, level: float) -> TwinJump:
    """The measures over 0 … the last step."""
    n = len(ys) - 1
    apex = max(ys)
    fraction, airtime = 1.0, n * h
    if rule.landing_test == "swept":
        fraction = (ys[n - 1] - level) / (ys[n - 1] - ys[n])
        fraction = min(1.0, max(0.0, fraction))
        airtime = (n - 1) * h + h * fraction
    near = sum(1 for y in ys if y >= 0.9 * apex)
    return TwinJump("lands", n, apex, ys.index(apex), fraction, vs[n], near, airtime)
