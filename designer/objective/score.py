"""The score (DEVELOPERS.md, score): miss, rate spread, cost, worst and violation, over arrays of designs."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from designer.brief.model import Brief, Gap, JumpBrief, Ledge, Target
from designer.objective.table import Extremes, JumpTable, at_level, weights

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]

NEGLIGIBLE = 1e-9
"""A shortfall of this many length units, or less, counts as none."""

Terms = Mapping[str, "Floats"]
"""Deviations that objective modules add, by name, each an array (designs,) in tolerances."""


@dataclass(frozen=True, slots=True)
class Scores:
    """Scores of many designs, arrays (designs,); those that are compared hold nine significant digits."""

    miss: Floats
    rate_spread: Floats
    cost: Floats
    """NaN, like miss and rate_spread, where a jump never lands."""
    violation: Floats
    """Infinite where a jump never lands."""
    worst: Floats
    """The largest |deviation|, in tolerances, to nine significant digits like the others."""
    shortfalls: Floats
    """(designs, features) in length units, ledges first, then gaps, each in the order of the brief."""

    @property
    def feasible(self) -> NDArray[np.bool_]:
        """Whether every jump lands and every ledge and gap does as it must."""
        return np.asarray(self.violation == 0.0)


_POWERS = np.array([float(f"1e{k}") for k in range(301)])
"""Powers of ten by exponent, each the nearest double: a power function may be off in its last bit."""


NOISE = 1e-10
"""A miss, spread or cost below this many tolerances is what floats leave of nothing, and counts as 0."""


def _compared(values: Floats, lands: NDArray[np.bool_]) -> Floats:
    """Return a miss, spread or cost as it is compared: no noise, nine digits, NaN without a landing."""
    return nine_digits(np.where(lands, np.where(values < NOISE, 0.0, values), np.nan))


def nine_digits(values: Floats) -> Floats:
    """Round to nine significant digits, so that noise in the last bits decides nothing."""
    values = np.asarray(values, dtype=np.float64)
    with np.errstate(divide="ignore", invalid="ignore"):
        exponent = np.floor(np.log10(np.abs(values)))
    usual = np.abs(exponent) < 200.0  # neither 0 nor infinite nor NaN
    digits = np.where(usual, 8.0 - exponent, 0.0).astype(np.int64)
    # Two whole powers of ten, one of them 1, both exact up to 10^22.
    up, down = _POWERS[np.maximum(digits, 0)], _POWERS[np.maximum(-digits, 0)]
    with np.errstate(invalid="ignore"):
        rounded = np.rint(values * up / down) / up * down
    return np.where(usual, rounded, values)


def deviation(target: Target, measure: Extremes) -> Floats:
    """Return d of one target in tolerances: signed, 0 inside bounds; the farther side of two bounds."""
    if target.aim is not None:
        return (measure.nominal - target.aim) / target.within
    zero = np.zeros_like(measure.low)
    under = over = zero
    if target.at_least is not None:
        under = np.minimum(zero, measure.low - target.at_least) / target.within
    if target.at_most is not None:
        over = np.maximum(zero, measure.high - target.at_most) / target.within
    return np.where(-under > over, under, over)


def spread_of(measure: Extremes) -> Floats:
    """Return largest less smallest over the rates, in the measure's unit."""
    return measure.high - measure.low


def ledge_spare(ledge: Ledge, jump: JumpTable) -> Floats:
    """Return the signed slack of a ledge after its margin at the worst rate, length."""
    top = jump.measures["step_top"]
    if ledge.must == "reach":
        return top.low - (ledge.height + ledge.margin)
    return (ledge.height - ledge.margin) - top.high


