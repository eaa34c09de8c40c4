"""The kernel gives the bits of an independent twin, compiled and not, and foresees only what is so."""

from __future__ import annotations

import math
import random
from dataclasses import dataclass
from fractions import Fraction

import numpy as np
import pytest

from designer.motion import kernel
from designer.motion.jumps import Jumps, Launches, Status
from designer.motion.rounding import MODE_CODES
from designer.motion.rule import Integrator, Mode, Place, Rounding, Rule
from designer.motion.simulate import rule_codes, simulate
from tests.reference.random_cases import random_launch, random_rule, words_of
from tests.reference.twin import TwinJump, jump

RULES = 2000
LAUNCHES_PER_RULE = 10


@dataclass(frozen=True)
class Case:
    rule: Rule
    level: float
    rows: list[tuple[float, ...]]
    """gravity, launch_speed, step, grain, fall_factor, terminal_speed"""
    twins: list[TwinJump]


def random_case(dice: random.Random) -> Case:
    rule = random_rule(dice)
    rows = [random_launch(dice) for _ in range(LAUNCHES_PER_RULE)]
    height = rows[0][1] ** 2 / (2.0 * rows[0][0])
    level = dice.choice([0.0, 0.0, 0.0, 5e-7, height * dice.uniform(-1.5, 1.1), -height, 0.5 * height])
    words = words_of(rule)
    twins = [
        jump(words, g, v, h, grain=q, fall_factor=factor, terminal_speed=terminal, level=level)
        for g, v, h, q, factor, terminal in rows
    ]
    return Case(rule, level, rows, twins)


@pytest.fixture(scope="module")
def cases() -> list[Case]:
    dice = random.Random(20)
    return [random_case(dice) for _ in range(RULES)]


def same_bits(a: float, b: float) -> bool:
    return np.float64(a).tobytes() == np.float64(b).tobytes()


def assert_equal(jumps: Jumps, i: int, twin: TwinJump, case: Case) -> None:
    where = (case.rule, case.level, case.rows[i], twin)
    assert Status(int(jumps.status[i])).text == twin.status, where
    if twin.status != "lands":
        assert np.isnan([jumps.apex[i], jumps.fraction[i], jumps.landing_velocity[i]]).all(), where
        assert jumps.steps[i] == jumps.apex_step[i] == jumps.near_apex_steps[i] == 0, where
        return
    counts = (jumps.steps[i], jumps.apex_step[i], jumps.near_apex_steps[i])
    assert counts == (twin.steps, twin.apex_step, twin.near_apex_steps), where
    assert twin.apex is not None
    assert twin.fraction is not None
    assert twin.landing_velocity is not None
    assert same_bits(jumps.apex[i], twin.apex), where
    assert same_bits(jumps.fraction[i], twin.fraction), where
    assert same_bits(jumps.landing_velocity[i], twin.landing_velocity), where


@pytest.mark.parametrize("compiled", [False, True])
def test_same_bits_as_the_twin(cases: list[Case], compiled: bool) -> None:
    for case in cases:
        launches = Launches(*np.array(case.rows).T)
        jumps = simulate(case.rule, launches, case.level, compiled=compiled, count_near_apex=True)
        for i, twin in enumerate(case.twins):
            assert_equal(jumps, i, twin, case)


def test_the_cases_reach_every_corner(cases: list[Case]) -> None:
    """What is compared above is worth comparing: every option, every way to end, many of each."""
    assert sum(len(case.twins) for case in cases) == 20_000
    seen = [twin.status for case in cases for twin in case.twins]
    assert seen.count("lands") > 12_000
    for status in Status:
        assert seen.count(status.text) >= 20, status
    combinations = {(c.rule.integrator, c.rule.rounding) for c in cases}
    assert len(combinations) == len(Integrator) * len(Mode) * len(Place) * 2


def codes(rule: Rule) -> kernel.Codes:
    return rule_codes(rule)


def fly(rule: Rule, gravity: float, speed: float, step: float, grain: float) -> kernel.Outcome:
    return kernel.fly(codes(rule), (gravity, speed, grain, 1.0, math.inf), step, 0.0, False)


@pytest.mark.parametrize("integrator", list(Integrator))
@pytest.mark.parametrize("at", list(Place))
@pytest.mark.parametrize("mode", list(Mode))
@pytest.mark.parametrize("q", [1.0, 0.25])
def test_carried_remainder_loses_nothing(integrator: Integrator, at: Place, mode: Mode, q: float) -> None:
    """SOURCES.md, section 9 (computed): v + e is the unrounded velocity, for ever.

    |e| is at most half a grain to nearest, less than one otherwise. Exact in numbers that binary holds.
    """
    rule = codes(Rule(integrator, Rounding(mode, at, carry=True)))
    gravity, speed, step = 811.0, 270.25, 1 / 128
    numbers = (gravity, speed, q, 1.0, math.inf)
    state = (0.0, speed, 0.0)
    for n in range(1, 400):
        loss = gravity * step
        state = kernel.advance(rule, numbers, step, state, loss)
        _, v, e = state
        assert Fraction(v) + Fraction(e) == Fraction(speed) - n * Fraction(gravity) / 128
        assert abs(e) <= q / 2 if mode.is_nearest else abs(e) < q
        assert v / q == round(v / q)


