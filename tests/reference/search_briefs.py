"""Briefs for tests and benchmarks of the search, made in code."""

from __future__ import annotations

import math
from dataclasses import replace
from typing import Any

from designer.brief.model import Brief, Choice, JumpBrief, Loop, Rate, Rates, Target
from designer.motion.rule import Constants, FrameTime, LandingTest, Rounding, Rule

FIXED = {
    "run_speed": Choice((0.0,)),
    "fall_factor": Choice((1.0,)),
    "terminal_speed": Choice((math.inf,)),
}


def ms(*steps: int) -> tuple[Rate, ...]:
    """Return supported rates that are whole milliseconds."""
    return tuple(Rate(f"{step} ms", step / 1000.0) for step in steps)


def points(low: float, high: float, every: float) -> Choice:
    """Return a range with an increment."""
    count = round((high - low) / every)
    return Choice(tuple(low + k * every for k in range(count + 1)), text=f"{low:g} to {high:g} by {every:g}")


def fixed_loop(
    rule: Rule, search: dict[str, Choice], rates: tuple[Rate, ...], *targets: Target, **changes: Any
) -> Brief:
    """Return a brief with a fixed loop."""
    brief = Brief(
        name="made",
        title="Made in code",
        length_unit="cm",
        loop=Loop.FIXED,
        rule=rule,
        rates=Rates(rates),
        search=FIXED | search,
        base=Constants(1000.0, 400.0, 0.008),
        jumps=(JumpBrief(targets=targets),),
    )
    return replace(brief, **changes)


def millions(integrator: str = "average", every: float = 5.0) -> Brief:
    """Return the issue's brief of 2.55 million designs at 8 rates (fewer where the increment is larger)."""
    search = {
        "gravity": points(200.0, 2000.0, every),
        "launch_speed": points(100.0, 600.0, every),
        "step": Choice(tuple(n / 1000.0 for n in (*range(1, 9), 10, 12, 16, 20, 25, 33))),
        "grain": Choice((0.0, 0.125, 0.25, 0.5, 1.0)),
    }
    rule = Rule(integrator, Rounding(at="before-move"), FrameTime.WHOLE_MS_DOWN)
    return fixed_loop(
        rule,
        search,
        ms(3, 4, 7, 8, 11, 14, 17, 33),
        Target("apex", within=1.0, aim=56.0),
        Target("airtime", within=0.02, aim=0.70),
    )


ALIGNED_STEPS = (3, 4, 5, 6, 7, 8, 10, 11, 13, 14, 16, 20, 25, 33)


def alignment() -> Brief:
    """Return the issue's brief in which only a grain-aligned gravity is steady."""
    search = {
        "gravity": points(200.0, 2000.0, 5.0),
        "launch_speed": points(100.0, 600.0, 1.0),
        "step": Choice((0.008,)),
        "grain": Choice((1.0,)),
    }
    rule = Rule("average", Rounding(at="end"), FrameTime.WHOLE_MS_DOWN, LandingTest.END_OF_STEP)
    return fixed_loop(rule, search, ms(*ALIGNED_STEPS), Target("apex", within=0.5, aim=45.6))
