"""The data of the pictures of several jumps: reach jump by jump, all arcs, and who pays for whom."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace

from designer.analysis.arcs import Arc, Scene, course
from designer.brief.model import Brief
from designer.objective.judge import judge
from designer.objective.verdict import JumpVerdict, Verdict
from designer.report import build_reach, findings, style
from designer.report.arc_figure import ArcPicture
from designer.report.build_arcs import scene_ranges
from designer.report.figures import ReachPicture
from designer.report.several_rows import paid
from designer.report.shown import NEAREST, View, best_of, pair, shown, views
from designer.report.style import Look
from designer.search.result import Candidate, SearchResult

FAR = 1.6
"""How many times as high or far as a jump reaches a feature may be to be drawn in its picture of reach."""


def each_jump(brief: Brief, result: SearchResult, best: Candidate) -> Iterator[tuple[Brief, list[View]]]:
    """Yield for each jump its brief, and today and the best of it alone at every whole rate."""
    for index, jump in enumerate(brief.jumps):
        view = _near(brief.view(jump.name), [one.verdict.jumps[index] for one in (best, result.today) if one])

        def alone(one: Candidate | None, view: Brief = view, index: int = index) -> Candidate | None:
            return None if one is None else replace(one, verdict=judge(view, one.verdict.sets[index]))

        only = alone(best)
        if only is None:
            continue
        today = only if result.today is best else alone(result.today)
        kept = (only,) if result.best is not None else ()
        own = replace(
            result,
            best=only if kept else None,
            nearest=None if kept else only,
            today=today,
            sets=(),
            shortlist=kept,
        )
        yield view, pair(views(view, own), only)


def _near(view: Brief, found: Sequence[JumpVerdict]) -> Brief:
    """Leave out ledges and gaps that hold by so much that they would flatten the jump's picture."""
    rows = [row for one in found for row in (one.nominal, *one.rates)]

    def span(measure: str) -> tuple[float, float]:
        values = [value for row in rows if (value := row.measures[measure]) is not None]
        return min(values, default=0.0) / FAR, max(values, default=math.inf) * FAR

    (low, high), (near, far) = span("step_top"), span("max_gap")
    return replace(
        view,
        ledges=tuple(
            one
            for one in view.ledges
            if (one.height <= high if one.must == "stay-out" else one.height >= low)
        ),
        gaps=tuple(
            one for one in view.gaps if (one.width <= far if one.must == "stay-out" else one.width >= near)
        ),
    )


def reach_of_each(
    brief: Brief, result: SearchResult, best: Candidate
) -> tuple[list[ReachPicture], list[str]]:
    """Return a picture of reach for each jump, and all of them in words."""
    pictures, words = [], []
    for view, rows in each_jump(brief, result, best):
        found = findings.reach_title(rows, brief.length_unit)
        title = replace(found, text=f"{style.shorten(view.jumps[0].name)}: {_small(found.text)}")
        picture = build_reach.reach(view, rows, title)
        words.append(build_reach.reach_alt(picture))
        pictures.append(replace(picture, subtitle="", remarks=(), small=True))
    return pictures, words


def gaps_of_each(brief: Brief, result: SearchResult, best: Candidate) -> tuple[list[ReachPicture], list[str]]:
    """Return a picture for each jump, far level and kind of demand; none without gaps."""
    pictures, words = [], []
    for view, rows in each_jump(brief, result, best):
        # A panel for each far level and kind of demand, in the order of `gap_reaches`.
        kinds = dict.fromkeys((gap.far_level, gap.must) for gap in view.gaps)
        panels = build_reach.gap_reaches(view, rows) if kinds else []
        for (level, _), picture in zip(kinds, panels, strict=True):
            side = f", far side at {level:g}" if level else ""
            title = f"{style.shorten(view.jumps[0].name)}{side}: {_small(picture.title)}"
            words.append(build_reach.reach_alt(replace(picture, title=title)))
            pictures.append(replace(picture, title=title, subtitle="", remarks=(), small=True))
    return pictures, words


def _small(title: str) -> str:
    """Return a sentence as it goes on after a colon."""
    first = title.split(" ", 1)[0]
    return title[0].lower() + title[1:] if first in ("Today", "With", "Every", "Over") else title


def _look(index: int) -> Look:
    """Return how the arcs of a jump are drawn; after six colours come greys."""
    colours = len(style.CANDIDATE_LOOKS)
    return style.candidate_look(index) if index < colours else style.brought_look(index - colours)


@dataclass(frozen=True, slots=True)
class Path:
    """The arcs of one jump, and how they are drawn."""

    name: str
    look: Look
    arcs: tuple[Arc, ...]
    """The nominal one first."""


@dataclass(frozen=True, slots=True)
class CoursePicture:
    """All jumps of one set over the features."""

    stage: ArcPicture
    """Axes, ground and features; no arcs but today's underneath."""
    paths: tuple[Path, ...]


