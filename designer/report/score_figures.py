"""The pictures of the score: the trade-off front and the sensitivity bars; nothing is computed."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from matplotlib.ticker import FuncFormatter, MaxNLocator, NullLocator

from designer.report import labels, style
from designer.report.figures import foot, head, name_axes
from designer.report.findings import plain
from designer.report.style import Look

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Scale:
    """One axis: its range, and its ticks where it is logarithmic (none: evenly spaced round numbers)."""

    low: float
    high: float
    log: bool = False
    ticks: tuple[tuple[float, str], ...] = ()
    """(value, label)."""


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
    """Miss (with the violation where nothing is feasible) against rate spread, in tolerances."""

    title: str
    subtitle: str
    front_spread: Floats
    """(points,) ascending: sets that nothing beats in both."""
    front_miss: Floats
    named: tuple[FrontPoint, ...]
    x: Scale
    y: Scale
    y_label: str
    tint: float
    """Up to which miss the ground is tinted; 0: nowhere."""
    remarks: tuple[str, ...] = ()


def front(ax: Axes, picture: FrontPicture) -> Axes:
    """Draw what precision costs in rate spread, with the shortlist by name; hollow where not on target."""
    ax.set_xscale("log" if picture.x.log else "linear")
    ax.set_yscale("log" if picture.y.log else "linear")
    ax.set_xlim(picture.x.low, picture.x.high)
    ax.set_ylim(picture.y.low, picture.y.high)
    for axis, scale in ((ax.xaxis, picture.x), (ax.yaxis, picture.y)):
        axis.set_minor_locator(NullLocator())
        if scale.log:
            axis.set_ticks([value for value, _ in scale.ticks], [label for _, label in scale.ticks])
        else:
            axis.set_major_locator(MaxNLocator(8, steps=[1, 2, 5, 10]))
            axis.set_major_formatter(FuncFormatter(lambda value, _: "" if value < 0.0 else plain(value, 4)))
    ax.grid(color=style.FAINT, linewidth=0.7)
    if picture.y.low < picture.tint:
        ax.axhspan(picture.y.low, min(picture.tint, picture.y.high), color=style.GOOD, zorder=0.5)
        ax.axhline(picture.tint, color=style.QUIET, linewidth=0.9, linestyle=(0, (2, 2)), zorder=0.6)
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
    name_axes(ax, "rate spread (tolerances)", picture.y_label, left=52.0)
    head(ax, picture.title, picture.subtitle)
    spots = [(point.rate_spread, point.miss) for point in picture.named]
    others = list(zip(picture.front_spread.tolist(), picture.front_miss.tolist(), strict=True))
    labels.beside(ax, [*spots, *others], texts, len(spots))
    if picture.remarks:
        foot(ax, picture.remarks)
    return ax


@dataclass(frozen=True, slots=True)
class Bar:
    """One nudge in the sensitivity picture."""

    label: str
    value: float | None
    """Change in tolerances; None where the nudged jump never lands."""
    flip: bool


def sensitivity(
    ax: Axes, name: str, bars: Sequence[Bar], limit: float, row_labels: bool = True, *, zeros: bool = True
) -> Axes:
    """Draw the change of one measure for one increment of each constant, in tolerances; flips are hatched.

    With zeros=False what does not move the measure at all stays blank.
    """
    rows = np.arange(len(bars))
    ax.set_xlim(-limit, limit)
    ax.set_ylim(len(bars) - 0.4, -0.6)
    ax.axvspan(-1.0, 1.0, color=style.GOOD, zorder=0.5)
    ax.axvline(0.0, color=style.INK, linewidth=0.9, zorder=3)
    for row, bar in zip(rows.tolist(), bars, strict=True):
        if bar.value is None:
            _bar_text(ax, row, 0.0, "never lands", style.BREACH_TEXT)
            continue
        if bar.value == 0.0 and not zeros:
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
            ax.plot(
                [shown], [row], marker=">" if shown > 0 else "<", color=style.INK, clip_on=False, zorder=4
            )
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


def banner(ax: Axes, title: str, subtitle: str, up: float = 0.0) -> None:
    """Write one heading over a row of panels, above the small title of the first, `up` points higher."""
    for text, over, size, weight, colour in (
        (title, 46, style.FONT_TITLE, "bold", style.INK),
        (subtitle, 28, style.FONT_SMALL, "normal", style.QUIET),
    ):
        ax.annotate(
            text,
            (0, 1),
            (0, over + up),
            xycoords="axes fraction",
            textcoords="offset points",
            fontsize=size,
            fontweight=weight,
            color=colour,
            va="bottom",
            annotation_clip=False,
        )
