"""Where a study starts: the closed forms turned round, aligned gravities, and what people already have."""

from __future__ import annotations

import math
from collections.abc import Iterator
from itertools import product
from typing import TYPE_CHECKING

import numpy as np

from designer.brief.model import Brief, Target
from designer.motion.closed_form import constants_for
from designer.motion.grain import aligned_gravities
from designer.motion.rule import SEARCHABLE, Constants, Integrator
from designer.objective.table import fixed_lengths
from designer.search.space import Axis, Space

if TYPE_CHECKING:
    from numpy.typing import NDArray

MOST = 48
"""A study starts with at most so many seeds; the rest it finds out for itself."""
NEAREST = 2
"""How many grain-aligned gravities are tried on either side of the textbook one."""

LEAN = {Integrator.EXPLICIT: -1.0, Integrator.SEMI_IMPLICIT: 1.0, Integrator.AVERAGE: 0.0}
"""c of the stepped parabola: its launch speed is launch_speed − c·g·h/2 (Hairer, Lubich & Wanner, Geometric
Numerical Integration, ch. I)."""


def _row(constants: Constants) -> list[float]:
    none = {"step": math.nan, "terminal_speed": math.inf}
    values = ((name, getattr(constants, name)) for name in SEARCHABLE)
    return [none[name] if value is None else float(value) for name, value in values]


def _samples(axis: Axis, count: int = 3) -> list[float]:
    """Return a few values spread over an axis: both ends and what lies between."""
    if axis.points is None:
        return [float(v) for v in np.linspace(axis.low, axis.high, count)]
    at = np.unique(np.round(np.linspace(0, len(axis.points) - 1, count)).astype(int))
    return [axis.points[k] for k in at]


def _value(target: Target) -> float | None:
    for value in (target.aim, target.at_least, target.at_most):
        if value is not None:
            return value
    return None


def _wanted(brief: Brief, *measures: str) -> float | None:
    """Return what the first target on one of these measures asks for."""
    targets = [t for jump in brief.jumps for t in jump.targets if t.measure in measures]
    return next((_value(target) for target in targets), None)


def _pairs(brief: Brief, space: Space, fall_factor: float) -> Iterator[tuple[float, float]]:
    """Yield (gravity, apex) that the continuous formulas ask for."""
    apex, airtime = _wanted(brief, "apex"), _wanted(brief, "airtime")
    if apex is None and brief.ledges:
        apex = max(
            (ledge.height + ledge.margin for ledge in brief.ledges if ledge.must == "reach"), default=None
        )
    if apex is not None and apex > 0.0 and airtime is not None and airtime > 0.0:
        gravity, launch = (float(x) for x in constants_for(apex, airtime, fall_factor))
        yield gravity, apex
        return
    for gravity in _samples(space.axis("gravity")):
        if apex is not None and apex > 0.0:
            yield gravity, apex
        elif airtime is not None and airtime > 0.0:
            launch = gravity * airtime / (1.0 + 1.0 / math.sqrt(fall_factor))
            yield gravity, launch * launch / (2.0 * gravity)


def _gravities(brief: Brief, gravity: float, grain: float, steps: list[float], axis: Axis) -> list[float]:
    """Return the gravity and the grain-aligned ones on either side of it."""
    if grain <= 0.0:
        return [gravity]
    low, high = max(axis.low, 0.5 * gravity), min(axis.high, 2.0 * gravity)
    if low > high:
        return [gravity]
    aligned = np.asarray(aligned_gravities(brief.rule, grain, np.array(steps), low, high), dtype=np.float64)
    near = aligned[np.argsort(np.abs(aligned - gravity), kind="stable")][: 2 * NEAREST]
    return [gravity, *(float(g) for g in near)]


def _physical(brief: Brief, space: Space) -> Iterator[list[float]]:
    """Yield designs from the closed forms, most plausible first."""
    _, edge = fixed_lengths(brief)
    reach = _wanted(brief, "max_gap", "sure_gap")
    supported = [rate.step for rate in brief.rates.supported]
    around = (space.axis(name) for name in ("step", "grain", "fall_factor", "terminal_speed"))
    for step, grain, fall, terminal in product(*(_samples(axis) for axis in around)):
        nominal = brief.aim_at.step if brief.aim_at is not None else step
        for start, apex in _pairs(brief, space, max(fall, 1e-3)):
            for gravity in _gravities(
                brief, start, grain, sorted({*supported, nominal}), space.axis("gravity")
            ):
                smooth = math.sqrt(2.0 * gravity * apex)
                airtime = smooth / gravity * (1.0 + 1.0 / math.sqrt(max(fall, 1e-3)))
                runs = (
                    [(reach - edge) / airtime] if reach is not None else _samples(space.axis("run_speed"), 2)
                )
                launch = smooth + LEAN[brief.rule.integrator] * 0.5 * gravity * nominal
                for run in runs:
                    yield [gravity, launch, step, grain, run, fall, terminal]


def seeds(brief: Brief, space: Space) -> NDArray[np.float64]:
    """Return designs to start from, (designs, 7) in SEARCHABLE's order, not yet put onto the space."""
    found = [_row(one) for one in ([brief.today] if brief.today else []) + [s.constants for s in brief.sets]]
    physical = list(_physical(brief, space))
    # Every so-manyth, so that each grain and step gets its turn where there are too many.
    keep = max(1, math.ceil(len(physical) / max(1, MOST - len(found))))
    return np.array(found + physical[::keep], dtype=np.float64).reshape(-1, len(SEARCHABLE))
