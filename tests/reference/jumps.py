"""Launches and rules in few words, and what two results have in common."""

from __future__ import annotations

from dataclasses import fields

import numpy as np

from designer.motion.jumps import Jumps, Launches
from designer.motion.rule import Rounding, Rule


def launches(
    gravity: object,
    speed: object,
    step: object,
    grain: object = 0.0,
    fall: object = 1.0,
    cap: object = np.inf,
) -> Launches:
    return Launches(*(np.asarray(x, dtype=np.float64) for x in (gravity, speed, step, grain, fall, cap)))


def rule(integrator: str = "average", mode: str = "nearest-even", at: str = "end", **more: object) -> Rule:
    return Rule(integrator, Rounding(mode, at), **more)  # type: ignore[arg-type]


def airtime(jumps: Jumps, step: object) -> np.ndarray:
    """Return the landing time (DEVELOPERS.md, update rule)."""
    return (jumps.steps - 1) * np.asarray(step) + np.asarray(step) * jumps.fraction


def equal(a: Jumps, b: Jumps) -> bool:
    return all(
        getattr(a, f.name).dtype == getattr(b, f.name).dtype
        and getattr(a, f.name).tobytes() == getattr(b, f.name).tobytes()
        for f in fields(Jumps)
    )
