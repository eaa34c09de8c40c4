"""What a grain does to gravity: margins, flips, aligned gravities, against stepping and printed figures."""

from __future__ import annotations

import math
from fractions import Fraction

import numpy as np
import pytest

from designer.motion.grain import (
    aligned_gravities,
    as_fraction,
    effective_gravity_per_step,
    flip_gravities,
    flip_margin,
    flips_near,
    is_tie,
)
from designer.motion.rounding import MODE_CODES, snap
from designer.motion.rule import Mode, Rounding, Rule
from tests.reference.trade_case import TIES

MS = 1e-3
EIGHT = np.array([3, 4, 7, 8, 11, 14, 17, 33]) / 1000.0


def rule_of(mode: Mode | str = Mode.NEAREST_EVEN, **options: bool) -> Rule:
    return Rule("average", Rounding(mode, "before-move", **options))


def loss_by_stepping(mode: Mode, gravity: float, grain: float, step: float, *, falling: bool) -> float:
    """Return how much the third of three steps takes from a velocity, in exact fractions of the inputs."""
    v = -2.0 * grain if falling else 2000.0 * grain
    for _ in range(3):
        before, v = v, snap(v - gravity * step, grain, MODE_CODES[mode])
    return before - v


@pytest.mark.parametrize("mode", Mode)
@pytest.mark.parametrize("falling", [False, True])
def test_effective_gravity_is_what_stepping_does(mode: Mode, falling: bool) -> None:
    rule = rule_of(mode)
    for gravity in range(100, 2001, 35):
        for grain in (0.25, 1.0, 3.0):
            for ms in (1, 4, 8, 16, 33):
                step = ms / 1000.0
                if bool(is_tie(rule, gravity, grain, step)):
                    continue
                acts = effective_gravity_per_step(rule, gravity, grain, step, falling=falling)
                lost = loss_by_stepping(mode, gravity, grain, step, falling=falling)
                assert float(acts) == pytest.approx(lost / step, rel=1e-12, abs=1e-12)


@pytest.mark.parametrize("gravity", TIES)
@pytest.mark.parametrize("mode", ["nearest-even", "nearest-away", "nearest-up"])
@pytest.mark.parametrize("falling", [False, True])
def test_effective_gravity_at_a_tie(gravity: float, mode: str, falling: bool) -> None:
    """δ = 6.5, 5.5 and 1.5 at 8 ms: computed, to even after one step."""
    rule = rule_of(mode)
    assert bool(is_tie(rule, gravity, 1.0, 0.008))
    low = math.floor(gravity * 0.008)
    taken = {"nearest-even": low + low % 2, "nearest-up": low, "nearest-away": low + falling}[mode]
    acts = effective_gravity_per_step(rule, gravity, 1.0, 0.008, falling=falling)
    assert float(acts) == pytest.approx(taken / 0.008, rel=1e-12)
    # 1/128 s makes the same ties exact in binary, so that stepping shows what they do.
    exact = (low + 0.5) * 128.0
    lost = loss_by_stepping(Mode(mode), exact, 1.0, 1 / 128, falling=falling)
    assert lost == taken


def test_effective_gravity_is_within_half_a_grain() -> None:
    """|g_eff − g| ≤ q/(2h) in nearest modes."""
    rng = np.random.default_rng(1)
    gravity, step = rng.uniform(50.0, 3000.0, 2000), rng.uniform(0.001, 0.05, 2000)
    grain = rng.choice([0.125, 0.5, 1.0, 2.0], 2000)
    acts = effective_gravity_per_step(rule_of(), gravity, grain, step)
    assert np.all(np.abs(acts - gravity) <= grain / (2.0 * step) * (1.0 + 1e-12))


def test_directed_modes_take_a_whole_number_as_it_is() -> None:
    for mode in (Mode.DOWN, Mode.UP, Mode.TOWARD_ZERO):
        assert bool(is_tie(rule_of(mode), 1000.0, 1.0, 0.008))
        assert float(effective_gravity_per_step(rule_of(mode), 1000.0, 1.0, 0.008)) == pytest.approx(1000.0)


