"""The closed form against exact formulas, computed tables and the trade's case."""

from __future__ import annotations

import math
from fractions import Fraction

import numpy as np
import pytest

from designer.motion.closed_form import closed_form
from designer.motion.jumps import Launches, Status
from designer.motion.rule import Integrator, LandingTest, Mode, Place, Rounding, Rule
from designer.motion.simulate import simulate
from tests.reference import trade_case
from tests.reference.launches import launches_of

C = {Integrator.EXPLICIT: -1, Integrator.SEMI_IMPLICIT: 1, Integrator.AVERAGE: 0}
"""c of y_n = n·h·v0 − g·h²·n(n + c)/2."""


def exact_jump(c: int, v0: Fraction, g: Fraction, h: Fraction) -> tuple[int, Fraction, int]:
    """Return apex step, apex and the first n ≥ 1 with y ≤ 0 of the stepped parabola, exactly."""
    r = v0 / (g * h)
    top = {-1: math.ceil(r), 1: max(0, math.ceil(r - 1)), 0: max(0, math.ceil(r - Fraction(1, 2)))}[c]
    landing = {-1: math.ceil(2 * r + 1), 1: max(1, math.ceil(2 * r - 1)), 0: math.ceil(2 * r)}[c]
    w = v0 - c * g * h / 2
    apex = w * w / (2 * g) - (g * h * h / 2) * (top - w / (g * h)) ** 2
    return top, apex, landing


@pytest.mark.parametrize("integrator", Integrator)
def test_stepped_formulas_without_rounding(integrator: Integrator) -> None:
    """n*, apex, landing of the stepped parabola (Hairer, Lubich & Wanner, ch. I, from memory)."""
    dice = np.random.default_rng(5)
    cases = []
    for _ in range(500):
        v0, g = Fraction(int(dice.integers(1, 900)), 4), Fraction(int(dice.integers(8, 4000)), 4)
        cases.append((v0, g, Fraction(int(dice.integers(1, 40)), 1000)))
    numbers = np.array([[float(x) for x in case] for case in cases])
    rule = Rule(integrator, contact_tolerance=0.0, landing_test=LandingTest.END_OF_STEP)
    found, flagged = closed_form(rule, launches_of(numbers[:, 1], numbers[:, 0], numbers[:, 2]))
    assert flagged.mean() < 0.25  # with no tolerance every exact return to 0 is a doubt
    for i in np.flatnonzero(~flagged & (found.status == Status.LANDS)):
        top, apex, landing = exact_jump(C[integrator], *cases[i])
        assert (found.apex_step[i], found.steps[i]) == (top, landing)
        assert float(found.apex[i]) == pytest.approx(float(apex), rel=1e-12)
    assert np.sum(~flagged & (found.status == Status.LANDS)) > 350


PRINTED = {
    (10.0, 20.0, 1 / 60): ((30, 31 / 12, 61), (29, 29 / 12, 59), (30, 5 / 2, 60)),
    (12.0, 30.0, 1 / 50): ((20, 63 / 25, 41), (19, 57 / 25, 39), (20, 12 / 5, 40)),
    (8.0, 9.81, 1 / 60): (
        (49, 49931 / 15000, 99),
        (48, 15977 / 5000, 97),
        (49, 782873 / 240000, 98),
    ),
}
"""Computed with exact fractions: v0, g, h → apex step, apex, landing step of each integrator."""


@pytest.mark.parametrize("case", PRINTED)
@pytest.mark.parametrize("integrator", Integrator)
def test_printed_stepped_cases(case: tuple[float, float, float], integrator: Integrator) -> None:
    """Where a step moves by nothing the apex's step is flagged; apex and landing hold even so."""
    speed, gravity, step = case
    top, apex, landing = PRINTED[case][list(Integrator).index(integrator)]
    found, flagged = closed_form(Rule(integrator), launches_of(gravity, speed, step))
    assert float(found.apex) == pytest.approx(apex, rel=1e-12)
    assert int(found.steps) == landing
    assert flagged == (gravity != 9.81 and integrator is not Integrator.AVERAGE)
    if not flagged:
        assert int(found.apex_step) == top


