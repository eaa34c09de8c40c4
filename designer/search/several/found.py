"""Both routes of a search over several jumps, told like those of one."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import replace
from typing import TYPE_CHECKING

import numpy as np

from designer.brief.model import Brief
from designer.motion.rule import Constants
from designer.objective.modules import ObjectiveModule
from designer.search.found import Found, expected, study_with
from designer.search.looks import Sets
from designer.search.progress import Progress
from designer.search.ranking import NO_ROWS, STEADY_WITHIN, Leaders, Rows, rows_of
from designer.search.result import Clash
from designer.search.several.assign import SeveralSpace, own_counts
from designer.search.several.clash import clashes_of
from designer.search.several.exact import Chosen, Placed
from designer.search.several.measure import Measurer
from designer.search.several.scan import SeveralScan, scan_several
from designer.search.several.study import SeveralEvaluator, coarse, narrowed

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]

RATES_PER_DESIGN = 10
"""Rates at which the budget's designs may be flown; with more of them, fewer designs."""
MOST_STEPS = 3e9
"""Steps that a scan may simulate where the rule has no closed form: about twenty seconds compiled."""
MOST_CELLS = 2_000_000
"""Combinations of gravity, step and grain: about 300 bytes of each are kept."""
MOST_AT_ONCE = 4_000_000
"""Designs that one gravity may have, with every step and grain."""
MOST_FRONT = 40
"""So many members of the front are judged and listed; the others differ from them by little."""
SEED_FLIGHTS = 4_000_000
SEED_STEPS = 2e8
"""What a scan of a few points may fly and step to give a study its seeds."""
BOXES = (0.12, 0.03)
"""Shares of each range in which the seeds are refined, one after the other."""


def reason_to_study(
    brief: Brief, space: SeveralSpace, budget: int, objectives: Sequence[ObjectiveModule]
) -> str | None:
    """Return why no separated scan is possible, in words; None where one is."""
    if objectives:
        names = ", ".join(module.name for module in objectives)
        return f"the objective module {names} is asked design by design"
    endless = [axis.name for axis in space.axes if axis.points is None]
    if endless:
        return f"{', '.join(endless)} {'has' if len(endless) == 1 else 'have'} no increments"
    return _too_much(brief, space, budget)


def _too_much(brief: Brief, space: SeveralSpace, budget: int) -> str | None:
    """Return why a grid is too large to measure, in words; None where it is not."""
    cells, own, at_once = sizes(space)
    if cells * own > budget:
        return f"the jumps have {cells * own:,} designs of their own, more than the budget of {budget:,}"
    if cells > MOST_CELLS:
        return f"gravity, step and grain have {cells:,} combinations, more than {MOST_CELLS:,}"
    if at_once > MOST_AT_ONCE:
        return f"one gravity has {at_once:,} designs, more than fit into memory at once"
    measurer = Measurer(brief, space)
    if measurer.flights > RATES_PER_DESIGN * budget:
        return f"it takes {measurer.flights:,} jumps, more than {RATES_PER_DESIGN} a design of the budget"
    steps = measurer.steps_to_simulate()
    if steps > MOST_STEPS:
        return f"jumps without a closed form must be stepped, which takes about {steps:.2g} steps"
    return None


def sizes(space: SeveralSpace) -> tuple[int, int, int]:
    """Return how many (gravity, step, grain) there are, the own designs at each, and the most at once."""
    gravity, step, grain = (len(space.shared(name).points or ()) for name in ("gravity", "step", "grain"))
    own, links = own_counts(space)
    return gravity * step * grain, sum(own), step * grain * max(sum(own), links * len(own))


def by_separated_scan(brief: Brief, space: SeveralSpace, *, workers: int, progress: Progress) -> Found:
    """Measure each jump's own designs and put them together."""
    done = scan_several(brief, space, workers=workers, progress=progress)
    clashes: tuple[Clash, ...] = ()
    if done.best is None:
        clashes = clashes_of(brief, done.chooser.measurer, progress)
    leaders, matrix = _leaders(brief, done)
    names = [jump.name for jump in brief.jumps]
    what = "does better than the best" if done.best is not None else "does all that is asked"
    notes = [
        f"Measured {done.evaluated:,} designs of single jumps: none of the {space.size:,} sets of the grid "
        f"{what}."
    ]
    if not done.proved:
        notes = [
            f"Measured {done.evaluated:,} designs of single jumps; too many sets are equally near to what is "
            "asked to say which of them is nearest to the last digit."
        ]
    if len(done.front) > MOST_FRONT:
        listed = len(leaders.front)
        notes.append(f"The front has {len(done.front)} members; {listed} of them are listed.")
    alone = {name: cost for name, cost in zip(names, done.alone, strict=True) if cost is not None}
    return Found(
        leaders,
        lambda numbers: Sets(space.each_designs(matrix[numbers])),
        done.evaluated,
        done.certificate,
        clashes,
        "scan",
        tuple(notes),
        alone,
    )