def test_nothing_flips_without_a_grain_or_with_carry() -> None:
    for rule, grain in ((rule_of(), 0.0), (rule_of(carry=True), 1.0)):
        assert np.isnan(flip_margin(rule, 800.0, grain, 1.0, EIGHT))
        assert not bool(is_tie(rule, 812.5, grain, 0.008))
        assert float(effective_gravity_per_step(rule, 812.5, grain, 0.008)) == 812.5
        assert aligned_gravities(rule, grain, EIGHT, 100.0, 2000.0).size == 0
        assert flip_gravities(rule, grain, EIGHT, 100.0, 2000.0).size == 0
        assert flips_near(rule, 800.0, grain, 0.008, 3).size == 0


def test_flip_margin_by_hand() -> None:
    """8 ms, grain 1, gravity 800: 6.4 grains a step, 0.1 from the flip at 6.5, so 0.1/0.008 = 12.5."""
    assert float(flip_margin(rule_of(), 800.0, 1.0, 1.0, [0.008])) == pytest.approx(12.5)
    assert float(flip_margin(rule_of("down"), 800.0, 1.0, 1.0, [0.008])) == pytest.approx(0.4 / 0.008)
    # Falling at 1.5: 9.6 grains, 0.1 from 9.5; a tenth of a grain is reached by 1.5 times less gravity.
    assert float(flip_margin(rule_of(), 800.0, 1.0, 1.5, [0.008])) == pytest.approx(12.5 / 1.5)
    # 4 ms: 3.2 grains, 0.3 from the flip; 8 ms decides.
    assert float(flip_margin(rule_of(), 800.0, 1.0, 1.0, [0.004, 0.008])) == pytest.approx(12.5)
    assert float(flip_margin(rule_of(), 812.5, 1.0, 1.0, [0.008])) == pytest.approx(0.0, abs=1e-9)


def test_flip_margin_shapes() -> None:
    gravity = np.array([800.0, 810.0, 1000.0])
    grain = np.array([1.0, 0.0, 0.125])
    margin = flip_margin(rule_of(), gravity, grain, 1.0, EIGHT)
    assert margin.shape == (3,)
    assert np.isnan(margin).tolist() == [False, True, False]
    for i in (0, 2):
        assert margin[i] == flip_margin(rule_of(), gravity[i], grain[i], 1.0, EIGHT)
    own_steps = flip_margin(rule_of(), gravity, grain, 1.0, np.tile(EIGHT, (3, 1)))
    assert np.array_equal(own_steps, margin, equal_nan=True)


@pytest.mark.parametrize("mode", Mode)
def test_flip_margin_is_the_distance_to_the_nearest_flip(mode: Mode) -> None:
    rule = rule_of(mode)
    flips = flip_gravities(rule, 0.5, EIGHT, 1.0, 4000.0, fall_factor=1.5)
    for gravity in (333.0, 801.0, 1617.0, 2500.5):
        nearest = np.min(np.abs(flips - gravity))
        assert float(flip_margin(rule, gravity, 0.5, 1.5, EIGHT)) == pytest.approx(
            nearest, rel=1e-9, abs=1e-9
        )
        near = flips_near(rule, gravity, 0.5, 0.008, 4)
        alone = flip_gravities(rule, 0.5, [0.008], 1.0, 4000.0)
        expected = np.sort(np.abs(alone - gravity))[:4]
        assert np.abs(near - gravity) == pytest.approx(expected, rel=1e-9)


@pytest.mark.parametrize("mode", Mode)
def test_effective_gravity_changes_at_flips_and_nowhere_else(mode: Mode) -> None:
    rule, steps = rule_of(mode), [0.004, 0.007]
    flips = flip_gravities(rule, 1.0, steps, 100.0, 900.0)
    between = np.concatenate(([100.0], flips, [900.0]))
    middles = 0.5 * (between[1:] + between[:-1])
    acts = effective_gravity_per_step(rule, middles[:, None], 1.0, np.array(steps))
    assert np.all(np.any(np.diff(acts, axis=0) != 0.0, axis=1))
    rng = np.random.default_rng(3)
    for low, high, here in zip(between[:-1], between[1:], acts, strict=True):
        some = rng.uniform(low + 1e-6 * low, high - 1e-6 * high, 5)
        assert np.all(effective_gravity_per_step(rule, some[:, None], 1.0, np.array(steps)) == here)


