"""From a search's result to picture files, each written whole or not at all."""

from __future__ import annotations

import io
import re
import warnings
from collections.abc import Callable, Sequence
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING
from xml.sax.saxutils import escape

import matplotlib
import numpy as np
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure
from matplotlib.transforms import Bbox

from designer.brief.model import Brief
from designer.objective.rows import binding
from designer.report import (
    build_arcs,
    build_front,
    build_reach,
    build_sensitivity,
    figures,
    labels,
    score_figures,
    style,
)
from designer.report.arc_figure import ArcPicture, arcs
from designer.report.results import write_whole
from designer.report.shown import View, best_of, pair, views
from designer.search.progress import Progress, Silent
from designer.search.result import SearchResult

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from numpy.typing import NDArray

ALT_FILE = "alt.txt"
PANEL, LINE, AXIS = 3.3, 0.17, 0.68
"""Height of the axes of a gap panel, of a line of remarks, and of an axis' numbers and name, inches."""
MARGIN = 0.2
"""Blank inches around a picture."""


@dataclass(frozen=True, slots=True)
class Picture:
    """A drawn picture before it is written."""

    name: str
    figure: Figure
    alt: str

    def box(self) -> Bbox:
        """Return what to write: everything drawn and a margin, in inches."""
        renderer = self.figure.canvas.get_renderer()  # type: ignore[attr-defined]
        return self.figure.get_tightbbox(renderer).padded(MARGIN)


def make_pictures(
    brief: Brief, result: SearchResult, folder: Path, progress: Progress | None = None
) -> list[Path]:
    """Draw everything that a search shows and write it to a folder: PNG and SVG of each, and alt.txt.

    Returns the files in the order in which they should be looked at. The same result gives the same bytes.
    """
    listener = Silent() if progress is None else progress
    folder.mkdir(parents=True, exist_ok=True)
    files: list[Path] = []
    alts: list[str] = []
    with matplotlib.rc_context(style.RC), warnings.catch_warnings():
        # A name in a script that the shipped font lacks is drawn as boxes; alt.txt still has it.
        warnings.filterwarnings("ignore", message="Glyph .* missing from font")
        todo = plan(brief, result)
        # Packing a PNG is another thread's work while this one writes the SVG.
        with ThreadPoolExecutor(1) as pool:
            for done, draw in enumerate(todo):
                listener.update("Drawing", done, len(todo))
                picture = draw()
                box = picture.box()
                packed = pool.submit(png_bytes, picture, pixels(picture, box))
                vector = svg_bytes(picture, box)
                for suffix, data in (("png", packed.result()), ("svg", vector)):
                    path = folder / f"{picture.name}.{suffix}"
                    write_whole(path, data)
                    files.append(path)
                alts.append(f"{picture.name}: {picture.alt}\n")
        listener.update("Drawing", len(todo), len(todo))
    write_whole(folder / ALT_FILE, "\n".join(alts).encode())
    return [*files, folder / ALT_FILE]


def plan(brief: Brief, result: SearchResult) -> list[Callable[[], Picture]]:
    """Return how to draw each picture, in order; call them within rc_context(style.RC)."""
    brief = binding(brief)
    best = best_of(result)
    if best is None:
        return []
    if brief.several:
        from designer.report.several_pictures import plan_several

        return plan_several(brief, result, best)
    rows = views(brief, result)
    both = pair(rows, best)
    todo: list[Callable[[], Picture]] = [lambda: reach_picture(brief, both)]
    if len(rows) > len(both):
        todo.append(lambda: reach_panels(brief, rows))
    if brief.gaps:
        todo.append(lambda: gap_picture(brief, both))
    todo.append(lambda: arc_picture(brief, rows))
    front = build_front.front(result)
    if front is not None:
        todo.append(lambda: front_picture(front))
    nudged = build_sensitivity.sensitivity(brief, best)
    if nudged is not None:
        todo.append(lambda: sensitivity_picture(nudged))
    return todo


