"""The paths of a jump at each rate, and where the brief's ledges and gaps stand beside them."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, TypeVar

import numpy as np

from designer.brief.model import Brief, Rate
from designer.motion.jumps import Status
from designer.motion.rule import Constants
from designer.motion.simulate import trace
from designer.objective.table import as_flown

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]

LEDGE_SHARE = 0.16
"""How wide a ledge is drawn, as a share of the width of the scene."""
Wide = TypeVar("Wide", "LedgeShape", "CeilingShape")

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
class BlockShape:
    """A block as it is drawn: as high and long as it is, around the apex."""

    name: str
    must: str
    height: float
    length: float
    x_from: float
    x_to: float


@dataclass(frozen=True, slots=True)
class CeilingShape:
    """A ceiling as it is drawn: where the arc of the feet must stay under, from x_from to x_to."""

    name: str
    must: str
    height: float
    """Of the ceiling itself."""
    feet: float
    """The height less the body's: what the arc must stay under."""
    x_from: float
    x_to: float


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
    blocks: tuple[BlockShape, ...] = ()
    """Empty where x is time."""
    ceilings: tuple[CeilingShape, ...] = ()


@dataclass(frozen=True, slots=True)
class Course:
    """The arcs of every jump of one set, and the features around them."""

    paths: tuple[tuple[Arc, ...], ...]
    """Of each jump in the order of the brief, the nominal arc first."""
    scene: Scene
    """The features, without arcs of its own."""


def course(brief: Brief, sets: Sequence[Constants]) -> Course:
    """Trace every jump of a set; x is a distance only where every jump runs.

    A feature stands around the apexes of the jumps that it binds.
    """
    by_distance = all(one.run_speed > 0.0 for one in sets)
    views = [brief.view(jump.name) for jump in brief.jumps]
    scenes = [arcs(view, one, by_distance) for view, one in zip(views, sets, strict=True)]
    gaps = brief.gaps if by_distance else ()
    every = Scene(
        arcs=(),
        by_distance=by_distance,
        edge_allowance=0.0,
        ledges=_over_all([one for scene in scenes for one in scene.ledges]),
        gaps=tuple(GapShape(gap.name, gap.must, gap.width, gap.far_level, gap.margin) for gap in gaps),
        blocks=_first_of([one for scene in scenes for one in scene.blocks]),
        ceilings=_over_all([one for scene in scenes for one in scene.ceilings]),
    )
    return Course(tuple(scene.arcs for scene in scenes), every)


def _over_all(shapes: Sequence[Wide]) -> tuple[Wide, ...]:
    """Return each shape once, as wide as all of its kind, name and height together."""
    found: dict[tuple[object, ...], Wide] = {}
    for one in shapes:
        key = (one.name, one.must, one.height)
        old = found.get(key, one)
        found[key] = replace(one, x_from=min(one.x_from, old.x_from), x_to=max(one.x_to, old.x_to))
    return tuple(found.values())


def _first_of(blocks: Sequence[BlockShape]) -> tuple[BlockShape, ...]:
    """Return each block once, where the first jump that it binds meets it."""
    found: dict[tuple[object, ...], BlockShape] = {}
    for one in blocks:
        found.setdefault((one.name, one.must, one.height, one.length), one)
    return tuple(found.values())


def arcs(brief: Brief, constants: Constants, by_distance: bool | None = None) -> Scene:
    """Trace constants at the nominal rate and at each supported one, down to the lowest far side of a gap.

    The brief has one jump, or is the view of one. by_distance: whether x is a distance; None: if it runs.
    """
    by_distance = constants.run_speed > 0.0 if by_distance is None else by_distance
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
        blocks=_blocks(brief, paths) if by_distance else (),
        ceilings=_ceilings(brief, paths),
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
    second, constants = brief.jumps[0].second, as_flown(constants)
    flight = trace(brief.rule, constants, which.step, second=second)
    lands = flight.status is Status.LANDS
    if lands and lowest < 0.0:
        flight = trace(brief.rule, constants, which.step, lowest, second=second)
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
    middle, half = _around_apex(paths)
    return tuple(
        LedgeShape(ledge.name, ledge.must, ledge.height, ledge.margin, middle - half, middle + half)
        for ledge in brief.ledges
    )


def _around_apex(paths: tuple[Arc, ...]) -> tuple[float, float]:
    """Return where the apex of the nominal arc is, and half of how wide a ledge there is drawn."""
    landing = [arc for arc in paths if arc.lands] or list(paths)
    width = max(float(arc.x[-1]) for arc in landing)
    return float(landing[0].x[int(np.argmax(landing[0].y))]), 0.5 * LEDGE_SHARE * width


def _blocks(brief: Brief, paths: tuple[Arc, ...]) -> tuple[BlockShape, ...]:
    """Stand blocks around the apex: there the most is cleared."""
    middle, _ = _around_apex(paths)
    return tuple(
        BlockShape(
            one.name, one.must, one.height, one.length, middle - 0.5 * one.length, middle + 0.5 * one.length
        )
        for one in brief.blocks
    )


def _ceilings(brief: Brief, paths: tuple[Arc, ...]) -> tuple[CeilingShape, ...]:
    middle, half = _around_apex(paths)
    return tuple(
        CeilingShape(
            one.name, one.must, one.height, one.height - one.body_height, middle - half, middle + half
        )
        for one in brief.ceilings
    )
