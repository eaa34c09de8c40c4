"""The pictures themselves: each takes plain data and an axes, draws, and returns the axes. Nothing is computed."""

from __future__ import annotations

import textwrap
from collections.abc import Sequence
from dataclasses import dataclass, field
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


def banner(ax: Axes, title: str, subtitle: str) -> None:
    """Write one heading over a row of panels, above the small title of the first."""
    for text, up, size, weight, colour in (
        (title, 46, style.FONT_TITLE, "bold", style.INK),
        (subtitle, 28, style.FONT_SMALL, "normal", style.QUIET),
    ):
        ax.annotate(
            text,
            (0, 1),
            (0, up),
            xycoords="axes fraction",
            textcoords="offset points",
            fontsize=size,
            fontweight=weight,
            color=colour,
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
        ax.fill_between(
            thread.rate,
            bound,
            thread.reach,
            where=breach.where.tolist(),
            step="mid",
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
        _foot(ax, picture.remarks)
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
    shown = [rate for rate in rates if low <= rate <= high]
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


def _foot(ax: Axes, remarks: Sequence[str]) -> None:
    """Write remarks under the axis label."""
    text = "\n".join(textwrap.fill(remark, style.FOOT_WIDTH, subsequent_indent="    ") for remark in remarks)
    ax.annotate(
        text,
        (0, 0),
        (0, -42),
        xycoords="axes fraction",
        textcoords="offset points",
        fontsize=style.FONT_SMALL,
        color=style.QUIET,
        va="top",
        annotation_clip=False,
    )


@dataclass(frozen=True, slots=True)
class FrontPoint:
    """One named set in the trade-off picture."""

    label: str
    look: Look
    rate_spread: float
    miss: float
    on_target: bool


@dataclass(frozen=True, slots=True)
class FrontPicture:
    """Miss against rate spread, both in tolerances."""

    title: str
    subtitle: str
    front_spread: Floats
    """(points,) ascending: sets that nothing beats in both."""
    front_miss: Floats
    named: tuple[FrontPoint, ...]
    x_range: tuple[float, float]
    y_range: tuple[float, float]
    log: tuple[bool, bool]
    """Whether the axes are logarithmic: (spread, miss)."""
    remarks: tuple[str, ...] = field(default=())


def front(ax: Axes, picture: FrontPicture) -> Axes:
    """Draw what precision costs in rate spread, with the shortlist by name; hollow where not on target."""
    ax.set_xscale("log" if picture.log[0] else "linear")
    ax.set_yscale("log" if picture.log[1] else "linear")
    ax.set_xlim(*picture.x_range)
    ax.set_ylim(*picture.y_range)
    ax.grid(color=style.FAINT, linewidth=0.7)
    if picture.y_range[0] < 1.0:
        ax.axhspan(picture.y_range[0], min(1.0, picture.y_range[1]), color=style.GOOD, zorder=0.5)
        ax.axhline(1.0, color=style.QUIET, linewidth=0.9, linestyle=(0, (2, 2)), zorder=0.6)
    ax.plot(
        picture.front_spread,
        picture.front_miss,
        color=style.TODAY,
        marker="o",
        markersize=3.5,
        linewidth=1.2,
        drawstyle="steps-post",
        zorder=1.5,
    )
    texts = []
    for point in picture.named:
        ax.plot(
            [point.rate_spread],
            [point.miss],
            linestyle="none",
            marker=point.look.marker,
            markersize=10,
            markerfacecolor=point.look.colour if point.on_target else style.PAPER,
            markeredgecolor=point.look.text_colour,
            markeredgewidth=1.8,
            zorder=3,
        )
        texts.append(
            ax.text(
                point.rate_spread,
                point.miss,
                point.label,
                color=point.look.text_colour,
                fontweight="bold",
                fontsize=style.FONT,
                zorder=4,
            )
        )
    ax.set_xlabel("rate spread (tolerances)")
    ax.set_ylabel("miss (tolerances)")
    head(ax, picture.title, picture.subtitle)
    spots = [(point.rate_spread, point.miss) for point in picture.named]
    others = list(zip(picture.front_spread.tolist(), picture.front_miss.tolist(), strict=True))
    labels.beside(ax, [*spots, *others], texts, len(spots))
    if picture.remarks:
        _foot(ax, picture.remarks)
    return ax


@dataclass(frozen=True, slots=True)
class Bar:
    """One nudge in the sensitivity picture."""

    label: str
    value: float | None
    """Change in tolerances; None where the nudged jump never lands."""
    flip: bool


def sensitivity(ax: Axes, name: str, bars: Sequence[Bar], limit: float, row_labels: bool = True) -> Axes:
    """Draw the change of one measure for one increment of each constant, in tolerances; flips are hatched."""
    rows = np.arange(len(bars))
    ax.set_xlim(-limit, limit)
    ax.set_ylim(len(bars) - 0.4, -0.6)
    ax.axvspan(-1.0, 1.0, color=style.GOOD, zorder=0.5)
    ax.axvline(0.0, color=style.INK, linewidth=0.9, zorder=3)
    for row, bar in zip(rows.tolist(), bars, strict=True):
        if bar.value is None:
            _bar_text(ax, row, 0.0, "never lands", style.BREACH_TEXT)
            continue
        shown = float(np.clip(bar.value, -limit, limit))
        ax.barh(
            row,
            shown,
            height=0.62,
            facecolor=style.BREACH if bar.flip else style.CANDIDATE_LOOKS[0].colour,
            edgecolor=style.BREACH_TEXT if bar.flip else style.CANDIDATE_LOOKS[0].colour,
            hatch=style.HATCH if bar.flip else None,
            linewidth=0.8,
            zorder=2,
        )
        if shown != bar.value:
            ax.plot([shown], [row], marker=">" if shown > 0 else "<", color=style.INK, clip_on=False, zorder=4)
        number = f"{bar.value:+.2f}".replace("-", "−") if abs(bar.value) >= 0.005 else "0"
        _bar_text(ax, row, shown, number, style.BREACH_TEXT if bar.flip else style.INK, limit)
    ax.set_yticks(rows, [bar.label for bar in bars] if row_labels else [""] * len(bars))
    ax.tick_params(axis="y", length=0)
    for side in ("left", "bottom"):
        ax.spines[side].set_visible(side == "bottom")
    ax.set_title(name, fontsize=style.FONT, pad=6.0)
    ax.set_xlabel("tolerances", fontsize=style.FONT_SMALL)
    return ax


def _bar_text(ax: Axes, row: float, end: float, text: str, colour: str, limit: float = 1.0) -> None:
    """Write at the end of a bar, on the side where there is room."""
    right = end >= 0
    if abs(end) > 0.45 * limit:
        # A long bar leaves no room beyond its end: write on the empty side of the axis.
        end, right = 0.0, not right
    ax.annotate(
        text,
        (end, row),
        (4 if right else -4, 0),
        textcoords="offset points",
        ha="left" if right else "right",
        va="center",
        fontsize=style.FONT_SMALL - 1,
        color=colour,
        zorder=4,
    )
