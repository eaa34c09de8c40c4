"""Arcs: the right rates, the right ends, features where they belong."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from designer.analysis.arcs import arcs
from designer.brief.model import Rate
from designer.motion.rule import Integrator, Mode, Place, Rounding, Rule
from designer.objective.judge import judge
from tests.report.samples import PROPOSED, TODAY, courier, rates


def test_one_arc_a_distinct_rate_with_the_nominal_first() -> None:
    scene = arcs(courier(), TODAY)
    assert [arc.rate for arc in scene.arcs] == ["60 Hz", "72 Hz", "90 Hz", "120 Hz", "144 Hz", "240 Hz"]
    assert [arc.nominal for arc in scene.arcs] == [True, False, False, False, False, False]
    apart = arcs(courier(aim_at=Rate("50 Hz", 0.02)), TODAY)
    assert [arc.rate for arc in apart.arcs][:2] == ["50 Hz", "60 Hz"]


def test_arcs_start_at_the_edge_peak_at_the_apex_and_end_at_the_lowest_far_side() -> None:
    brief = courier()
    rows = {row.rate: row for row in judge(brief, PROPOSED[0], bands=False).jumps[0].rates}
    for arc in arcs(brief, PROPOSED[0]).arcs:
        assert (arc.x[0], arc.y[0]) == (0.0, 0.0)
        assert arc.y.max() == rows[arc.rate].measures["apex"]
        assert arc.y[-1] == -40.0
        assert (np.diff(arc.x) > 0.0).all()


def test_without_far_sides_below_they_end_at_the_ground_where_the_gap_is_measured() -> None:
    brief = courier(gaps=())
    rows = {row.rate: row for row in judge(brief, PROPOSED[0], bands=False).jumps[0].rates}
    for arc in arcs(brief, PROPOSED[0]).arcs:
        assert arc.y[-1] == pytest.approx(0.0, abs=1e-6)
        # A jump that is swept lands where the segment crosses the ground: that is max_gap.
        assert arc.x[-1] == pytest.approx(rows[arc.rate].measures["max_gap"], abs=1e-5)


def test_features_stand_at_their_heights_around_the_apex() -> None:
    brief = courier()
    scene = arcs(brief, PROPOSED[0])
    assert [(one.name, one.height) for one in scene.ledges] == [("awning", 110.0), ("billboard", 124.0)]
    nominal = scene.arcs[0]
    middle = nominal.x[int(nominal.y.argmax())]
    for ledge in scene.ledges:
        assert ledge.x_from < middle < ledge.x_to
    assert [(one.name, one.width, one.far_level) for one in scene.gaps] == [("alley", 380.0, -40.0)]
    assert scene.by_distance


def test_standing_still_is_drawn_over_time_and_without_gaps() -> None:
    scene = arcs(courier(), replace(TODAY, run_speed=0.0))
    assert not scene.by_distance
    assert scene.gaps == ()
    assert scene.arcs[0].x[-1] == pytest.approx(0.75, abs=0.02)
    assert scene.arcs[0].y[-1] == pytest.approx(0.0, abs=1e-6)


def test_a_jump_that_never_lands_is_cut_short() -> None:
    rule = Rule(Integrator.AVERAGE, Rounding(Mode.NEAREST_EVEN, Place.BEFORE_MOVE))
    one = (Rate("1000 Hz", 0.001),)
    brief = courier(rule=rule, rates=replace(rates(), supported=one), aim_at=one[0])
    scene = arcs(brief, replace(TODAY, gravity=400.0))
    assert not scene.arcs[0].lands
    assert len(scene.arcs[0].x) <= 201
