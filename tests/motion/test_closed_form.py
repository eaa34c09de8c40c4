"""The closed form against the kernel and an independent twin, and what it leaves to the kernel."""

from __future__ import annotations

import math
from dataclasses import replace
from fractions import Fraction
from itertools import product

import numpy as np
import pytest

from designer.motion import closed_form as module
from designer.motion.closed_form import closed_form, has_closed_form
from designer.motion.jumps import Jumps, Launches, Status
from designer.motion.rule import Integrator, LandingTest, Mode, Place, PositionRounding, Rounding, Rule
from designer.motion.simulate import simulate
from tests.reference.launches import launches_of
from tests.reference.twin import TwinRule, jump

RULES = [
    Rule(integrator, Rounding(mode, place), landing_test=landing, launch_gravity=gravity)
    for integrator, mode, place, landing, gravity in product(
        Integrator, Mode, Place, LandingTest, (True, False)
    )
]
LAUNCHES = 160
"""For each rule: 144 rules make 23,040 jumps."""
GRAINS = np.array([0.0, 0.0, 1.0, 1.0, 2.0, 3.0, 10.0, 0.5, 0.25, 0.125, 2.0**-8, 2.0**-16])


def random_launches(seed: int, size: int, tidy: bool) -> Launches:
    dice = np.random.default_rng(seed)
    if tidy:
        gravity = dice.integers(20, 800, size) * 5.0
        speed = dice.integers(1, 160, size) * 5.0
        step = np.where(
            dice.random(size) < 0.7, dice.integers(3, 50, size) / 1000, 1 / dice.integers(20, 300, size)
        )
    else:
        gravity = np.exp(dice.uniform(np.log(20.0), np.log(5000.0), size))
        speed = np.exp(dice.uniform(0.0, np.log(1000.0), size))
        step = np.exp(dice.uniform(np.log(0.003), np.log(0.06), size))
    grain = dice.choice(GRAINS, size)
    snapped = np.maximum(np.round(speed / np.where(grain > 0.0, grain, 1.0)), 1.0) * grain
    speed = np.where((grain > 0.0) & (dice.random(size) < 0.6), snapped, speed)
    speed = np.where(dice.random(size) < 0.02, -speed, speed)
    fall = np.where(dice.random(size) < 0.5, 1.0, dice.choice([0.5, 1.5, 2.0, 2.3, 3.0, 0.0], size))
    terminal = np.where(dice.random(size) < 0.5, np.inf, dice.choice([60.0, 200.0, 300.5, 411.3], size))
    return Launches(gravity, speed, step, grain, fall, terminal)


def disagreements(
    rule: Rule, launches: Launches, level: float, found: Jumps, flagged: np.ndarray
) -> list[str]:
    """Return what differs from the kernel among jumps that are not flagged."""
    kernel = simulate(rule, launches, level, compiled=True)
    lands = kernel.status == Status.LANDS
    same = found.status == kernel.status
    same &= (found.steps == kernel.steps) & (found.apex_step == kernel.apex_step)
    for name in ("apex", "landing_velocity"):
        ours, theirs = getattr(found, name), getattr(kernel, name)
        same &= np.isclose(ours, theirs, rtol=1e-9, atol=1e-13, equal_nan=True)
    same &= np.isclose(found.fraction, kernel.fraction, rtol=0.0, atol=1e-9, equal_nan=True)
    wrong = np.flatnonzero(~same & ~flagged)
    assert np.array_equal(np.isnan(found.apex[~flagged]), ~lands[~flagged]) or wrong.size
    return [f"{rule} level {level}: {[float(c[i]) for c in launches.broadcast()]}" for i in wrong]


