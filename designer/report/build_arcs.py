"""The data of the picture of jump arcs."""

from __future__ import annotations

from collections.abc import Sequence

from designer.analysis.arcs import Scene
from designer.analysis.arcs import arcs as trace_arcs
from designer.brief.model import Brief
from designer.report import findings
from designer.report.arc_figure import ArcPicture
from designer.report.shown import shown
from designer.search.result import SearchResult


def arc_panels(brief: Brief, result: SearchResult) -> list[ArcPicture]:
    """Return the arcs of every set, on one scale; today's alone only where nothing else is shown."""
    rows = shown(result)
    today = [one for one in rows if one.name == "today"]
    rows = [one for one in rows if one.name != "today"] or rows
    scenes = [trace_arcs(brief, one.constants) for one in rows]
    under = trace_arcs(brief, today[0].constants) if today and rows != today else None
    beneath = (
        under.arcs if under is not None and all(s.by_distance == under.by_distance for s in scenes) else ()
    )
    x_range, y_range = _scene_ranges([*scenes, *([under] if beneath and under else [])])
    lone = len(rows) == 1
    inset, inset_x, inset_y = _inset([*scenes, *([under] if beneath and under else [])])
    rates = len(scenes[0].arcs)
    subtitle = "one line a rate, the bold one nominal" if rates > 1 else "one rate"
    return [
        ArcPicture(
            title=findings.arc_title(one.name, one.verdict, brief),
            subtitle=subtitle + ("; grey: today" if beneath else ""),
            unit=brief.length_unit,
            scene=scene,
            look=one.look,
            under=beneath,
            x_range=x_range,
            y_range=y_range,
            inset=inset,
            inset_x=inset_x,
            inset_y=inset_y,
            thickness=0.009
            * max(x_range[1] - x_range[0] if scene.by_distance else 0.0, y_range[1] - y_range[0]),
            small=not lone,
        )
        for one, scene in zip(rows, scenes, strict=True)
    ]


def _scene_ranges(scenes: Sequence[Scene]) -> tuple[tuple[float, float], tuple[float, float]]:
    """Return one range of x and of y that holds every scene; jumps that never land are cut."""
    flown = [arc for scene in scenes for arc in scene.arcs if arc.lands]
    flown = flown or [arc for scene in scenes for arc in scene.arcs]
    wide = max([float(arc.x[-1]) for arc in flown] + [g.width for s in scenes for g in s.gaps])
    tops = [float(arc.y.max()) for arc in flown] + [ledge.height for s in scenes for ledge in s.ledges]
    low = min([0.0, *(gap.far_level for scene in scenes for gap in scene.gaps)])
    tall = max(tops) - low
    return (-0.07 * wide, 1.06 * wide), (low - 0.1 * tall, max(tops) + 0.08 * tall)


def _inset(
    scenes: Sequence[Scene],
) -> tuple[tuple[float, float, float, float], tuple[float, float], tuple[float, float]]:
    """Return where the enlarged apex goes (under the lowest arc), and the x and y that it shows."""
    flown = [arc for scene in scenes for arc in scene.arcs if arc.lands]
    flown = flown or [arc for scene in scenes for arc in scene.arcs]
    level = [arc.x[arc.y >= 0.0] for arc in flown]
    wide = min(float(x[-1]) for x in level)
    apexes = [float(arc.y.max()) for arc in flown]
    middles = [float(arc.x[int(arc.y.argmax())]) for arc in flown]
    heights = [*apexes, *(ledge.height for ledge in scenes[0].ledges)]
    room = max(0.12 * (max(heights) - min(heights)), 0.01 * max(heights))
    middle, half = sum(middles) / len(middles), 0.16 * wide
    # A parabola is wider than 0.6 of its base up to 0.64 of its height: the box below fits under it.
    box = (0.27 * wide, 0.04 * min(apexes), 0.48 * wide, 0.5 * min(apexes))
    return box, (middle - half, middle + half), (min(heights) - room, max(heights) + room)


def arc_alt(brief: Brief, panels: Sequence[ArcPicture]) -> str:
    """Return the arcs in a few sentences."""
    lines = []
    for panel in panels:
        nominal = panel.scene.arcs[0]
        lines.append(
            f"{panel.title}: at {nominal.rate} the arc rises to {nominal.y.max():.4g} {brief.length_unit}."
        )
    names = [ledge.name for ledge in brief.ledges] + [gap.name for gap in brief.gaps]
    return " ".join(lines) + (f" Drawn over {', '.join(names)}." if names else "")
