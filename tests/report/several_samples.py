"""Search results of several jumps, made by judging a few sets, for tables and pictures."""

from __future__ import annotations

from dataclasses import replace
from functools import cache

from designer.brief.model import Block, Brief, Ceiling, Gap, JumpBrief, Ledge, Target, Term, Variable
from designer.motion.rule import Constants, Second
from designer.objective.judge import judge
from designer.search.result import Candidate, SearchResult
from tests.reference.several_briefs import fixed, three_jumps

WALK = Constants(gravity=1600.0, launch_speed=620.0, grain=1.0, run_speed=300.0)


@cache
def five_jumps() -> Brief:
    """Return a brief with five jumps: three_jumps, a double jump and a hop."""
    brief = three_jumps()
    walk = brief.jumps[0].terms
    variables = (*brief.variables, Variable("hop.launch_speed", fixed(350.0)))
    double = JumpBrief(
        "double jump of the courier",
        (Target("apex", within=4.0, aim=205.0),),
        like="walk",
        terms=walk,
        today=WALK,
        base=WALK,
        second=Second(520.0),
    )
    low = replace(WALK, launch_speed=350.0)
    hop = JumpBrief(
        "hop",
        (Target("apex", within=2.0, aim=40.0), Target("airtime", within=0.02, aim=0.4)),
        like="walk",
        terms={**walk, "launch_speed": Term(len(variables) - 1)},
        today=low,
        base=low,
    )
    everyone = (*(jump.name for jump in brief.jumps), double.name, hop.name)
    return replace(
        brief,
        title="Five jumps of one courier",
        jumps=(*brief.jumps, double, hop),
        variables=variables,
        ledges=(*brief.ledges, Ledge("gantry over the quay", 195.0, "reach", 2.0, (double.name,))),
        gaps=(*brief.gaps, Gap("lock", 560.0, "stay-out", 0.0, 4.0, everyone)),
        blocks=(Block("crate stack", 60.0, 120.0, "clear", 3.0, ("walk",)),),
        ceilings=(Ceiling("arcade", 220.0, 175.0, by=("hop",)),),
    )


def sets_of(gravity: float, launch_speed: float, grain: float, times: float) -> tuple[Constants, ...]:
    """Return a set for `five_jumps`."""
    walk = replace(WALK, gravity=gravity, launch_speed=launch_speed, grain=grain)
    armour = replace(walk, launch_speed=launch_speed * times, gravity_factor=0.9)
    return (
        walk,
        replace(walk, run_speed=540.0),
        armour,
        walk,
        replace(walk, launch_speed=350.0),
    )


@cache
def five_result() -> SearchResult:
    """Return today and six candidates of `five_jumps`, with what each jump could have alone made up."""
    brief = five_jumps()
    numbers = [
        ("today", (1600.0, 620.0, 1.0, 0.85)),
        ("A", (1620.0, 625.0, 0.125, 0.8)),
        ("B", (1600.0, 615.0, 0.125, 0.85)),
        ("C", (1550.0, 610.0, 0.0, 0.9)),
        ("D", (1640.0, 630.0, 0.125, 0.85)),
        ("E", (1500.0, 600.0, 1.0, 0.85)),
        ("F", (1700.0, 640.0, 0.125, 0.75)),
    ]
    found = [
        Candidate(label, f"one of several, {label}", "numbers", judge(brief, sets_of(*four)))
        for label, four in numbers
    ]
    today, best = replace(found[0], why="what the build has now", change="none"), found[1]
    alone = {jump.name: 0.6 * (jump.cost or 0.0) for jump in best.verdict.jumps}
    return SearchResult(
        best=best,
        nearest=None,
        today=today,
        sets=(),
        shortlist=tuple(found[1:]),
        front=tuple(found[1:]),
        certificate=None,
        evaluations=1,
        seed=0,
        method="scan",
        notes=("Made for a test.",),
        clashes=(),
        alone=alone,
    )
