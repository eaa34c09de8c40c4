"""From a search's result to picture files, each written whole or not at all."""

from __future__ import annotations

import io
import re
import warnings
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING
from xml.sax.saxutils import escape

import matplotlib
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure
from matplotlib.transforms import Bbox

from designer.brief.model import Brief, Gap, Ledge
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
from designer.report.arc_figure import arcs
from designer.report.results import write_whole
from designer.report.shown import best_of, pair, shown
from designer.search.result import Candidate, SearchResult

if TYPE_CHECKING:
    from matplotlib.axes import Axes

ALT_FILE = "alt.txt"
PANEL, LINE = 3.3, 0.17
"""Height of the axes of a gap panel and of a line of remarks, inches."""
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


def make_pictures(brief: Brief, result: SearchResult, folder: Path) -> list[Path]:
    """Draw everything that a search shows and write it to a folder: PNG and SVG of each, and alt.txt.

    Returns the files in the order in which they should be looked at. The same result gives the same bytes.
    """
    folder.mkdir(parents=True, exist_ok=True)
    files: list[Path] = []
    alts: list[str] = []
    with matplotlib.rc_context(style.RC), warnings.catch_warnings():
        # A name in a script that the shipped font lacks is drawn as boxes; alt.txt still has it.
        warnings.filterwarnings("ignore", message="Glyph .* missing from font")
        for picture in draw_all(brief, result):
            box = picture.box()
            for suffix, data in (("png", png_bytes(picture, box)), ("svg", svg_bytes(picture, box))):
                path = folder / f"{picture.name}.{suffix}"
                write_whole(path, data)
                files.append(path)
            alts.append(f"{picture.name}: {picture.alt}\n")
    write_whole(folder / ALT_FILE, "\n".join(alts).encode())
    return [*files, folder / ALT_FILE]


def draw_all(brief: Brief, result: SearchResult) -> Iterator[Picture]:
    """Yield each picture, drawn; call within rc_context(style.RC)."""
    best = best_of(result)
    if best is None:
        return
    yield reach_picture(brief, result, best)
    if len(shown(result)) > len(pair(result, best)):
        yield reach_panels(brief, result)
    if brief.gaps:
        yield gap_picture(brief, result, best)
    yield arc_picture(brief, result)
    yield from front_picture(result)
    yield from sensitivity_picture(brief, best)


def _figure(size: tuple[float, float]) -> Figure:
    figure = Figure(figsize=size)
    FigureCanvasAgg(figure)
    return figure


def front_picture(result: SearchResult) -> Iterator[Picture]:
    """Draw miss against rate spread; nothing where no set has a score."""
    data = build_front.front(result)
    if data is None:
        return
    figure = _figure(style.SIZE_WIDE)
    score_figures.front(figure.add_axes((0.08, 0.12, 0.88, 0.72)), data)
    yield Picture("front", figure, build_front.front_alt(data))


def reach_picture(brief: Brief, result: SearchResult, best: Candidate) -> Picture:
    """Draw reach against frame rate: today and the best over the ledges. The picture that sells."""
    data = build_reach.reach(brief, pair(result, best), build_reach.reach_title(brief, result, best))
    height = max(0.72 * style.SIZE_WIDE[1], _column_height(len(data.demands) + len(data.threads)))
    figure = _figure((style.SIZE_WIDE[0], height / 0.72))
    figures.reach_by_rate(figure.add_axes((0.08, 0.12, 0.72, 0.72)), data)
    return Picture("reach-by-rate", figure, build_reach.reach_alt(data))


def reach_panels(brief: Brief, result: SearchResult) -> Picture:
    """Draw the same for every set, a panel each on one scale, so that none hides another."""
    panels = build_reach.reach_panels(brief, result)
    axes, figure = _grid(
        len(panels), 5.0, 2.7, gap=(_label_room(brief), 1.25 + _overhang(len(brief.ledges), 2.7))
    )
    for ax, data in zip(axes, panels, strict=True):
        figures.reach_by_rate(ax, data)
    return Picture("reach-each", figure, " ".join(build_reach.reach_alt(data) for data in panels))


