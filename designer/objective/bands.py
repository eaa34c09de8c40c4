"""At which whole rates from 20 to 1000 Hz a demand fails: not only at those that the brief lists."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from designer.brief.model import Brief
from designer.brief.rates import step_of_hz
from designer.motion.batch import fly_many
from designer.motion.rule import Constants
from designer.objective.score import NEGLIGIBLE, feature_spare
from designer.objective.table import Designs, Fly, JumpTable, extremes, kinematics, own_scalars

if TYPE_CHECKING:
    from numpy.typing import NDArray

LOWEST_HZ, HIGHEST_HZ = 20, 1000


@dataclass(frozen=True, slots=True)
class RateSweep:
    """One set of constants at every whole rate from LOWEST_HZ to HIGHEST_HZ."""

    hz: NDArray[np.int64]
    steps: NDArray[np.float64]
    """Seconds, what frame_time makes of each rate."""
    tables: tuple[JumpTable, ...]
    """Of the one jump; a "design" of its table is a rate."""


def runs(failing: Sequence[bool] | NDArray[np.bool_], first: int = LOWEST_HZ) -> Iterator[tuple[int, int]]:
    """Yield (from, to), both included, of each run of True; the first entry stands for the rate `first`."""
    start = None
    for rate, fails in enumerate([*failing, False], start=first):
        if fails and start is None:
            start = rate
        elif not fails and start is not None:
            yield start, rate - 1
            start = None


def band_names(failing: Sequence[bool] | NDArray[np.bool_], first: int = LOWEST_HZ) -> tuple[str, ...]:
    """Return the runs of True in words: "77–83 Hz", "90 Hz"."""
    return tuple(f"{a} Hz" if a == b else f"{a}–{b} Hz" for a, b in runs(failing, first))


def sweep_rates(
    brief: Brief, constants: Constants, *, compiled: bool | None = None, fly: Fly = fly_many
) -> RateSweep:
    """Measure one jump at every whole rate from 20 to 1000 Hz; rates with the same step are flown once."""
    hz = np.arange(LOWEST_HZ, HIGHEST_HZ + 1)
    steps = np.array([step_of_hz(int(rate), brief.rule.frame_time) for rate in hz])
    distinct, where = np.unique(steps, return_inverse=True)
    # Each step is a design of its own with one rate: then nominal, smallest and largest are all its value.
    designs = Designs.of([constants] * len(distinct))
    names = ("apex", "airtime")
    kin = kinematics(brief, designs.launches(distinct[:, None]), compiled=compiled, names=names, fly=fly)
    kin = kin.spread(where, steps[:, None])
    everywhere = Designs.of([constants] * len(hz))
    return RateSweep(hz, steps, extremes(brief, kin, 0, (), own_scalars(constants, everywhere)))


def failures(brief: Brief, sweep: RateSweep) -> tuple[list[NDArray[np.bool_]], NDArray[np.bool_]]:
    """Return at which rates of a sweep each feature fails, and at which the jump never lands, (rates,).

    A feature fails too where its jump never lands: nobody can say then what it reaches.
    """
    (jump,), (table,) = brief.jumps, sweep.tables
    found = []
    for feature in brief.features:
        spare, _ = feature_spare(brief, feature, jump, table)
        found.append(~table.lands | (spare < -NEGLIGIBLE))
    return found, ~table.lands


def failing_bands(brief: Brief, sweep: RateSweep) -> tuple[tuple[tuple[str, ...], ...], tuple[str, ...]]:
    """Return for each feature (in the order of the brief) where it fails, and where nothing lands."""
    found, stuck = failures(brief, sweep)
    return tuple(band_names(fails) for fails in found), band_names(stuck)