def gap_spare(gap: Gap, jump: JumpTable, contact_tolerance: float) -> tuple[Floats, NDArray[np.bool_]]:
    """Return the signed slack of a gap after its margin at the worst rate, and where it is one of height.

    A far side above the apex falls short in height: there the slack is the apex less the far level.
    """
    level = gap.far_level
    if gap.must == "cross":
        width = jump.measures[at_level("sure_gap", level)].low - (gap.width + gap.margin)
        apex = jump.measures["apex"].low
        in_height = (apex < level - contact_tolerance) & (level > 0.0)
        return np.where(in_height, apex - level, width), in_height
    spare = (gap.width - gap.margin) - jump.measures[at_level("max_gap", level)].high
    return spare, np.zeros(spare.shape, dtype=bool)


def tolerance(jump: JumpBrief, measures: Sequence[str], size: float) -> float:
    """Return in what units a feature's shortfall counts: the jump's `within`, else 1 % of the feature."""
    for target in jump.targets:
        if target.measure in measures:
            return target.within
    return 0.01 * abs(size) if size else 1.0


def _shortfall(spare: Floats) -> Floats:
    short = np.maximum(0.0, -spare)
    return np.where(short <= NEGLIGIBLE, 0.0, short)


def _violations(brief: Brief, tables: Mapping[str, JumpTable]) -> tuple[Floats, Floats]:
    """Return each feature's shortfall, (designs, features), and the sum of all in tolerances, (designs,)."""
    jumps = {jump.name: jump for jump in brief.jumps}
    count = len(next(iter(tables.values())).lands)
    total = np.zeros(count)
    columns: list[Floats] = []
    for feature in brief.features:
        worst = np.zeros(count)
        for name in feature.by:
            jump, table = jumps[name], tables[name]
            if isinstance(feature, Ledge):
                short = _shortfall(ledge_spare(feature, table))
                unit: Floats | float = tolerance(jump, ("apex", "step_top"), feature.height)
            else:
                spare, in_height = gap_spare(feature, table, brief.rule.contact_tolerance)
                short = _shortfall(spare)
                unit = np.where(
                    in_height,
                    tolerance(jump, ("apex", "step_top"), feature.far_level),
                    tolerance(jump, ("max_gap", "sure_gap"), feature.width),
                )
            total = total + short / unit
            worst = np.maximum(worst, short)
        columns.append(worst)
    return np.column_stack(columns) if columns else np.zeros((count, 0)), total


def score(brief: Brief, tables: Sequence[JumpTable], extra_terms: Terms | None = None) -> Scores:
    """Score designs whose jumps are tabled, one table a jump of the brief.

    extra_terms are deviations of objective modules; each counts like a target of weight 1.
    """
    by_name = {table.name: table for table in tables}
    count = len(tables[0].lands)
    squares, spreads, worst = np.zeros(count), np.zeros(count), np.zeros(count)
    for jump in brief.jumps:
        for target in jump.targets:
            measure = by_name[jump.name].measures[target.measure]
            d = deviation(target, measure)
            s = spread_of(measure) / target.within
            weight = jump.weight * target.weight
            squares = squares + weight * (d * d)
            spreads = spreads + weight * (s * s)
            worst = np.maximum(worst, np.abs(d))
    total = weights(brief.jumps)
    for d in (extra_terms or {}).values():
        squares, worst = squares + d * d, np.maximum(worst, np.abs(d))
    miss_weight = total + len(extra_terms or {})
    miss = np.sqrt(squares / miss_weight) if miss_weight else squares
    spread = np.sqrt(spreads / total) if total else spreads
    shortfalls, violation = _violations(brief, by_name)
    lands = np.logical_and.reduce([table.lands for table in tables])
    cost = miss + brief.rates.spread_weight * spread
    return Scores(
        miss=_compared(miss, lands),
        rate_spread=_compared(spread, lands),
        cost=_compared(cost, lands),
        violation=nine_digits(np.where(lands, violation, np.inf)),
        worst=nine_digits(np.where(lands, worst, np.nan)),
        shortfalls=np.where(lands[:, None], shortfalls, np.inf),
    )
