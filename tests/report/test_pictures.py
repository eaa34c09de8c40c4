"""Pictures: what they say as data, that nothing lies over anything, and the same bytes every time."""

from __future__ import annotations

import itertools
from dataclasses import replace
from pathlib import Path
from xml.etree import ElementTree

import matplotlib
import numpy as np
import pytest
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.text import Text

from designer.brief.model import Brief, Gap, Ledge, Rate, Rates
from designer.objective.judge import judge
from designer.report import build_arcs, build_front, build_reach, build_sensitivity, style
from designer.report.pictures import Picture, make_pictures, plan
from designer.report.shown import View, pair, shown, views
from designer.search.result import Candidate, SearchResult
from tests.report.samples import LONG, PROPOSED, TODAY, bring, clashing, courier, result

NAMES = ["reach-by-rate", "reach-each", "gaps-by-rate", "arcs", "front", "sensitivity"]


def judged(brief: Brief, found: SearchResult) -> SearchResult:
    """The same result with true verdicts, as a search would give."""

    def true(one: Candidate) -> Candidate:
        return replace(one, verdict=judge(brief, one.verdict.constants))

    listed = tuple(true(one) for one in found.shortlist)
    return replace(
        found,
        today=true(found.today) if found.today else None,
        sets=tuple(true(one) for one in found.sets),
        shortlist=listed,
        best=listed[0] if found.best else None,
        nearest=true(found.nearest) if found.nearest else None,
        front=listed,
    )


def drawn_all(brief: Brief, found: SearchResult) -> list[Picture]:
    with matplotlib.rc_context(style.RC):
        return [draw() for draw in plan(brief, found)]


def both(brief: Brief, found: SearchResult) -> list[View]:
    """Today and the first candidate, measured."""
    return pair(views(brief, found), found.shortlist[0])


