"""The pictures of several jumps: their arcs together, and who pays for whom; nothing is computed."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from matplotlib.collections import LineCollection

from designer.report import labels, style
from designer.report.arc_figure import names, stage
from designer.report.build_several import CoursePicture, PayPanel, Share
from designer.report.figures import head

if TYPE_CHECKING:
    from matplotlib.axes import Axes


def course(ax: Axes, picture: CoursePicture) -> Axes:
    """Draw the arcs of every jump over the features, each named at its apex."""
    stage(ax, picture.stage)
    under = [np.column_stack((arc.x, arc.y)) for arc in picture.stage.under]
    ax.add_collection(
        LineCollection(under, colors=style.TODAY, linewidths=1.6, alpha=0.85, zorder=2.0), autolim=False
    )
    spots, texts = [], []
    for order, path in enumerate(picture.paths):
        thin = [np.column_stack((arc.x, arc.y)) for arc in path.arcs[1:]]
        ax.add_collection(
            LineCollection(thin, colors=path.look.colour, linewidths=0.6, alpha=0.45, zorder=2.2),
            autolim=False,
        )
        nominal = path.arcs[0]
        ax.plot(
            nominal.x,
            nominal.y,
            color=path.look.colour,
            linestyle=path.look.dash,
            linewidth=path.look.width,
            zorder=2.5 + 0.01 * order,
        )
        top = int(np.argmax(nominal.y))
        spots.append((float(nominal.x[top]), float(nominal.y[top])))
        ax.plot(
            [spots[-1][0]],
            [spots[-1][1]],
            linestyle="none",
            marker=path.look.marker,
            markersize=6,
            markerfacecolor=path.look.colour,
            markeredgecolor=style.PAPER,
            zorder=3.0,
        )
        texts.append(
            ax.text(
                *spots[-1],
                path.name,
                color=path.look.text_colour,
                fontsize=style.FONT_SMALL,
                fontweight="bold",
                bbox={"facecolor": style.PAPER, "edgecolor": "none", "pad": 0.8, "alpha": 0.85},
                zorder=4,
            )
        )
    head(ax, picture.stage.title, picture.stage.subtitle)
    names(ax, picture.stage)
    labels.beside(ax, spots, texts, len(spots))
    return ax


def paying(ax: Axes, panel: PayPanel, limit: float, row_labels: bool) -> Axes:
    """Draw for each jump a ring at what it could have alone and a marker at what it costs in this set."""
    ax.set_xlim(-0.04 * limit, limit)
    ax.set_ylim(len(panel.shares) - 0.4, -0.6)
    ax.grid(axis="x", color=style.FAINT, linewidth=0.7)
    for row, share in enumerate(panel.shares):
        _share(ax, row, share, panel, limit)
    names = [style.shorten(share.jump, 22) if row_labels else "" for share in panel.shares]
    ax.set_yticks(range(len(panel.shares)), names)
    ax.tick_params(axis="y", length=0)
    ax.spines["left"].set_visible(False)
    ax.set_title(panel.title, fontsize=style.FONT, pad=6.0, color=panel.look.text_colour)
    ax.set_xlabel("cost (tolerances)", fontsize=style.FONT_SMALL)
    return ax


def _share(ax: Axes, row: int, share: Share, panel: PayPanel, limit: float) -> None:
    if share.cost is None:
        ax.text(
            0.02 * limit, row, "never lands", color=style.BREACH_TEXT, fontsize=style.FONT_SMALL, va="center"
        )
        return
    end = min(share.cost, limit)
    if share.alone is not None:
        start = min(share.alone, limit)
        ax.plot([start, end], [row, row], color=panel.look.colour, linewidth=2.4, zorder=2)
        ax.plot(
            [start],
            [row],
            linestyle="none",
            marker="o",
            markersize=8,
            markerfacecolor=style.PAPER,
            markeredgecolor=style.INK,
            zorder=2.5,
        )
    cut = share.cost > limit
    ax.plot(
        [end],
        [row],
        linestyle="none",
        marker=">" if cut else panel.look.marker,
        markersize=6,
        markerfacecolor=panel.look.colour,
        markeredgecolor=panel.look.text_colour,
        clip_on=False,
        zorder=3,
    )
    value = share.cost if share.more is None else share.more
    text = f"{value:.2f}" if share.more is None else f"{value:+.2f}".replace("-", "−")
    far = max(end, min(share.alone or 0.0, limit))
    inside = far > 0.72 * limit  # no room beyond the end: over the line then
    ax.annotate(
        text,
        (far, row),
        (-2, 5) if inside else (8, 0),
        textcoords="offset points",
        ha="right" if inside else "left",
        va="bottom" if inside else "center",
        fontsize=style.FONT_SMALL,
        color=style.INK,
        zorder=4,
    )
