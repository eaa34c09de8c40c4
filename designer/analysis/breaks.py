"""Where one set of constants breaks the demands of a brief at whole rates: by its margin, or outright."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from designer.analysis.sweep import RateReach
from designer.brief.model import Brief, Gap, Ledge
from designer.objective.score import NEGLIGIBLE

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Mask = NDArray[np.bool_]


@dataclass(frozen=True, slots=True)
class Break:
    """One ledge or gap over the whole rates of a sweep; arrays (rates,)."""

    kind: str
    """ "ledge" or "gap"."""
    index: int
    """In the brief's list of its kind."""
    feature: Ledge | Gap
    reach: NDArray[np.float64]
    """What is compared with it, length: step_top, sure_gap or max_gap; NaN where the jump never lands."""
    fails: Mask
    """Where the demand does not hold, margin included; so too where the jump never lands."""
    outright: Mask
    """Where not only the margin is broken: what must be made is not, or what must not be made is."""

    @property
    def margin_only(self) -> Mask:
        """Where the jump lands and nothing but the margin is broken."""
        return np.asarray(self.fails & ~self.outright & np.isfinite(self.reach))


def size_of(feature: Ledge | Gap) -> float:
    """Return the height of a ledge or the width of a gap, length."""
    return feature.height if isinstance(feature, Ledge) else feature.width


def bound_of(feature: Ledge | Gap) -> float:
    """Return what a reach is held against: the size with its margin, length."""
    return size_of(feature) + (-feature.margin if feature.must == "stay-out" else feature.margin)


def breaks(brief: Brief, sweep: RateReach) -> tuple[Break, ...]:
    """Return every ledge, then every gap, with where its demand breaks; float noise aside."""
    found = [
        _break("ledge", index, ledge, sweep.step_top, sweep.lands) for index, ledge in enumerate(brief.ledges)
    ]
    for index, gap in enumerate(brief.gaps):
        reach = sweep.gaps[gap.far_level]
        crossed = reach.max_gap if gap.must == "stay-out" else reach.sure_gap
        found.append(_break("gap", index, gap, crossed, sweep.lands))
    return tuple(found)


def _break(kind: str, index: int, feature: Ledge | Gap, reach: NDArray[np.float64], lands: Mask) -> Break:
    size, bound = size_of(feature), bound_of(feature)
    with np.errstate(invalid="ignore"):
        if feature.must == "stay-out":
            short, made = reach > bound + NEGLIGIBLE, reach >= size - NEGLIGIBLE
            outright = short & made
        else:
            short, outright = reach < bound - NEGLIGIBLE, reach < size - NEGLIGIBLE
    return Break(kind, index, feature, reach, short | ~lands, outright & lands)