def test_flips_are_counted_once() -> None:
    """17 steps and five grains: 4,243 cells of gravity in all (counted by stepping)."""
    ms = sorted({*range(1, 9), 10, 12, 16, 20, 25, 33} | {3, 4, 7, 8, 11, 14, 17, 33})
    steps = [m / 1000.0 for m in ms]
    assert len(steps) == 17
    cells = 1  # without a grain
    for grain in (0.125, 0.25, 0.5, 1.0):
        exact = {
            Fraction(2 * m + 1, 2) * Fraction(grain) * 1000 / step
            for step in ms
            for m in range(int(2000 * step / 1000 / grain) + 2)
        }
        inside = sorted(g for g in exact if 200 <= g <= 2000)
        found = flip_gravities(rule_of(), grain, steps, 200.0, 2000.0)
        assert found == pytest.approx([float(g) for g in inside], rel=1e-12)
        cells += found.size + 1
    assert cells == pytest.approx(4243, abs=5)


def test_aligned_gravities_of_whole_milliseconds() -> None:
    """Computed: steps of 3 … 33 ms: 125, 250, … at an eighth; 1000 and 2000 at one."""
    assert aligned_gravities(rule_of(), 0.125, EIGHT, 100.0, 600.0).tolist() == [125.0, 250.0, 375.0, 500.0]
    assert aligned_gravities(rule_of(), 1.0, EIGHT, 200.0, 2000.0).tolist() == [1000.0, 2000.0]


def test_aligned_gravities_of_whole_rates() -> None:
    """Computed: 60, 72, 90, 120 and 144 Hz: q·lcm = 720 at one, 90 at an eighth."""
    steps = [1 / rate for rate in (60, 72, 90, 120, 144)]
    assert aligned_gravities(rule_of(), 1.0, steps, 100.0, 1500.0).tolist() == [720.0, 1440.0]
    assert aligned_gravities(rule_of(), 0.125, steps, 80.0, 300.0).tolist() == [90.0, 180.0, 270.0]


@pytest.mark.parametrize("mode", Mode)
@pytest.mark.parametrize("steps", [EIGHT, [1 / 60, 1 / 72, 1 / 90], [0.004, 0.0125, 1 / 64]])
def test_aligned_gravities_act_alike_at_every_step(mode: Mode, steps: list[float]) -> None:
    rule = rule_of(mode)
    found = aligned_gravities(rule, 0.5, steps, 50.0, 9000.0)
    assert found.size
    acts = effective_gravity_per_step(rule, found[:, None], 0.5, np.asarray(steps))
    assert np.ptp(acts, axis=1) == pytest.approx(np.zeros(found.size), abs=1e-9)
    margin = flip_margin(rule, found, 0.5, 1.0, steps)
    if mode.is_nearest:
        assert acts[:, 0] == pytest.approx(found, rel=1e-12)
    # Half a grain at the longest step is all that there can be.
    assert margin == pytest.approx(np.full(found.size, 0.5 / (2.0 * max(steps))), rel=1e-6)


def test_aligned_gravities_miss_none() -> None:
    rule, steps = rule_of(), [0.003, 0.004, 0.007]
    whole = [
        gravity
        for gravity in range(1, 6001)
        if all(Fraction(gravity) * Fraction(ms, 1000) % 1 == 0 for ms in (3, 4, 7))
    ]
    assert aligned_gravities(rule, 1.0, steps, 1.0, 6000.0).tolist() == whole


@pytest.mark.parametrize(
    ("step", "exact"),
    [
        (0.008, Fraction(1, 125)),
        (0.033, Fraction(33, 1000)),
        (1 / 60, Fraction(1, 60)),
        (1 / 59.94, Fraction(100, 5994)),
        (1 / 128, Fraction(1, 128)),
        (2.5 * MS, Fraction(1, 400)),
    ],
)
def test_step_is_the_fraction_that_was_meant(step: float, exact: Fraction) -> None:
    assert as_fraction(step) == exact


def test_step_without_a_simple_fraction_stays_itself() -> None:
    step = math.pi / 1000.0
    assert as_fraction(step) == Fraction(step)
