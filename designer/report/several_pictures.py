"""Every picture of a search of several jumps."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from functools import partial

from designer.brief.model import Brief
from designer.report import (
    build_front,
    build_sensitivity,
    figures,
    labels,
    score_figures,
    several_figures,
    style,
)
from designer.report.build_several import PayPicture, course_picture, gaps_of_each, paying, reach_of_each
from designer.report.figures import ReachPicture
from designer.report.pictures import (
    Picture,
    between,
    blank,
    front_picture,
    grid,
    label_room,
)
from designer.search.result import Candidate, SearchResult

REACH_TITLE = "How high each jump reaches: today and {name}"
GAPS_TITLE = "How far each jump crosses: today and {name}"
KEY = "Triangles: supported rates (hollow: watched); grey band: margin; hatched: demand broken"
BEFORE_LAST = figures.RATE_TICKS[-2]
WIDTH, HEIGHT = 4.6, 2.5
"""Inches of the axes of one jump's panel."""
MOST_COLUMNS = 14
"""How many panels of the sensitivity picture stand side by side."""
COURSE = (8.6, 4.6)
"""Most inches of the axes of all arcs."""


def plan_several(brief: Brief, result: SearchResult, best: Candidate) -> list[Callable[[], Picture]]:
    """Return how to draw each picture, in order. The brief has only binding rows."""
    name = best.label or "the nearest"
    todo: list[Callable[[], Picture]] = []
    for file, title, (panels, words) in (
        ("reach-by-rate", REACH_TITLE, reach_of_each(brief, result, best)),
        ("gaps-by-rate", GAPS_TITLE, gaps_of_each(brief, result, best)),
    ):
        if panels:
            todo.append(partial(_panels, brief, file, title.format(name=name), panels, words))
    todo.append(partial(_course, brief, result, best))
    pay = paying(brief, result)
    if pay is not None:
        todo.append(partial(_paying, pay))
    front = build_front.front(result)
    if front is not None:
        todo.append(partial(front_picture, front))
    nudged = build_sensitivity.sensitivity(brief, best)
    if nudged is not None:
        todo.append(partial(_sensitivity, nudged))
    return todo


def _panels(
    brief: Brief, file: str, title: str, panels: Sequence[ReachPicture], words: Sequence[str]
) -> Picture:
    """Draw a panel a jump, each on its own scale, under one heading."""
    most = max(len(one.demands) + len(one.threads) for one in panels)
    axes, figure = grid(
        len(panels), WIDTH, HEIGHT, gap=(label_room(brief) + 0.35, between(panels, most, HEIGHT))
    )
    for ax, data in zip(axes, panels, strict=True):
        figures.reach_by_rate(ax, data)
        # The labels' column begins beside the last tick, which needs the room of the one before.
        ticks = [tick for tick in figures.RATE_TICKS if tick != BEFORE_LAST]
        ax.set_xticks(ticks, [str(tick) for tick in ticks])
        ax.get_xticklabels()[-1].set_horizontalalignment("right")
    tallest = max(figures.heading_height(one.title, one.subtitle, small=True) for one in panels[:2])
    score_figures.banner(axes[0], title, KEY, up=labels.POINTS_PER_INCH * tallest - 10)
    return Picture(file, figure, " ".join([f"{title}.", *words]))


def _course(brief: Brief, result: SearchResult, best: Candidate) -> Picture:
    """Draw all jumps of the best set over the features."""
    data, words = course_picture(brief, result, best)
    wide = data.stage.x_range[1] - data.stage.x_range[0]
    tall = data.stage.y_range[1] - data.stage.y_range[0]
    width, height = COURSE
    if data.stage.scene.by_distance:
        width = min(width, height * wide / tall)
        height = width * tall / wide
    figure = blank(style.SIZE_WIDE)
    size = figure.get_size_inches()
    ax = figure.add_axes((0.08, 0.12, width / size[0], height / size[1]))
    several_figures.course(ax, data)
    return Picture("arcs", figure, words)


def _paying(data: PayPicture) -> Picture:
    """Draw who pays for whom, a panel a set."""
    across = min(len(data.panels), 4)
    axes, figure = grid(
        len(data.panels), 2.4, 0.5 + 0.3 * len(data.panels[0].shares), gap=(0.4, 1.0), columns=across
    )
    for index, (ax, panel) in enumerate(zip(axes, data.panels, strict=True)):
        several_figures.paying(ax, panel, data.limit, row_labels=index % across == 0)
    score_figures.banner(axes[0], data.title, data.subtitle)
    return Picture("who-pays", figure, data.alt)


def _sensitivity(data: build_sensitivity.SensitivityPicture) -> Picture:
    """Draw what one increment of each variable does to the best."""
    count, rows = len(data.columns), len(data.labels)
    across = -(-count // -(-count // MOST_COLUMNS))
    axes, figure = grid(count, 1.3, 0.4 + 0.26 * rows, gap=(0.12, 1.2), columns=across)
    for index, (ax, (name, bars)) in enumerate(zip(axes, data.columns, strict=True)):
        score_figures.sensitivity(ax, name, bars, data.limit, row_labels=index % across == 0, zeros=False)
        ax.title.set_fontsize(style.FONT_SMALL)
    score_figures.banner(axes[0], data.title, data.subtitle, up=12)
    return Picture("sensitivity", figure, data.alt)
