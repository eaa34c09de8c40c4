"""The study with Optuna: where a scan is not possible. Its result is the best found, never the best."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from typing import TYPE_CHECKING

import numpy as np

from designer.search.evaluate import Evaluator, penalised
from designer.search.progress import Progress, Silent
from designer.search.space import Axis, Space

if TYPE_CHECKING:
    import optuna
    from numpy.typing import NDArray

BATCH = 16
"""Trials asked for together and told in order: the same history whatever evaluates them."""
PATIENCE = 200
"""A study stops early after so many trials in a row, and a third of all, without a better one."""
HOPELESS = 1e6
"""Stands for a jump that never lands: a finite number, so that the sampler may rank it last."""


@contextmanager
def _quiet() -> Iterator[None]:
    """Keep Optuna's log to warnings while a study runs."""
    import optuna

    level = optuna.logging.get_verbosity()
    optuna.logging.set_verbosity(optuna.logging.WARNING)
    try:
        yield
    finally:
        optuna.logging.set_verbosity(level)


def _place(axis: Axis, value: float) -> float | int:
    """Return the parameter that stands for a value: an index into the points, or the value itself."""
    value = axis.clip(value)
    return axis.points.index(value) if axis.points is not None else value


def _suggest(trial: optuna.Trial, space: Space) -> list[float]:
    """Return what the sampler suggests, in the order of the axes."""
    row = []
    for axis in space.axes:
        if axis.is_fixed:
            row.append(axis.low)
        elif axis.points is not None:
            row.append(axis.points[trial.suggest_int(axis.name, 0, len(axis.points) - 1)])
        else:
            row.append(trial.suggest_float(axis.name, axis.low, axis.high))
    return row


def _enqueue(study: optuna.Study, evaluator: Evaluator) -> int:
    """Queue the seeds, each design once, and return how many there are."""
    space = evaluator.space
    start = evaluator.tidy(evaluator.starts())
    queued: set[tuple[float, ...]] = set()
    for row in np.nan_to_num(start, nan=0.0, posinf=np.inf).tolist():
        if tuple(row) in queued:
            continue
        queued.add(tuple(row))
        moving = {a.name: _place(a, v) for a, v in zip(space.axes, row, strict=True) if not a.is_fixed}
        study.enqueue_trial(moving)
    return len(queued)


def _tell(
    study: optuna.Study, asked: list[optuna.Trial], evaluator: Evaluator, rows: NDArray[np.float64]
) -> float:
    """Score a batch, tell the study in the order of its trials, and return the batch's best rank."""
    scores = evaluator(rows)
    for trial, cost, violation in zip(asked, scores.cost, scores.violation, strict=True):
        trial.set_constraint("violation", float(violation) if np.isfinite(violation) else HOPELESS)
        study.tell(trial, float(cost) if np.isfinite(cost) else HOPELESS)
    return float(np.min(penalised(scores)))


def run_study(evaluator: Evaluator, *, seed: int, trials: int, progress: Progress | None = None) -> str:
    """Let TPE (tree-structured Parzen estimator) search a space, and return in words what was done.

    Every design goes through the evaluator, which remembers it. The same seed gives the same designs.
    """
    import optuna

    progress = progress or Silent()
    with _quiet():
        study = optuna.create_study(sampler=optuna.samplers.TPESampler(seed=seed))
        queued = min(_enqueue(study, evaluator), trials)
        best, last_better, done = np.inf, 0, 0
        patience = max(PATIENCE, trials // 3)
        while done < trials and done - last_better < patience:
            asked = [study.ask() for _ in range(min(BATCH, trials - done))]
            rows = evaluator.tidy(np.array([_suggest(trial, evaluator.space) for trial in asked]))
            found = _tell(study, asked, evaluator, rows)
            done += len(asked)
            if found < best:
                best, last_better = found, done
            progress.update("Running the study", done, trials)
    why = "all were run" if done >= trials else f"none of the last {done - last_better} was better"
    return (
        f"Optuna {optuna.__version__} (TPE, seed {seed}) ran {done} of {trials} trials, {queued} of them "
        f"seeds from physics, today and named sets; it stopped because {why}."
    )