def blank(size: tuple[float, float]) -> Figure:
    """Return an empty figure of a size in inches."""
    figure = Figure(figsize=size)
    FigureCanvasAgg(figure)
    return figure


def front_picture(data: score_figures.FrontPicture) -> Picture:
    """Draw miss against rate spread."""
    figure = blank(style.SIZE_WIDE)
    score_figures.front(figure.add_axes((0.08, 0.12, 0.88, 0.72)), data)
    return Picture("front", figure, build_front.front_alt(data))


def reach_picture(brief: Brief, rows: Sequence[View]) -> Picture:
    """Draw reach against frame rate: today and the best over the ledges. The picture that sells."""
    data = build_reach.reach(brief, rows)
    height = max(0.72 * style.SIZE_WIDE[1], column_height(len(data.demands) + len(data.threads)))
    figure = blank((style.SIZE_WIDE[0], height / 0.72))
    figures.reach_by_rate(figure.add_axes((0.08, 0.12, 0.72, 0.72)), data)
    return Picture("reach-by-rate", figure, build_reach.reach_alt(data))


def reach_panels(brief: Brief, rows: Sequence[View]) -> Picture:
    """Draw the same for every set, a panel each on one scale, so that none hides another."""
    panels = build_reach.reach_panels(brief, rows)
    axes, figure = grid(
        len(panels), 5.0, 2.7, gap=(label_room(brief), between(panels, len(brief.ledges), 2.7))
    )
    for ax, data in zip(axes, panels, strict=True):
        figures.reach_by_rate(ax, data)
    alt = [build_reach.reach_alt(data, lone=True) for data in panels]
    return Picture("reach-each", figure, " ".join([*alt, build_reach.demands_alt(panels[0])]).strip())


def gap_picture(brief: Brief, rows: Sequence[View]) -> Picture:
    """Draw how wide a gap is crossed against frame rate, a panel for each level of the far side."""
    panels = build_reach.gap_reaches(brief, rows)
    # Inches of each panel: its heading, the axes with numbers and name, and its remarks.
    heads = [figures.heading_height(one.title, one.subtitle) for one in panels]
    feet = [LINE * (figures.foot_text(one.remarks).count("\n") + 2) if one.remarks else 0.0 for one in panels]
    total = sum(heads) + sum(feet) + len(panels) * (PANEL + AXIS)
    figure = blank((style.SIZE_WIDE[0], total))
    top = total
    for data, head, below in zip(panels, heads, feet, strict=True):
        bottom = top - head - PANEL
        figures.reach_by_rate(figure.add_axes((0.08, bottom / total, 0.72, PANEL / total)), data)
        top = bottom - AXIS - below
    return Picture("gaps-by-rate", figure, " ".join(build_reach.reach_alt(data) for data in panels))


def arc_picture(brief: Brief, rows: Sequence[View]) -> Picture:
    """Draw the arcs of each set over the scene, a panel each on one scale."""
    panels = build_arcs.arc_panels(brief, rows)
    wide = panels[0].x_range[1] - panels[0].x_range[0]
    tall = panels[0].y_range[1] - panels[0].y_range[0]
    width = 7.4 if len(panels) == 1 else 5.0
    by_distance = panels[0].scene.by_distance
    height = min(max(width * tall / wide, 1.6), 5.2) if by_distance else 0.5 * width
    width = min(width, height * wide / tall) if by_distance else width
    room = between(panels, len(brief.features), height)
    axes, figure = grid(len(panels), width, height, gap=(label_room(brief), room))
    for ax, data in zip(axes, panels, strict=True):
        arcs(ax, data)
    return Picture("arcs", figure, build_arcs.arc_alt(brief, panels))


