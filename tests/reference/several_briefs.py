"""A brief with several jumps, made in code, for tests that need no file."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

from designer.brief.model import Brief, Choice, Gap, JumpBrief, Ledge, Rate, Target, Term, Variable
from designer.motion.rule import Constants, Rounding, Rule
from tests.reference.make import brief_of

RULE = Rule("semi-implicit", Rounding("nearest-even", "end"), frame_time="whole-ms-down")
RATES = tuple(Rate(f"{hz} Hz", ms / 1000) for hz, ms in [(60, 16), (120, 8), (144, 6), (240, 4)])
WALK = Constants(gravity=1600.0, launch_speed=620.0, grain=1.0, run_speed=300.0)
SPRINT = replace(WALK, run_speed=540.0)
ARMOUR = replace(WALK, launch_speed=527.0, gravity_factor=0.9)
SETS = (WALK, SPRINT, ARMOUR)
"""What the build has now."""


def fixed(value: float) -> Choice:
    """Return a choice that the search may not change."""
    return Choice((value,), text=f"{value:g}")


VARIABLES = (
    Variable("gravity", Choice((1550.0, 1600.0, 1650.0), text="1550 to 1650 by 50")),
    Variable("grain", fixed(1.0)),
    Variable("walk.launch_speed", Choice((600.0, 610.0, 620.0, 630.0), text="600 to 630 by 10")),
    Variable("walk.run_speed", fixed(300.0)),
    Variable("sprint.run_speed", fixed(540.0)),
    Variable("armour.launch_speed times", Choice((0.8, 0.85, 0.9), text="0.8 to 0.9 by 0.05")),
    Variable("armour.gravity_factor", Choice((0.9, 1.0), text="one of 0.9, 1")),
)
TERMS = {"gravity": Term(0), "grain": Term(1), "launch_speed": Term(2), "run_speed": Term(3)}
JUMPS = (
    JumpBrief(
        "walk",
        (Target("apex", within=2.0, aim=120.0), Target("airtime", within=0.02, aim=0.76, weight=2.0)),
        terms=TERMS,
        today=WALK,
        base=WALK,
    ),
    JumpBrief(
        "sprint",
        (Target("max_gap", within=10.0, at_least=420.0),),
        like="walk",
        terms={**TERMS, "run_speed": Term(4)},
        today=SPRINT,
        base=SPRINT,
    ),
    JumpBrief(
        "armour",
        (Target("apex", within=3.0, at_least=85.0, at_most=95.0), Target("airtime", within=0.03, aim=0.7)),
        weight=0.5,
        like="walk",
        terms={**TERMS, "launch_speed": Term(2, (5,)), "gravity_factor": Term(6)},
        today=ARMOUR,
        base=ARMOUR,
    ),
)
LEDGES = (
    Ledge("awning", 110.0, "reach", 2.0, ("walk", "sprint")),
    Ledge("crate", 80.0, "reach", 1.0, ("armour",)),
    Ledge("billboard", 124.0, "stay-out", 1.0, ("walk", "sprint", "armour")),
)
GAPS = (
    Gap("alley", 400.0, "cross", -40.0, 5.0, ("sprint",)),
    Gap("moat", 300.0, "stay-out", 0.0, 5.0, ("walk", "armour")),
)


def three_jumps(**changes: Any) -> Brief:
    """Return walk, sprint (like walk) and armour (walk's launch speed times a factor) of one game.

    72 combined designs: 3 gravities, 4 launch speeds, 3 factors of armour's launch speed, 2 of its gravity.
    """
    return brief_of(
        **{
            "rule": RULE,
            "rates": RATES,
            "aim_at": RATES[0],
            "today": WALK,
            "base": WALK,
            "search": {"gravity": VARIABLES[0].choice, "grain": VARIABLES[1].choice},
            "jumps": JUMPS,
            "variables": VARIABLES,
            "ledges": LEDGES,
            "gaps": GAPS,
            **changes,
        }
    )
