"""Many jumps at once: the closed form where there is one, the kernel for the rest."""

from __future__ import annotations

from dataclasses import fields

import numpy as np

from designer.motion.closed_form import closed_form
from designer.motion.jumps import Jumps, Launches
from designer.motion.rule import Rule
from designer.motion.simulate import simulate


def fly_many(
    rule: Rule,
    launches: Launches,
    level: float = 0.0,
    *,
    workers: int = 1,
    compiled: bool | None = None,
    count_near_apex: bool = False,
) -> Jumps:
    """Return what becomes of each launch at a landing level (length), in the launches' broadcast shape.

    Launches that the closed form cannot decide to the kernel's answer (ties, rules without one) are stepped;
    count_near_apex steps them all, since only the kernel counts. `compiled` and `workers` are for the
    stepped part (see `simulate`) and never change a result.
    """
    if count_near_apex:
        return simulate(
            rule, launches, level, workers=workers, compiled=compiled, count_near_apex=count_near_apex
        )
    jumps, flagged = closed_form(rule, launches, level)
    if flagged.any():
        rest = Launches(*(np.ascontiguousarray(a[flagged]) for a in launches.broadcast()))
        stepped = simulate(rule, rest, level, workers=workers, compiled=compiled)
        for part in fields(Jumps):
            getattr(jumps, part.name)[flagged] = getattr(stepped, part.name)
    return jumps
