"""Reach at every whole rate against a known case and against jumps flown one by one."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from designer.analysis.sweep import reach_by_rate
from designer.brief.model import Gap
from designer.motion.jumps import Status
from designer.motion.rule import FrameTime, Integrator, Mode, Place, Rounding, Rule
from designer.objective.judge import judge
from tests.report.samples import PROPOSED, TODAY, courier


def test_the_known_case_comes_out() -> None:
    # Source: the project's search notes §14, "a case to know": gravity 1600, launch 620, grain 1, whole ms.
    sweep = reach_by_rate(courier(), TODAY)
    known = {60: 113.5, 72: 115.1, 90: 114.2, 120: 115.9, 144: 113.6, 240: 126.7}
    for rate, apex in known.items():
        assert sweep.apex[sweep.rate == rate][0] == pytest.approx(apex, abs=0.05)


def test_rates_with_the_same_step_agree() -> None:
    # Source: frame caps in whole milliseconds, SOURCES.md, section 10: 201 to 250 Hz all run at 4 ms.
    sweep = reach_by_rate(courier(), TODAY)
    band = (sweep.rate >= 201) & (sweep.rate <= 250)
    assert set(sweep.step[band]) == {0.004}
    assert len(set(sweep.apex[band])) == 1
    assert sweep.step[sweep.rate == 200][0] == 0.005


def test_it_equals_the_judge_at_listed_rates() -> None:
    brief = courier()
    for constants in (TODAY, *PROPOSED):
        sweep = reach_by_rate(brief, constants)
        for row in judge(brief, constants, bands=False).jumps[0].rates:
            at = sweep.rate == int(row.rate.split()[0])
            # The sweep runs on the closed form, the judge on the kernel: equal but for the last bit.
            assert sweep.apex[at][0] == pytest.approx(row.measures["apex"], rel=1e-12)
            assert sweep.airtime[at][0] == pytest.approx(row.measures["airtime"], rel=1e-12)
            assert sweep.gaps[0.0].max_gap[at][0] == pytest.approx(row.measures["max_gap"], rel=1e-12)
            assert sweep.gaps[0.0].sure_gap[at][0] == pytest.approx(row.measures["sure_gap"], rel=1e-12)


def test_step_up_and_lower_far_side_reach_farther() -> None:
    brief = courier()
    sweep = reach_by_rate(brief, replace(PROPOSED[0], step_up=7.0))
    assert np.array_equal(sweep.step_top, sweep.apex + 7.0)
    assert set(sweep.gaps) == {0.0, -40.0}
    assert (sweep.gaps[-40.0].max_gap > sweep.gaps[0.0].max_gap).all()
    assert (sweep.gaps[-40.0].sure_gap < sweep.gaps[-40.0].max_gap).all()


def test_a_far_side_above_the_apex_is_never_reached() -> None:
    brief = replace(courier(), gaps=(Gap("tower", 50.0, "cross", far_level=500.0),))
    sweep = reach_by_rate(brief, PROPOSED[0])
    assert (sweep.gaps[500.0].max_gap == 0.0).all()
    assert (sweep.gaps[500.0].sure_gap == 0.0).all()


def test_what_never_lands_has_no_numbers() -> None:
    # Source: SOURCES.md, section 3, stalls: toward zero before the move with g·h under a grain hovers.
    rule = Rule(
        Integrator.AVERAGE, Rounding(Mode.TOWARD_ZERO, Place.BEFORE_MOVE), frame_time=FrameTime.WHOLE_MS_DOWN
    )
    brief = replace(courier(), rule=rule)
    constants = replace(TODAY, gravity=800.0, launch_speed=300.0)
    sweep = reach_by_rate(brief, constants)
    fast = sweep.rate > 500
    assert (sweep.status[fast] == Status.HOVERS).all()
    assert np.isnan(sweep.apex[fast]).all()
    assert np.isnan(sweep.gaps[0.0].max_gap[fast]).all()
    assert np.isnan(sweep.gaps[-40.0].max_gap[fast]).all()
    assert not sweep.lands[fast].any()
    assert sweep.lands[~fast].all()


def test_the_range_of_rates_can_be_chosen_and_is_checked() -> None:
    assert reach_by_rate(courier(), TODAY, 50, 60).rate.tolist() == list(range(50, 61))
    with pytest.raises(ValueError, match="1 ≤ low ≤ high"):
        reach_by_rate(courier(), TODAY, 60, 50)
