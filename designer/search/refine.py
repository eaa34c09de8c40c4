"""The last step of a study: down to the bottom of the cell, then back onto numbers that people can say."""

from __future__ import annotations

from itertools import product
from typing import TYPE_CHECKING, Any

import numpy as np

from designer.search.evaluate import DIGITS, INFEASIBLE, Evaluator, figures, penalised, significant
from designer.search.progress import Progress, Silent
from designer.search.space import Axis

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]

STARTS = 3
"""How many of the best are refined."""
POPULATION = 32
GENERATIONS = 30
BOX = 0.08
"""Half the width of the box in which a start is refined, as a share of each axis."""
PRICE, PRICE_IN_TOLERANCES = 0.01, 0.05
"""Tidier numbers may cost this share more, or this much, whichever is more."""
ALIKE = 0.025
"""Tidy numbers stay within this share of the untidy ones: nobody tells them apart while playing."""
TIDIED, MOST_TIDIED = 16, 32
"""About so many designs, and never more, are put back onto tidy numbers."""
MOST_COMBINATIONS = 4096
TIDIER = 500
"""About so many tidier neighbours a start has."""


def best_rows(matrix: Floats, ranks: Floats, count: int) -> list[int]:
    """Return the best few designs that differ by more than a box in some constant, best first."""
    chosen: list[int] = []
    for k in np.argsort(ranks, kind="stable"):
        if len(chosen) == count:
            break
        with np.errstate(invalid="ignore", divide="ignore"):
            apart = [np.nanmax(np.abs(matrix[k] / matrix[j] - 1.0)) > BOX for j in chosen]
        if all(apart):
            chosen.append(int(k))
    return chosen


def _box(axis: Axis, value: float) -> tuple[float, float]:
    """Return between what an axis' parameter (index of a point, or value) may move around a start."""
    if axis.points is not None:
        at, around = axis.points.index(value), max(1, round(BOX * len(axis.points)))
        return float(max(0, at - around)), float(min(len(axis.points) - 1, at + around))
    reach = BOX * (axis.high - axis.low)
    return max(axis.low, value - reach), min(axis.high, value + reach)


