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
class TwinSecond:
    """A second jump in the air, in the words of a brief."""

    launch_speed: float
    when: float | str
    """ "apex", or seconds."""
    how: str


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
    second: TwinSecond | None = None,
) -> TwinJump:
    """One jump from height 0."""
    numbers = (gravity, launch_speed, step, grain, fall_factor, terminal_speed)
    ys, vs, landed, started = _samples(rule, numbers, level, second)
    return _landed(rule, ys, vs, step, level) if landed else TwinJump(_never(vs, started))


def time_above(
    rule: TwinRule,
    gravity: float,
    launch_speed: float,
    step: float,
    height: float,
    *,
    grain: float = 0.0,
    fall_factor: float = 1.0,
    terminal_speed: float = math.inf,
    second: TwinSecond | None = None,
) -> float | None:
    """The longest stay above a height before the landing at 0 (or at the height, if lower); None: no landing.

    All stays are listed from the samples of the whole flight, and then the longest is taken.
    """
    numbers = (gravity, launch_speed, step, grain, fall_factor, terminal_speed)
    ys, _, landed, _ = _samples(rule, numbers, min(0.0, height), second)
    if not landed:
        return None
    near = rule.contact_tolerance

    def moment(n: int) -> float:
        """When step n crosses the height."""
        if rule.landing_test != "swept":
            return n * step
        share = (height - ys[n - 1]) / (ys[n] - ys[n - 1])
        return (n - 1) * step + step * min(1.0, max(0.0, share))

    stays: list[float] = []
    since = 0.0 if height - near <= 0 else None
    for n in range(1, len(ys)):
        if since is None:
            if ys[n] > ys[n - 1] and ys[n] >= height - near:
                since = moment(n)
        elif ys[n] < ys[n - 1] and ys[n] <= height + near:
            stays.append(moment(n) - since)
            since = None
    return max([0.0, *stays])


def _samples(
    rule: TwinRule,
    numbers: tuple[float, float, float, float, float, float],
    level: float,
    second: TwinSecond | None,
) -> tuple[list[float], list[float], bool, bool]:
    """Heights and velocities to the landing or the longest flight; does it land; did it get so high."""
    gravity, launch_speed, h, grain, fall_factor, terminal_speed = numbers
    longest = math.floor(30 / h + 0.5)
    ys, vs = [0.0], [launch_speed]
    e = 0.0
    started = level <= 0
    to_come = second
    for n in range(1, longest + 1):
        y, v = ys[-1], vs[-1]
        if to_come is not None and _due(to_come, n, v, h):
            v = to_come.launch_speed if to_come.how == "set" else v + to_come.launch_speed
            to_come = None
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
            return ys, vs, True, started
    return ys, vs, False, started


def _due(second: TwinSecond, n: int, v: float, h: float) -> bool:
    """Whether step n, which starts with v, is one at whose start the second jump may act."""
    if second.when == "apex":
        return n > 1 and v <= 0
    return (n - 1) * h >= float(second.when)


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
