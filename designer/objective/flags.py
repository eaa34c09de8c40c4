"""What a person should know of a set of constants beside its numbers: ties, flips near by, fairness."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from designer.brief.model import Brief
from designer.motion.closed_form import has_closed_form
from designer.motion.grain import flips_near, is_tie
from designer.motion.rule import Constants
from designer.objective.verdict import RateRow

NEAR = 0.01
"""A flip closer than this share of gravity is named."""


def find_flags(
    brief: Brief, constants: Constants, rows: Sequence[RateRow], stuck: Sequence[str]
) -> tuple[str, ...]:
    """Return what to know, a short phrase each, for rows with the nominal rate first.

    stuck names the bands of rates at which the jump never lands.
    """
    seen: dict[float, RateRow] = {}
    for row in rows:
        seen.setdefault(row.step, row)
    found = [f"{row.status} at {row.rate}" for row in seen.values() if row.status != "lands"]
    if stuck:
        found.append(f"never lands at {', '.join(stuck)}")
    if constants.grain > 0.0:
        found += _rounding_flags(brief, constants, list(seen))
        if not bool(np.all(has_closed_form(brief.rule, np.array([constants.grain])))):
            found.append("no closed form for this rule and grain: every jump is stepped")
    return (*found, *_fairness(brief, rows))


def _rounding_flags(brief: Brief, constants: Constants, steps: Sequence[float]) -> list[str]:
    """Name the steps at which g·h sits on a tie, and the nearest flip where it is near."""
    if brief.rule.rounding.carry:
        return []
    found = []
    nearest: tuple[float, float, float] | None = None
    for step in steps:
        for factor in sorted({1.0, constants.fall_factor}):
            gravity = constants.gravity * factor
            here = (np.array([gravity]), np.array([constants.grain]), np.array([step]))
            if bool(is_tie(brief.rule, *here)[0]):
                found.append(f"tie at {step * 1000:.6g} ms")
                continue
            for flip in flips_near(brief.rule, gravity, constants.grain, step, 1):
                # In terms of the constant that a person would change: falling gravity has its factor.
                away = abs(float(flip) - gravity) / factor
                if nearest is None or away < nearest[0]:
                    nearest = (away, float(flip) / factor, step)
    if nearest is not None and nearest[0] <= NEAR * constants.gravity:
        away, flip, step = nearest
        found.append(f"flip at gravity {flip:.6g}, {away:.3g} away, at {step * 1000:.6g} ms")
    return list(dict.fromkeys(found))


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
    return [f"faster machines jump {how}: {high:.1f} at {fast.rate} against {low:.1f} at {slow.rate}"]