def course_picture(brief: Brief, result: SearchResult, best: Candidate) -> tuple[CoursePicture, str]:
    """Return the arcs of every jump of the best set, and the same in words."""
    found = course(brief, best.verdict.sets)
    under: tuple[Arc, ...] = ()
    if result.today is not None and result.today is not best:
        today = course(brief, result.today.verdict.sets)
        if today.scene.by_distance == found.scene.by_distance:
            under = tuple(arcs[0] for arcs in today.paths)
    every = replace(found.scene, arcs=(*under, *(arc for arcs in found.paths for arc in arcs)))
    x_range, y_range = scene_ranges([every])
    name = best.label or NEAREST
    title = course_title(name, best.verdict, brief)
    subtitle = "every jump; bold: at the nominal rate, thin: at the others" + (
        "; grey: today" if under else ""
    )
    looks = [_look(index) for index in range(len(brief.jumps))]
    paths = tuple(
        Path(style.shorten(jump.name), look, arcs)
        for jump, look, arcs in zip(brief.jumps, looks, found.paths, strict=True)
    )
    stage = ArcPicture(
        title=title,
        subtitle=subtitle,
        unit=brief.length_unit,
        scene=found.scene,
        look=looks[0],
        under=under,
        x_range=x_range,
        y_range=y_range,
        inset=(0.0, 0.0, 0.0, 0.0),
        inset_x=(0.0, 0.0),
        inset_y=(0.0, 0.0),
        thickness=0.009 * max(x_range[1] - x_range[0] if every.by_distance else 0.0, y_range[1] - y_range[0]),
    )
    return CoursePicture(stage, paths), _course_words(brief, title, paths, every)


def course_title(name: str, verdict: Verdict, brief: Brief) -> str:
    """Return what the arcs of one set show: whether every demand holds at the supported rates."""
    broken = [
        (kind, feature, found)
        for kind, index, feature in findings.features(brief)
        if not (found := findings.judged(verdict, kind, index)).holds
    ]
    if verdict.violation is None:
        return f"{name}: a jump never lands at a rate that counts"
    if not broken:
        between = any(flag.startswith("between the supported rates") for flag in verdict.flags)
        more = ", though not at every rate between" if between else ""
        return f"{name}: every demand holds at the supported rates{more}"
    kind, feature, found = broken[0]
    more = f", and {len(broken) - 1} more fail{'s' if len(broken) == 2 else ''}" if len(broken) > 1 else ""
    bands = [found.worst_rate] if found.worst_rate else []
    clause = findings.failing_clause(kind, feature.must, feature.name, bands, margin=feature.margin)
    return f"{name}: {clause}{more}"


def _course_words(brief: Brief, title: str, paths: tuple[Path, ...], scene: Scene) -> str:
    tops = [f"{one.name} rises to {one.arcs[0].y.max():.4g} {brief.length_unit}" for one in paths]
    names = [feature.name for feature in brief.features]
    over = f" Drawn over {', '.join(names)}." if names else ""
    return (
        f"{title}. At {scene.arcs[-1].rate if not paths else paths[0].arcs[0].rate} {'; '.join(tops)}.{over}"
    )


@dataclass(frozen=True, slots=True)
class Share:
    """What one jump has to do with the cost of one set."""

    jump: str
    cost: float | None
    """Cost of the jump's targets; None where it never lands."""
    alone: float | None
    """The best that it could have alone; None where that is not known."""

    @property
    def more(self) -> float | None:
        """What it pays for the others."""
        return paid(self.cost, self.alone)


@dataclass(frozen=True, slots=True)
class PayPanel:
    """One set in the picture of who pays for whom."""

    title: str
    look: Look
    shares: tuple[Share, ...]


@dataclass(frozen=True, slots=True)
class PayPicture:
    """Who pays for whom, a panel a set on one scale."""

    title: str
    subtitle: str
    panels: tuple[PayPanel, ...]
    limit: float
    """How far the axes go; what costs more is cut and named."""
    alt: str


def paying(brief: Brief, result: SearchResult) -> PayPicture | None:
    """Return what each jump costs in each set, against the best that it could have alone."""
    panels = []
    for one in shown(result):
        cost = one.verdict.cost
        shares = tuple(
            Share(jump.name, found.cost, result.alone.get(jump.name))
            for jump, found in zip(brief.jumps, one.verdict.jumps, strict=True)
            if jump.targets
        )
        name = style.shorten(one.name)
        title = f"{name}: " + ("no cost" if cost is None else f"cost {cost:.3g}")
        panels.append(PayPanel(title, one.look, shares))
    if not panels or not panels[0].shares:
        return None
    rows = shown(result)
    first = best_of(result)
    best = next((k for k, one in enumerate(rows) if first is not None and one.verdict is first.verdict), 0)
    name = style.shorten(rows[best].name)
    # What is proposed sets the scale; today and what people brought may lie far beyond.
    proposed = range(len(rows) - max(1, len(result.shortlist)), len(rows))
    costs = [s.cost for k in proposed for s in panels[k].shares if s.cost is not None]
    limit = 1.35 * max([0.1, *costs, *result.alone.values()])
    title = _pay_title(name, panels[best])
    subtitle = "Cost of each jump's own targets in each set, in tolerances"
    if result.alone:
        subtitle += "; ring: the best that it could have alone; number: what it pays for the others"
    words = [
        f"{panel.title}: "
        + ", ".join(f"{s.jump} {_number(s.cost)} (pays {_number(s.more)})" for s in panel.shares)
        for panel in panels
    ]
    return PayPicture(title, subtitle, tuple(panels), limit, f"{title}. {'. '.join(words)}.")


def _number(value: float | None) -> str:
    return "nothing known" if value is None else f"{value:.3g}"


def _pay_title(name: str, panel: PayPanel) -> str:
    """Return who pays most in one set."""
    known = [(share.more, share.jump) for share in panel.shares if share.more is not None]
    if not known:
        dear = max(panel.shares, key=lambda share: -1.0 if share.cost is None else share.cost)
        return f"With {name} {dear.jump} is farthest from what was wanted"
    more, jump = max(known)
    if more < 0.005:
        return f"With {name} no jump pays for the others"
    return f"With {name} {jump} pays most for sharing: {more:.2f} tolerances more than alone"
