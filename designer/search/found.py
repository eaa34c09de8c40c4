"""What either route of a search hands on: the designs worth remembering, and how they were found."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING

import numpy as np

from designer.brief.model import Brief
from designer.objective.modules import ObjectiveModule
from designer.objective.table import Designs
from designer.search.conflict import failing_patterns, find_clashes, least_sums
from designer.search.evaluate import Evaluator, pick
from designer.search.looks import Sets
from designer.search.progress import Progress
from designer.search.ranking import Leaders, absorb, rows_of
from designer.search.refine import GENERATIONS, POPULATION, STARTS, TIDIED, TIDIER, refine, tidy_designs
from designer.search.result import Certificate, Clash
from designer.search.scan import cells_of, least_shortfalls, only_numbers, scan
from designer.search.space import Space
from designer.search.study import run_study

if TYPE_CHECKING:
    from numpy.typing import NDArray


@dataclass(frozen=True, slots=True)
class Found:
    """Designs worth remembering."""

    leaders: Leaders
    designs: Callable[[NDArray[np.int64]], Designs | Sets]
    """From the numbers in `leaders` to constants."""
    evaluations: int
    certificate: Certificate | None
    clashes: tuple[Clash, ...]
    method: str
    """ "scan" or "study"."""
    notes: tuple[str, ...]
    alone: Mapping[str, float] = field(default_factory=dict)
    """Of several jumps, by name, the lowest cost that each could have by itself."""

    def because(self, reason: str) -> Found:
        """Return the same with the reason for the study said first."""
        return replace(self, notes=(f"No scan, since {reason}; so the best is the best found.", *self.notes))


def by_scan(brief: Brief, space: Space, *, workers: int, progress: Progress) -> Found:
    """Scan the grid."""
    done = scan(brief, space, workers=workers, progress=progress)
    clashes: tuple[Clash, ...] = ()
    if not len(done.leaders.feasible):

        def least(sets: Sequence[Sequence[int]]) -> list[float]:
            return least_shortfalls(brief, space, sets, workers=workers, progress=progress)

        clashes = find_clashes(brief, done.failing, least, proved=True)
    proved = "no point of it does better than the best" if len(done.leaders.feasible) else "none is feasible"
    note = f"Scanned all {done.evaluated:,} designs of the grid: {proved}."
    return Found(done.leaders, space.designs, done.evaluated, done.certificate, clashes, "scan", (note,))


def by_study(
    brief: Brief,
    space: Space,
    *,
    seed: int,
    trials: int,
    objectives: Sequence[ObjectiveModule],
    workers: int,
    progress: Progress,
) -> Found:
    """Let Optuna search and SciPy refine; all designs that they tried are ranked like a scan's."""
    evaluator = Evaluator(brief, space, objectives, workers, expected(trials))
    return study_with(evaluator, seed=seed, trials=trials, progress=progress)


def expected(trials: int) -> int:
    """Return about how many designs a study and its refinement score."""
    return trials + STARTS * POPULATION * GENERATIONS + TIDIED * TIDIER


def study_with(evaluator: Evaluator, *, seed: int, trials: int, progress: Progress) -> Found:
    """Let Optuna search and SciPy refine what an evaluator scores."""
    brief, space = evaluator.brief, evaluator.space
    said = [run_study(evaluator, seed=seed, trials=trials, progress=progress)]
    said.append(refine(evaluator, seed=seed, progress=progress))
    tidy = np.zeros((0, len(space.axes)))
    if not space.is_grid:
        tidy = tidy_designs(evaluator, progress)
    matrix, scores = evaluator.everything()
    tried = pick(scores, np.isfinite(scores.violation))
    keep = np.ones(len(matrix), dtype=bool)
    if len(tidy):
        # Only tidy designs are proposed: what costs a hair less is the same with figures that nobody can say.
        keep = (matrix[:, None, :] == tidy[None, :, :]) | (np.isnan(matrix)[:, None, :] & np.isnan(tidy))
        keep = keep.all(axis=2).any(axis=1)
    designs = evaluator.designs(matrix[keep])
    rows = rows_of(pick(scores, keep), np.flatnonzero(keep), _numbers(brief, designs), _cells(designs))
    leaders = absorb(Leaders(), rows)
    if len(tidy):
        untidy = float(np.min(scores.cost[scores.feasible]))
        said.append(
            f"Put back onto tidy numbers: the best costs {leaders.best_cost:.4g}, untidy {untidy:.4g}."
        )
    clashes: tuple[Clash, ...] = ()
    if not len(leaders.feasible):
        clashes = find_clashes(
            brief, failing_patterns(scores), lambda sets: least_sums(tried.shortfalls, sets), proved=False
        )
    return Found(
        leaders,
        lambda numbers: evaluator.designs(matrix[numbers]),
        evaluator.count,
        None,
        clashes,
        "study",
        tuple(said),
    )


def _numbers(brief: Brief, designs: Designs | Sets) -> NDArray[np.bool_]:
    """Return which designs keep today's step and grain."""
    if isinstance(designs, Designs):
        return only_numbers(brief, designs)
    return only_numbers(brief.view(brief.jumps[0].name), designs.each[0])


def _cells(designs: Designs | Sets) -> NDArray[np.int64]:
    """Return one number for the cell in which designs lie; those of a cell look alike to a designer."""
    if isinstance(designs, Designs):
        return cells_of(designs)
    each = np.column_stack([cells_of(one) for one in designs.each])
    return np.unique(each, axis=0, return_inverse=True)[1].reshape(-1).astype(np.int64)
