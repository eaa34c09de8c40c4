"""Scoring scattered designs, and a record of all that were scored."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field, fields
from decimal import Decimal
from typing import TYPE_CHECKING

import numpy as np

from designer.brief.model import Brief
from designer.motion.closed_form import has_closed_form
from designer.motion.jumps import LONGEST_FLIGHT
from designer.objective.modules import ObjectiveModule
from designer.objective.score import Scores, score
from designer.objective.table import Designs, design_tables
from designer.search.looks import Sets
from designer.search.seeds import seeds
from designer.search.space import Axis, Space

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]

WORTH_COMPILING = 500_000
"""Steps in all above which stepping is compiled."""
DOUBTFUL = 0.04
"""The share of jumps that the closed form hands back to be stepped (ties and the like)."""
INFEASIBLE = 1e6
"""What `penalised` adds to designs that land but break a ledge or gap."""
DIGITS = 4
"""Constants without increments take values of at most so many significant figures."""


def significant(value: float, digits: int) -> float:
    """Return a value with at most so many significant figures, the double nearest to that decimal."""
    return float(f"{value:.{digits - 1}e}")


def figures(value: float) -> int:
    """Return how many significant figures a value is written with: 1500 → 2, 0.85 → 2."""
    return max(1, len(Decimal(repr(float(value))).normalize().as_tuple().digits))


def designs_of(matrix: Floats) -> Designs:
    """Return the designs whose constants are the columns of a matrix (designs, 7), in SEARCHABLE's order."""
    return Designs(*np.ascontiguousarray(np.asarray(matrix, dtype=np.float64).T))


@dataclass
class Evaluator:
    """Scores designs of a space and remembers each."""

    brief: Brief
    space: Space
    objectives: Sequence[ObjectiveModule] = ()
    workers: int = 1
    expected: int = 600
    """About how many designs will be scored in all; decides whether compiling the kernel pays."""
    _places: dict[bytes, int] = field(default_factory=dict)
    """Where in `_all` each design stands."""
    _all: Scores | None = None

    @property
    def count(self) -> int:
        """How many distinct designs were scored."""
        return len(self._places)

    def tidy(self, matrix: Floats) -> Floats:
        """Return designs put onto the space: grid constants on points, others to four figures in bounds."""

        def on(axis: Axis, column: Floats) -> list[float]:
            if axis.points is None:
                return [axis.clip(significant(value, DIGITS)) for value in column]
            return [axis.clip(value) for value in column]

        return np.column_stack(
            [on(axis, column) for axis, column in zip(self.space.axes, np.asarray(matrix).T, strict=True)]
        )

    def __call__(self, matrix: Floats) -> Scores:
        """Score designs, a matrix (designs, 7) that already lies on the space; each is measured only once."""
        rows = np.ascontiguousarray(matrix, dtype=np.float64)
        keys = [row.tobytes() for row in rows]
        fresh: dict[bytes, int] = {}
        for at, key in enumerate(keys):
            if key not in self._places:
                fresh.setdefault(key, at)
        if fresh:
            found = self._measure(rows[list(fresh.values())])
            self._places |= {key: len(self._places) + k for k, key in enumerate(fresh)}
            self._all = found if self._all is None else _join(self._all, found)
        if self._all is None:
            raise ValueError("no designs to score")
        return pick(self._all, np.array([self._places[key] for key in keys]))

    def designs(self, matrix: Floats) -> Designs | Sets:
        """Return the designs whose constants are the columns of a matrix."""
        return designs_of(matrix)

    def starts(self) -> Floats:
        """Return designs for a study to start from, a matrix not yet put onto the space."""
        return seeds(self.brief, self.space)

    def _measure(self, matrix: Floats) -> Scores:
        designs = designs_of(matrix)
        tables = design_tables(self.brief, designs, workers=self.workers, compiled=self._compiled(designs))
        terms: dict[str, Floats] = {}
        for module in self.objectives:
            terms |= module.terms(designs, tables)
        return score(self.brief, tables, terms or None)

    def _compiled(self, designs: Designs) -> bool | None:
        """Batches look small one by one; compile where the whole is not."""
        share = np.where(has_closed_form(self.brief.rule, designs.grain), DOUBTFUL, 1.0)
        flight = np.minimum(2.0 * designs.launch_speed / designs.gravity, LONGEST_FLIGHT)
        rates = sum(1.0 / rate.step for rate in self.brief.rates.supported)
        return True if self.expected * rates * float(np.mean(share * flight)) > WORTH_COMPILING else None

    def everything(self) -> tuple[Floats, Scores]:
        """Return all designs, ascending in the order that decides between equals, with scores."""
        if self._all is None:
            raise ValueError("nothing was scored yet")
        matrix = np.array([np.frombuffer(key) for key in self._places])
        order = np.lexsort(np.nan_to_num(self.deciding(matrix), nan=0.0, posinf=np.inf).T[::-1])
        return matrix[order], pick(self._all, order)

    def deciding(self, matrix: Floats) -> Floats:
        """Return what decides between equals, (designs, columns), the first column first."""
        return matrix


def pick(scores: Scores, which: NDArray[np.int64] | NDArray[np.bool_]) -> Scores:
    """Return the scores of some designs."""
    return Scores(*(getattr(scores, part.name)[which] for part in fields(Scores)))


def _join(first: Scores, second: Scores) -> Scores:
    return Scores(
        *(np.concatenate([getattr(first, f.name), getattr(second, f.name)]) for f in fields(Scores))
    )


def penalised(scores: Scores) -> Floats:
    """Return one finite number a design that sorts as designs do: feasible ones first, by cost."""
    landed = np.isfinite(scores.violation)
    rank = np.where(landed, np.nan_to_num(scores.cost) + np.where(landed, scores.violation, 0.0), 0.0)
    far = np.where(scores.feasible, 0.0, np.where(landed, INFEASIBLE, 1e12))
    return np.asarray(np.minimum(rank, np.where(scores.feasible, 0.99e6, 1e9)) + far)