def test_trade_case() -> None:
    """Common practice, no source: launch 270, gravity 800, grain 1, steps of 1 … 40 ms."""
    step = np.arange(1, 41) / 1000.0
    launches = launches_of(trade_case.GRAVITY, trade_case.LAUNCH_SPEED, step, trade_case.GRAIN)
    found, flagged = closed_form(Rule(Integrator.AVERAGE), launches)
    assert not flagged.any()
    assert found.apex == pytest.approx(np.array(trade_case.APEX_BY_MS), abs=1e-9)
    for table, rounding, digits in (
        (trade_case.BEFORE_MOVE_APEX, Rounding(at=Place.BEFORE_MOVE), 1e-9),
        (trade_case.TOWARD_ZERO_APEX, Rounding(Mode.TOWARD_ZERO), 5e-4),
    ):
        found, flagged = closed_form(Rule(Integrator.AVERAGE, rounding), launches)
        for ms, apex in table.items():
            assert flagged[ms - 1] or float(found.apex[ms - 1]) == pytest.approx(apex, abs=digits)
        assert flagged[[ms - 1 for ms in table]].sum() <= 1


def test_ties_are_flagged() -> None:
    """The trade case at δ = 6.5, 5.5, 1.5 and 0.5 (common practice, no source; computed with fractions)."""
    gravity = np.array([*trade_case.TIES, trade_case.STALLED_TIE_GRAVITY])
    for mode in (Mode.NEAREST_EVEN, Mode.NEAREST_AWAY, Mode.NEAREST_UP):
        rule = Rule(
            Integrator.AVERAGE, Rounding(mode, Place.BEFORE_MOVE), landing_test=LandingTest.END_OF_STEP
        )
        assert closed_form(rule, launches_of(gravity, 270.0, 0.008, 1.0))[1].all()
    for mode in (Mode.UP, Mode.TOWARD_ZERO):
        rule = Rule(
            Integrator.AVERAGE, Rounding(mode, Place.BEFORE_MOVE), landing_test=LandingTest.END_OF_STEP
        )
        found, flagged = closed_form(rule, launches_of(gravity, 270.0, 0.008, 1.0))
        assert not flagged.any()  # in these modes half a grain is as far from a flip as can be
        for i, table in enumerate(trade_case.TIES.values()):
            apex, airtime = table[mode.value]
            assert float(found.apex[i]) == pytest.approx(apex, abs=1e-9)
            assert int(found.steps[i]) * 8 == airtime
        assert found.status[3] == (Status.HOVERS if mode is Mode.TOWARD_ZERO else Status.NEVER_SLOWS)


def test_launch_convention() -> None:
    """Computed: v0 400, g 980, 60 Hz: 78.33 with gravity in the launch step, 85.00 without: v0·h apart."""
    launches = launches_of(980.0, 400.0, 1 / 60)
    with_gravity = closed_form(Rule(Integrator.SEMI_IMPLICIT), launches)[0].apex
    without = closed_form(Rule(Integrator.SEMI_IMPLICIT, launch_gravity=False), launches)[0].apex
    explicit = closed_form(Rule(Integrator.EXPLICIT), launches)[0].apex
    assert float(with_gravity) == pytest.approx(78.33, abs=0.005)
    assert float(without) == pytest.approx(85.00, abs=0.005)
    assert float(without) == pytest.approx(float(explicit), rel=1e-12)
    assert float(without - with_gravity) == pytest.approx(400.0 / 60.0, rel=1e-12)


@pytest.mark.parametrize(
    ("mode", "rising", "falling"),
    [("down", 7, 7), ("up", 6, 6), ("toward-zero", 7, 6), ("nearest-even", 6, 6)],
)
def test_loss_of_a_step_on_the_grain(mode: str, rising: int, falling: int) -> None:
    """Derived: down ⌈δ⌉, up ⌊δ⌋, toward zero ⌈δ⌉ rising and ⌊δ⌋ falling; here δ = 6.4, explicit."""
    rule = Rule(Integrator.EXPLICIT, Rounding(mode), landing_test=LandingTest.END_OF_STEP)
    found, flagged = closed_form(rule, launches_of(800.0, 272.0, 0.008, 1.0))
    assert not flagged
    v, y, heights = 272, 0, [0]
    while y > 0 or len(heights) == 1 or heights[-1] > heights[-2]:
        y, v = y + v, v - (rising if v - 6.4 >= 0 else falling)
        heights.append(y)
    assert float(found.apex) == pytest.approx(max(heights) * 0.008, rel=1e-12)
    assert (int(found.steps), float(found.landing_velocity)) == (len(heights) - 1, float(v))


