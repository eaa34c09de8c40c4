"""The picture of reach against frame rate: plain data and an axes in, the axes out, nothing computed."""

from __future__ import annotations

import textwrap
from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from designer.report import labels, style
from designer.report.style import Look

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Thread:
    """One set in a picture against frame rate."""

    label: str
    look: Look
    rate: Floats
    """(rates,) whole Hz."""
    reach: Floats
    """(rates,) length; NaN where the jump never lands."""


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
    """False beyond the supported rates, where it is drawn paler."""


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
    y_range: tuple[float, float]
    remarks: tuple[str, ...] = ()
    """Short sentences for the foot: what is off the scale, what never lands."""
    x_label: str = "frame rate (Hz)"
    label_threads: bool = True
    small: bool = False
    """One panel among several: a smaller title."""


MOST_TRIANGLES = 24
RATE_TICKS = (20, 30, 40, 60, 90, 120, 180, 240, 360, 500, 700, 1000)


def head(ax: Axes, title: str, subtitle: str = "", *, small: bool = False) -> None:
    """Write the finding over a picture, and in small what it shows."""
    width = style.TITLE_WIDTH_SMALL if small else style.TITLE_WIDTH
    lines = textwrap.fill(title, width)
    below = textwrap.fill(subtitle, int(width * 1.45)) if subtitle else ""
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


def reach_by_rate(ax: Axes, picture: ReachPicture) -> Axes:
    """Draw how far each set reaches at every whole rate, with the demands as lines across."""
    ax.set_xscale("log")
    ax.set_xlim(min(t.rate[0] for t in picture.threads), max(t.rate[-1] for t in picture.threads))
    ax.set_ylim(*picture.y_range)
    ax.set_xticks(RATE_TICKS, [str(tick) for tick in RATE_TICKS])
    ax.minorticks_off()
    ax.grid(axis="x", color=style.FAINT, linewidth=0.7)
    for demand in picture.demands:
        _demand(ax, demand, picture.y_range)
    for breach in picture.breaches:
        thread, bound = picture.threads[breach.thread], picture.demands[breach.demand].bound
        # Both edges of each rate's step, so that a rate that stands alone is filled too.
        edges = (thread.rate[:, None] + np.array([-0.5, 0.5])).ravel()
        ax.fill_between(
            edges,
            bound,
            np.repeat(thread.reach, 2),
            where=np.repeat(breach.where, 2).tolist(),
            facecolor=style.BREACH,
            edgecolor=style.BREACH_TEXT,
            hatch=style.HATCH,
            linewidth=0.6,
            alpha=1.0 if breach.counts else style.PALE,
            zorder=2.2,
        )
    for order, thread in enumerate(picture.threads):
        ax.plot(
            thread.rate,
            thread.reach,
            drawstyle="steps-mid",
            color=thread.look.colour,
            linestyle=thread.look.dash,
            linewidth=thread.look.width,
            solid_joinstyle="round",
            solid_capstyle="butt",
            zorder=2.5 + 0.01 * order,
        )
    _rug(ax, picture.supported, style.INK)
    _rug(ax, picture.watched, style.PAPER)
    if picture.supported:
        for start, end in ((1.0, min(picture.supported)), (max(picture.supported), 1e6)):
            ax.axvspan(start, end, facecolor=style.OUTSIDE, linewidth=0, zorder=0.2)
    ax.set_xlabel(picture.x_label)
    ax.set_ylabel(picture.y_label)
    head(ax, picture.title, picture.subtitle, small=picture.small)
    _reach_labels(ax, picture)
    if picture.remarks:
        foot(ax, picture.remarks)
    return ax


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


def _rug(ax: Axes, rates: Sequence[float], fill: str) -> None:
    """Mark rates at the foot of the axes."""
    low, high = ax.get_xlim()
    shown = sorted(rate for rate in rates if low <= rate <= high)
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
        markersize=6,
        markerfacecolor=fill,
        markeredgecolor=style.INK,
        clip_on=False,
        zorder=4,
    )


def _reach_labels(ax: Axes, picture: ReachPicture) -> None:
    """Label threads and demands in one column at the right."""
    heights, texts, colours, bold = [], [], [], []
    if picture.label_threads:
        for thread in picture.threads:
            finite = thread.reach[np.isfinite(thread.reach)]
            heights.append(float(finite[-1]) if len(finite) else picture.y_range[1])
            texts.append(thread.label)
            colours.append(thread.look.text_colour)
            bold.append(True)
    for demand in picture.demands:
        heights.append(demand.value)
        texts.append(demand.label)
        colours.append(style.INK)
        bold.append(False)
    labels.column(ax, heights, texts, colours, bold)


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