def sensitivity_picture(data: build_sensitivity.SensitivityPicture) -> Picture:
    """Draw what one increment of each constant does to the best."""
    count, rows = len(data.columns), len(data.labels)
    axes, figure = grid(count, 2.15, 0.55 + 0.3 * rows, gap=(0.35, 0.0), columns=count)
    for index, (ax, (name, bars)) in enumerate(zip(axes, data.columns, strict=True)):
        score_figures.sensitivity(ax, name, bars, data.limit, row_labels=index == 0)
    score_figures.banner(axes[0], data.title, data.subtitle)
    return Picture("sensitivity", figure, data.alt)


def column_height(names: int) -> float:
    """Return the inches that a column of so many labels of two lines takes."""
    return names * labels.height_of(2) / labels.POINTS_PER_INCH


def between(
    panels: Sequence[figures.ReachPicture] | Sequence[ArcPicture], names: int, height: float
) -> float:
    """Return the inches from the foot of one panel's axes to the head of the next one's."""
    heads = [figures.heading_height(one.title, one.subtitle, small=one.small) for one in panels]
    return AXIS + max(heads) + _overhang(names, height)


def _overhang(names: int, height: float) -> float:
    """Return by how many inches a column of names is taller than its panel."""
    return max(0.0, column_height(names) - height)


def label_room(brief: Brief) -> float:
    """Return the inches between two panels: the names of features, and the next panel's axis."""
    names = [len(style.shorten(feature.name)) for feature in brief.features]
    return 1.1 + 0.078 * max([18, *names])


def grid(
    count: int, width: float, height: float, gap: tuple[float, float], columns: int | None = None
) -> tuple[list[Axes], Figure]:
    """Return `count` axes of one size (inches) in rows of two, or of `columns`, and their figure."""
    across = columns or min(count, 2)
    down = -(-count // across)
    size = (across * (width + gap[0]), down * (height + gap[1]))
    figure = blank(size)
    axes = []
    for index in range(count):
        row, column = divmod(index, across)
        left = column * (width + gap[0]) / size[0]
        bottom = 1.0 - (row * (height + gap[1]) + height) / size[1]
        axes.append(figure.add_axes((left, bottom, width / size[0], height / size[1])))
    return axes, figure


def pixels(picture: Picture, box: Bbox) -> NDArray[np.uint8]:
    """Return a picture as (rows, columns, 3) red, green and blue, at twice the usual resolution.

    Paper hides what is under it: without transparency the file is smaller, and packed in less time.
    """
    buffer = io.BytesIO()
    picture.figure.savefig(buffer, format="raw", dpi=style.DPI, bbox_inches=box)
    width = int(box.width * style.DPI)
    found = np.frombuffer(buffer.getbuffer(), np.uint8).reshape(-1, width, 4)
    return np.ascontiguousarray(found[:, :, :3])


def png_bytes(picture: Picture, image: NDArray[np.uint8]) -> bytes:
    """Return pixels as PNG; the picture's text alternative stands in the metadata."""
    from PIL.Image import fromarray
    from PIL.PngImagePlugin import PngInfo

    words = PngInfo()
    words.add_itxt("Title", picture.name)
    words.add_itxt("Description", picture.alt)
    packed = io.BytesIO()
    fromarray(image).save(packed, "png", pnginfo=words, dpi=(style.DPI, style.DPI))
    return packed.getvalue()


def svg_bytes(picture: Picture, box: Bbox) -> bytes:
    """Return a picture as SVG with <title> and <desc>, without a date and with fixed ids."""
    buffer = io.BytesIO()
    metadata = {"Date": None, "Creator": "leapwright"}
    picture.figure.savefig(buffer, format="svg", bbox_inches=box, metadata=metadata)
    text = buffer.getvalue().decode()
    words = f"<title>{escape(picture.name)}</title>\n <desc>{escape(picture.alt)}</desc>"
    text, found = re.subn(r"(<svg [^>]*)>", lambda m: f'{m[1]} role="img">\n {words}', text, count=1)
    if not found:
        raise RuntimeError("the SVG writer produced no <svg> element")
    return text.encode()