def test_jumps_that_never_land() -> None:
    """Derived: toward zero with δ < 1 hovers before the move; nearest with δ < ½ never slows."""
    toward_zero = Rounding(Mode.TOWARD_ZERO, Place.BEFORE_MOVE)
    hover = closed_form(Rule(Integrator.AVERAGE, toward_zero), launches_of(800.0, 270.0, 0.001, 1.0))
    stall = closed_form(Rule(Integrator.AVERAGE), launches_of(400.0, 270.0, 0.001, 1.0))
    long = closed_form(Rule(Integrator.AVERAGE), launches_of(10.0, 400.0, 0.01, 0.0))
    for (found, flagged), status in (
        (hover, Status.HOVERS),
        (stall, Status.NEVER_SLOWS),
        (long, Status.TOO_LONG),
    ):
        assert not flagged
        assert found.status == status
        assert np.isnan([found.apex, found.fraction, found.landing_velocity]).all()
        assert found.steps == found.apex_step == 0


@pytest.mark.parametrize(("integrator", "seconds"), [("semi-implicit", 6.31), ("average", 12.6)])
def test_sinking_lands(integrator: str, seconds: float) -> None:
    """Computed: toward zero at the end of the step sinks: v0 100, g 800, q 1, 1 ms: 6.31 and 12.6 s."""
    rule = Rule(integrator, Rounding(Mode.TOWARD_ZERO), landing_test=LandingTest.END_OF_STEP)
    found, flagged = closed_form(rule, launches_of(800.0, 100.0, 0.001, 1.0))
    assert not flagged
    assert int(found.steps) / 1000 == pytest.approx(seconds, abs=0.05 if seconds > 10 else 0.005)


def test_case_to_know() -> None:
    """Computed: gravity 1600, launch 620, grain 1, semi-implicit, whole ms; a tie at 1/128 s."""
    step = np.array([16, 13, 11, 8, 6, 4]) / 1000.0
    found, flagged = closed_form(Rule(Integrator.SEMI_IMPLICIT), launches_of(1600.0, 620.0, step, 1.0))
    printed = [113.5, 115.1, 114.2, 115.9, 113.6, 126.7]
    assert found.apex[~flagged] == pytest.approx(np.array(printed)[~flagged], abs=0.05)
    assert flagged.sum() <= 1
    assert closed_form(Rule(Integrator.SEMI_IMPLICIT), launches_of(1600.0, 620.0, 1 / 128, 1.0))[1]


@pytest.mark.parametrize("tolerance", [0.0, 1e-3, 1.0])
def test_a_fall_from_the_very_height_of_landing_is_left_to_the_kernel(tolerance: float) -> None:
    """Apex 50 exactly (v²/2g), level 50 − tolerance: the fall starts where it would have landed."""
    rule = Rule(Integrator.AVERAGE, Rounding(at=Place.BEFORE_MOVE), contact_tolerance=tolerance)
    many = Launches(1600.0, 400.0, 0.01, np.array([0.0, 1.0]), np.array([2.0, 1.0]), np.inf)
    found, flagged = closed_form(rule, many, 50.0 - tolerance)
    stepped = simulate(rule, many, 50.0 - tolerance)
    assert (flagged | (found.status == stepped.status)).all()
    assert (flagged | (found.steps == stepped.steps)).all()


def test_doubt_before_the_terminal_speed_is_not_forgotten() -> None:
    rule = Rule(
        Integrator.SEMI_IMPLICIT,
        Rounding(Mode.DOWN, Place.BEFORE_MOVE),
        launch_gravity=False,
        contact_tolerance=0.0,
    )
    one = Launches(11.15, 3.15, 0.025, 1.0, 1.5573784124192578, 2.5)
    found, flagged = closed_form(rule, one)
    assert flagged or found.steps == simulate(rule, one).steps
