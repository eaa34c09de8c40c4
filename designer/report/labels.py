"""Where labels go so that none lies over another: one column of them, or beside scattered points."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from matplotlib.figure import Figure
from matplotlib.transforms import Bbox

from designer.report.style import FONT_SMALL, INK, PAPER, QUIET

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.text import Text

POINTS_PER_INCH = 72.0
COLUMN_OFFSET = 0.03
"""How far right of the axes a column of labels starts, as a share of the axes' width."""


def spread(wanted: Sequence[float], sizes: Sequence[float], low: float, high: float) -> list[float]:
    """Return centres near the wanted ones, in their order, at which intervals of these sizes do not overlap.

    Least squares under order (pool adjacent violators), then pushed inside [low, high] where they fit.
    """
    order = sorted(range(len(wanted)), key=lambda i: wanted[i])
    offsets, total = [], 0.0
    for i in order:
        offsets.append(total + sizes[i] / 2)
        total += sizes[i]
    blocks: list[tuple[float, int]] = []
    for place, i in enumerate(order):
        mean, count = wanted[i] - offsets[place], 1
        while blocks and blocks[-1][0] > mean:
            other, many = blocks.pop()
            mean, count = (mean * count + other * many) / (count + many), count + many
        blocks.append((mean, count))
    floor, ceiling = low, max(low, high - total)
    starts = [min(max(mean, floor), ceiling) for mean, count in blocks for _ in range(count)]
    result = [0.0] * len(wanted)
    for place, i in enumerate(order):
        result[i] = starts[place] + offsets[place]
    return result


def height_of(lines: int) -> float:
    """Return the height of a label in a column, points."""
    return FONT_SMALL * 1.25 * lines + 2.0


@dataclass(frozen=True, slots=True)
class Row:
    """One label of a column."""

    height: float
    """What it belongs to, data units."""
    text: str
    colour: str = INK
    bold: bool = False
    start: float | None = 1.0
    """Where across the axes (0 to 1) the thing it names ends; None: it is nowhere to be seen."""


def column(ax: Axes, rows: Sequence[Row]) -> list[Text]:
    """Write labels in a column right of the axes, each joined by a thin line to the end of what it names."""
    figure = _figure(ax)
    if figure is None or not rows:
        return []
    tall = ax.get_position().height * figure.get_figheight() * POINTS_PER_INCH
    shares = [height_of(row.text.count("\n") + 1) / tall for row in rows]
    low, high = ax.get_ylim()
    wanted = [min(max((row.height - low) / (high - low), 0.0), 1.0) for row in rows]
    drawn = []
    for centre, height, row in zip(spread(wanted, shares, -0.06, 1.06), wanted, rows, strict=True):
        if row.start is not None:
            _leader(ax, row, height, centre)
        drawn.append(
            ax.text(
                1.0 + COLUMN_OFFSET,
                centre,
                row.text,
                transform=ax.transAxes,
                color=row.colour,
                fontsize=FONT_SMALL,
                fontweight="bold" if row.bold else "normal",
                va="center",
                ha="left",
                linespacing=1.1,
                bbox={"facecolor": PAPER, "edgecolor": "none", "pad": 0.5},
            )
        )
    return drawn


def _leader(ax: Axes, row: Row, height: float, centre: float) -> None:
    """Join a label to the edge of the axes, and from there, dotted, to where the thing itself ends."""
    lines: list[tuple[list[float], list[float], str, object]] = [
        ([1.0, 1.0 + COLUMN_OFFSET * 0.8], [height, centre], QUIET, "solid")
    ]
    if row.start is not None and row.start < 0.995:
        lines.append(([row.start, 1.0], [height, height], row.colour, (0, (1, 2))))
    for x, y, colour, dash in lines:
        ax.plot(
            x,
            y,
            transform=ax.transAxes,
            color=colour,
            linestyle=dash,
            linewidth=0.7,
            clip_on=False,
            zorder=1.5,
        )


def beside(ax: Axes, points: Sequence[tuple[float, float]], texts: Sequence[Text], keep: int) -> None:
    """Move each text beside its point (data units), where it hides no marker and no earlier text.

    The first `keep` points have a text each; the rest are points that should stay visible too. Distances
    and directions are tried nearest first; where none is free, the one that hides least is taken.
    """
    figure = _figure(ax)
    if figure is None:
        return
    renderer = figure.canvas.get_renderer()  # type: ignore[attr-defined]
    pixels = ax.transData.transform(np.asarray(points, dtype=float).reshape(-1, 2))
    inside = ax.get_window_extent(renderer)
    unit = figure.dpi / POINTS_PER_INCH
    taken: list[Bbox] = []
    for index, text in enumerate(texts[:keep]):
        size = text.get_window_extent(renderer)
        best: tuple[float, Bbox] | None = None
        for distance in (10.5, 14.0, 18.0, 26.0, 36.0, 50.0):
            for angle in np.deg2rad([20, -20, 70, -70, 160, -160, 110, -110]):
                box = _box(pixels[index], (size.width, size.height), distance * unit, float(angle))
                hidden = _hidden(box, pixels, taken, inside, unit)
                if best is None or hidden < best[0] - 1e-9:
                    best = (hidden, box)
            if best is not None and best[0] <= 0.0:
                break
        if best is None:
            continue
        taken.append(best[1])
        x, y = ax.transData.inverted().transform((best[1].x0, best[1].y0))
        text.set_position((float(x), float(y)))
        text.set_horizontalalignment("left")
        text.set_verticalalignment("bottom")


def _figure(ax: Axes) -> Figure | None:
    figure = ax.get_figure()
    return figure if isinstance(figure, Figure) else None


def _box(point: np.ndarray, size: tuple[float, float], distance: float, angle: float) -> Bbox:
    """Return the box of a text at a distance and direction from a point, in pixels."""
    x = point[0] + distance * np.cos(angle)
    y = point[1] + distance * np.sin(angle)
    left = x if np.cos(angle) > 0 else x - size[0]
    return Bbox.from_bounds(left, y - size[1] / 2, size[0], size[1])


def _hidden(box: Bbox, pixels: np.ndarray, taken: Sequence[Bbox], inside: Bbox, unit: float) -> float:
    """Return how much a box would hide: markers, texts, and what lies outside the axes."""
    near = (
        (pixels[:, 0] > box.x0 - 5 * unit)
        & (pixels[:, 0] < box.x1 + 5 * unit)
        & (pixels[:, 1] > box.y0 - 5 * unit)
        & (pixels[:, 1] < box.y1 + 5 * unit)
    )
    hidden = float(near.sum()) * 40.0
    for other in taken:
        shared = Bbox.intersection(box, other)
        hidden += 0.0 if shared is None else 100.0 + float(shared.width * shared.height)
    outside = max(0.0, inside.x0 - box.x0) + max(0.0, box.x1 - inside.x1)
    outside += max(0.0, inside.y0 - box.y0) + max(0.0, box.y1 - inside.y1)
    return hidden + float(outside) * 10.0
