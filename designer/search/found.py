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
from designer.search.ranking import Leaders, Rows, absorb, join, rows_of
from designer.search.refine import GENERATIONS, POPULATION, STARTS, TIDIER, refine
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
    expected = trials + STARTS * (POPULATION * GENERATIONS + TIDIER)
    evaluator = Evaluator(brief, space, objectives, workers, expected)
    said = run_study(evaluator, seed=seed, trials=trials, progress=progress)
    chosen, refined = refine(evaluator, seed=seed, progress=progress)
    matrix, scores = evaluator.everything()
    tried = pick(scores, np.isfinite(scores.violation))
    keep = np.ones(len(matrix), dtype=bool)
    if scores.feasible[chosen] and not space.is_grid:
        # What is a hair cheaper than the tidy proposal is the same proposal with more figures.
        keep = ~(scores.feasible & (scores.cost < scores.cost[chosen]))
    designs = designs_of(matrix[keep])
    numbers = only_numbers(brief, designs)
    rows = rows_of(pick(scores, keep), np.flatnonzero(keep), numbers, cells_of(designs))
    leaders = absorb(Leaders(), rows)
    leading = rows.take((rows.index == chosen) & rows.feasible)
    if len(leading) and not space.is_grid:
        leaders = _led_by(leaders, leading)
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
        (said, refined),
    )


def _led_by(leaders: Leaders, leading: Rows) -> Leaders:
    """Put the tidy proposal before designs that equal it (with a run speed that nothing asks about, say)."""
    others = leaders.feasible.take(leaders.feasible.index != leading.index[0])
    changes = {"feasible": join([leading, others]).take(slice(0, 2))}
    if leading.numbers[0] and leading.cost[0] <= leaders.numbers.cost[0]:
        changes["numbers"] = leading
    if leading.on_target[0] and leading.spread[0] <= leaders.steady.spread[0]:
        changes["steady"] = leading
    return replace(leaders, **changes)