@pytest.mark.parametrize("tidy", [True, False])
def test_agrees_with_the_kernel_wherever_it_is_not_flagged(tidy: bool) -> None:
    wrong: list[str] = []
    kept = dict.fromkeys(Status, 0)
    jumps = flags = 0
    levels = (0.0, -40.0, 0.0, 25.0, -400.0, 0.0, 2.5, -0.5, 110.0)
    for i, rule in enumerate(RULES):
        launches = random_launches(1000 + i + 500 * tidy, LAUNCHES, tidy)
        level = levels[i % len(levels)]
        found, flagged = closed_form(rule, launches, level)
        wrong += disagreements(rule, launches, level, found, flagged)
        jumps += flagged.size
        flags += int(flagged.sum())
        for status in Status:
            kept[status] += int(np.sum(found.status[~flagged] == status))
    assert not wrong, f"{len(wrong)} of {jumps}: {wrong[:5]}"
    assert jumps > 20_000
    # A closed form that gave up everywhere would pass: it must have decided nearly all, of every kind.
    assert flags < 0.09 * jumps
    assert min(kept.values()) > 100, kept


def corner_launches(kind: str, seed: int, size: int) -> Launches:
    """Return launches that crowd one corner of the rule."""
    dice = np.random.default_rng(seed)
    grain = dice.choice([0.125, 1.0, 4.0], size)
    step = np.where(
        dice.random(size) < 0.5, dice.integers(2, 40, size) / 1000, 1 / dice.integers(20, 400, size)
    )
    grains = dice.integers(1, 12, size) + dice.uniform(0.05, 0.95, size)
    fall = dice.choice([1.0, 1.0, 0.5, 2.0], size)
    steps = dice.integers(1, 30, size)
    terminal = np.full(size, np.inf)
    if kind == "whole":  # gravity on the grain: steps that move by nothing, velocities of exactly zero
        grains = dice.integers(1, 12, size).astype(float)
    elif kind == "terminal":  # a limit of a few grains
        grains = dice.uniform(0.02, 2.5, size)
        terminal = dice.choice([0.3, 0.5, 0.9, 1.0, 1.5, 2.2, 3.0, 7.5], size) * grain
    elif kind == "limit":  # a limit that is met exactly, up to noise
        terminal = (dice.integers(0, 9, size) + fall * grains) * grain
    elif kind == "low":  # over after a step or two, some back at 0 exactly
        steps = dice.integers(1, 7, size) / 2.0
    elif kind == "long":  # still rising when the longest flight is over
        step = dice.choice([0.05, 0.04, 1 / 30], size)
        steps = dice.integers(500, 1500, size)
    loss = grains * grain
    speed = np.maximum(np.floor(steps * loss / grain) * grain, grain)
    speed = np.where(dice.random(size) < 0.2, speed + 0.37 * grain, speed)
    smooth = dice.random(size) < 0.3
    speed = np.where(smooth, steps * loss, speed)
    return Launches(loss / step, speed, step, np.where(smooth, 0.0, grain), fall, terminal)


@pytest.mark.parametrize("kind", ["whole", "terminal", "limit", "low", "long"])
def test_agrees_with_the_kernel_in_corners(kind: str) -> None:
    wrong: list[str] = []
    decided = jumps = 0
    for i, rule in enumerate(RULES):
        if kind == "low":
            rule = replace(rule, contact_tolerance=0.0)  # noqa: PLW2901
        launches = corner_launches(kind, 3000 + i, 60)
        height = float(launches.launch_speed[0] ** 2 / (2.0 * launches.gravity[0]))
        level = (0.0, 0.5 * height, -height)[i % 3]
        found, flagged = closed_form(rule, launches, level)
        wrong += disagreements(rule, launches, level, found, flagged)
        decided += int(np.sum(~flagged))
        jumps += flagged.size
    assert not wrong, f"{len(wrong)}: {wrong[:4]}"
    assert decided > 0.25 * jumps


@pytest.mark.parametrize("tolerance", [0.0, 0.25, 20.0])
def test_agrees_with_the_kernel_at_other_tolerances(tolerance: float) -> None:
    """Up to one in which the whole jump lies, so that the first step down lands."""
    wrong: list[str] = []
    for i, (integrator, mode) in enumerate(product(Integrator, Mode)):
        landing = LandingTest.SWEPT if i % 2 else LandingTest.END_OF_STEP
        rule = Rule(integrator, Rounding(mode), landing_test=landing, contact_tolerance=tolerance)
        launches = random_launches(7000 + i, 100, True)
        for level in (0.0, 5e-7, 0.1, 30.0, -7.0):
            found, flagged = closed_form(rule, launches, level)
            wrong += disagreements(rule, launches, level, found, flagged)
    assert not wrong, wrong[:5]


