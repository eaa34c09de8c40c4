"""The picture of jump arcs over the brief's ledges and gaps, to scale; plain data in, nothing computed."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from matplotlib.collections import LineCollection
from matplotlib.patches import Rectangle

from designer.analysis.arcs import Arc, GapShape, LedgeShape, Scene
from designer.report import labels, style
from designer.report.figures import head, name_axes
from designer.report.style import Look

if TYPE_CHECKING:
    from matplotlib.axes import Axes

WORDS = {"reach": "reach", "cross": "cross", "stay-out": "stay out"}


@dataclass(frozen=True, slots=True)
class ArcPicture:
    """One set's arcs over the scene, with today's underneath."""

    title: str
    subtitle: str
    unit: str
    scene: Scene
    look: Look
    under: tuple[Arc, ...]
    """Arcs of today, drawn in grey first; empty where there is no today or it is the set itself."""
    x_range: tuple[float, float]
    y_range: tuple[float, float]
    inset: tuple[float, float, float, float]
    """Where the enlarged apex is drawn, in the room under the arcs: x, y, width, height, data units."""
    inset_x: tuple[float, float]
    inset_y: tuple[float, float]
    """What the enlarged apex shows."""
    thickness: float
    """How thick ground is drawn, length."""
    small: bool = False
    """One panel among several: a smaller title."""


def arcs(ax: Axes, picture: ArcPicture) -> Axes:
    """Draw one line a rate over the ledges and gaps, x and y to one scale where x is a distance."""
    scene = picture.scene
    ax.set_xlim(*picture.x_range)
    ax.set_ylim(*picture.y_range)
    if scene.by_distance:
        ax.set_aspect("equal", adjustable="box")
    ax.grid(color=style.FAINT, linewidth=0.6)
    _ground(ax, picture)
    for ledge in scene.ledges:
        _ledge(ax, ledge)
    for gap in scene.gaps:
        _far_side(ax, gap, picture)
    _paths(ax, picture)
    _enlarge(ax, picture)
    run = f"distance run ({picture.unit})" if scene.by_distance else "time since launch (s)"
    name_axes(ax, run, f"height ({picture.unit})")
    head(ax, picture.title, picture.subtitle, small=picture.small)
    _names(ax, picture)
    return ax


def _paths(ax: Axes, picture: ArcPicture) -> None:
    """Draw today's arcs in grey, then the set's, the nominal one bold."""
    under = [np.column_stack((arc.x, arc.y)) for arc in picture.under]
    thin = [np.column_stack((arc.x, arc.y)) for arc in picture.scene.arcs if not arc.nominal]
    ax.add_collection(
        LineCollection(under, colors=style.TODAY, linewidths=1.3, alpha=0.85, zorder=2.0), autolim=False
    )
    ax.add_collection(
        LineCollection(thin, colors=picture.look.colour, linewidths=0.9, alpha=0.8, zorder=2.4), autolim=False
    )
    for arc in picture.scene.arcs:
        if arc.nominal:
            ax.plot(arc.x, arc.y, color=picture.look.colour, linewidth=2.0, zorder=2.6)


def _enlarge(ax: Axes, picture: ArcPicture) -> None:
    """Draw the apex once more, enlarged, in the room under the arcs: ledges are lines there."""
    inset = ax.inset_axes(picture.inset, transform=ax.transData, zorder=5)
    inset.set_xlim(*picture.inset_x)
    inset.set_ylim(*picture.inset_y)
    _paths(inset, picture)
    for ledge in picture.scene.ledges:
        inset.axhline(
            ledge.height, color=style.SOLID, linewidth=1.2, linestyle=style.LEDGE_DASH[ledge.must], zorder=2.3
        )
    inset.set_xticks([])
    inset.locator_params(axis="y", nbins=4)
    inset.tick_params(labelsize=style.FONT_SMALL - 1, length=2, pad=2)
    for side in ("top", "right"):
        inset.spines[side].set_visible(True)
    inset.set_title("apex, enlarged", fontsize=style.FONT_SMALL - 1, fontweight="normal", pad=2, loc="center")
    ax.plot(
        [*picture.inset_x, *picture.inset_x[::-1], picture.inset_x[0]],
        [picture.inset_y[0]] * 2 + [picture.inset_y[1]] * 2 + [picture.inset_y[0]],
        color=style.QUIET,
        linewidth=0.7,
        zorder=2.9,
    )


def _ground(ax: Axes, picture: ArcPicture) -> None:
    """Draw the ground of the take-off, up to the edge where there are gaps."""
    end = 0.0 if picture.scene.gaps else picture.x_range[1]
    start = picture.x_range[0]
    ax.add_patch(_box(start, -picture.thickness, end - start, picture.thickness, "reach"))


def _box(x: float, y: float, width: float, height: float, must: str) -> Rectangle:
    """Return a filled box for what must be made, an open dashed one for what must not."""
    keep_out = must == "stay-out"
    return Rectangle(
        (x, y),
        width,
        height,
        facecolor="none" if keep_out else style.SOLID,
        edgecolor=style.SOLID,
        linestyle=style.LEDGE_DASH[must] if keep_out else "solid",
        linewidth=1.2 if keep_out else 0.8,
        zorder=1.8,
    )


def _ledge(ax: Axes, ledge: LedgeShape) -> None:
    """Draw a ledge: a line over the arcs, cased in white, and a thin one from it to its name."""
    ax.plot(
        [ledge.x_to, ax.get_xlim()[1]],
        [ledge.height, ledge.height],
        color=style.QUIET,
        linewidth=0.6,
        linestyle=(0, (1, 2)),
        zorder=1.4,
    )
    ends = ([ledge.x_from, ledge.x_to], [ledge.height, ledge.height])
    ax.plot(*ends, color=style.PAPER, linewidth=4.0, solid_capstyle="butt", zorder=2.65)
    ax.plot(
        *ends,
        color=style.SOLID,
        linewidth=2.0,
        linestyle=style.LEDGE_DASH[ledge.must],
        solid_capstyle="butt",
        zorder=2.7,
    )


def _far_side(ax: Axes, gap: GapShape, picture: ArcPicture) -> None:
    """Draw the far side of a gap with its wall, and dotted what edge_allowance adds to it."""
    end = picture.x_range[1]
    slab = _box(gap.width, gap.far_level - picture.thickness, end - gap.width, picture.thickness, gap.must)
    if gap.must == "stay-out":
        slab.set(facecolor=style.PAPER, zorder=1.85)
    ax.add_patch(slab)
    ax.plot(
        [gap.width, gap.width],
        [picture.y_range[0], gap.far_level],
        color=style.SOLID,
        linewidth=1.2,
        linestyle=style.LEDGE_DASH[gap.must],
        zorder=1.86,
    )
    if picture.scene.edge_allowance > 0.0:
        ax.plot(
            [gap.width - picture.scene.edge_allowance, gap.width],
            [gap.far_level, gap.far_level],
            color=style.SOLID,
            linewidth=1.5,
            linestyle=(0, (1, 1)),
            zorder=1.9,
        )


def _names(ax: Axes, picture: ArcPicture) -> None:
    """Name ledges and gaps in a column at the right, at their heights."""
    scene = picture.scene
    rows = [
        labels.Row(x.height, f"{style.shorten(x.name)}\n{x.height:g}, {WORDS[x.must]}") for x in scene.ledges
    ]
    rows += [
        labels.Row(x.far_level, f"{style.shorten(x.name)}\n{x.width:g} wide, {WORDS[x.must]}")
        for x in scene.gaps
    ]
    labels.column(ax, rows)
