"""The study over the variables of several jumps: scoring scattered sets, and where to start."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from designer.brief.model import Brief
from designer.motion.closed_form import has_closed_form
from designer.motion.jumps import LONGEST_FLIGHT
from designer.motion.rule import Constants
from designer.objective.score import Scores, parts, put_together, views_of
from designer.objective.table import Designs, design_tables
from designer.search.evaluate import DOUBTFUL, WORTH_COMPILING, Evaluator
from designer.search.looks import Set, Sets, named_set, today_of
from designer.search.several.assign import DECIDING, SeveralSpace
from designer.search.space import Axis

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]

COARSE = 24
"""So many points stand for a variable without increments in the scan that gives a study its seeds."""
FIGURES = 3
"""Such points have so many significant figures."""


@dataclass
class SeveralEvaluator(Evaluator):
    """Scores sets of several jumps, given by the values of all variables, and remembers each.

    Its scores hold shortfalls demand by demand: each jump's own features in turn.
    """

    first: Floats | None = None
    """Sets to start from beside those that people have, (sets, variables)."""

    @property
    def several(self) -> SeveralSpace:
        """The space with its terms."""
        if not isinstance(self.space, SeveralSpace):
            raise TypeError("a space of several jumps is needed")
        return self.space

    def designs(self, matrix: Floats) -> Sets:
        """Return the sets that values of all variables, (sets, variables), stand for."""
        return Sets(self.several.each_designs(matrix))

    def starts(self) -> Floats:
        """Return today, the named sets and the seeds, (sets, variables), not yet put onto the space."""
        brief = self.brief
        now = today_of(brief)
        people: list[Set] = [now] if now is not None else []
        people += [named_set(brief, one) for one in brief.sets]
        rows = [variables_of(self.several, one) for one in people if isinstance(one, tuple)]
        lots = [np.array(rows)] if rows else []
        lots += [self.first] if self.first is not None and len(self.first) else []
        if not lots:
            lots = [np.array([[_middle(axis) for axis in self.space.axes]])]
        return np.concatenate(lots)

    def deciding(self, matrix: Floats) -> Floats:
        """Return the constants in the order that decides between equals, jump by jump within each."""
        each = self.several.each_designs(matrix)
        return np.column_stack([getattr(one, name) for name in DECIDING for one in each])

    def _measure(self, matrix: Floats) -> Scores:
        each = self.several.each_designs(matrix)
        found, tables = [], []
        for view, designs in zip(views_of(self.brief), each, strict=True):
            compiled = self._pays(view, designs)
            table = design_tables(view, designs, workers=self.workers, compiled=compiled)
            tables.append(table[0])
            found.append(parts(view, table))
        by_name = {jump.name: one for jump, one in zip(self.brief.jumps, each, strict=True)}
        terms: dict[str, Floats] = {}
        for module in self.objectives:
            terms |= module.terms(by_name, tables)
        scores = put_together(self.brief, found, terms or None)
        lands = np.logical_and.reduce([part.lands for part in found])
        demands = np.concatenate([part.shortfalls for part in found], axis=1)
        return replace(scores, shortfalls=np.where(lands[:, None], demands, np.inf))

    def _pays(self, view: Brief, designs: Designs) -> bool | None:
        """Return True where stepping is worth compiling for all that will be scored."""
        closed = has_closed_form(self.brief.rule, designs.grain) & (view.jumps[0].second is None)
        share = np.where(closed, DOUBTFUL, 1.0)
        pull = designs.gravity * designs.gravity_factor
        flight = np.minimum(2.0 * designs.launch_speed / pull, LONGEST_FLIGHT)
        rates = sum(1.0 / rate.step for rate in self.brief.rates.supported)
        return True if self.expected * rates * float(np.mean(share * flight)) > WORTH_COMPILING else None


def _middle(axis: Axis) -> float:
    return axis.points[len(axis.points) // 2] if axis.points is not None else 0.5 * (axis.low + axis.high)


def variables_of(space: SeveralSpace, sets: Sequence[Constants]) -> list[float]:
    """Return values of the variables that come to a set as nearly as links allow."""
    none = {"step": math.nan, "terminal_speed": math.inf}
    row = [_middle(axis) for axis in space.axes]
    done: set[int] = set()
    pairs = [
        (terms[name], one, name) for terms, one in zip(space.terms, sets, strict=True) for name in DECIDING
    ]
    for term, one, name in sorted(pairs, key=lambda pair: len(pair[0].factors)):
        said = getattr(one, name)
        value = none[name] if said is None else float(said)
        if not term.factors and term.variable not in done:
            row[term.variable] = value
            done.add(term.variable)
        elif term.factors and term.factors[-1] not in done:
            base = row[term.variable]
            for factor in term.factors[:-1]:
                base *= row[factor]
            row[term.factors[-1]] = value / base if base else 1.0
            done.add(term.factors[-1])
    return row


def coarse(space: SeveralSpace) -> SeveralSpace:
    """Return the space with a few tidy points of each variable that has more or no increments."""
    return replace(space, axes=tuple(_coarse(axis) for axis in space.axes))


def _coarse(axis: Axis) -> Axis:
    if axis.points is not None:
        if len(axis.points) <= COARSE:
            return axis
        at = np.unique(np.linspace(0, len(axis.points) - 1, COARSE).round().astype(int))
        return replace(axis, points=tuple(axis.points[k] for k in at))
    spread = np.linspace(axis.low, axis.high, COARSE)
    tidy = {float(f"{value:.{FIGURES - 1}e}") for value in spread}
    points = tuple(sorted(value for value in tidy if axis.low <= value <= axis.high)) or (axis.low,)
    return replace(axis, points=points)


def narrowed(space: SeveralSpace, around: Floats, share: float) -> SeveralSpace:
    """Return the coarse space of a box around one set: a share of each range to either side."""
    axes = []
    for axis, value in zip(space.axes, around, strict=True):
        if axis.is_fixed or not math.isfinite(value):
            axes.append(axis)
            continue
        reach = share * ((axis.high if math.isfinite(axis.high) else value) - axis.low)
        low, high = max(axis.low, value - reach), min(axis.high, value + reach)
        points = axis.points and tuple(point for point in axis.points if low <= point <= high)
        axes.append(replace(axis, points=points, low=low, high=high))
    return coarse(replace(space, axes=tuple(axes)))
