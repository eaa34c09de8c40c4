"""Small briefs and designs made in code, for tests that need no file."""

from __future__ import annotations

import math
from dataclasses import replace
from typing import Any

import numpy as np

from designer.brief.model import Brief, Choice, JumpBrief, Loop, Rate, Rates, Target
from designer.motion.rule import Constants, Rule
from designer.objective.table import Extremes, JumpTable


def brief_of(
    *targets: Target, rule: Rule | None = None, rates: tuple[Rate, ...] = (), **changes: Any
) -> Brief:
    """Return a brief that steps each frame, aims at 100 Hz, exact frame times."""
    supported = rates or (Rate("100 Hz", 0.01), Rate("50 Hz", 0.02))
    brief = Brief(
        name="made",
        title="Made in code",
        length_unit="cm",
        loop=Loop.EACH_FRAME,
        rule=rule or Rule("semi-implicit"),
        rates=Rates(supported),
        aim_at=Rate("100 Hz", 0.01),
        base=Constants(gravity=1000.0, launch_speed=400.0),
        jumps=(JumpBrief(targets=targets),),
    )
    return replace(brief, **changes)


def table_of(
    lands: list[bool] | None = None, **measures: tuple[list[float], list[float], list[float]]
) -> JumpTable:
    """Return a table from (nominal, low, high) lists a measure; keys may hold "__" for "@"."""
    found = {
        name.replace("__", "@"): Extremes(*(np.array(part, dtype=float) for part in three))
        for name, three in measures.items()
    }
    count = len(next(iter(found.values())).nominal)
    return JumpTable("jump", np.array(lands if lands is not None else [True] * count), found)


def small_brief() -> Brief:
    """Return a brief whose grid has 272 designs."""
    today = Constants(gravity=1600.0, launch_speed=620.0, run_speed=540.0)
    search = {
        "gravity": Choice(tuple(float(g) for g in range(1400, 1701, 20)), text="1400 to 1700 by 20"),
        "launch_speed": Choice(tuple(float(v) for v in range(580, 661, 5)), text="580 to 660 by 5"),
        "grain": Choice((0.0,)),
        "run_speed": Choice((540.0,)),
        "fall_factor": Choice((1.0,)),
        "terminal_speed": Choice((math.inf,)),
    }
    return brief_of(
        Target("apex", within=2.0, aim=120.0),
        Target("airtime", within=0.02, aim=0.76),
        today=today,
        base=today,
        search=search,
    )
