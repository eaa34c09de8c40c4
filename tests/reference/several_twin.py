"""The score of several jumps (DEVELOPERS.md, score), in plain Python over the twin of the update rule.

Written from the text as the single twin is, and apart from it: loops over jumps, rates, targets and features,
no arrays, nothing of designer/ but the brief's own values. Knows apex, airtime, landing_speed, max_gap,
sure_gap and step_top, and ledges, gaps, blocks and ceilings.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from designer.brief.model import Block, Brief, Ceiling, Gap, JumpBrief, Ledge, Target
from designer.motion.rule import Constants
from tests.reference.score_twin import nine, twin_rule
from tests.reference.twin import TwinJump, TwinSecond, time_above
from tests.reference.twin import jump as fly

Row = dict[Any, float]


@dataclass(frozen=True)
class TwinScores:
    """One set of several jumps scored; None where a jump never lands."""

    miss: float | None
    spread: float | None
    cost: float | None
    violation: float
    worst: tuple[float, str, str]
    """The largest |d|, its jump and its measure."""
    spares: Mapping[str, float]
    """Of each feature by name, the least slack over its jumps and the rates."""
    costs: Mapping[str, float]
    """Of each jump alone."""


def measure_row(brief: Brief, jump: JumpBrief, constants: Constants, step: float) -> Row | None:
    """What one jump does at one step; None where it never lands."""

    numbers: dict[str, Any] = {
        "gravity": constants.gravity * constants.gravity_factor,
        "launch_speed": constants.launch_speed,
        "step": step,
        "grain": constants.grain,
        "fall_factor": constants.fall_factor,
        "terminal_speed": math.inf if constants.terminal_speed is None else constants.terminal_speed,
    }
    if jump.second is not None:
        when = "apex" if jump.second.when is None else jump.second.when
        numbers["second"] = TwinSecond(jump.second.launch_speed, when, str(jump.second.how))

    def at(level: float) -> TwinJump:
        return fly(twin_rule(brief), **numbers, level=level)

    flat = at(0.0)
    if flat.status != "lands":
        return None
    row: Row = {
        "apex": flat.apex,
        "airtime": flat.airtime,
        "landing_speed": -flat.landing_velocity,
        "step_top": flat.apex + constants.step_up,
    }
    for gap in (None, *brief.gaps):
        level = 0.0 if gap is None else gap.far_level
        there = at(level)
        reach = sure = 0.0
        if there.status == "lands":
            reach = constants.run_speed * there.airtime + constants.edge_allowance
            sure = max(0.0, reach - constants.run_speed * step)
        row["max_gap", level], row["sure_gap", level] = reach, sure
    for block in brief.blocks:
        stay = time_above(twin_rule(brief), **numbers, height=block.height)
        row["clearance", block.height] = constants.run_speed * (stay or 0.0)
    row["max_gap"], row["sure_gap"] = row["max_gap", 0.0], row["sure_gap", 0.0]
    return row


def deviation(target: Target, rows: Sequence[Row]) -> float:
    """d of one target; the first row is the nominal one."""
    if target.aim is not None:
        return (rows[0][target.measure] - target.aim) / target.within
    seen = [row[target.measure] for row in rows]
    under = min(0.0, min(seen) - target.at_least) if target.at_least is not None else 0.0
    over = max(0.0, max(seen) - target.at_most) if target.at_most is not None else 0.0
    return (under if -under > over else over) / target.within


def _within(jump: JumpBrief, names: tuple[str, str], size: float) -> float:
    for target in jump.targets:
        if target.measure in names:
            return target.within
    return 0.01 * abs(size)


def slack(  # noqa: PLR0911 - one return a kind of demand reads best
    brief: Brief, feature: Any, jump: JumpBrief, row: Row
) -> tuple[float, float]:
    """The signed slack at one rate, and what a shortfall counts in."""
    heights, widths = ("apex", "step_top"), ("max_gap", "sure_gap")
    if isinstance(feature, Ceiling):
        unit = _within(jump, heights, feature.height)
        return feature.height - feature.margin - (row["apex"] + feature.body_height), unit
    if isinstance(feature, Ledge):
        unit = _within(jump, heights, feature.height)
        if feature.must == "reach":
            return row["step_top"] - (feature.height + feature.margin), unit
        return feature.height - feature.margin - row["step_top"], unit
    if isinstance(feature, Block):
        way, unit = row["clearance", feature.height], _within(jump, widths, feature.length)
        if feature.must == "clear":
            return way - (feature.length + feature.margin), unit
        return feature.length - feature.margin - way, unit
    assert isinstance(feature, Gap)
    level, unit = feature.far_level, _within(jump, widths, feature.width)
    if feature.must == "stay-out":
        return feature.width - feature.margin - row["max_gap", level], unit
    if level > 0 and row["apex"] < level - brief.rule.contact_tolerance:
        return row["apex"] - level, _within(jump, heights, level)
    return row["sure_gap", level] - (feature.width + feature.margin), unit


def score_set(brief: Brief, sets: Sequence[Constants]) -> TwinScores:
    """Score one set, a Constants a jump."""
    squares = spreads = weight = violation = 0.0
    worst: tuple[float, str, str] = (0.0, "", "")
    spares: dict[str, float] = {}
    costs: dict[str, float] = {}
    every = list(zip(brief.jumps, sets, strict=True))
    rows_of: dict[str, list[Row]] = {}
    for jump, constants in every:
        nominal = brief.aim_at.step if brief.aim_at else constants.step
        steps = [nominal, *(rate.step for rate in brief.rates.supported)]
        rows = [measure_row(brief, jump, constants, step) for step in steps]
        if any(row is None for row in rows):
            return TwinScores(None, None, None, math.inf, worst, {}, {})
        rows_of[jump.name] = rows
    for jump, _ in every:
        rows = rows_of[jump.name]
        own_squares = own_spreads = own_weight = 0.0
        for target in jump.targets:
            seen = [row[target.measure] for row in rows]
            d = deviation(target, rows)
            s = (max(seen) - min(seen)) / target.within
            own_squares += target.weight * d * d
            own_spreads += target.weight * s * s
            own_weight += target.weight
            if abs(d) > worst[0]:
                worst = (abs(d), jump.name, target.measure)
        squares += jump.weight * own_squares
        spreads += jump.weight * own_spreads
        weight += jump.weight * own_weight
        if own_weight:
            own = math.sqrt(own_spreads / own_weight)
            costs[jump.name] = nine(math.sqrt(own_squares / own_weight) + brief.rates.spread_weight * own)
    for feature in brief.features:
        spares[feature.name] = math.inf
        for jump, _ in every:
            if jump.name in feature.by:
                pairs = [slack(brief, feature, jump, row) for row in rows_of[jump.name]]
                least, unit = min(pairs, key=lambda pair: pair[0])
                violation += -least / unit if least < -1e-9 else 0.0
                spares[feature.name] = min(spares[feature.name], least)
    miss = math.sqrt(squares / weight) if weight else 0.0
    spread = math.sqrt(spreads / weight) if weight else 0.0
    cost = miss + brief.rates.spread_weight * spread
    return TwinScores(nine(miss), nine(spread), nine(cost), nine(violation), worst, spares, costs)