@pytest.mark.parametrize("mode", Mode)
def test_next_to_a_flip_is_flagged(mode: Mode) -> None:
    """A billionth of a grain is left to the kernel; a millionth is not."""
    rule = Rule("average", Rounding(mode), landing_test=LandingTest.END_OF_STEP)
    grains = 6.5 if mode.is_nearest else 6.0
    for off, doubtful in ((5e-10, True), (-5e-10, True), (1e-6, False), (-1e-6, False)):
        _, flagged = closed_form(rule, launches_of((grains + off) / 0.008, 270.0, 0.008, 1.0))
        assert flagged == doubtful


def test_agrees_with_a_plain_twin() -> None:
    """The twin shares no code with designer/."""
    checked = 0
    for i, rule in enumerate(RULES[::3]):
        launches = random_launches(9000 + i, 12, bool(i % 2))
        level = (0.0, -30.0, 20.0)[i % 3]
        words = TwinRule(
            rule.integrator.value,
            rule.rounding.mode.value,
            rule.rounding.at.value,
            landing_test=rule.landing_test.value,
            launch_gravity=rule.launch_gravity,
        )
        found, flagged = closed_form(rule, launches, level)
        for k in np.flatnonzero(~flagged):
            g, v, h, q, fall, terminal = (float(column[k]) for column in launches.broadcast())
            twin = jump(words, g, v, h, grain=q, fall_factor=fall, terminal_speed=terminal, level=level)
            assert Status(int(found.status[k])).text == twin.status, (rule, g, v, h, q, fall, terminal)
            if twin.status == "lands":
                assert (found.steps[k], found.apex_step[k]) == (twin.steps, twin.apex_step)
                assert float(found.apex[k]) == pytest.approx(twin.apex, rel=1e-9, abs=1e-13)
                assert float(found.fraction[k]) == pytest.approx(twin.fraction, abs=1e-9)
                assert float(found.landing_velocity[k]) == pytest.approx(twin.landing_velocity, rel=1e-9)
            checked += 1
    assert checked > 450


@pytest.mark.parametrize("mode", Mode)
@pytest.mark.parametrize("integrator", Integrator)
def test_share_that_is_flagged_on_a_tidy_grid(integrator: Integrator, mode: Mode) -> None:
    """At most 5 % of a grid of fives (0.125 in directed modes; counted), and every jump on a flip."""
    gravity, speed = np.arange(200.0, 2001.0, 5.0)[:, None, None], np.arange(100.0, 601.0, 25.0)[:, None]
    step = np.array([3, 4, 7, 8, 11, 14, 17, 33]) / 1000.0
    rule = Rule(integrator, Rounding(mode, Place.BEFORE_MOVE), landing_test=LandingTest.END_OF_STEP)
    for grain, most in ((0.0, 0.02), (0.125, 0.05), (0.25, 0.035), (0.5, 0.025), (1.0, 0.02)):
        _, flagged = closed_form(rule, launches_of(gravity, speed, step, grain))
        assert flagged.shape == (361, 21, 8)
        assert flagged.mean() < most, (grain, flagged.mean())
        if grain == 0.0:
            continue
        exact = np.array(
            [
                [Fraction(int(g)) * m / 1000 / Fraction(grain) % 1 for m in (3, 4, 7, 8, 11, 14, 17, 33)]
                for g in gravity[:, 0, 0]
            ]
        )
        on_flip = exact == (Fraction(1, 2) if mode.is_nearest else 0)
        assert np.all(flagged[on_flip[:, None, :].repeat(21, axis=1)])


def test_rules_and_grains_with_a_closed_form() -> None:
    grains = np.array([0.0, 1.0, 3.0, 0.5, 2.0**-16, 0.1, 0.75, 1.5, -1.0, np.nan])
    exact = [True, True, True, True, True, False, False, False, False, False]
    assert has_closed_form(Rule("average"), grains).tolist() == exact
    carried = has_closed_form(Rule("average", Rounding(carry=True)), grains)
    assert carried.tolist() == [True] + [False] * 9
    snapped = Rule("average", position=PositionRounding(0.125))
    assert not has_closed_form(snapped, grains).any()
    for rule, grain in ((Rule("average"), 0.1), (Rule("average", Rounding(carry=True)), 1.0), (snapped, 0.0)):
        assert closed_form(rule, launches_of(800.0, 270.0, 0.008, grain))[1]


