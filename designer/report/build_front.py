"""The data of the trade-off picture."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence

import numpy as np

from designer.objective.verdict import Verdict
from designer.report import style
from designer.report.findings import plain
from designer.report.score_figures import FrontPicture, FrontPoint, Scale
from designer.report.shown import shown
from designer.search.result import Candidate, SearchResult

TINY = 1e-3
"""Tolerances below which nothing is told apart: drawn at this value on a logarithmic axis."""


def front(result: SearchResult) -> FrontPicture | None:
    """Return the trade-off picture, or None where no set has a miss."""
    feasible = result.best is not None
    pairs = [(c.verdict.rate_spread, off(c.verdict, feasible)) for c in result.front]
    points = sorted({(x, y) for x, y in pairs if x is not None and y is not None})
    named = tuple(_named(result, feasible))
    if not named:
        return None
    x = scale([p.rate_spread for p in named] + [p[0] for p in points])
    y = scale([p.miss for p in named] + [p[1] for p in points])
    return FrontPicture(
        title=front_title(result),
        subtitle=_subtitle(feasible, bool(points), y),
        front_spread=_onto(x, [p[0] for p in points]),
        front_miss=_onto(y, [p[1] for p in points]),
        named=tuple(_placed(p, x, y) for p in named),
        x=x,
        y=y,
        y_label="miss (tolerances)" if feasible else "miss + violation (tolerances)",
        tint=1.0 if feasible else 0.0,
    )


def off(verdict: Verdict, feasible: bool) -> float | None:
    """Return how far a set is off: its miss; where nothing is feasible with its violation, tolerances."""
    if verdict.miss is None or feasible:
        return verdict.miss
    return None if verdict.violation is None else verdict.miss + verdict.violation


def _named(result: SearchResult, feasible: bool) -> Iterator[FrontPoint]:
    """Yield every shown set that has a place in the picture."""
    for one in shown(result):
        x, y = one.verdict.rate_spread, off(one.verdict, feasible)
        if x is not None and y is not None:
            yield FrontPoint(style.shorten(one.name), one.look, x, y, one.verdict.on_target)


def _subtitle(feasible: bool, points: bool, y: Scale) -> str:
    said = []
    if points:
        less = "less of both" if feasible else "less of both (miss with violation, spread)"
        said.append(f"Small grey: sets to which no other has {less}.")
    said.append("Filled: on target; hollow: something is out of tolerance or broken.")
    if feasible and y.low < 1.0:
        said.append("Tinted: miss below 1.")
    return " ".join(said)


def _onto(scale: Scale, values: Sequence[float]) -> np.ndarray:
    """Return values as they are drawn: on a logarithmic axis what is tiny lies at TINY."""
    found = np.array(values, dtype=np.float64)
    return np.maximum(found, TINY) if scale.log else found


def _placed(point: FrontPoint, x: Scale, y: Scale) -> FrontPoint:
    spread, miss = float(_onto(x, [point.rate_spread])[0]), float(_onto(y, [point.miss])[0])
    return FrontPoint(point.label, point.look, spread, miss, point.on_target)


def scale(values: Sequence[float]) -> Scale:
    """Return an axis with room around the values; logarithmic where they span much and are not all tiny."""
    drawn = [max(value, TINY) for value in values]
    low, high = min(drawn), max(drawn)
    if high > 6.0 * low:
        room = (high / low) ** 0.1
        ends = (low / room, high * room)
        return Scale(*ends, log=True, ticks=tuple(_ticks(*ends, tiny=min(values) < TINY)))
    low, high = min(values), max(values)
    if high < TINY:
        return Scale(-0.04, 1.0)
    span = max(high - low, 0.1 * high, 10 * TINY)
    return Scale(max(low - 0.15 * span, -0.04 * span), high + 0.15 * span)


def _ticks(low: float, high: float, tiny: bool) -> Iterator[tuple[float, str]]:
    """Yield ticks at 1, 2 and 5 of each decade, at 1 alone where there are many decades."""
    decades = range(math.floor(math.log10(low)), math.ceil(math.log10(high)) + 1)
    for power in decades:
        for factor in (1.0, 2.0, 5.0) if math.log10(high / low) < 3.5 else (1.0,):
            value = factor * float(f"1e{power}")
            if low <= value <= high:
                # Whatever is smaller is drawn at the tick of TINY, which therefore says so.
                least = tiny and math.isclose(value, TINY)
                yield value, ("≤ " if least else "") + plain(value)


def _figure(value: float | None, digits: int = 2) -> str:
    """Return a number of tolerances: "0.15", "below 0.001"."""
    value = 0.0 if value is None else value
    if value == TINY:
        return f"at most {plain(TINY)}"
    return plain(value, digits) if value >= TINY or value == 0.0 else f"below {plain(TINY)}"


def _same(one: float, other: float) -> bool:
    """Return whether two numbers of tolerances look alike: equal to three figures, or both tiny."""
    return max(one, other) < TINY or f"{one:.3g}" == f"{other:.3g}"


def front_title(result: SearchResult) -> str:
    """Return what the trade-off shows: whether precision and sameness over the rates pull apart."""
    if result.best is None:
        return _infeasible_title(result)
    listed = [c for c in result.shortlist if c.verdict.miss is not None and c.verdict.rate_spread is not None]
    miss = {id(c): c.verdict.miss or 0.0 for c in listed}
    spread = {id(c): c.verdict.rate_spread or 0.0 for c in listed}
    closest = min(listed, key=lambda c: (miss[id(c)], spread[id(c)]))
    steadiest = min(listed, key=lambda c: (spread[id(c)], miss[id(c)]))
    nearest = f"{closest.label} is nearest to what was wanted (miss {_figure(closest.verdict.miss)})"
    if all(_same(value, spread[id(steadiest)]) for value in spread.values()):
        none = max(spread.values()) < TINY
        alike = "; none spreads over the rates" if none else "; all spread alike over the rates"
        said = nearest + (alike if len(listed) > 1 else "")
        beaten = _beaten(result, closest, "miss")
    elif _same(spread[id(closest)], spread[id(steadiest)]):
        said = f"{closest.label} is both nearest to what was wanted and steadiest over the rates"
        beaten = _beaten(result, closest, "miss") or _beaten(result, closest, "rate_spread")
    else:
        said = f"{nearest}, {steadiest.label} steadiest over the rates "
        said += f"(spread {_figure(steadiest.verdict.rate_spread)})"
        beaten = _beaten(result, closest, "miss") or _beaten(result, steadiest, "rate_spread")
    return f"Of the candidates, {said}" if beaten else said


def _beaten(result: SearchResult, best: Candidate, what: str) -> bool:
    """Return whether a set of the front visibly has less of a coordinate than a candidate."""
    mine = getattr(best.verdict, what) or 0.0
    values = [getattr(c.verdict, what) for c in result.front]
    return any(value is not None and value < mine and not _same(value, mine) for value in values)


def _infeasible_title(result: SearchResult) -> str:
    nearest = result.nearest
    if nearest is None or nearest.verdict.violation is None:
        return "No set makes the jump land at every rate that counts"
    count = sum(not one.holds for one in (*nearest.verdict.ledges, *nearest.verdict.gaps))
    many = "one" if count == 1 else f"{count}"
    short = _figure(nearest.verdict.violation)
    return f"No set keeps every demand: the nearest breaks {many}, by {short} tolerances"


def front_alt(picture: FrontPicture) -> str:
    """Return the trade-off in a few sentences."""
    measure = picture.y_label.removesuffix(" (tolerances)")
    places = [f"{p.label} {_figure(p.miss, 3)} and {_figure(p.rate_spread, 3)}" for p in picture.named]
    return f"{picture.title}. In tolerances, {measure} and rate spread: {', '.join(places)}."
