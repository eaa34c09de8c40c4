"""At which whole rates from 20 to 1000 Hz a demand fails: not only at those that the brief lists."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from designer.brief.model import Brief, Ledge
from designer.brief.rates import step_of_hz
from designer.motion.batch import fly_many
from designer.motion.rule import Constants
from designer.objective.score import NEGLIGIBLE, gap_spare, ledge_spare
from designer.objective.table import Designs, Fly, JumpTable, extremes, kinematics, scalars

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
    """One a jump; a "design" of these tables is a rate."""


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
    """Measure one set at every whole rate from 20 to 1000 Hz; rates with the same step are flown once."""
    hz = np.arange(LOWEST_HZ, HIGHEST_HZ + 1)
    steps = np.array([step_of_hz(int(rate), brief.rule.frame_time) for rate in hz])
    distinct, where = np.unique(steps, return_inverse=True)
    # Each step is a design of its own with one rate: then nominal, smallest and largest are all its value.
    designs = Designs.of([constants] * len(distinct))
    names = ("apex", "airtime")
    kin = kinematics(brief, designs.launches(distinct[:, None]), compiled=compiled, names=names, fly=fly)
    kin = type(kin)(
        steps[:, None],
        kin.lands[where],
        {name: values[where] for name, values in kin.flight.items()},
        {level: values[where] for level, values in kin.airtimes.items()},
    )
    everywhere = Designs.of([constants] * len(hz))
    return RateSweep(hz, steps, extremes(brief, kin, 0, (), scalars(brief, everywhere, constants)))


def failing_bands(brief: Brief, sweep: RateSweep) -> tuple[tuple[tuple[str, ...], ...], tuple[str, ...]]:
    """Return for each feature (ledges, then gaps) the bands where it fails, and where a jump never lands.

    A feature fails too where its jump never lands: nobody can say then what it reaches.
    """
    bands = []
    for feature in brief.features:
        fails = np.zeros(len(sweep.hz), dtype=bool)
        for table in sweep.tables:
            if table.name not in feature.by:
                continue
            if isinstance(feature, Ledge):
                spare = ledge_spare(feature, table)
            else:
                spare = gap_spare(feature, table, brief.rule.contact_tolerance)[0]
            fails |= ~table.lands | (spare < -NEGLIGIBLE)
        bands.append(band_names(fails))
    stuck = np.logical_or.reduce([~table.lands for table in sweep.tables])
    return tuple(bands), band_names(stuck)