@pytest.mark.parametrize("at", list(Place))
@pytest.mark.parametrize("integrator", list(Integrator))
@pytest.mark.parametrize("mode", list(Mode))
def test_off_the_grain_the_first_step_differs(integrator: Integrator, at: Place, mode: Mode) -> None:
    """The launch speed is taken as given: the first rounding is that of the first step."""
    rule = codes(Rule(integrator, Rounding(mode, at)))
    numbers = (800.0, 270.4, 1.0, 1.0, math.inf)
    first = kernel.advance(rule, numbers, 0.01, (0.0, 270.4, 0.0), 8.0)
    expected = {Mode.UP: 263.0}.get(mode, 262.0)
    assert first[1] == expected
    assert MODE_CODES[mode] == rule[1]


@pytest.mark.parametrize(
    ("mode", "gravity", "level", "status"),
    [
        (Mode.NEAREST_EVEN, 400.0, 0.0, Status.NEVER_SLOWS),
        (Mode.TOWARD_ZERO, 800.0, 0.0, Status.HOVERS),
        (Mode.DOWN, 800.0, 1e4, Status.OUT_OF_REACH),
    ],
)
def test_what_one_step_proves_is_not_flown_to_the_end(
    monkeypatch: pytest.MonkeyPatch, mode: Mode, gravity: float, level: float, status: Status
) -> None:
    """30,000 steps of 1 ms are left out: at most the 270 grains are lost, then the answer stands."""
    flown = []
    advance = kernel.advance
    monkeypatch.setattr(kernel, "advance", lambda *given: flown.append(1) or advance(*given))
    rule = codes(Rule("average", Rounding(mode, "before-move")))
    outcome = kernel.fly(rule, (gravity, 270.0, 1.0, 1.0, math.inf), 0.001, level, True)
    assert outcome[0] == status
    assert len(flown) <= 272


def test_no_gravity_in_the_first_step_is_no_standstill() -> None:
    """v does not change in the launch step, and yet the jump goes on and lands."""
    outcome = fly(Rule("semi-implicit", launch_gravity=False), 980.0, 400.0, 1 / 60, 0.0)
    assert outcome[0] == Status.LANDS


def test_the_longest_flight() -> None:
    """DEVELOPERS.md, update rule: N = floor(30/h + 0.5)."""
    for step, last in ((0.008, 3750), (0.016, 1875), (1 / 60, 1800), (0.033, 909), (0.007, 4286)):
        assert kernel.last_step(step) == last


def test_the_last_step_may_still_land() -> None:
    """A flight of 30 s lands at N; one that would need a step more is too long."""
    step, gravity = 0.5, 64.0
    rule = Rule("average", landing_test="end-of-step")
    lands = fly(rule, gravity, 0.5 * gravity * 30.0, step, 0.0)
    assert lands[:2] == (Status.LANDS, 60)
    late = fly(rule, gravity, 0.5 * gravity * 30.0 + 0.25, step, 0.0)
    assert late[0] == Status.TOO_LONG


def test_a_step_longer_than_the_longest_flight() -> None:
    assert fly(Rule("average"), 10.0, 10.0, 100.0, 0.0)[0] == Status.TOO_LONG


def test_touching_the_level_from_below_counts_as_reaching_it() -> None:
    """An apex within the tolerance of the level reaches it; just outside it does not."""
    rule = codes(Rule("average"))
    numbers = (20.0, 10.0, 0.0, 1.0, math.inf)  # apex 2.5 exactly at n = 30
    for level, status in ((2.5, Status.LANDS), (2.5 + 9e-7, Status.LANDS), (2.5 + 2e-6, Status.OUT_OF_REACH)):
        assert kernel.fly(rule, numbers, 1 / 60, level, False)[0] == status


def test_the_folder_for_compiled_code_follows_the_sources(
    tmp_path: object, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv("XDG_CACHE_HOME", str(tmp_path))
    first = kernel._cache_folder("1.0", "")
    assert first is not None
    assert first.is_dir()
    assert first.parts[-2] == "leapwright"
    assert kernel._cache_folder("1.0", "") == first
    assert kernel._cache_folder("1.1", "") != first
    monkeypatch.setattr(kernel.rounding, "__file__", __file__)
    assert kernel._cache_folder("1.0", "") not in (first, None)


def test_no_folder_where_none_can_be_made(tmp_path: object) -> None:
    blocked = f"{tmp_path}/file"
    with open(blocked, "w", encoding="utf-8") as file:
        file.write("not a folder")
    assert kernel._cache_folder("1.0", blocked) is None