def _local(evaluator: Evaluator, start: Floats, rng: np.random.Generator) -> None:
    """Search the box around one design by differential evolution, without derivatives."""
    from scipy.optimize import differential_evolution

    axes = evaluator.space.axes
    boxes = [None if axis.is_fixed else _box(axis, value) for axis, value in zip(axes, start, strict=True)]
    moving = [k for k, box in enumerate(boxes) if box is not None and box[0] < box[1]]
    if not moving:
        return

    def designs(parameters: Floats) -> Floats:
        rows = np.repeat(start[None, :], parameters.shape[1], axis=0)
        for k, column in zip(moving, parameters, strict=True):
            points = axes[k].points
            rows[:, k] = column if points is None else np.array(points)[np.rint(column).astype(int)]
        return evaluator.tidy(rows)

    def cost(parameters: Floats) -> Any:
        return penalised(evaluator(designs(parameters)))

    bounds = [boxes[k] for k in moving]
    begin = [start[k] if (p := axes[k].points) is None else p.index(start[k]) for k in moving]
    differential_evolution(
        cost,
        bounds,
        x0=np.clip(begin, [b[0] for b in bounds if b], [b[1] for b in bounds if b]),
        rng=rng,
        integrality=[axes[k].points is not None for k in moving],
        popsize=max(1, POPULATION // len(moving)),
        maxiter=GENERATIONS,
        vectorized=True,
        updating="deferred",
        polish=False,
        tol=0.0,
    )


def _tidier(axis: Axis, value: float) -> list[float]:
    """Return the value and its neighbours with fewer figures, in bounds and near enough to feel alike."""
    found = {value}
    for digits in range(1, DIGITS):
        near = significant(value, digits)
        unit = 10.0 ** (np.floor(np.log10(abs(value))) - digits + 1) if value else 0.0
        found |= {significant(near + side * unit, digits) for side in (-1.0, 0.0, 1.0)}
    return sorted(v for v in found if axis.low <= v <= axis.high and abs(v - value) <= ALIKE * abs(value))


def _tidied(evaluator: Evaluator, row: Floats) -> Floats:
    """Return the tidiest design around one, in the constants without increments, that costs hardly more."""
    axes = evaluator.space.axes
    choices = [
        _tidier(axis, value) if axis.points is None else [value]
        for axis, value in zip(axes, row, strict=True)
    ]
    total = int(np.prod([len(choice) for choice in choices]))
    if total <= MOST_COMBINATIONS:
        rows = np.array(list(product(*choices)))
        return np.asarray(rows[tidiest(evaluator, rows, penalised(evaluator(rows)))])
    for k, choice in enumerate(choices):  # too many together: one constant at a time
        rows = np.repeat(row[None, :], len(choice), axis=0)
        rows[:, k] = choice
        ranks = penalised(evaluator(rows))
        dear = ~_nearly(ranks)
        row = rows[min(range(len(choice)), key=lambda i: (dear[i], figures(choice[i]), ranks[i]))]
    return row


def _nearly(ranks: Floats) -> NDArray[np.bool_]:
    """Return which designs cost hardly more than the best; where none is feasible, only the best."""
    best = float(np.min(ranks))
    return np.asarray(ranks <= (best + max(PRICE * best, PRICE_IN_TOLERANCES) if best < INFEASIBLE else best))


def figures_of(evaluator: Evaluator, matrix: Floats) -> NDArray[np.int64]:
    """Return how many figures the constants without increments take in all, (designs,)."""
    free = [k for k, axis in enumerate(evaluator.space.axes) if axis.points is None]
    return np.array([sum(figures(row[k]) for k in free) for row in matrix], dtype=np.int64)


def tidiest(evaluator: Evaluator, matrix: Floats, ranks: Floats) -> int:
    """Return the design with the fewest figures among those that cost hardly more than the best."""
    near = np.flatnonzero(_nearly(ranks))
    order = np.lexsort((near, ranks[near], figures_of(evaluator, matrix[near])))
    return int(near[order[0]])


def refine(evaluator: Evaluator, *, seed: int, progress: Progress | None = None) -> str:
    """Refine the best few designs that an evaluator remembers, and return what was done in words.

    Each start has a random stream of its own, so nothing depends on the order or the pace of the work.
    """
    progress = progress or Silent()
    matrix, scores = evaluator.everything()
    before, ranks = len(matrix), penalised(scores)
    starts = matrix[best_rows(matrix, ranks, STARTS)]
    streams = np.random.SeedSequence([seed, 1]).spawn(len(starts))
    for k, (start, stream) in enumerate(zip(starts, streams, strict=True)):
        _local(evaluator, start, np.random.default_rng(stream))
        progress.update("Refining the best", k + 1, len(starts))
    after = penalised(evaluator.everything()[1])
    was, now = float(np.min(ranks)), float(np.min(after))
    gain = "to no better cost" if now >= was else f"cost {was:.4g} became {now:.4g}"
    return f"SciPy refined the best {len(starts)} with {len(after) - before} more designs: {gain}."


def _worth_tidying(evaluator: Evaluator) -> Floats:
    """Return the feasible designs, (designs, 7), that deserve tidy numbers.

    For each grain and step the best few that differ, and of those on target the steadiest.
    """
    matrix, scores = evaluator.everything()
    ranks = penalised(scores)
    kinds = [k for k, axis in enumerate(evaluator.space.axes) if axis.name in ("step", "grain")]
    coarse = np.nan_to_num(matrix[:, kinds])
    _, group = np.unique(coarse, axis=0, return_inverse=True)
    group = group.reshape(-1)
    each = max(STARTS, TIDIED // (int(group.max()) + 1))
    chosen: list[int] = []
    for which in range(int(group.max()) + 1):
        own = np.flatnonzero((group == which) & scores.feasible)
        chosen += [int(own[k]) for k in best_rows(matrix[own], ranks[own], each)]
    steady = np.flatnonzero(scores.feasible & (scores.worst <= 1.0))
    if len(steady):
        chosen.append(int(steady[np.lexsort((ranks[steady], scores.rate_spread[steady]))[0]]))
    chosen = sorted(dict.fromkeys(chosen), key=lambda k: (ranks[k], k))
    return np.asarray(matrix[chosen[:MOST_TIDIED]])


def tidy_designs(evaluator: Evaluator, progress: Progress | None = None) -> Floats:
    """Return designs on tidy numbers, (designs, 7): what is worth it of all that was tried, put onto them.

    Empty where nothing is feasible. Everything tried on the way is scored and remembered too.
    """
    progress = progress or Silent()
    rows = _worth_tidying(evaluator)
    tidy = []
    for k, row in enumerate(rows):
        tidy.append(_tidied(evaluator, row))
        progress.update("Finding tidy numbers", k + 1, len(rows))
    return np.array(tidy).reshape(-1, len(evaluator.space.axes))
