"""The closed form against the kernel, an independent twin, exact formulas and printed cases."""

from __future__ import annotations

import math
from fractions import Fraction
from itertools import product

import numpy as np
import pytest

from designer.motion import closed_form as module
from designer.motion.closed_form import closed_form, has_closed_form
from designer.motion.jumps import Jumps, Launches, Status
from designer.motion.rule import Integrator, LandingTest, Mode, Place, PositionRounding, Rounding, Rule
from designer.motion.simulate import simulate
from tests.reference import trade_case
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
C = {Integrator.EXPLICIT: -1, Integrator.SEMI_IMPLICIT: 1, Integrator.AVERAGE: 0}


def launches_of(
    gravity: object, launch_speed: object, step: object, grain: object = 0.0, fall: object = 1.0
) -> Launches:
    six = (gravity, launch_speed, step, grain, fall, np.inf)
    return Launches(*(np.asarray(a, dtype=np.float64) for a in six))


def random_launches(seed: int, size: int, tidy: bool) -> Launches:
    dice = np.random.default_rng(seed)
    if tidy:
        gravity = dice.integers(20, 800, size) * 5.0
        speed = dice.integers(1, 160, size) * 5.0
        step = np.where(dice.random(size) < 0.7, dice.integers(3, 50, size) / 1000, 1 / dice.integers(20, 300, size))
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


def disagreements(rule: Rule, launches: Launches, level: float, found: Jumps, flagged: np.ndarray) -> list[str]:
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


@pytest.mark.parametrize("tolerance", [0.0, 0.25])
def test_agrees_with_the_kernel_at_other_tolerances(tolerance: float) -> None:
    wrong: list[str] = []
    for i, (integrator, mode) in enumerate(product(Integrator, Mode)):
        rule = Rule(integrator, Rounding(mode), contact_tolerance=tolerance)
        launches = random_launches(7000 + i, 100, True)
        for level in (0.0, 5e-7, 0.1, 30.0, -7.0):
            found, flagged = closed_form(rule, launches, level)
            wrong += disagreements(rule, launches, level, found, flagged)
    assert not wrong, wrong[:5]


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
    """SEARCH, 1: about 2 % (nearest) and 5 % (directed) of a grid of fives lie on a flip."""
    gravity, speed = np.arange(200.0, 2001.0, 5.0)[:, None, None], np.arange(100.0, 601.0, 25.0)[:, None]
    step = np.array([3, 4, 7, 8, 11, 14, 17, 33]) / 1000.0
    rule = Rule(integrator, Rounding(mode, Place.BEFORE_MOVE), landing_test=LandingTest.END_OF_STEP)
    for grain, most in ((0.0, 0.03), (0.125, 0.30), (0.25, 0.16), (0.5, 0.09), (1.0, 0.06)):
        _, flagged = closed_form(rule, launches_of(gravity, speed, step, grain))
        assert flagged.shape == (361, 21, 8)
        assert flagged.mean() < most, (grain, flagged.mean())
        if grain == 0.0:
            continue
        exact = np.array([[Fraction(int(g)) * m / 1000 / Fraction(grain) % 1 for m in (3, 4, 7, 8, 11, 14, 17, 33)] for g in gravity[:, 0, 0]])
        on_flip = exact == (Fraction(1, 2) if mode.is_nearest else 0)
        assert np.all(flagged[on_flip[:, None, :].repeat(21, axis=1)])


def exact_jump(c: int, v0: Fraction, g: Fraction, h: Fraction) -> tuple[int, Fraction, int]:
    """Return apex step, apex and the first n ≥ 1 with y ≤ 0 by CHECKS' table (derived there, exact)."""
    r = v0 / (g * h)
    top = {-1: math.ceil(r), 1: max(0, math.ceil(r - 1)), 0: max(0, math.ceil(r - Fraction(1, 2)))}[c]
    landing = {-1: math.ceil(2 * r + 1), 1: max(1, math.ceil(2 * r - 1)), 0: math.ceil(2 * r)}[c]
    w = v0 - c * g * h / 2
    apex = w * w / (2 * g) - (g * h * h / 2) * (top - w / (g * h)) ** 2
    return top, apex, landing


@pytest.mark.parametrize("integrator", Integrator)
def test_stepped_formulas_without_rounding(integrator: Integrator) -> None:
    """n*, apex and landing of the stepped parabola (Hairer, Lubich & Wanner, ch. I, from memory; CHECKS, 3)."""
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
"""CHECKS, 3 (exact fractions): v0, g, h → apex step, apex, landing step of each integrator."""


