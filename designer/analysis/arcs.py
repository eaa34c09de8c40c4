"""The paths of a jump at each rate, and where the brief's ledges and gaps stand beside them."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from designer.brief.model import Brief, Rate
from designer.motion.jumps import Status
from designer.motion.rule import Constants
from designer.motion.simulate import trace

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]

LEDGE_SHARE = 0.16
"""How wide a ledge is drawn, as a share of the width of the scene."""
STUCK_STEPS = 200
"""How many steps are drawn of a jump that never lands."""


@dataclass(frozen=True, slots=True)
class Arc:
    """A jump's path at one rate: its samples, joined by straight lines as a swept test sees it."""

    rate: str
    step: float
    """Seconds."""
    nominal: bool
    x: Floats
    """(points,) distance run in length units, or seconds where the brief has no run_speed."""
    y: Floats
    """(points,) height over the take-off, length."""
    lands: bool


@dataclass(frozen=True, slots=True)
class LedgeShape:
    """A ledge as it is drawn: a slab whose top is at its height, from x_from to x_to."""

    name: str
    must: str
    height: float
    margin: float
    x_from: float
    x_to: float


@dataclass(frozen=True, slots=True)
class GapShape:
    """A gap as it is drawn: from the take-off edge at 0 to its far edge at `width`, far side at far_level."""

    name: str
    must: str
    width: float
    far_level: float
    margin: float


@dataclass(frozen=True, slots=True)
class Scene:
    """The arcs of one set of constants and the features around them, to scale where x is a distance."""

    arcs: tuple[Arc, ...]
    by_distance: bool
    """False where x is time in seconds, since run_speed is 0."""
    edge_allowance: float
    """What the two edges add to a gap's reach, length; 0 where x is time."""
    ledges: tuple[LedgeShape, ...]
    gaps: tuple[GapShape, ...]
    """Empty where x is time."""


def arcs(brief: Brief, constants: Constants) -> Scene:
    """Trace constants at the nominal rate and at each supported one, down to the lowest far side of a gap."""
    by_distance = constants.run_speed > 0.0
    pace = constants.run_speed if by_distance else 1.0
    lowest = min([0.0, *(gap.far_level for gap in brief.gaps if by_distance)])
    paths = tuple(_arc(brief, constants, rate, pace, lowest) for rate in _rates(brief, constants))
    gaps = brief.gaps if by_distance else ()
    return Scene(
        arcs=paths,
        by_distance=by_distance,
        edge_allowance=constants.edge_allowance if by_distance else 0.0,
        ledges=_ledges(brief, paths),
        gaps=tuple(GapShape(gap.name, gap.must, gap.width, gap.far_level, gap.margin) for gap in gaps),
    )


def _rates(brief: Brief, constants: Constants) -> Iterator[tuple[Rate, bool]]:
    """Yield each distinct step once, the nominal one first, with whether it is the nominal one."""
    nominal = brief.nominal(constants)
    named = {rate.step: rate for rate in brief.rates.supported}
    yield named.get(nominal.step, nominal), True
    for step, rate in named.items():
        if step != nominal.step:
            yield rate, False


def _arc(brief: Brief, constants: Constants, rate: tuple[Rate, bool], pace: float, lowest: float) -> Arc:
    """Trace one rate and cut the last segment where it meets the lowest level."""
    which, nominal = rate
    flight = trace(brief.rule, constants, which.step)
    lands = flight.status is Status.LANDS
    if lands and lowest < 0.0:
        flight = trace(brief.rule, constants, which.step, lowest)
    t, y = np.asarray(flight.t, dtype=np.float64), np.asarray(flight.y, dtype=np.float64)
    if not lands:
        t, y = t[: STUCK_STEPS + 1], y[: STUCK_STEPS + 1]
    elif len(y) > 1 and y[-1] < lowest < y[-2]:
        share = (y[-2] - lowest) / (y[-2] - y[-1])
        t, y = t.copy(), y.copy()
        t[-1], y[-1] = t[-2] + (t[-1] - t[-2]) * share, lowest
    return Arc(which.name, which.step, nominal, t * pace, y, lands)


def _ledges(brief: Brief, paths: tuple[Arc, ...]) -> tuple[LedgeShape, ...]:
    """Stand ledges around the apex of the nominal arc, so that one sees which the arcs clear."""
    landing = [arc for arc in paths if arc.lands] or list(paths)
    width = max(float(arc.x[-1]) for arc in landing)
    middle = float(landing[0].x[int(np.argmax(landing[0].y))])
    half = 0.5 * LEDGE_SHARE * width
    return tuple(
        LedgeShape(ledge.name, ledge.must, ledge.height, ledge.margin, middle - half, middle + half)
        for ledge in brief.ledges
    )
