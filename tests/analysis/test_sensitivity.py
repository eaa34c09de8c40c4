"""One increment: the grid's neighbours, true differences, flips named and never averaged."""

from __future__ import annotations

from dataclasses import replace

import pytest

from designer.analysis.sensitivity import one_increment
from designer.brief.model import Choice, Target
from designer.motion.rule import Rounding
from designer.objective.judge import judge
from tests.report.samples import PROPOSED, TODAY, courier


def smooth(**search: Choice) -> object:
    """The courier without grain in its search, so that nothing flips."""
    brief = courier()
    return replace(brief, search={**(brief.search or {}), "grain": Choice((0.0,)), **search})


def test_neighbours_are_the_grids_own_points() -> None:
    found = one_increment(courier(), PROPOSED[0])
    moves = [(one.constant, one.before, one.after) for one in found.nudges]
    assert moves == [
        ("gravity", 1620.0, 1630.0),
        ("gravity", 1620.0, 1610.0),
        ("launch_speed", 635.0, 640.0),
        ("launch_speed", 635.0, 630.0),
        ("grain", 0.125, 1.0),
        ("grain", 0.125, 0.0),
    ]


def test_at_the_end_of_the_grid_there_is_one_neighbour_and_off_the_grid_two() -> None:
    brief = courier()
    ends = one_increment(brief, replace(PROPOSED[0], gravity=3200.0, launch_speed=1000.0))
    assert [one.after for one in ends.nudges if one.constant == "gravity"] == [3190.0]
    off = one_increment(brief, replace(PROPOSED[0], gravity=1604.0))
    assert [one.after for one in off.nudges if one.constant == "gravity"] == [1610.0, 1600.0]


def test_changes_are_differences_of_judged_sets_in_tolerances() -> None:
    brief = courier()
    found = one_increment(brief, PROPOSED[0])
    up = next(one for one in found.nudges if one.constant == "launch_speed" and one.direction == 1)
    was = judge(brief, PROPOSED[0], bands=False)
    now = judge(brief, replace(PROPOSED[0], launch_speed=640.0), bands=False)
    for index, change in enumerate(up.changes):
        before, after = was.jumps[0].targets[index].value, now.jumps[0].targets[index].value
        assert before is not None
        assert after is not None
        assert change.change == after - before
        assert change.in_tolerances == (after - before) / brief.jumps[0].targets[index].within
    assert up.miss == pytest.approx((now.miss or 0) - (was.miss or 0))
    assert up.spares["ledge billboard"] == pytest.approx(
        (now.ledges[1].spare or 0.0) - (was.ledges[1].spare or 0.0)
    )
    assert set(up.spares) == {"ledge awning", "ledge billboard", "gap alley"}


def test_without_grain_nothing_flips_and_the_slope_is_that_of_the_formula() -> None:
    brief = smooth()
    found = one_increment(brief, replace(PROPOSED[0], grain=0.0))  # type: ignore[arg-type]
    assert not any(one.flip for one in found.nudges)
    up = next(one for one in found.nudges if one.constant == "launch_speed" and one.direction == 1)
    # Continuous: the apex v²/2g grows by v/g for each unit of speed (SOURCES.md, section 1).
    assert up.changes[0].change == pytest.approx(5 * 637.5 / 1620, rel=0.03)


def test_crossing_a_flip_is_named_with_its_rates() -> None:
    brief = courier()
    # 1600·0.016 is 25.6 grains of 1 and becomes 26; 1590·0.016 is 25.44 and becomes 25: a flip at 60 Hz.
    found = one_increment(brief, TODAY)
    down = next(one for one in found.nudges if one.constant == "gravity" and one.direction == -1)
    assert "60 Hz" in down.flips
    assert down.flip
    # 1600·0.004 is 6.4 and 1590·0.004 is 6.36: still 6 grains at 240 Hz.
    assert "240 Hz" not in down.flips
    speed = next(one for one in found.nudges if one.constant == "launch_speed")
    assert not speed.flip


def test_a_carried_remainder_never_flips() -> None:
    brief = courier()
    rule = replace(brief.rule, rounding=Rounding(carry=True))
    found = one_increment(replace(brief, rule=rule), TODAY)
    assert not any(one.flip for one in found.nudges)


def test_constants_without_increments_move_by_one_per_cent() -> None:
    brief = courier()
    ranged = {**(brief.search or {}), "gravity": Choice(None, 800.0, 3200.0)}
    found = one_increment(replace(brief, search=ranged), TODAY)
    moves = [(one.after, one.share) for one in found.nudges if one.constant == "gravity"]
    assert moves == [(1600 * 1.01, True), (1600 * 0.99, True)]


def test_where_nothing_is_searched_everything_moves_by_one_per_cent() -> None:
    found = one_increment(courier(search=None), TODAY)
    assert {one.constant for one in found.nudges} >= {"gravity", "launch_speed", "grain", "run_speed"}
    assert all(one.share for one in found.nudges)
    assert not any(one.constant == "terminal_speed" for one in found.nudges)


def test_fixed_constants_are_left_alone_where_others_are_searched() -> None:
    assert "run_speed" not in {one.constant for one in one_increment(courier(), TODAY).nudges}


def test_a_list_may_hold_no_limit_at_all() -> None:
    brief = courier()
    search = {**(brief.search or {}), "terminal_speed": Choice((500.0, float("inf")))}
    found = one_increment(replace(brief, search=search), TODAY)
    nudge = next(one for one in found.nudges if one.constant == "terminal_speed")
    assert (nudge.direction, nudge.before, nudge.after) == (-1, float("inf"), 500.0)


def test_a_nudge_that_never_lands_has_no_numbers() -> None:
    brief = courier()
    search = {**(brief.search or {}), "grain": Choice((1.0, 60.0))}
    found = one_increment(replace(brief, search=search), TODAY)
    nudge = next(one for one in found.nudges if one.constant == "grain")
    # 1600·0.016 is 25.6, under half of a grain of 60: v never changes (SOURCES.md, section 3, stalls).
    assert not nudge.lands
    assert nudge.miss is None
    assert nudge.changes[0].in_tolerances is None


def test_bounds_change_by_what_counts_at_the_worst_rate() -> None:
    brief = courier()
    jump = replace(brief.jumps[0], targets=(Target("max_gap", 10.0, at_least=400.0),))
    found = one_increment(replace(brief, jumps=(jump,)), PROPOSED[0])
    assert [change.measure for change in found.nudges[0].changes] == ["max_gap"]