@pytest.mark.parametrize("case", PRINTED)
@pytest.mark.parametrize("integrator", Integrator)
def test_printed_stepped_cases(case: tuple[float, float, float], integrator: Integrator) -> None:
    """Where a step moves by nothing the apex's step is noise's, and flagged; apex and landing hold even so."""
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
    """CHECKS, 3, its table of ties: δ = 6.5, 5.5, 1.5 and 0.5."""
    gravity = np.array([*trade_case.TIES, trade_case.STALLED_TIE_GRAVITY])
    for mode in (Mode.NEAREST_EVEN, Mode.NEAREST_AWAY, Mode.NEAREST_UP):
        rule = Rule(Integrator.AVERAGE, Rounding(mode, Place.BEFORE_MOVE), landing_test=LandingTest.END_OF_STEP)
        assert closed_form(rule, launches_of(gravity, 270.0, 0.008, 1.0))[1].all()
    for mode in (Mode.UP, Mode.TOWARD_ZERO):
        rule = Rule(Integrator.AVERAGE, Rounding(mode, Place.BEFORE_MOVE), landing_test=LandingTest.END_OF_STEP)
        found, flagged = closed_form(rule, launches_of(gravity, 270.0, 0.008, 1.0))
        assert not flagged.any()  # in these modes half a grain is as far from a flip as can be
        for i, table in enumerate(trade_case.TIES.values()):
            apex, airtime = table[mode.value]
            assert float(found.apex[i]) == pytest.approx(apex, abs=1e-9)
            assert int(found.steps[i]) * 8 == airtime
        assert found.status[3] == (Status.HOVERS if mode is Mode.TOWARD_ZERO else Status.NEVER_SLOWS)


def test_launch_convention() -> None:
    """CHECKS, 3: v0 400, g 980, 60 Hz: 78.33 with gravity in the launch step, 85.00 without; differs by v0·h."""
    launches = launches_of(980.0, 400.0, 1 / 60)
    with_gravity = closed_form(Rule(Integrator.SEMI_IMPLICIT), launches)[0].apex
    without = closed_form(Rule(Integrator.SEMI_IMPLICIT, launch_gravity=False), launches)[0].apex
    explicit = closed_form(Rule(Integrator.EXPLICIT), launches)[0].apex
    assert float(with_gravity) == pytest.approx(78.33, abs=0.005)
    assert float(without) == pytest.approx(85.00, abs=0.005)
    assert float(without) == pytest.approx(float(explicit), rel=1e-12)
    assert float(without - with_gravity) == pytest.approx(400.0 / 60.0, rel=1e-12)


@pytest.mark.parametrize(("mode", "rising", "falling"), [("down", 7, 7), ("up", 6, 6), ("toward-zero", 7, 6), ("nearest-even", 6, 6)])
def test_loss_of_a_step_on_the_grain(mode: str, rising: int, falling: int) -> None:
    """CHECKS, 3: down ⌈δ⌉, up ⌊δ⌋, toward zero ⌈δ⌉ rising and ⌊δ⌋ falling; here δ = 6.4, explicit."""
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
    """CHECKS, 3: stalls. Toward zero under one grain a step hovers before the move; nearest under half never slows."""
    toward_zero = Rounding(Mode.TOWARD_ZERO, Place.BEFORE_MOVE)
    hover = closed_form(Rule(Integrator.AVERAGE, toward_zero), launches_of(800.0, 270.0, 0.001, 1.0))
    stall = closed_form(Rule(Integrator.AVERAGE), launches_of(400.0, 270.0, 0.001, 1.0))
    long = closed_form(Rule(Integrator.AVERAGE), launches_of(10.0, 400.0, 0.01, 0.0))
    for (found, flagged), status in ((hover, Status.HOVERS), (stall, Status.NEVER_SLOWS), (long, Status.TOO_LONG)):
        assert not flagged
        assert found.status == status
        assert np.isnan([found.apex, found.fraction, found.landing_velocity]).all()
        assert found.steps == found.apex_step == 0


@pytest.mark.parametrize(("integrator", "seconds"), [("semi-implicit", 6.31), ("average", 12.6)])
def test_sinking_lands(integrator: str, seconds: float) -> None:
    """CHECKS, 3: toward zero at the end of the step sinks: v0 100, g 800, q 1, 1 ms lands after 6.31 and 12.6 s."""
    rule = Rule(integrator, Rounding(Mode.TOWARD_ZERO), landing_test=LandingTest.END_OF_STEP)
    found, flagged = closed_form(rule, launches_of(800.0, 100.0, 0.001, 1.0))
    assert not flagged
    assert int(found.steps) / 1000 == pytest.approx(seconds, abs=0.05 if seconds > 10 else 0.005)


def test_case_to_know() -> None:
    """SEARCH, 14: gravity 1600, launch 620, grain 1, semi-implicit, whole ms; the tie at 1/128 s is flagged."""
    step = np.array([16, 13, 11, 8, 6, 4]) / 1000.0
    found, flagged = closed_form(Rule(Integrator.SEMI_IMPLICIT), launches_of(1600.0, 620.0, step, 1.0))
    printed = [113.5, 115.1, 114.2, 115.9, 113.6, 126.7]
    assert found.apex[~flagged] == pytest.approx(np.array(printed)[~flagged], abs=0.05)
    assert flagged.sum() <= 1
    assert closed_form(Rule(Integrator.SEMI_IMPLICIT), launches_of(1600.0, 620.0, 1 / 128, 1.0))[1]


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