def gap_picture(brief: Brief, result: SearchResult, best: Candidate) -> Picture:
    """Draw how wide a gap is crossed against frame rate, a panel for each level of the far side."""
    panels = build_reach.gap_reaches(brief, result, best)
    # Inches of each panel: the axes, its heading and axis label, and its remarks.
    heights = [PANEL + 1.7 + LINE * figures.foot_text(one.remarks).count("\n") for one in panels]
    figure = _figure((style.SIZE_WIDE[0], sum(heights)))
    top = sum(heights)
    for data, height in zip(panels, heights, strict=True):
        top -= height
        bottom = (top + height - PANEL) / sum(heights)
        figures.reach_by_rate(figure.add_axes((0.08, bottom, 0.72, PANEL / sum(heights))), data)
    return Picture("gaps-by-rate", figure, " ".join(build_reach.reach_alt(data) for data in panels))


def arc_picture(brief: Brief, result: SearchResult) -> Picture:
    """Draw the arcs of each set over the scene, a panel each on one scale."""
    panels = build_arcs.arc_panels(brief, result)
    wide = panels[0].x_range[1] - panels[0].x_range[0]
    tall = panels[0].y_range[1] - panels[0].y_range[0]
    width = 7.4 if len(panels) == 1 else 5.0
    by_distance = panels[0].scene.by_distance
    height = min(max(width * tall / wide, 1.6), 5.2) if by_distance else 0.5 * width
    width = min(width, height * wide / tall) if by_distance else width
    overhang = _overhang(len(brief.ledges) + len(brief.gaps), height)
    axes, figure = _grid(len(panels), width, height, gap=(_label_room(brief), 1.3 + overhang))
    for ax, data in zip(axes, panels, strict=True):
        arcs(ax, data)
    return Picture("arcs", figure, build_arcs.arc_alt(brief, panels))


def sensitivity_picture(brief: Brief, best: Candidate) -> Iterator[Picture]:
    """Draw what one increment of each constant does to the best; nothing where nothing may move."""
    data = build_sensitivity.sensitivity(brief, best)
    if data is None:
        return
    count, rows = len(data.columns), len(data.labels)
    axes, figure = _grid(count, 2.15, 0.55 + 0.3 * rows, gap=(0.35, 0.0), columns=count)
    for index, (ax, (name, bars)) in enumerate(zip(axes, data.columns, strict=True)):
        score_figures.sensitivity(ax, name, bars, data.limit, row_labels=index == 0)
    score_figures.banner(axes[0], data.title, data.subtitle)
    yield Picture("sensitivity", figure, data.alt)


def _column_height(names: int) -> float:
    """Return the inches that a column of so many labels of two lines takes."""
    return names * labels.height_of(2) / labels.POINTS_PER_INCH


def _overhang(names: int, height: float) -> float:
    """Return by how many inches a column of names is taller than its panel."""
    return max(0.0, _column_height(names) - height)


def _label_room(brief: Brief) -> float:
    """Return the inches between two panels: the names of ledges and gaps, and the next panel's axis."""
    features: list[Ledge | Gap] = [*brief.ledges, *brief.gaps]
    names = [len(style.shorten(feature.name)) for feature in features]
    return 1.1 + 0.078 * max([18, *names])


def _grid(
    count: int, width: float, height: float, gap: tuple[float, float], columns: int | None = None
) -> tuple[list[Axes], Figure]:
    """Return `count` axes of one size (inches) in rows of two, or of `columns`, and their figure."""
    across = columns or min(count, 2)
    down = -(-count // across)
    size = (across * (width + gap[0]), down * (height + gap[1]))
    figure = _figure(size)
    axes = []
    for index in range(count):
        row, column = divmod(index, across)
        left = column * (width + gap[0]) / size[0]
        bottom = 1.0 - (row * (height + gap[1]) + height) / size[1]
        axes.append(figure.add_axes((left, bottom, width / size[0], height / size[1])))
    return axes, figure


def png_bytes(picture: Picture, box: Bbox) -> bytes:
    """Return a picture as PNG at twice the usual resolution; its text alternative stands in the metadata."""
    buffer = io.BytesIO()
    picture.figure.savefig(
        buffer,
        format="png",
        dpi=style.DPI,
        bbox_inches=box,
        metadata={"Software": None, "Title": picture.name, "Description": picture.alt},
    )
    return buffer.getvalue()


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
