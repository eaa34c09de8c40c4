"""What either route of a search hands on: the designs worth remembering, and how they were found."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from designer.brief.model import Brief
from designer.objective.modules import ObjectiveModule
from designer.objective.table import Designs
from designer.search.conflict import failing_patterns, find_clashes, least_sums
from designer.search.evaluate import Evaluator, designs_of, pick
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
    designs: Callable[[NDArray[np.int64]], Designs]
    """From the numbers in `leaders` to constants."""
    evaluations: int
    certificate: Certificate | None
    clashes: tuple[Clash, ...]
    method: str
    """ "scan" or "study"."""
    notes: tuple[str, ...]

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
    expected = trials + STARTS * POPULATION * GENERATIONS + TIDIED * TIDIER
    evaluator = Evaluator(brief, space, objectives, workers, expected)
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
    designs = designs_of(matrix[keep])
    rows = rows_of(pick(scores, keep), np.flatnonzero(keep), only_numbers(brief, designs), cells_of(designs))
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
        lambda numbers: designs_of(matrix[numbers]),
        evaluator.count,
        None,
        clashes,
        "study",
        tuple(said),
    )
