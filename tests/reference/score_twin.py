"""The score once more (DEVELOPERS.md), design by design, in plain Python over the twin of the update rule.

Written from the text: loops over rates, targets and features, no arrays, nothing of designer/ but the
brief's own values. Knows apex, airtime, landing_speed, max_gap, sure_gap and step_top.
"""

from __future__ import annotations

import itertools
import math
from dataclasses import dataclass

from designer.brief.model import Brief, Gap, Ledge
from tests.reference.twin import TwinJump, TwinRule, jump

ORDER = ("gravity", "launch_speed", "step", "grain", "run_speed", "fall_factor", "terminal_speed")


@dataclass(frozen=True)
class TwinScore:
    """One design scored; miss, spread and cost are None where the jump never lands."""

    constants: tuple[float, ...]
    """In ORDER; step 0 in a loop that steps each frame."""
    miss: float | None
    spread: float | None
    cost: float | None
    violation: float
    worst: float
    shortfalls: tuple[float, ...]

    @property
    def feasible(self) -> bool:
        return self.violation == 0


def nine(x: float) -> float:
    """Round to nine significant digits by way of the decimal text."""
    return float(f"{x:.8e}") if math.isfinite(x) else x


def twin_rule(brief: Brief) -> TwinRule:
    rule = brief.rule
    return TwinRule(
        integrator=str(rule.integrator),
        mode=str(rule.rounding.mode),
        at=str(rule.rounding.at),
        carry=rule.rounding.carry,
        landing_test=str(rule.landing_test),
        launch_gravity=rule.launch_gravity,
        contact_tolerance=rule.contact_tolerance,
        position_grain=rule.position.grain,
        position_mode=str(rule.position.mode),
    )


def _measures(brief: Brief, constants: dict[str, float], step: float) -> dict[str, float] | None:
    def fly(level: float) -> TwinJump:
        return jump(
            twin_rule(brief),
            constants["gravity"],
            constants["launch_speed"],
            step,
            grain=constants["grain"],
            fall_factor=constants["fall_factor"],
            terminal_speed=constants["terminal_speed"],
            level=level,
        )

    rise = brief.base.step_up if brief.base else 0.0
    edge = brief.base.edge_allowance if brief.base else 0.0
    flat = fly(0.0)
    if flat.status != "lands":
        return None
    found = {
        "apex": flat.apex,
        "airtime": flat.airtime,
        "landing_speed": -flat.landing_velocity,
        "step_top": flat.apex + rise,
    }
    for level in {0.0, *(gap.far_level for gap in brief.gaps)}:
        there = flat if level == 0 else fly(level)
        if there.status == "lands":
            reach = constants["run_speed"] * there.airtime + edge
            sure = max(0.0, reach - constants["run_speed"] * step)
        else:
            reach = sure = 0.0
        found["max_gap", level], found["sure_gap", level] = reach, sure
    found["max_gap"], found["sure_gap"] = found["max_gap", 0.0], found["sure_gap", 0.0]
    return found


def _tolerance(brief: Brief, names: tuple[str, ...], size: float) -> float:
    for target in brief.jumps[0].targets:
        if target.measure in names:
            return target.within
    return 0.01 * abs(size)


def _shortfall(brief: Brief, feature: Ledge | Gap, row: dict[str, float]) -> tuple[float, float]:
    """The shortfall at one rate, and what it counts in."""
    heights, widths = ("apex", "step_top"), ("max_gap", "sure_gap")
    if isinstance(feature, Ledge):
        unit = _tolerance(brief, heights, feature.height)
        if feature.must == "reach":
            return feature.height + feature.margin - row["step_top"], unit
        return row["step_top"] - (feature.height - feature.margin), unit
    level = feature.far_level
    unit = _tolerance(brief, widths, feature.width)
    if feature.must == "cross":
        if level > 0 and row["apex"] < level - brief.rule.contact_tolerance:
            return level - row["apex"], _tolerance(brief, heights, level)
        return feature.width + feature.margin - row["sure_gap", level], unit
    return row["max_gap", level] - (feature.width - feature.margin), unit


def score_design(brief: Brief, values: tuple[float, ...]) -> TwinScore:
    """Score one design; values in ORDER."""
    constants = dict(zip(ORDER, values, strict=True))
    nominal_step = brief.aim_at.step if brief.aim_at else constants["step"]
    nominal = _measures(brief, constants, nominal_step)
    rows = [nominal] + [_measures(brief, constants, rate.step) for rate in brief.rates.supported]
    features = (*brief.ledges, *brief.gaps)
    if any(row is None for row in rows):
        never = tuple(math.inf for _ in features)
        return TwinScore(values, None, None, None, math.inf, math.nan, never)
    squares = spreads = total = worst = 0.0
    for target in brief.jumps[0].targets:
        seen = [row[target.measure] for row in rows]
        if target.aim is not None:
            d = (nominal[target.measure] - target.aim) / target.within
        else:
            under = min(0, min(seen) - target.at_least) if target.at_least is not None else 0
            over = max(0, max(seen) - target.at_most) if target.at_most is not None else 0
            d = (under if -under > over else over) / target.within
        s = (max(seen) - min(seen)) / target.within
        squares += target.weight * d * d
        spreads += target.weight * s * s
        total += target.weight
        worst = max(worst, abs(d))
    miss = math.sqrt(squares / total) if total else 0.0
    spread = math.sqrt(spreads / total) if total else 0.0
    violation, shortfalls = 0.0, []
    for feature in features:
        worst_short, unit = max((_shortfall(brief, feature, row) for row in rows), key=lambda pair: pair[0])
        short = 0.0 if worst_short <= 1e-9 else worst_short
        violation += short / unit
        shortfalls.append(short)
    cost = miss + brief.rates.spread_weight * spread
    return TwinScore(values, nine(miss), nine(spread), nine(cost), nine(violation), worst, tuple(shortfalls))


def brute_force(brief: Brief) -> list[TwinScore]:
    """Score every design of the grid, best first in the order of the score (DEVELOPERS.md)."""
    axes = [brief.search[name].values if name in brief.search else (0.0,) for name in ORDER]
    scored = [score_design(brief, values) for values in itertools.product(*axes)]

    def order(one: TwinScore) -> tuple[object, ...]:
        if one.feasible:
            return (0, one.cost, one.constants)
        return (1, math.inf if one.cost is None else one.cost + one.violation, one.constants)

    return sorted(scored, key=order)


def front(scored: list[TwinScore]) -> list[tuple[float, float]]:
    """The (miss, rate spread) pairs that no feasible design dominates, by miss; 1e-14 is 0 but for noise."""

    def clean(x: float) -> float:
        return x if x >= 1e-10 else 0.0

    pairs = sorted({(clean(one.miss), clean(one.spread)) for one in scored if one.feasible})
    return [
        pair for pair in pairs if not any(p != pair and p[0] <= pair[0] and p[1] <= pair[1] for p in pairs)
    ]
