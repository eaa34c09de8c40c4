"""The data of the pictures, apart from any drawing: axes, marks, and what alternatives in text say."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path

import matplotlib
import numpy as np
import pytest

from designer.analysis.sensitivity import Nudge
from designer.brief.model import Brief, Gap, Ledge
from designer.motion.rule import Constants
from designer.objective.judge import judge
from designer.report import build_arcs, build_front, build_reach, style
from designer.report.build_sensitivity import nudge_label
from designer.report.figures import Thread, last_seen, steps
from designer.report.pictures import make_pictures, pixels, plan
from designer.report.results import write_results
from designer.report.shown import View, pair, views
from designer.search.result import Candidate, SearchResult
from tests.report.samples import PROPOSED, TODAY, courier, result, robot, robot_sets


def searched(
    brief: Brief, sets: Sequence[Constants], today: Constants | None = TODAY, feasible: bool = True
) -> SearchResult:
    """A result with true verdicts: candidates A, B …, or the first as the nearest if not feasible."""
    listed = tuple(
        Candidate("ABCDEF"[i], "", "code", judge(brief, constants)) for i, constants in enumerate(sets)
    )
    now = None if today is None else Candidate("today", "", "none", judge(brief, today))
    base = replace(result(courier(), 1), today=now, front=listed)
    if feasible:
        return replace(base, shortlist=listed, best=listed[0], nearest=None)
    nearest = replace(listed[0], label=None)
    return replace(base, shortlist=(), best=None, nearest=nearest, front=(nearest, *listed[1:]))


def robots() -> tuple[Brief, SearchResult, list[View]]:
    today, *sets = robot_sets()
    brief = robot()
    found = searched(brief, sets, today)
    return brief, found, views(brief, found)


def scored(found: SearchResult, *rows: tuple[float, float, float]) -> SearchResult:
    """The result with these (miss, rate spread, violation) for its candidates; the front has them too."""
    listed = tuple(
        replace(c, verdict=replace(c.verdict, miss=m, rate_spread=s, violation=v, feasible=v == 0.0))
        for c, (m, s, v) in zip(found.shortlist, rows, strict=True)
    )
    return replace(found, shortlist=listed, best=listed[0], front=listed, today=None)


def test_in_a_fixed_loop_each_set_has_its_own_rate_marked_and_in_view() -> None:
    brief, found, rows = robots()
    both = pair(rows, found.shortlist[0])
    for data in (build_reach.reach(brief, both), *build_reach.gap_reaches(brief, both)):
        assert [thread.own for thread in data.threads] == [(50.0,), (60.0,)]
        assert [thread.label.split(":")[0] for thread in data.threads] == ["today at 20 ms", "A at 60 Hz"]
        assert data.supported == ()
        assert data.span is None
        for thread in data.threads:
            value = thread.reach[thread.rate == thread.own[0]][0]
            assert data.y_range[0] < value < data.y_range[1]
            # What counts is the own rate alone: nothing is broken there.
        assert all(not breach.counts for breach in data.breaches)
        assert "50 to 50" not in data.title


def test_rates_beyond_the_usual_ones_widen_the_picture() -> None:
    today, slow, fast = robot_sets()
    brief = robot()
    rows = views(brief, searched(brief, [replace(slow, step=1 / 15), replace(fast, step=1 / 1200)], today))
    assert {(int(row.sweep.rate[0]), int(row.sweep.rate[-1])) for row in rows} == {(15, 1200)}
    for row in rows:
        assert row.sweep.rate[0] <= row.used[0] <= row.used[-1] <= row.sweep.rate[-1]


def test_a_label_belongs_to_the_last_point_in_view() -> None:
    reach = np.array([1.0, 2.0, 5.0, 3.0, np.nan, np.nan])
    thread = Thread("A", "A", style.TODAY_LOOK, np.arange(20.0, 26.0), reach)
    assert last_seen(thread, (0.0, 4.0)) == 3
    assert last_seen(thread, (4.0, 6.0)) == 2
    assert last_seen(thread, (7.0, 8.0)) is None


def test_equal_neighbours_share_a_piece_of_line() -> None:
    x, y = steps(np.arange(20.0, 26.0), np.array([1.0, 1.0, 1.0, 2.0, 2.0, 1.0]))
    assert x.tolist() == [19.5, 22.5, 22.5, 24.5, 24.5, 25.5]
    assert y.tolist() == [1.0, 1.0, 2.0, 2.0, 1.0, 1.0]


def test_the_key_names_only_what_is_drawn() -> None:
    brief = courier(ledges=(Ledge("step", 90.0, "reach"),))
    brief = replace(brief, rates=replace(brief.rates, watched=()))
    found = searched(brief, PROPOSED[:1])
    data = build_reach.reach(brief, pair(views(brief, found), found.shortlist[0]))
    assert "triangles: supported rates" in data.subtitle
    for absent in ("hollow", "margin", "hatched", "own rate"):
        assert absent not in data.subtitle


@pytest.mark.parametrize(
    "values",
    [
        [0.0, 0.0],
        [1e-14, 3e-13],
        [5.3e-5, 0.00268, 0.17],
        [6e-5, 0.0248, 5.71],
        [1.3, 1.3001],
        [1.3, 1.3],
        [0.0, 2.0],
        [0.1, 0.99],
        [2.0, 150.0],
        [0.0, 1e6],
        [3e-4, 9e-4],
    ],
)
def test_an_axis_holds_every_value_and_has_plain_numbers(values: list[float]) -> None:
    scale = build_front.scale(values)
    shown = [max(value, build_front.TINY) if scale.log else value for value in values]
    assert all(scale.low < value < scale.high for value in shown)
    assert scale.high - scale.low > 1e-3
    if scale.log:
        assert scale.low > 0.0
        assert 2 <= len(scale.ticks) <= 14
    for value, label in scale.ticks:
        assert scale.low <= value <= scale.high
        assert "e" not in label
    tiny = scale.log and min(values) < build_front.TINY
    assert any(label.startswith("≤") for _, label in scale.ticks) == tiny


def test_the_drawn_axes_have_numbers() -> None:
    base = searched(courier(), PROPOSED[:3])
    for rows in (
        [(0.1, 0.0, 0.0), (0.5, 0.0, 0.0), (0.9, 1e-9, 0.0)],
        [(0.0248, 0.00268, 0.0), (0.105, 5.3e-5, 0.0), (5.0, 0.17, 0.0)],
        [(6e-5, 1.3, 0.0), (5.0, 1.301, 0.0), (2.0, 1.302, 0.0)],
    ):
        found = scored(base, *rows)
        with matplotlib.rc_context(style.RC):
            picture = next(p for p in (draw() for draw in plan(courier(), found)) if p.name == "front")
            picture.figure.canvas.draw()
            axes = picture.figure.axes[0]
            for axis, (low, high) in ((axes.xaxis, axes.get_xlim()), (axes.yaxis, axes.get_ylim())):
                inside = [t for t in axis.get_majorticklabels() if t.get_text()]
                places = [p for p in axis.get_majorticklocs() if low <= p <= high]
                assert len(places) >= 2
                assert all("e" not in text.get_text() for text in inside)
                assert axis.get_offset_text().get_text() == ""


@pytest.mark.parametrize(
    ("rows", "title"),
    [
        (
            [(0.1, 0.0, 0.0), (0.5, 0.0, 0.0)],
            "A is nearest to what was wanted (miss 0.1); none spreads over the rates",
        ),
        (
            [(0.1, 1.3001, 0.0), (0.5, 1.3002, 0.0)],
            "A is nearest to what was wanted (miss 0.1); all spread alike over the rates",
        ),
        (
            [(0.1, 1.5, 0.0), (0.5, 1.2, 0.0)],
            "A is nearest to what was wanted (miss 0.1), B steadiest over the rates (spread 1.2)",
        ),
        (
            [(0.1, 1.2, 0.0), (0.5, 1.5, 0.0)],
            "A is both nearest to what was wanted and steadiest over the rates",
        ),
        ([(0.1, 1.2, 0.0)], "A is nearest to what was wanted (miss 0.1)"),
    ],
)
def test_the_front_claims_no_more_than_the_numbers_show(
    rows: list[tuple[float, float, float]], title: str
) -> None:
    found = scored(searched(courier(), PROPOSED[: len(rows)]), *rows)
    assert build_front.front_title(found) == title
    # A set of the front that does better in one makes it a finding about the candidates only.
    verdict = replace(found.shortlist[0].verdict, miss=0.02, rate_spread=9.0)
    beaten = replace(found, front=(*found.front, Candidate(None, "", "code", verdict)))
    assert build_front.front_title(beaten) == f"Of the candidates, {title}"


def test_where_nothing_is_feasible_the_front_counts_the_violation() -> None:
    brief = courier(ledges=(Ledge("sill", 120.0, "reach"), Ledge("vent", 118.0, "stay-out")))
    found = searched(brief, PROPOSED, feasible=False)
    data = build_front.front(found)
    assert data is not None
    assert data.y_label == "miss + violation (tolerances)"
    near = next(one for one in data.named if one.label == "nearest")
    verdict = found.nearest.verdict  # type: ignore[union-attr]
    assert verdict.miss is not None
    assert verdict.violation is not None
    assert near.miss == pytest.approx(verdict.miss + verdict.violation)
    assert "land" not in data.title
    assert data.title.startswith("No set keeps every demand: the nearest breaks")
    assert data.tint == 0.0
    wanted = sorted(
        (c.verdict.rate_spread, (c.verdict.miss or 0.0) + (c.verdict.violation or 0.0)) for c in found.front
    )
    assert data.front_spread.tolist() == [spread for spread, _ in wanted]
    assert data.front_miss.tolist() == pytest.approx([off for _, off in wanted])


def test_steps_are_told_in_ms_and_constants_with_their_units() -> None:
    def label(constant: str, before: float, after: float, share: bool = False) -> str:
        nudge = Nudge(constant, 1, before, after, share, (), None, None, {}, (), True)
        return nudge_label(nudge, "cm")

    assert label("step", 0.01, 0.011) == "step 10 → 11 ms"
    assert label("step", 1 / 60, 0.02) == "step 16.667 → 20 ms"
    assert label("gravity", 1600.0, 1610.0) == "gravity 1600 → 1610 cm/s²"
    assert label("launch_speed", 620.0, 625.0) == "launch_speed 620 → 625 cm/s"
    assert label("fall_factor", 1.1, 1.2) == "fall_factor 1.1 → 1.2"
    assert label("terminal_speed", 900.0, np.inf) == "terminal_speed 900 cm/s → none"
    assert label("terminal_speed", np.inf, 900.0) == "terminal_speed none → 900 cm/s"
    assert label("gravity", 1600.0, 1616.0, share=True) == "gravity +1 %"


def test_every_enlarged_apex_shows_the_ledges_whole() -> None:
    brief = courier()
    fast = replace(PROPOSED[0], run_speed=1500.0)
    panels = build_arcs.arc_panels(brief, views(brief, searched(brief, [PROPOSED[0], fast])))
    assert panels[0].inset_x != panels[1].inset_x
    for panel in panels:
        for ledge in panel.scene.ledges:
            assert panel.inset_x[0] <= ledge.x_from < ledge.x_to <= panel.inset_x[1]
            assert panel.inset_y[0] < ledge.height < panel.inset_y[1]


def test_of_many_rates_a_few_arcs_are_drawn_with_the_extremes_among_them() -> None:
    supported = tuple(
        replace(courier().rates.supported[0], name=f"{hz} Hz", step=1 / hz) for hz in range(30, 145)
    )
    brief = replace(courier(), rates=replace(courier().rates, supported=supported), aim_at=supported[30])
    (panel,) = build_arcs.arc_panels(brief, views(brief, searched(brief, PROPOSED[:1], today=None)))
    drawn = panel.scene.arcs
    assert len(drawn) <= build_arcs.MOST_ARCS
    assert drawn[0].nominal
    assert f"{len(drawn)} of 115 rates" in panel.subtitle
    apexes = {row.measures["apex"] for row in judge(brief, PROPOSED[0]).jumps[0].rates if row.supported}
    # The highest sample of an arc is the apex, since a jump is highest at the end of a step here.
    assert max(float(arc.y.max()) for arc in drawn) == pytest.approx(max(a for a in apexes if a))
    assert min(float(arc.y.max()) for arc in drawn) == pytest.approx(min(a for a in apexes if a))


def test_the_text_of_the_panels_tells_of_today_once(tmp_path: Path) -> None:
    brief = courier()
    make_pictures(brief, searched(brief, PROPOSED[:3]), tmp_path)
    lines = dict(
        line.split(": ", 1) for line in (tmp_path / "alt.txt").read_text().splitlines() if ": " in line
    )
    assert lines["reach-each"].count("of today") == 1
    assert lines["reach-each"].count("Lines:") == 1


def test_no_picture_has_a_blank_side() -> None:
    wide, two = robot(), courier(gaps=(Gap("alley", 380.0, "cross"), Gap("river", 500.0, "stay-out")))
    today, *sets = robot_sets()
    cases = [
        (wide, searched(wide, sets, today)),
        (two, searched(two, PROPOSED[:1])),
    ]
    for brief, found in cases:
        with matplotlib.rc_context(style.RC):
            for draw in plan(brief, found):
                picture = draw()
                image = pixels(picture, picture.box())
                ink = (image != 255).any(axis=2)
                rows, columns = np.flatnonzero(ink.any(axis=1)), np.flatnonzero(ink.any(axis=0))
                sides = (
                    rows[0],
                    ink.shape[0] - 1 - rows[-1],
                    columns[0],
                    ink.shape[1] - 1 - columns[-1],
                )
                assert max(sides) < 0.5 * style.DPI, (picture.name, sides)


class Heard:
    """Remembers what it is told."""

    def __init__(self) -> None:
        self.said: list[tuple[str, int, int]] = []

    def update(self, stage: str, done: int, total: int) -> None:
        self.said.append((stage, done, total))


def test_drawing_tells_how_far_it_is(tmp_path: Path) -> None:
    brief = courier(gaps=())
    heard = Heard()
    write_results(brief, b"", searched(brief, PROPOSED[:1]), tmp_path, progress=heard)
    assert heard.said == [("Drawing", done, 4) for done in range(5)]


def test_each_set_is_swept_once_for_all_pictures(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    from designer.report import shown

    calls = []
    real = shown.reach_by_rate

    def counted(*args: object) -> object:
        calls.append(args)
        return real(*args)  # type: ignore[arg-type]

    monkeypatch.setattr(shown, "reach_by_rate", counted)
    make_pictures(courier(), searched(courier(), PROPOSED[:2]), tmp_path)
    assert len(calls) == 3
