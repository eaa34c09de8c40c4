"""The data of the trade-off picture."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from designer.report import findings, style
from designer.report.score_figures import FrontPicture, FrontPoint
from designer.report.shown import shown
from designer.search.result import SearchResult

SUBTITLE = (
    "Grey: sets that no other beats in both. Filled: on target; hollow: something is out of tolerance. "
    "Tinted: miss below 1"
)


def front(result: SearchResult) -> FrontPicture | None:
    """Return the trade-off picture, or None where no set has a miss."""
    points = sorted(
        {
            (c.verdict.rate_spread, c.verdict.miss)
            for c in result.front
            if c.verdict.rate_spread is not None and c.verdict.miss is not None
        }
    )
    named = tuple(
        FrontPoint(style.shorten(one.name), one.look, one.verdict.rate_spread, one.verdict.miss,
                   one.verdict.on_target)
        for one in shown(result)
        if one.verdict.rate_spread is not None and one.verdict.miss is not None
    )  # fmt: skip
    if not named:
        return None
    xs = [p.rate_spread for p in named] + [p[0] for p in points]
    ys = [p.miss for p in named] + [p[1] for p in points]
    (x_range, x_log), (y_range, y_log) = _axis(xs), _axis(ys)
    return FrontPicture(
        title=findings.front_title(result),
        subtitle=SUBTITLE,
        front_spread=np.array([p[0] for p in points], dtype=np.float64),
        front_miss=np.array([p[1] for p in points], dtype=np.float64),
        named=named,
        x_range=x_range,
        y_range=y_range,
        log=(x_log, y_log),
    )


def _axis(values: Sequence[float]) -> tuple[tuple[float, float], bool]:
    """Return a range with room around the values, and whether it should be logarithmic."""
    low, high = min(values), max(values)
    if low > 0.0 and high > 6.0 * low:
        room = (high / low) ** 0.1
        return (low / room, high * room), True
    span = max(high - low, 0.1 * high, 1e-6)
    return (max(low - 0.15 * span, -0.04 * span), high + 0.15 * span), False


def front_alt(picture: FrontPicture) -> str:
    """Return the trade-off in a few sentences."""
    places = ", ".join(
        f"{p.label} misses by {p.miss:.3g} and spreads {p.rate_spread:.3g}" for p in picture.named
    )
    return f"{picture.title}. In tolerances: {places}."
