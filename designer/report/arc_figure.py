"""The picture of jump arcs over the brief's ledges and gaps, to scale; plain data in, nothing computed."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from matplotlib.collections import LineCollection
from matplotlib.patches import Rectangle

from designer.analysis.arcs import Arc, BlockShape, CeilingShape, GapShape, LedgeShape, Scene
from designer.report import labels, style
from designer.report.figures import head, name_axes
from designer.report.style import Look

if TYPE_CHECKING:
    from matplotlib.axes import Axes

WORDS = {"stay-out": "stay out", "stay-under": "stay under"}
"""How demands read where they are more than the word itself."""


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
    stage(ax, picture)
    _paths(ax, picture)
    _enlarge(ax, picture)
    head(ax, picture.title, picture.subtitle, small=picture.small)
    names(ax, picture)
    return ax


def stage(ax: Axes, picture: ArcPicture) -> None:
    """Draw the axes, the ground and every feature."""
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
    for block in scene.blocks:
        _block(ax, block)
    for ceiling in scene.ceilings:
        _ceiling(ax, ceiling, picture.thickness)
    run = f"distance run ({picture.unit})" if scene.by_distance else "time since launch (s)"
    name_axes(ax, run, f"height ({picture.unit})")


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
    _leader(ax, ledge.x_to, ledge.height)
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


def _block(ax: Axes, block: BlockShape) -> None:
    """Draw a block as it stands there, and a thin line from its top to its name."""
    _leader(ax, block.x_to, block.height)
    box = _box(block.x_from, 0.0, block.length, block.height, block.must)
    if block.must == "clear":
        # Jumps that need not clear it are drawn across it, and must be seen.
        box.set(facecolor=style.FAINT, zorder=1.5)
    ax.add_patch(box)


def _ceiling(ax: Axes, ceiling: CeilingShape, thickness: float) -> None:
    """Draw what the feet must stay under: an open box over it, hatched where the body would hit."""
    _leader(ax, ceiling.x_to, ceiling.feet)
    box = _box(ceiling.x_from, ceiling.feet, ceiling.x_to - ceiling.x_from, thickness, "stay-out")
    box.set(hatch=style.HATCH, linestyle="solid", edgecolor=style.QUIET)
    ax.add_patch(box)


def _leader(ax: Axes, start: float, height: float) -> None:
    """Draw a thin line from a feature to the column of names."""
    ends = ([start, ax.get_xlim()[1]], [height, height])
    ax.plot(*ends, color=style.QUIET, linewidth=0.6, linestyle=(0, (1, 2)), zorder=1.4)


def names(ax: Axes, picture: ArcPicture) -> None:
    """Name every feature in a column at the right, at its height."""
    scene = picture.scene
    rows = [(x.height, x.name, f"{x.height:g}, {_demand(x.must)}") for x in scene.ledges]
    rows += [(x.far_level, x.name, f"{x.width:g} wide, {_demand(x.must)}") for x in scene.gaps]
    rows += [(x.height, x.name, f"{x.height:g} × {x.length:g}, {_demand(x.must)}") for x in scene.blocks]
    rows += [(x.feet, x.name, f"{x.height:g}: feet {_demand(x.must)} {x.feet:g}") for x in scene.ceilings]
    labels.column(ax, [labels.Row(y, f"{style.shorten(name)}\n{words}") for y, name, words in rows])


def _demand(must: str) -> str:
    return WORDS.get(must, must)
