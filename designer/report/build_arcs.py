"""The data of the picture of jump arcs."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

from designer.analysis.arcs import Arc, Scene
from designer.analysis.arcs import arcs as trace_arcs
from designer.brief.model import Brief
from designer.report import findings
from designer.report.arc_figure import ArcPicture
from designer.report.findings import length
from designer.report.shown import TODAY, View

MOST_ARCS = 24
"""How many rates are drawn of a set: more lines would be one blot."""


def arc_panels(brief: Brief, views: Sequence[View]) -> list[ArcPicture]:
    """Return the arcs of every set, on one scale; today's alone only where nothing else is shown."""
    today = [one for one in views if one.name == TODAY]
    rows = [one for one in views if one.name != TODAY] or today
    full = [trace_arcs(brief, one.shown.constants) for one in rows]
    under = trace_arcs(brief, today[0].shown.constants) if today and rows != today else None
    if under is not None and any(scene.by_distance != under.by_distance for scene in full):
        under = None
    every = [*full, *([under] if under is not None else [])]
    x_range, y_range = scene_ranges(every)
    box = _inset_box(every)
    inset_y = _inset_heights(every)
    wide = _narrowest(every)
    beneath = () if under is None else _few(under.arcs)
    panels = []
    for one, whole in zip(rows, full, strict=True):
        scene = replace(whole, arcs=_few(whole.arcs))
        panels.append(
            ArcPicture(
                title=findings.arc_title(one, brief.length_unit),
                subtitle=_subtitle(len(full[0].arcs), len(scene.arcs), bool(beneath)),
                unit=brief.length_unit,
                scene=scene,
                look=one.shown.look,
                under=beneath,
                x_range=x_range,
                y_range=y_range,
                inset=box,
                inset_x=_around_apex(scene, wide),
                inset_y=inset_y,
                thickness=0.009 * max(x_range[1] - x_range[0] if scene.by_distance else 0.0,
                                      y_range[1] - y_range[0]),
                small=len(rows) > 1,
            )
        )  # fmt: skip
    return panels


def _few(arcs: tuple[Arc, ...]) -> tuple[Arc, ...]:
    """Return at most MOST_ARCS arcs: the nominal one, the extremes of height and length, some between."""
    if len(arcs) <= MOST_ARCS:
        return arcs
    order = sorted(range(1, len(arcs)), key=lambda i: arcs[i].step)
    keep = {0, order[0], order[-1], *order[:: -(-len(order) // (MOST_ARCS - 6))]}
    for measure in (lambda i: float(arcs[i].y.max()), lambda i: float(arcs[i].x[-1])):
        keep |= {min(order, key=measure), max(order, key=measure)}
    return tuple(arcs[i] for i in sorted(keep))


def _subtitle(rates: int, drawn: int, today: bool) -> str:
    shown = f"{drawn} of {rates} rates" if drawn < rates else "one line a rate"
    said = "one rate" if rates == 1 else f"{shown}, the bold one nominal"
    return said + ("; grey: today" if today else "")


def scene_ranges(scenes: Sequence[Scene]) -> tuple[tuple[float, float], tuple[float, float]]:
    """Return one range of x and of y that holds every scene; jumps that never land are cut."""
    flown = [arc for scene in scenes for arc in scene.arcs if arc.lands]
    flown = flown or [arc for scene in scenes for arc in scene.arcs]
    wide = max([float(arc.x[-1]) for arc in flown] + [g.width for s in scenes for g in s.gaps])
    tops = [float(arc.y.max()) for arc in flown] + [ledge.height for s in scenes for ledge in s.ledges]
    tops += [block.height for s in scenes for block in s.blocks]
    tops += [ceiling.feet for s in scenes for ceiling in s.ceilings]
    low = min([0.0, *(gap.far_level for scene in scenes for gap in scene.gaps)])
    tall = max(tops) - low
    return (-0.07 * wide, 1.06 * wide), (low - 0.1 * tall, max(tops) + 0.08 * tall)


def _flown(scenes: Sequence[Scene]) -> list[Arc]:
    """Return the arcs that land; all where none does."""
    flown = [arc for scene in scenes for arc in scene.arcs if arc.lands]
    return flown or [arc for scene in scenes for arc in scene.arcs]


def _narrowest(scenes: Sequence[Scene]) -> float:
    """Return how long the shortest jump is above the take-off."""
    return min(float(arc.x[arc.y >= 0.0][-1]) for arc in _flown(scenes))


def _inset_box(scenes: Sequence[Scene]) -> tuple[float, float, float, float]:
    """Return where the enlarged apex goes: under the lowest arc."""
    wide, low = _narrowest(scenes), min(float(arc.y.max()) for arc in _flown(scenes))
    # A parabola is wider than 0.6 of its base up to 0.64 of its height: the box below fits under it.
    return (0.27 * wide, 0.04 * low, 0.48 * wide, 0.5 * low)


def _inset_heights(scenes: Sequence[Scene]) -> tuple[float, float]:
    """Return the heights that the enlarged apex shows: every apex and every ledge."""
    heights = [float(arc.y.max()) for arc in _flown(scenes)]
    heights += [ledge.height for ledge in scenes[0].ledges]
    room = max(0.12 * (max(heights) - min(heights)), 0.01 * max(heights))
    return min(heights) - room, max(heights) + room


def _around_apex(scene: Scene, wide: float) -> tuple[float, float]:
    """Return the x that the enlarged apex shows: around the nominal apex, and the ledges whole."""
    nominal = _flown([scene])[0]
    middle = float(nominal.x[int(nominal.y.argmax())])
    half = max([0.16 * wide, *(1.15 * (ledge.x_to - middle) for ledge in scene.ledges)])
    return middle - half, middle + half


def arc_alt(brief: Brief, panels: Sequence[ArcPicture]) -> str:
    """Return the arcs in a few sentences."""
    lines = []
    for panel in panels:
        nominal = panel.scene.arcs[0]
        top = length(float(nominal.y.max()), brief.length_unit, 4)
        rises = f"; at {nominal.rate} the arc rises to {top}" if brief.features else ""
        lines.append(f"{panel.title}{rises}.")
    names = [findings.quoted(feature.name) for feature in brief.features]
    return " ".join(lines) + (f" Drawn over {', '.join(names)}." if names else "")
