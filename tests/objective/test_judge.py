"""A verdict says the same as the kernel, the score and the normative text."""

from dataclasses import replace

import numpy as np
import pytest

from designer.brief.model import Gap, Ledge, Loop, Rate, Target
from designer.motion.rule import Constants, Rounding, Rule
from designer.motion.simulate import simulate
from designer.objective.bands import band_names, failing_bands, sweep_rates
from designer.objective.judge import judge, mark
from designer.objective.score import score
from designer.objective.table import Designs, design_tables
from tests.reference.make import brief_of

RULE = Rule("semi-implicit", Rounding("nearest-even", "end"), frame_time="whole-ms-down")
TODAY = Constants(gravity=1600.0, launch_speed=620.0, grain=1.0, run_speed=540.0)
RATES = tuple(
    Rate(f"{hz} Hz", ms / 1000) for hz, ms in [(60, 16), (72, 13), (90, 11), (120, 8), (144, 6), (240, 4)]
)
BRIEF = brief_of(
    Target("apex", within=2.0, aim=120.0),
    Target("airtime", within=0.02, aim=0.76),
    Target("max_gap", within=10.0, at_least=400.0),
    rule=RULE,
    rates=RATES,
    aim_at=RATES[0],
    today=TODAY,
    base=TODAY,
    ledges=(Ledge("awning", 110.0, "reach", 2.0), Ledge("billboard", 124.0, "stay-out", 1.0)),
    gaps=(Gap("alley", 380.0, "cross", -40.0, 5.0), Gap("roof", 100.0, "cross", 60.0)),
)  # fmt: skip


def test_rows_are_the_kernels_own_numbers() -> None:
    jump = judge(BRIEF, TODAY).jumps[0]
    # The printed apexes of the design's known case: 113.5, 115.1, 114.2, 115.9, 113.6, 126.7 (computed there
    # with exact arithmetic).
    apexes = [row.measures["apex"] for row in jump.rates]
    assert [round(apex or 0.0, 1) for apex in apexes] == [113.5, 115.1, 114.2, 115.9, 113.6, 126.7]
    flown = simulate(RULE, Designs.of([TODAY]).launches(np.array([0.016])))
    assert jump.nominal.measures["apex"] == flown.apex[0, 0]
    assert jump.nominal.measures["steps"] == flown.steps[0, 0]
    assert jump.spreads["apex"] == pytest.approx(max(apexes) - min(apexes))


def test_the_verdict_has_the_score_of_the_closed_form() -> None:
    sets = [TODAY, replace(TODAY, gravity=1580.0, launch_speed=625.0), replace(TODAY, grain=0.125)]
    scores = score(BRIEF, design_tables(BRIEF, Designs.of(sets)))
    for i, constants in enumerate(sets):
        verdict = judge(BRIEF, constants, bands=False)
        assert (verdict.miss, verdict.rate_spread, verdict.cost) == (
            scores.miss[i],
            scores.rate_spread[i],
            scores.cost[i],
        )
        assert verdict.violation == scores.violation[i]


def test_spares_are_signed_and_name_the_worst_rate() -> None:
    verdict = judge(BRIEF, TODAY)
    awning, billboard = verdict.ledges
    assert awning.holds
    assert awning.worst_rate == "60 Hz"
    assert awning.spare == pytest.approx(1.5, abs=0.06)
    assert not billboard.holds
    assert billboard.worst_rate == "240 Hz"
    assert billboard.spare == pytest.approx(123.0 - 126.7, abs=0.06)
    assert not verdict.feasible