def crowded() -> Brief:
    """Long names, many features close together, thirty rates."""
    rates = tuple(Rate(f"{hz} Hz", (1000 // hz) / 1000) for hz in (1000 // ms for ms in range(4, 34)))
    ledges = tuple(
        Ledge(LONG[: 28 - i] + f" {i}", 108.0 + i, "stay-out" if i > 12 else "reach", 1.0)
        for i in (0, 1, 2, 16, 17, 30)
    )
    gaps = (
        Gap(LONG, 380.0, "cross", -40.0, 5.0),
        Gap("second", 385.0, "cross", -40.0),
        Gap("never", 520.0, "stay-out"),
    )
    return bring(courier(ledges=ledges, gaps=gaps, rates=Rates(rates), aim_at=rates[12]), LONG, "b")


def beyond(figure: Figure) -> set[int]:
    """Ids of the tick labels outside their axis, which exist but are not drawn."""
    hidden = set()
    for axis in (part for axes in every_axes(figure) for part in (axes.xaxis, axes.yaxis)):
        low, high = sorted(axis.get_view_interval())
        room = 1e-9 * max(1.0, abs(low), abs(high))
        for tick in [*axis.majorTicks, *axis.minorTicks]:
            if not low - room <= tick.get_loc() <= high + room:
                hidden |= {id(tick.label1), id(tick.label2)}
    return hidden


def every_axes(figure: Figure) -> list[Axes]:
    """Axes and the axes inside them."""
    return [one for one in figure.findobj(Axes) if isinstance(one, Axes)]


def overlaps(picture: Picture) -> list[tuple[str, str]]:
    """Pairs of texts whose boxes share more than a hair."""
    figure = picture.figure
    figure.canvas.draw()
    hidden = beyond(figure)
    boxes = []
    for text in figure.findobj(Text):
        if not isinstance(text, Text) or not text.get_visible() or id(text) in hidden:
            continue
        # An annotation's own box may hold an arrow; only its text counts.
        box = Text.get_window_extent(text)
        if text.get_text().strip() and box.width > 1 and box.height > 1:
            boxes.append((text.get_text(), box))
    found = []
    for (name, one), (other, two) in itertools.combinations(boxes, 2):
        wide = min(one.x1, two.x1) - max(one.x0, two.x0)
        tall = min(one.y1, two.y1) - max(one.y0, two.y0)
        if wide > 1.5 and tall > 2.5:
            found.append((name, other))
    return found


def test_the_check_for_overlaps_finds_one() -> None:
    with matplotlib.rc_context(style.RC):
        picture = plan(courier(), judged(courier(), result(courier(), 1)))[0]()
        axes = picture.figure.axes[0]
        axes.text(0.5, 0.5, "one upon", transform=axes.transAxes)
        axes.text(0.51, 0.5, "another", transform=axes.transAxes)
        assert overlaps(picture) == [("one upon", "another")]


@pytest.mark.parametrize("count", [1, 3, 6])
def test_no_text_lies_over_another(count: int) -> None:
    brief = courier()
    with matplotlib.rc_context(style.RC):
        for draw in plan(brief, judged(brief, result(brief, count))):
            picture = draw()
            assert overlaps(picture) == [], picture.name


def test_nor_in_a_crowded_brief() -> None:
    brief = crowded()
    base = result(courier(), 6)
    brought = tuple(Candidate(one.name, "brought", "code", base.shortlist[0].verdict) for one in brief.sets)
    found = judged(brief, replace(base, sets=brought))
    with matplotlib.rc_context(style.RC):
        for draw in plan(brief, found):
            picture = draw()
            assert overlaps(picture) == [], picture.name


def test_files_are_there_whole_and_the_same_every_time(tmp_path: Path) -> None:
    brief = courier()
    found = judged(brief, result(brief, 2))
    first = make_pictures(brief, found, tmp_path / "one")
    second = make_pictures(brief, found, tmp_path / "two")
    assert [path.name for path in first] == [
        f"{name}.{kind}" for name in NAMES for kind in ("png", "svg")
    ] + ["alt.txt"]
    assert sorted(path.name for path in (tmp_path / "one").iterdir()) == sorted(path.name for path in first)
    for one, two in zip(first, second, strict=True):
        assert one.read_bytes() == two.read_bytes(), one.name
    for path in first:
        if path.suffix == ".svg":
            root = ElementTree.fromstring(path.read_text())
            alt = root.find("{http://www.w3.org/2000/svg}desc")
            assert alt is not None
            assert alt.text
            assert alt.text in (tmp_path / "one" / "alt.txt").read_text()
            assert "dc:date" not in path.read_text()
        if path.suffix == ".png":
            assert path.read_bytes().startswith(b"\x89PNG")
            assert b"matplotlib" not in path.read_bytes()[:400]


def test_settings_of_others_are_left_alone(tmp_path: Path) -> None:
    before = dict(matplotlib.rcParams)
    make_pictures(courier(), judged(courier(), result(courier(), 1)), tmp_path)
    assert dict(matplotlib.rcParams) == before


def test_names_with_signs_of_markup_are_drawn_as_they_stand(tmp_path: Path) -> None:
    brief = courier(ledges=(Ledge("a <b> & $x^2$ _c_", 110.0, "reach"), Ledge("看板", 124.0, "stay-out")))
    files = make_pictures(brief, judged(brief, result(brief, 1)), tmp_path)
    for path in files:
        if path.suffix == ".svg":
            ElementTree.fromstring(path.read_text())
    assert "a <b> & $x^2$ _c_" in (tmp_path / "alt.txt").read_text()


def test_an_interrupted_picture_leaves_no_half_file(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    from designer.report import pictures

    def stop(*_: object) -> bytes:
        raise KeyboardInterrupt

    monkeypatch.setattr(pictures, "svg_bytes", stop)
    with pytest.raises(KeyboardInterrupt):
        make_pictures(courier(), judged(courier(), result(courier(), 1)), tmp_path)
    assert [path.name for path in tmp_path.iterdir()] == []


def test_one_candidate_needs_no_panels_and_no_gaps_no_gap_picture() -> None:
    brief = courier(gaps=())
    names = [one.name for one in drawn_all(brief, judged(brief, result(brief, 1)))]
    assert names == ["reach-by-rate", "arcs", "front", "sensitivity"]


def test_without_today_ledges_or_running_there_is_still_something_to_see() -> None:
    brief = courier(ledges=(), gaps=(), today=None)
    still = tuple(replace(one, run_speed=0.0) for one in PROPOSED[:1])
    base = result(courier(), 1)
    listed = (replace(base.shortlist[0], verdict=judge(brief, still[0])),)
    found = replace(base, today=None, shortlist=listed, best=listed[0], front=listed)
    pictures = drawn_all(brief, found)
    assert [one.name for one in pictures] == ["reach-by-rate", "arcs", "front", "sensitivity"]
    arcs = next(one for one in pictures if one.name == "arcs")
    assert arcs.figure.axes[0].get_xlabel() == "time since launch (s)"


def test_nothing_feasible_shows_the_nearest_set() -> None:
    brief = courier()
    found = judged(brief, clashing(brief))
    assert [one.name for one in shown(found)] == ["today", "nearest"]
    assert drawn_all(brief, found)[0].name == "reach-by-rate"
    assert drawn_all(brief, replace(found, nearest=None)) == []


def test_a_set_that_never_lands_is_said_in_the_picture() -> None:
    brief = courier()
    stuck = replace(TODAY, gravity=500.0)  # 500·0.001 is half of a grain: a tie to even that never slows
    found = judged(brief, result(brief, 1))
    found = replace(found, today=replace(found.today, verdict=judge(brief, stuck)))  # type: ignore[type-var]
    data = build_reach.reach(brief, both(brief, found))
    assert any("the jump never lands at 501–1000 Hz" in one for one in data.remarks)
    assert np.isnan(data.threads[0].reach[-1])


def test_breaches_are_where_the_verdict_says() -> None:
    brief = courier()
    found = judged(brief, result(brief, 1))
    data = build_reach.reach(brief, both(brief, found))
    where = np.zeros(len(data.threads[0].rate), dtype=bool)
    for breach in data.breaches:
        if breach.thread == 0 and breach.demand == 1:
            where |= breach.where
    rates = data.threads[0].rate[where]
    # today's billboard: see test_tables; the picture and the table speak of the same rates.
    assert rates.min() == 201
    assert rates.max() == 500
    assert not any(251 <= rate <= 333 for rate in rates)
    inside = [b for b in data.breaches if b.counts]
    assert all(data.threads[b.thread].rate[b.where].max() <= 240 for b in inside)


def test_supported_rates_and_demands_are_always_in_the_range_shown() -> None:
    brief = courier()
    found = judged(brief, result(brief, 6))
    for data in [
        build_reach.reach(brief, both(brief, found)),
        *build_reach.reach_panels(brief, views(brief, found)),
    ]:
        low, high = data.y_range
        for demand in data.demands:
            assert low < demand.bound < high
        for thread in data.threads:
            for rate in data.supported:
                assert low < thread.reach[thread.rate == rate][0] < high


def test_gaps_are_grouped_by_level_and_kind() -> None:
    brief = courier(
        gaps=(
            Gap("alley", 380.0, "cross", -40.0),
            Gap("court", 390.0, "cross", -40.0),
            Gap("river", 500.0, "stay-out"),
        )
    )
    found = judged(brief, result(brief, 1))
    panels = build_reach.gap_reaches(brief, both(brief, found))
    assert [len(one.demands) for one in panels] == [2, 1]
    assert [one.y_label for one in panels] == ["sure_gap (cm)", "max_gap (cm)"]


def test_the_front_marks_what_is_on_target_and_holds_everything_named() -> None:
    brief = courier()
    data = build_front.front(judged(brief, result(brief, 3)))
    assert data is not None
    assert [one.label for one in data.named] == ["today", "A", "B", "C"]
    assert not data.named[0].on_target
    for one in data.named:
        assert data.x.low < one.rate_spread < data.x.high
        assert data.y.low < one.miss < data.y.high


def test_sensitivity_has_a_column_a_measure_and_marks_flips() -> None:
    brief = courier()
    found = judged(brief, result(brief, 1))
    data = build_sensitivity.sensitivity(brief, found.shortlist[0])
    assert data is not None
    assert [name for name, _ in data.columns] == ["apex", "airtime", "max_gap", "miss", "rate spread"]
    assert data.labels[0] == "gravity 1620 → 1630 cm/s² (flip)"
    assert all(len(bars) == len(data.labels) for _, bars in data.columns)


def test_arcs_of_today_lie_under_every_set_on_one_scale() -> None:
    brief = courier()
    panels = build_arcs.arc_panels(brief, views(brief, judged(brief, result(brief, 3))))
    assert len(panels) == 3
    assert len({(one.x_range, one.y_range) for one in panels}) == 1
    assert all(len(one.under) == 6 for one in panels)
    for panel in panels:
        for arc in panel.scene.arcs:
            assert arc.y.max() < panel.y_range[1]
            assert arc.x.max() < panel.x_range[1]
