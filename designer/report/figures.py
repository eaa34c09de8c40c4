"""The picture of reach against frame rate: plain data and an axes in, the axes out, nothing computed."""

from __future__ import annotations

import textwrap
from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from matplotlib.collections import PolyCollection
from matplotlib.transforms import ScaledTranslation

from designer.report import labels, style
from designer.report.style import Look

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Thread:
    """One set in a picture against frame rate."""

    name: str
    label: str
    look: Look
    rate: Floats
    """(rates,) whole Hz."""
    reach: Floats
    """(rates,) length; NaN where the jump never lands."""
    own: tuple[float, ...] = ()
    """Hz: the rate that the set itself fixes, in a fixed loop."""


@dataclass(frozen=True, slots=True)
class Demand:
    """A ledge or gap as a line in a picture against frame rate."""

    label: str
    must: str
    """ "reach", "cross" or "stay-out"."""
    value: float
    bound: float
    """The value with its margin: what the reach is compared with."""


@dataclass(frozen=True, slots=True)
class Breach:
    """Where one thread breaks one demand."""

    thread: int
    demand: int
    where: NDArray[np.bool_]
    """(rates,)."""
    counts: bool = True
    """False beyond the rates that count, where it is drawn paler."""


@dataclass(frozen=True, slots=True)
class ReachPicture:
    """Everything in one picture of reach against frame rate."""

    title: str
    subtitle: str
    y_label: str
    threads: tuple[Thread, ...]
    demands: tuple[Demand, ...]
    breaches: tuple[Breach, ...]
    supported: tuple[float, ...]
    """Hz."""
    watched: tuple[float, ...]
    """Hz: shown, but nothing is demanded there."""
    span: tuple[float, float] | None
    """Hz: from the lowest to the highest rate that counts; None where it is not set off."""
    y_range: tuple[float, float]
    remarks: tuple[str, ...] = ()
    """Short sentences for the foot: what is off the scale, what never lands."""
    x_label: str = "frame rate (Hz)"
    label_threads: bool = True
    small: bool = False
    """One panel among several: a smaller title."""


MOST_TRIANGLES = 24
RATE_TICKS = (20, 30, 40, 60, 90, 120, 180, 240, 360, 500, 700, 1000)
FEW_TICKS = (20, 30, 60, 120, 240, 500, 1000)
"""The same for a small panel."""
LABEL_DOWN, LABEL_LEFT = 28.0, 44.0
"""How far from the axes their names stand, points."""


def head(ax: Axes, title: str, subtitle: str = "", *, small: bool = False) -> None:
    """Write the finding over a picture, and in small what it shows."""
    lines, below = _heading(title, subtitle, small)
    room = (below.count("\n") + 1) * style.FONT_SMALL * 1.25 + 4.0 if below else 0.0
    ax.set_title(lines, pad=10.0 + room, fontsize=style.FONT_PANEL if small else style.FONT_TITLE)
    if below:
        ax.annotate(
            below,
            (0, 1),
            (0, 8),
            xycoords="axes fraction",
            textcoords="offset points",
            fontsize=style.FONT_SMALL,
            color=style.QUIET,
            va="bottom",
            annotation_clip=False,
        )


def name_axes(ax: Axes, x_label: str, y_label: str, left: float = LABEL_LEFT) -> None:
    """Name the axes at fixed distances (points): to place names beside tick labels takes long to work out."""
    figure = ax.get_figure()
    if figure is None:
        return
    shift = ScaledTranslation(-left / 72, 0.0, figure.dpi_scale_trans)
    down = ScaledTranslation(0.0, -LABEL_DOWN / 72, figure.dpi_scale_trans)
    ax.set_xlabel(x_label)
    ax.set_ylabel(y_label)
    ax.xaxis.set_label_coords(0.5, 0.0, transform=ax.transAxes + down)
    ax.yaxis.set_label_coords(0.0, 0.5, transform=ax.transAxes + shift)


def _heading(title: str, subtitle: str, small: bool) -> tuple[str, str]:
    """Return a title and a subtitle, wrapped."""
    width = style.TITLE_WIDTH_SMALL if small else style.TITLE_WIDTH
    return textwrap.fill(title, width), textwrap.fill(subtitle, int(width * 1.45))


def heading_height(title: str, subtitle: str, *, small: bool = False) -> float:
    """Return how much room `head` takes over the axes, inches."""
    lines, below = _heading(title, subtitle, small)
    points = 14.0 + (lines.count("\n") + 1) * (style.FONT_PANEL if small else style.FONT_TITLE) * 1.25
    points += (below.count("\n") + 1) * style.FONT_SMALL * 1.25 + 4.0 if below else 0.0
    return points / labels.POINTS_PER_INCH


def reach_by_rate(ax: Axes, picture: ReachPicture) -> Axes:
    """Draw how far each set reaches at every whole rate, with the demands as lines across."""
    ax.set_xscale("log")
    ax.set_xlim(min(t.rate[0] for t in picture.threads), max(t.rate[-1] for t in picture.threads))
    ax.set_ylim(*picture.y_range)
    ticks = FEW_TICKS if picture.small else RATE_TICKS
    ax.set_xticks(ticks, [str(tick) for tick in ticks])
    ax.minorticks_off()
    ax.grid(axis="x", color=style.FAINT, linewidth=0.7)
    for demand in picture.demands:
        _demand(ax, demand, picture.y_range)
    for breach in picture.breaches:
        _hatch(ax, picture.threads[breach.thread], picture.demands[breach.demand].bound, breach)
    for order, thread in enumerate(picture.threads):
        ax.plot(
            *steps(thread.rate, thread.reach),
            color=thread.look.colour,
            linestyle=thread.look.dash,
            linewidth=thread.look.width,
            solid_joinstyle="round",
            solid_capstyle="butt",
            zorder=2.5 + 0.01 * order,
        )
    _rug(ax, picture.supported, style.INK)
    _rug(ax, picture.watched, style.PAPER)
    for order, thread in enumerate(picture.threads):
        # Sets may share a rate: the first is drawn larger, so that it shows around the next.
        size = 6.0 + 3.0 * (len(picture.threads) - 1 - order)
        _rug(ax, thread.own, thread.look.colour, edge=thread.look.text_colour, size=size)
    if picture.span is not None:
        for start, end in ((0.1, picture.span[0]), (picture.span[1], 1e6)):
            ax.axvspan(start, end, facecolor=style.OUTSIDE, linewidth=0, zorder=0.2)
    name_axes(ax, picture.x_label, picture.y_label)
    head(ax, picture.title, picture.subtitle, small=picture.small)
    _reach_labels(ax, picture)
    if picture.remarks:
        foot(ax, picture.remarks)
    return ax


