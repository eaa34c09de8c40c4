"""Games with several jumps, made in code, for tests and benchmarks of the search."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from typing import Any

from designer.brief.model import Brief, Choice, JumpBrief, Loop, Rate, Rates, Target, Term, Variable
from designer.motion.rule import OWN, SHARED, Constants, Rounding, Rule, Second
from tests.reference.search_briefs import ms, points

DEFAULTS = {
    "run_speed": 0.0,
    "fall_factor": 1.0,
    "terminal_speed": math.inf,
    "gravity_factor": 1.0,
}


@dataclass(frozen=True)
class One:
    """A jump: what its search names, "walk" for what is walk's, ("walk", factors) for a link."""

    name: str
    targets: tuple[Target, ...]
    own: Mapping[str, Any] = field(default_factory=dict)
    weight: float = 1.0
    second: Second | None = None


def among(*values: float) -> Choice:
    return Choice(values, text=", ".join(f"{v:g}" for v in values))


def game(
    rule: Rule,
    shared: Mapping[str, Choice],
    rates: tuple[Rate, ...],
    *jumps: One,
    spread_weight: float = 1.0,
    **changes: Any,
) -> Brief:
    """Return a brief with several jumps; a fixed loop where a step is among what they share."""
    variables = [Variable(name, shared[name]) for name in SHARED if name in shared]
    everybody = {one.name: Term(place) for place, one in enumerate(variables)}
    made: dict[str, dict[str, Term]] = {}
    for one in jumps:
        terms = dict(everybody)
        for name in OWN:
            said = one.own.get(name, among(DEFAULTS[name]) if name in DEFAULTS else None)
            if isinstance(said, str):
                terms[name] = made[said][name]
                continue
            other, choice = said if isinstance(said, tuple) else (None, said)
            variables.append(Variable(f"{one.name}.{name}{' times' if other else ''}", choice))
            place = len(variables) - 1
            terms[name] = Term(place)
            if other:
                base = made[other][name]
                terms[name] = Term(base.variable, (*base.factors, place))
        made[one.name] = terms
    fixed = "step" in shared
    base = Constants(1000.0, 400.0, shared["step"].values[0] if fixed else None)
    brief = Brief(
        name="made",
        title="Made in code",
        length_unit="cm",
        loop=Loop.FIXED if fixed else Loop.EACH_FRAME,
        rule=rule,
        rates=Rates(rates, spread_weight=spread_weight),
        aim_at=None if fixed else rates[0],
        base=base,
        jumps=tuple(
            JumpBrief(one.name, one.targets, one.weight, terms=made[one.name], second=one.second, base=base)
            for one in jumps
        ),
        variables=tuple(variables),
        search={one.name: one.choice for one in variables if one.name in SHARED},
    )
    return replace(brief, **changes)


def height(aim: float, within: float = 2.0, **more: Any) -> Target:
    return Target("apex", within=within, aim=aim, **more)


def time(aim: float, within: float = 0.02, **more: Any) -> Target:
    return Target("airtime", within=within, aim=aim, **more)


EIGHT = ms(3, 4, 5, 6, 8, 11, 14, 16)


def billion() -> Brief:
    """Return four jumps at eight rates: 1,142 million sets of 66 thousand own designs."""
    speeds = points(500.0, 740.0, 6.0)
    return game(
        Rule("semi-implicit", Rounding(at="before-move")),
        {"gravity": points(1200.0, 2200.0, 10.0), "step": among(0.008), "grain": among(0.0, 0.125, 0.5, 1.0)},
        EIGHT,
        One("walk", (height(120.0), time(0.76)), {"launch_speed": speeds}),
        One("sprint", (height(112.0), time(0.70)), {"launch_speed": speeds}),
        One("hop", (height(84.0), time(0.66)), {"launch_speed": points(440.0, 680.0, 6.0)}),
        One("armour", (height(96.0), time(0.74)), {"launch_speed": points(450.0, 690.0, 6.0)}),
    )