def test_launches_without_sense_are_flagged() -> None:
    rule = Rule("semi-implicit")
    sound = {
        "gravity": 800.0,
        "launch_speed": 270.0,
        "step": 0.008,
        "grain": 1.0,
        "fall_factor": 1.0,
        "terminal_speed": np.inf,
    }
    assert not closed_form(rule, Launches(*(np.array([x]) for x in sound.values())))[1].any()
    bad = {
        "gravity": [np.nan, 0.0, -5.0, np.inf],
        "launch_speed": [np.nan, np.inf, -np.inf],
        "step": [np.nan, 0.0, -1.0, 40.0],
        "grain": [np.nan, -1.0, np.inf],
        "fall_factor": [np.nan, -1.0, np.inf],
        "terminal_speed": [np.nan, 0.0, -3.0],
    }
    for name, values in bad.items():
        changed = sound | {name: np.array(values)}
        _, flagged = closed_form(rule, Launches(*(np.asarray(x) for x in changed.values())))
        assert flagged.all(), name


@pytest.mark.parametrize("shape", [(), (1,), (0,), (7,), (5, 3), (2, 3, 4), (3, 1, 50)])
def test_any_shape_and_any_cut_give_the_same(shape: tuple[int, ...], monkeypatch: pytest.MonkeyPatch) -> None:
    size = math.prod(shape)
    flat = random_launches(11, max(size, 1), True)
    columns = [column[:size].reshape(shape) for column in flat.broadcast()]
    whole, flags = closed_form(RULES[7], Launches(*columns), -3.0)
    assert whole.apex.shape == flags.shape == shape
    assert whole.status.dtype == np.int8
    assert whole.steps.dtype == whole.apex_step.dtype == np.int32
    assert (whole.near_apex_steps == -1).all()
    monkeypatch.setattr(module, "CHUNK", 4)
    cut, cut_flags = closed_form(RULES[7], Launches(*columns), -3.0)
    assert np.array_equal(flags, cut_flags)
    for name in ("status", "steps", "apex", "apex_step", "fraction", "landing_velocity"):
        ours, theirs = getattr(whole, name)[~flags], getattr(cut, name)[~flags]
        assert np.array_equal(ours, theirs, equal_nan=ours.dtype.kind == "f"), name


def test_broadcast_columns_give_what_full_ones_give() -> None:
    gravity, speed = np.array([[800.0], [1000.0], [1415.0]]), np.array([[270.0], [300.5], [410.0]])
    step = np.array([0.004, 0.007, 0.0085, 0.016])
    thin = Launches(gravity, speed, step, np.float64(0.5), np.float64(1.5), np.float64(200.0))
    full = Launches(*(np.array(column) for column in thin.broadcast()))
    for rule in RULES[::5]:
        one, other = closed_form(rule, thin, 5.0), closed_form(rule, full, 5.0)
        assert np.array_equal(one[1], other[1])
        assert np.array_equal(one[0].apex, other[0].apex, equal_nan=True)
        assert np.array_equal(one[0].fraction, other[0].fraction, equal_nan=True)


def test_grain_so_fine_that_it_changes_nothing() -> None:
    """A feature switched off equals the base: the limit of ever finer grains is no rounding."""
    speed = np.linspace(101.3, 399.9, 60)
    fine, doubtful = closed_form(Rule("average"), launches_of(973.1, speed, 0.00813, 2.0**-30))
    none, flagged = closed_form(Rule("average"), launches_of(973.1, speed, 0.00813, 0.0))
    sure = ~(doubtful | flagged)
    assert sure.sum() > 30
    assert fine.apex[sure] == pytest.approx(none.apex[sure], rel=1e-7)
    assert np.array_equal(fine.steps[sure], none.steps[sure])