def steps(rate: Floats, reach: Floats) -> tuple[Floats, Floats]:
    """Return the corners of a line that holds each value from half a Hz below its rate to half above.

    Equal neighbours share one piece.
    """
    starts = np.concatenate(([0], np.flatnonzero(reach[1:] != reach[:-1]) + 1))
    ends = np.concatenate((starts[1:], [len(reach)])) - 1
    x = np.column_stack((rate[starts] - 0.5, rate[ends] + 0.5)).ravel()
    return x, np.repeat(reach[starts], 2)


def _hatch(ax: Axes, thread: Thread, bound: float, breach: Breach) -> None:
    """Fill between a bound and a thread over the rates where the thread breaks it."""
    shapes = []
    where = np.flatnonzero(breach.where)
    for run in np.split(where, np.flatnonzero(np.diff(where) > 1) + 1):
        x, y = steps(thread.rate[run], thread.reach[run])
        shapes.append(np.column_stack(([x[0], *x, x[-1]], [bound, *y, bound])))
    area = PolyCollection(
        shapes,
        facecolor=style.BREACH,
        edgecolor=style.BREACH_TEXT,
        hatch=style.HATCH,
        linewidth=0.6,
        alpha=1.0 if breach.counts else style.PALE,
        zorder=2.2,
    )
    ax.add_collection(area, autolim=False)


def _demand(ax: Axes, demand: Demand, y_range: tuple[float, float]) -> None:
    """Draw one demand: its line and, where it has a margin, a pale band up to the bound."""
    ax.axhline(
        demand.value, color=style.SOLID, linewidth=1.3, linestyle=style.LEDGE_DASH[demand.must], zorder=2.3
    )
    if demand.bound != demand.value:
        ax.axhspan(
            min(demand.bound, demand.value),
            max(demand.bound, demand.value),
            facecolor=style.SOLID,
            alpha=0.12,
            linewidth=0,
            zorder=1.0,
        )


def _rug(ax: Axes, rates: Sequence[float], fill: str, edge: str = style.INK, size: float = 6.0) -> None:
    """Mark rates at the foot of the axes."""
    low, high = ax.get_xlim()
    shown = sorted(rate for rate in rates if low <= rate <= high)
    if not shown:
        return
    if len(shown) > MOST_TRIANGLES:
        # Too many to tell apart: a bar from the first to the last.
        ax.plot(
            [shown[0], shown[-1]],
            [0.0, 0.0],
            transform=ax.get_xaxis_transform(),
            color=style.INK,
            linewidth=4.0,
            solid_capstyle="butt",
            clip_on=False,
            zorder=4,
        )
        shown = [shown[0], shown[-1]]
    ax.plot(
        shown,
        [0.0] * len(shown),
        transform=ax.get_xaxis_transform(),
        linestyle="none",
        marker="^",
        markersize=size,
        markerfacecolor=fill,
        markeredgecolor=edge,
        clip_on=False,
        zorder=4,
    )


def _reach_labels(ax: Axes, picture: ReachPicture) -> None:
    """Label threads and demands in one column at the right."""
    rows = []
    if picture.label_threads:
        for thread in picture.threads:
            end = last_seen(thread, picture.y_range)
            height = picture.y_range[1] if end is None else float(thread.reach[end])
            start = None if end is None else _share(ax, float(thread.rate[end]))
            rows.append(labels.Row(height, thread.label, thread.look.text_colour, True, start))
    for demand in picture.demands:
        rows.append(labels.Row(demand.value, demand.label, style.INK))
    labels.column(ax, rows)


def last_seen(thread: Thread, y_range: tuple[float, float]) -> int | None:
    """Return the index of the last rate at which a thread lies in the picture; None where it never does."""
    with np.errstate(invalid="ignore"):
        seen = np.flatnonzero((thread.reach >= y_range[0]) & (thread.reach <= y_range[1]))
    return int(seen[-1]) if len(seen) else None


def _share(ax: Axes, rate: float) -> float:
    """Return where a rate lies across the axes, 0 to 1."""
    low, high = np.log(ax.get_xlim())
    return float((np.log(rate) - low) / (high - low))


def foot_text(remarks: Sequence[str]) -> str:
    """Return remarks as they stand under a picture, each wrapped."""
    return "\n".join(textwrap.fill(remark, style.FOOT_WIDTH, subsequent_indent="    ") for remark in remarks)


def foot(ax: Axes, remarks: Sequence[str]) -> None:
    """Write remarks under the axis label."""
    ax.annotate(
        foot_text(remarks),
        (0, 0),
        (0, -42),
        xycoords="axes fraction",
        textcoords="offset points",
        fontsize=style.FONT_SMALL,
        color=style.QUIET,
        va="top",
        annotation_clip=False,
    )
