"""The score (DEVELOPERS.md, score): miss, rate spread, cost, worst and violation, over arrays of designs."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from designer.brief.model import Block, Brief, Ceiling, Feature, Gap, JumpBrief, Ledge, Target
from designer.motion.measures import head_top
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


def block_spare(block: Block, jump: JumpTable) -> Floats:
    """Return the signed slack of a block after its margin at the worst rate: length of way above its top."""
    clearance = jump.measures[at_level("clearance", block.height)]
    if block.must == "clear":
        return clearance.low - (block.length + block.margin)
    return (block.length - block.margin) - clearance.high


def ceiling_spare(ceiling: Ceiling, jump: JumpTable) -> Floats:
    """Return the signed slack under a ceiling after its margin at the worst rate, length."""
    return (ceiling.height - ceiling.margin) - head_top(jump.measures["apex"].high, ceiling.body_height)


def tolerance(jump: JumpBrief, measures: Sequence[str], size: float) -> float:
    """Return in what units a feature's shortfall counts: the jump's `within`, else 1 % of the feature."""
    for target in jump.targets:
        if target.measure in measures:
            return target.within
    return 0.01 * abs(size) if size else 1.0


def _shortfall(spare: Floats) -> Floats:
    short = np.maximum(0.0, -spare)
    return np.where(short <= NEGLIGIBLE, 0.0, short)


@dataclass(frozen=True, slots=True)
class Parts:
    """What one jump of many designs adds to their scores, arrays (designs,) before anything is rounded."""

    squares: Floats
    """W·Σ w·d² over the jump's targets, with W the jump's own weight."""
    spreads: Floats
    """The same of s."""
    violation: Floats
    """The sum of the shortfalls of the features in whose `by` the jump is, in tolerances."""
    worst: Floats
    """The largest |d|."""
    lands: NDArray[np.bool_]
    shortfalls: Floats
    """(designs, features of the view), length."""


def parts(view: Brief, tables: Sequence[JumpTable]) -> Parts:
    """Return what a jump adds: the view of one of several jumps (or a brief with one), and its one table."""
    (jump,), (table,) = view.jumps, tables
    count = len(table.lands)
    squares, spreads, worst = np.zeros(count), np.zeros(count), np.zeros(count)
    for target in jump.targets:
        measure = table.measures[target.measure]
        d = deviation(target, measure)
        s = spread_of(measure) / target.within
        weight = jump.weight * target.weight
        squares = squares + weight * (d * d)
        spreads = spreads + weight * (s * s)
        worst = np.maximum(worst, np.abs(d))
    shortfalls, violation = _violations(view, jump, table)
    return Parts(squares, spreads, violation, worst, table.lands, shortfalls)


def _violations(view: Brief, jump: JumpBrief, table: JumpTable) -> tuple[Floats, Floats]:
    """Return each feature's shortfall, (designs, features), and the sum of all in tolerances, (designs,)."""
    count = len(table.lands)
    total = np.zeros(count)
    columns: list[Floats] = []
    for feature in view.features:
        spare, unit = feature_spare(view, feature, jump, table)
        short = _shortfall(spare)
        total = total + short / unit
        columns.append(np.maximum(np.zeros(count), short))
    return np.column_stack(columns) if columns else np.zeros((count, 0)), total


def feature_spare(
    view: Brief, feature: Feature, jump: JumpBrief, table: JumpTable
) -> tuple[Floats, Floats | float]:
    """Return a jump's signed slack at a feature, length, and in what units a shortfall of it counts."""
    if isinstance(feature, Ledge):
        return ledge_spare(feature, table), tolerance(jump, ("apex", "step_top"), feature.height)
    if isinstance(feature, Ceiling):
        return ceiling_spare(feature, table), tolerance(jump, ("apex", "step_top"), feature.height)
    if isinstance(feature, Block):
        return block_spare(feature, table), tolerance(jump, ("max_gap", "sure_gap"), feature.length)
    spare, in_height = gap_spare(feature, table, view.rule.contact_tolerance)
    unit = np.where(
        in_height,
        tolerance(jump, ("apex", "step_top"), feature.far_level),
        tolerance(jump, ("max_gap", "sure_gap"), feature.width),
    )
    return spare, unit


def put_together(brief: Brief, found: Sequence[Parts], extra_terms: Terms | None = None) -> Scores:
    """Return the scores of designs from what each jump adds, in the order of the brief's jumps.

    miss = sqrt(sum of squares / sum of weights), and the like of rate spread. extra_terms are deviations of
    objective modules; each counts like a target of weight 1.
    """
    squares, spreads, violation = found[0].squares, found[0].spreads, found[0].violation
    worst, lands = found[0].worst, found[0].lands
    for part in found[1:]:
        squares, spreads = squares + part.squares, spreads + part.spreads
        violation, worst = violation + part.violation, np.maximum(worst, part.worst)
        lands = lands & part.lands
    total = weights(brief.jumps)
    for d in (extra_terms or {}).values():
        squares, worst = squares + d * d, np.maximum(worst, np.abs(d))
    miss_weight = total + len(extra_terms or {})
    miss = np.sqrt(squares / miss_weight) if miss_weight else squares
    spread = np.sqrt(spreads / total) if total else spreads
    cost = miss + brief.rates.spread_weight * spread
    return Scores(
        miss=_compared(miss, lands),
        rate_spread=_compared(spread, lands),
        cost=_compared(cost, lands),
        violation=nine_digits(np.where(lands, violation, np.inf)),
        worst=nine_digits(np.where(lands, worst, np.nan)),
        shortfalls=np.where(lands[:, None], _shortfalls(brief, found), np.inf),
    )


def _shortfalls(brief: Brief, found: Sequence[Parts]) -> Floats:
    """Return each feature's largest shortfall over the jumps that must, (designs, features)."""
    if not brief.several:
        return found[0].shortfalls
    count = len(found[0].lands)
    columns = np.zeros((count, len(brief.features)))
    for jump, part in zip(brief.jumps, found, strict=True):
        mine = [index for index, feature in enumerate(brief.features) if jump.name in feature.by]
        columns[:, mine] = np.maximum(columns[:, mine], part.shortfalls)
    return columns


def views_of(brief: Brief) -> tuple[Brief, ...]:
    """Return the view of each jump in the order of the brief; a brief with one jump is its own view."""
    return tuple(brief.view(jump.name) for jump in brief.jumps) if brief.several else (brief,)


def score(brief: Brief, tables: Sequence[JumpTable], extra_terms: Terms | None = None) -> Scores:
    """Score designs whose jumps are tabled, one table a jump of the brief, in its order.

    extra_terms are deviations of objective modules; each counts like a target of weight 1.
    """
    pairs = zip(views_of(brief), tables, strict=True)
    return put_together(brief, [parts(view, (table,)) for view, table in pairs], extra_terms)