def _some(front: Sequence[Chosen], kept: Sequence[int]) -> list[Chosen]:
    """Return members of a front spread over its whole length, both ends among them, and those to be kept."""
    if len(front) <= MOST_FRONT:
        return list(front)
    spread = {int(k) for k in np.linspace(0, len(front) - 1, MOST_FRONT).round()}
    return [front[k] for k in sorted(spread | set(kept))]


def _noted(done: SeveralScan) -> list[int]:
    """Return which members of the front are not to be left out: the cheapest, the steadiest near it."""
    cost = done.chooser.scores(list(done.front)).cost
    least = float(cost.min())
    return [int(np.argmin(cost)), int(np.flatnonzero(cost <= STEADY_WITHIN * least)[-1])]


def _leaders(brief: Brief, done: SeveralScan) -> tuple[Leaders, Floats]:
    """Return what a scan found as leaders, and the variables of every set in them, (sets, variables)."""
    chooser = done.chooser

    def of(*placed: Placed | None) -> list[Chosen]:
        return [one.chosen for one in placed if one is not None]

    second = done.runner_up
    good = second is not None and bool(second.score.feasible[0])
    lists = {
        "feasible": of(done.best, second if good else None),
        "infeasible": of(done.nearest, None if good else second),
        "front": _some(done.front, _noted(done)) if done.best is not None else of(done.nearest),
        "steady": of(done.steady),
        "numbers": of(done.numbers),
        "pool": list(done.pool),
    }
    sets = sorted({one for some in lists.values() for one in some}, key=chooser.order)
    if not sets:
        return Leaders(), np.zeros((0, len(chooser.space.axes)))
    place = {one: k for k, one in enumerate(sets)}
    same = _keeps_today(brief, chooser.constants, sets)
    rows = rows_of(chooser.scores(sets), np.arange(len(sets)), same, np.zeros(len(sets), dtype=np.int64))

    def taken(some: Sequence[Chosen]) -> Rows:
        return rows.take(np.array([place[one] for one in some], dtype=np.int64)) if some else NO_ROWS

    return Leaders(**{name: taken(some) for name, some in lists.items()}), chooser.matrix(sets)


def _keeps_today(
    brief: Brief, constants: Callable[[Chosen], tuple[Constants, ...]], sets: Sequence[Chosen]
) -> NDArray[np.bool_]:
    today = brief.jumps[0].today
    if today is None:
        return np.zeros(len(sets), dtype=bool)
    firsts = [constants(one)[0] for one in sets]
    step = [brief.aim_at is not None or one.step == today.step for one in firsts]
    return np.array([one.grain == today.grain and kept for one, kept in zip(firsts, step, strict=True)])


def by_several_study(
    brief: Brief,
    space: SeveralSpace,
    *,
    seed: int,
    trials: int,
    objectives: Sequence[ObjectiveModule],
    workers: int,
    progress: Progress,
) -> Found:
    """Let Optuna search over all variables and SciPy refine; the seeds are of scans over few points."""
    evaluator = SeveralEvaluator(brief, space, objectives, workers, expected(trials))
    evaluator.first, said = coarse_seeds(brief, space, workers=workers, progress=progress)
    found = study_with(evaluator, seed=seed, trials=trials, progress=progress)
    return replace(found, notes=(said, *found.notes)) if said else found


def coarse_seeds(
    brief: Brief, space: SeveralSpace, *, workers: int, progress: Progress
) -> tuple[Floats, str]:
    """Return good sets of separated scans over a few points a variable, the best first, and what was done.

    Objective modules count for nothing here: seeds need only be near.
    """
    rows: list[Floats] = []
    measured = 0
    grid = coarse(space)
    for share in (*BOXES, None):
        cells, own, at_once = sizes(grid)
        if cells * own > SEED_FLIGHTS or at_once > MOST_AT_ONCE:
            break
        measurer = Measurer(brief, grid)
        if measurer.flights > SEED_FLIGHTS or measurer.steps_to_simulate() > SEED_STEPS:
            break
        done = scan_several(brief, grid, workers=workers, progress=progress)
        measured += done.evaluated
        first = done.best or done.nearest
        if first is None:
            break
        kept = [first.chosen, *done.pool[:8]]
        matrix = done.chooser.matrix(list(dict.fromkeys(kept)))
        rows = [matrix, *rows]
        if share is None or space.is_grid:
            break
        grid = narrowed(space, matrix[0], share)
    if not rows:
        return np.zeros((0, len(space.axes))), ""
    return np.concatenate(rows), (
        f"Seeds came from {measured:,} designs of single jumps on a few points of each range, put together."
    )
