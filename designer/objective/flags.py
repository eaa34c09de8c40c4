"""What a person should know of a set of constants beside its numbers: ties, flips near by, fairness."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np

from designer.brief.model import Brief, step_name
from designer.motion.closed_form import has_closed_form
from designer.motion.grain import flips_near, is_tie
from designer.motion.rule import Constants
from designer.objective.verdict import FeatureVerdict, RateRow

NEAR = 0.01
"""A flip closer than this share of gravity is named."""


def find_flags(
    brief: Brief,
    constants: Constants,
    rows: Sequence[RateRow],
    stuck: Sequence[str],
) -> tuple[str, ...]:
    """Return what to know of one jump, a short phrase each, for rows with the nominal rate first.

    stuck names the bands of rates at which the jump never lands.
    """
    seen: dict[float, RateRow] = {}
    for row in rows:
        seen.setdefault(row.step, row)
    found = [f"{row.status} at {row.rate}" for row in seen.values() if row.status != "lands"]
    if stuck:
        found.append(f"never lands at {', '.join(stuck)}")
    if constants.grain > 0.0:
        found += _ties(brief, constants, list(seen))
        counting = [step for step, row in seen.items() if row.supported]
        found += _near_flip(brief, constants, counting)
        if not bool(np.all(has_closed_form(brief.rule, np.array([constants.grain])))):
            found.append("no closed form for this rule and grain: every jump is stepped")
    found += _float_noise(constants, list(seen))
    return (*found, *_fairness(brief, rows))


def _ties(brief: Brief, constants: Constants, steps: Sequence[float]) -> list[str]:
    """Name the steps at which g·h sits on a tie."""
    gravities = {constants.pull, constants.pull * constants.fall_factor}
    q = constants.grain
    return [
        f"tie at {step_name(step)}"
        for step in steps
        if any(bool(is_tie(brief.rule, gravity, q, step)) for gravity in gravities)
    ]


def _float_noise(constants: Constants, steps: Sequence[float]) -> list[str]:
    """Name the steps at which noise in the last bits decides which of the two gravities acts."""
    if constants.grain > 0.0 or constants.fall_factor == 1.0:
        return []
    found = []
    for step in steps:
        ratio = constants.launch_speed / (constants.pull * step)
        if abs(ratio - round(ratio)) < 1e-9 * max(1.0, ratio):
            found.append(f"v comes to 0 after {round(ratio)} whole steps of {step_name(step)}: noise decides")
    return found


def _near_flip(brief: Brief, constants: Constants, steps: Sequence[float]) -> list[str]:
    """Name the nearest flip beside ties where it is near, in terms of the gravity constant."""
    nearest: tuple[float, float, float] | None = None
    for step in steps:
        for factor in sorted({1.0, constants.fall_factor}):
            gravity = constants.pull * factor
            if bool(is_tie(brief.rule, gravity, constants.grain, step)):
                continue
            for flip in flips_near(brief.rule, gravity, constants.grain, step, 1):
                away = abs(float(flip) - gravity) / factor / constants.gravity_factor
                if nearest is None or away < nearest[0]:
                    nearest = (away, float(flip) / factor / constants.gravity_factor, step)
    if nearest is None or nearest[0] > NEAR * constants.gravity:
        return []
    away, flip, step = nearest
    return [f"flip at gravity {flip:.6g}, {away:.3g} away, at {step_name(step)}"]


def between(rows: Sequence[RateRow], features: Sequence[FeatureVerdict]) -> list[str]:
    """Say which demands hold at every rate of the brief but fail at one between them."""
    steps = [row.step for row in rows if row.supported]
    low, high = 1.0 / max(steps), 1.0 / min(steps)
    found = []
    for feature in features:
        inside = [band for band in feature.failing if low < float(band.split("–")[0].split()[0]) < high]
        if feature.holds and inside:
            found.append(f"between the supported rates {feature.name} fails at {', '.join(inside)}")
    return found


def _fairness(brief: Brief, rows: Sequence[RateRow]) -> list[str]:
    """Say where the fastest machine jumps higher, or lower, than the slowest by more than a tolerance."""
    landing = [row for row in rows if row.supported and row.measures["apex"] is not None]
    if len(landing) < 2:
        return []
    slow, fast = max(landing, key=lambda row: row.step), min(landing, key=lambda row: row.step)
    low, high = slow.measures["apex"] or 0.0, fast.measures["apex"] or 0.0
    within = next(
        (t.within for jump in brief.jumps for t in jump.targets if t.measure == "apex"),
        0.01 * low,
    )
    if abs(high - low) <= within:
        return []
    how = "higher" if high > low else "lower"
    places = max(0, math.ceil(1.0 - math.log10(within)))  # a tenth of the tolerance
    figures = f"{high:.{places}f} at {fast.rate} against {low:.{places}f} at {slow.rate}"
    return [f"faster machines jump {how}: {figures}"]