def test_bands_agree_with_stepping_each_rate() -> None:
    sweep = sweep_rates(BRIEF, TODAY)
    bands, stuck = failing_bands(BRIEF, sweep)
    assert not stuck
    steps = np.array([max(1, 1000 // hz) / 1000 for hz in range(20, 1001)])
    apex = simulate(RULE, Designs.of([TODAY]).launches(steps)).apex[0]
    assert bands[1] == band_names(apex > 123.0 + 1e-9)
    assert bands[0] == band_names(apex < 112.0 - 1e-9)
    # SOURCES.md, section 10: a cap of 201 to 250 Hz is 4 ms, 334 to 500 Hz is 2 ms (computed).
    assert "201–250 Hz" in bands[1]


def test_a_set_that_never_lands_says_so() -> None:
    rule = Rule("average", Rounding("toward-zero", "before-move"))
    brief = replace(BRIEF, rule=rule, rates=replace(BRIEF.rates, supported=(Rate("1 ms", 0.001),)))
    verdict = judge(brief, replace(TODAY, gravity=800.0, launch_speed=270.0))
    assert verdict.jumps[0].rates[0].status == "hovers"
    assert verdict.violation is None
    assert verdict.cost is None
    assert not verdict.feasible
    assert any("hovers at 1 ms" in flag for flag in verdict.flags)


def test_ties_are_flagged() -> None:
    # 1600 · 1/128 s is 12.5 grains: the design's known case of a perfect tie.
    brief = replace(BRIEF, rates=replace(BRIEF.rates, supported=(Rate("128 Hz", 1 / 128),)))
    assert "tie at 128 Hz" in judge(brief, TODAY, bands=False).flags


def test_a_faster_machine_that_jumps_higher_is_a_finding() -> None:
    assert any("faster machines jump higher: 126.7 at 240 Hz" in flag for flag in judge(BRIEF, TODAY).flags)


def test_marks_follow_constants_and_rule() -> None:
    assert mark(TODAY, RULE) == mark(replace(TODAY), RULE)
    assert mark(TODAY, RULE) != mark(replace(TODAY, gravity=1600.1), RULE)
    assert mark(TODAY, RULE) != mark(TODAY, replace(RULE, launch_gravity=False))
    assert len(mark(TODAY, RULE)) == 4


def test_a_fixed_loop_aims_at_the_constants_own_step() -> None:
    brief = replace(BRIEF, loop=Loop.FIXED, aim_at=None)
    verdict = judge(brief, replace(TODAY, step=0.008), bands=False)
    assert verdict.jumps[0].nominal.step == 0.008


def test_step_up_and_edge_allowance_of_the_judged_set_count() -> None:
    plain = judge(BRIEF, TODAY)
    helped = judge(BRIEF, replace(TODAY, step_up=5.0, edge_allowance=7.0))
    assert helped.ledges[0].spare == pytest.approx((plain.ledges[0].spare or 0.0) + 5.0)
    assert helped.gaps[0].spare == pytest.approx((plain.gaps[0].spare or 0.0) + 7.0)
    assert helped.ledges[0].failing != plain.ledges[0].failing


def test_a_flip_margin_that_nothing_bounds_is_the_whole_of_gravity() -> None:
    for target, missed in ((Target("flip_margin", within=1.0, at_least=5.0), False),
                           (Target("flip_margin", within=1.0, aim=5.0), True)):  # fmt: skip
        verdict = judge(brief_of(target, rule=RULE, rates=RATES), replace(TODAY, grain=0.0), bands=False)
        assert verdict.jumps[0].nominal.measures["flip_margin"] is None
        assert verdict.miss == pytest.approx(1595.0 if missed else 0.0)


def test_noise_alone_decides_where_v_comes_to_zero_on_a_step() -> None:
    brief = brief_of(rates=(Rate("10 ms", 0.01),))
    flags = judge(brief, Constants(1000.0, 300.0, fall_factor=2.0), bands=False).flags
    assert any("v comes to 0 after 30 whole steps of 10 ms" in flag for flag in flags)
    assert not any("noise" in flag for flag in judge(brief, Constants(1000.0, 303.0, fall_factor=2.0)).flags)


def test_demands_that_fail_between_the_supported_rates_are_named() -> None:
    # The sample's best set that changes numbers only: fine at every listed rate, not at 5 ms.
    flags = judge(BRIEF, replace(TODAY, gravity=1460.0, launch_speed=595.0)).flags
    assert "between the supported rates billboard fails at 167–200 Hz" in flags


def test_a_far_side_below_that_is_never_reached_is_no_gap_of_nothing() -> None:
    slow = replace(TODAY, gravity=200.0, launch_speed=50.0, grain=0.0, terminal_speed=8.0, run_speed=5.0)
    brief = replace(BRIEF, ledges=(), gaps=(Gap("pit", 10.0, "stay-out", -300.0),))
    assert not judge(brief, slow, bands=False).feasible


def test_band_names_join_neighbours() -> None:
    assert band_names([True, False, True, True, False, True], first=20) == ("20 Hz", "22–23 Hz", "25 Hz")
    assert band_names([False, False]) == ()
