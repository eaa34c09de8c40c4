"""The second jump in the air: bit by bit against the twin, by hand, and what it must leave as it was."""

from __future__ import annotations

import math
import random
from dataclasses import dataclass, replace

import numpy as np
import pytest

from designer.errors import InputError
from designer.motion import kernel
from designer.motion.batch import above, fly_many
from designer.motion.closed_form import closed_form, has_closed_form
from designer.motion.jumps import Jumps, Launches, Status
from designer.motion.rule import Constants, How, Integrator, LandingTest, Mode, Place, Rounding, Rule, Second
from designer.motion.simulate import rule_codes, simulate, time_above, trace
from designer.motion.stay import closed_time_above
from tests.reference.jumps import airtime, equal, launches
from tests.reference.random_cases import random_launch, random_rule, words_of
from tests.reference.twin import TwinJump, TwinSecond, jump
from tests.reference.twin import time_above as twin_time_above

RULES = 1000
LAUNCHES_PER_RULE = 6


@dataclass(frozen=True)
class Case:
    rule: Rule
    second: Second
    level: float
    height: float
    rows: list[tuple[float, ...]]
    """gravity, launch_speed, step, grain, fall_factor, terminal_speed"""
    twins: list[TwinJump]
    single: list[TwinJump]
    """The same without the second jump."""
    above: list[float]
    """Seconds above the height; NaN where the jump never lands."""


def random_second(dice: random.Random, row: tuple[float, ...]) -> Second:
    """Draw one for this launch: at the apex, early, around the landing, or after it."""
    gravity, speed, step = row[:3]
    flight = 2.0 * speed / gravity
    landing = round(flight / step) * step
    when = dice.choice(
        [
            None,
            None,
            None,
            0.0,
            step * dice.randrange(0, 12),
            flight * dice.uniform(0.0, 1.3),
            landing + step * dice.choice([-2, -1, -1, 0, 1]),
        ]
    )
    strength = speed * dice.choice([0.3, 0.8, 1.0, dice.uniform(0.05, 2.0)])
    if when is not None:
        when = max(when, 0.0)
        strength = strength if dice.random() < 0.7 else dice.randrange(1, 9) * gravity * step
    return Second(strength, when, dice.choice(list(How)))


def random_case(dice: random.Random) -> Case:
    rule = random_rule(dice)
    rows = [random_launch(dice) for _ in range(LAUNCHES_PER_RULE)]
    second = random_second(dice, rows[0])
    top = rows[0][1] ** 2 / (2.0 * rows[0][0])
    twice = top + second.launch_speed**2 / (2.0 * rows[0][0])
    level = dice.choice([0.0, 0.0, 0.0, top * dice.uniform(-1.5, 1.1), twice * dice.uniform(0.3, 1.0), -top])
    height = dice.choice([top, twice, top, -top, 0.0, 5e-7]) * dice.uniform(0.2, 1.05)
    words = words_of(rule)
    again = TwinSecond(second.launch_speed, "apex" if second.when is None else second.when, second.how.value)
    twins, single, times = [], [], []
    for g, v, h, q, factor, terminal in rows:
        rest = {"grain": q, "fall_factor": factor, "terminal_speed": terminal}
        twins.append(jump(words, g, v, h, level=level, second=again, **rest))
        single.append(jump(words, g, v, h, level=level, **rest))
        time = twin_time_above(words, g, v, h, height, second=again, **rest)
        times.append(math.nan if time is None else time)
    return Case(rule, second, level, height, rows, twins, single, times)


@pytest.fixture(scope="module")
def cases() -> list[Case]:
    dice = random.Random(31)
    return [random_case(dice) for _ in range(RULES)]


def bits(a: object) -> bytes:
    return np.asarray(a, dtype=np.float64).tobytes()


def assert_equal(jumps: Jumps, i: int, twin: TwinJump, case: Case) -> None:
    where = (case.rule, case.second, case.level, case.rows[i], twin)
    assert Status(int(jumps.status[i])).text == twin.status, where
    if twin.status != "lands":
        assert np.isnan([jumps.apex[i], jumps.fraction[i], jumps.landing_velocity[i]]).all(), where
        return
    counts = (jumps.steps[i], jumps.apex_step[i], jumps.near_apex_steps[i])
    assert counts == (twin.steps, twin.apex_step, twin.near_apex_steps), where
    floats = (twin.apex, twin.fraction, twin.landing_velocity)
    assert bits((jumps.apex[i], jumps.fraction[i], jumps.landing_velocity[i])) == bits(floats), where


@pytest.mark.parametrize("compiled", [False, True])
def test_same_bits_as_the_twin(cases: list[Case], compiled: bool) -> None:
    for case in cases:
        batch = Launches(*np.array(case.rows).T)
        jumps = simulate(
            case.rule, batch, case.level, second=case.second, compiled=compiled, count_near_apex=True
        )
        for i, twin in enumerate(case.twins):
            assert_equal(jumps, i, twin, case)


@pytest.mark.parametrize("compiled", [False, True])
def test_same_time_above_as_the_twin(cases: list[Case], compiled: bool) -> None:
    for case in cases:
        batch = Launches(*np.array(case.rows).T)
        times = time_above(case.rule, batch, case.height, second=case.second, compiled=compiled)
        assert bits(times) == bits(case.above), (case.rule, case.second, case.height, case.rows)


def test_the_trace_is_the_jump(cases: list[Case]) -> None:
    acts = 0
    for case in cases:
        g, v, h, q, factor, terminal = case.rows[0]
        constants = Constants(
            g, v, grain=q, fall_factor=factor, terminal_speed=None if math.isinf(terminal) else terminal
        )
        flight = trace(case.rule, constants, h, case.level, second=case.second, max_steps=40_000)
        twin = case.twins[0]
        assert flight.status.text == twin.status
        if flight.lands:
            assert len(flight.y) == len(flight.v) == (twin.steps or 0) + 1
            assert bits((flight.y.max(), flight.v[-1])) == bits((twin.apex, twin.landing_velocity))
        if case.twins[0] == case.single[0]:
            continue
        acts += 1
        n = flight.second_step
        assert n is not None
        if case.second.when is None:
            assert n > 1
            assert flight.v[n - 1] <= 0.0
            assert (flight.v[1 : n - 1] > 0.0).all()
        else:
            assert (n - 1) * h >= case.second.when
            assert n == 1 or (n - 2) * h < case.second.when
    assert acts > 500


def test_the_cases_reach_every_corner(cases: list[Case]) -> None:
    """Second jumps of each kind that act, and some that a landing cancels; every way to end."""
    pairs = [(c, twin, one) for c in cases for twin, one in zip(c.twins, c.single, strict=True)]
    assert len(pairs) == RULES * LAUNCHES_PER_RULE
    statuses = [twin.status for _, twin, _ in pairs]
    for status in Status:
        assert statuses.count(status.text) >= 10, status
    for how in How:
        for timed in (False, True):
            acts = [
                t != o for c, t, o in pairs if c.second.how is how and (c.second.when is not None) == timed
            ]
            assert sum(acts) > 500, (how, timed)
    assert sum(t == o for c, t, o in pairs if c.second.when is not None and t.status == "lands") > 300
    rescued = [t for _, t, one in pairs if one.status == "out-of-reach" and t.status == "lands"]
    assert len(rescued) > 100
    combinations = {(c.rule.integrator, c.rule.rounding) for c in cases}
    assert len(combinations) > 0.95 * len(Integrator) * len(Mode) * len(Place) * 2
    times = np.array([time for c in cases for time in c.above])
    assert (times > 0.0).sum() > 2000
    assert (times == 0.0).sum() > 200
    assert np.isnan(times).sum() > 200


# --- by hand ---

PLAIN = Rule("average")
H = 1 / 32  # with gravity 64 each step takes 2 from v


def velocities(second: Second, steps: int, **constants: float) -> list[float]:
    flight = trace(PLAIN, Constants(**({"gravity": 64.0, "launch_speed": 6.0} | constants)), H, second=second)
    return flight.v[: steps + 1].tolist()


def test_at_the_apex_by_hand() -> None:
    """v is 6, 4, 2, 0; the next step starts with v = 0: it is set to 5 and loses 2."""
    assert velocities(Second(5.0), 7) == [6.0, 4.0, 2.0, 0.0, 3.0, 1.0, -1.0, -3.0]


def test_added_at_the_apex_by_hand() -> None:
    """v is 5, 3, 1, −1; −1 + 5 = 4, and then 2 less."""
    assert velocities(Second(5.0, how=How.ADD), 5, launch_speed=5.0) == [5.0, 3.0, 1.0, -1.0, 2.0, 0.0]


def test_at_a_time_by_hand() -> None:
    """2 steps have passed at the start of step 3; a hair later it is step 4."""
    assert velocities(Second(9.0, 2 * H), 4) == [6.0, 4.0, 2.0, 7.0, 5.0]
    assert velocities(Second(9.0, 2 * H + 1e-12), 4) == [6.0, 4.0, 2.0, 0.0, 7.0]
    assert velocities(Second(9.0, 2 * H, How.ADD), 4) == [6.0, 4.0, 2.0, 9.0, 7.0]


def test_gravity_follows_the_new_velocity() -> None:
    """Falls by twice the gravity; the step that starts with v = 0 but jumps again loses 2, not 4."""
    assert velocities(Second(5.0), 8, fall_factor=2.0)[3:] == [0.0, 3.0, 1.0, -1.0, -5.0, -9.0]
    # Too weak to turn it round: v stays ≤ 0, so the falling gravity stays.
    slow = velocities(Second(1.0, 5 * H, How.ADD), 6, fall_factor=2.0)
    assert slow == [6.0, 4.0, 2.0, 0.0, -4.0, -8.0, -11.0]


def test_it_acts_once() -> None:
    """The second apex does not launch a third jump: 0 at its top is followed by −2."""
    assert velocities(Second(4.0), 8)[3:] == [0.0, 2.0, 0.0, -2.0, -4.0, -6.0]


def test_never_in_the_first_step_at_the_apex() -> None:
    """A launch that is not upward begins as a fall; the second step starts with v ≤ 0."""
    flight = trace(PLAIN, Constants(64.0, -1.0), H, -10.0, second=Second(7.0))
    assert flight.second_step == 2
    assert flight.v[:3].tolist() == [-1.0, -3.0, 5.0]


def test_a_landing_cancels_it() -> None:
    """Average, 64 and 6: y is back at 0 at n = 6. Due at the start of step 7 is too late, of step 6 not."""
    alone = simulate(PLAIN, launches(64.0, 6.0, H))
    assert int(alone.steps) == 6
    assert equal(simulate(PLAIN, launches(64.0, 6.0, H), second=Second(50.0, 6 * H)), alone)
    late = trace(PLAIN, Constants(64.0, 6.0), H, second=Second(50.0, 6 * H))
    assert late.second_step is None
    assert int(simulate(PLAIN, launches(64.0, 6.0, H), second=Second(50.0, 5 * H)).steps) > 50


@pytest.mark.parametrize("integrator", list(Integrator))
@pytest.mark.parametrize("gravity_at_once", [True, False])
def test_at_time_zero_it_is_another_launch(integrator: Integrator, gravity_at_once: bool) -> None:
    """Set at 0 s replaces the launch, added at 0 s adds to it: also in a first step without gravity."""
    rule = Rule(integrator, Rounding("nearest-even"), launch_gravity=gravity_at_once)
    for grain in (0.0, 1.0):
        other = simulate(rule, launches(800.0, 270.0, 0.011, grain, 1.5))
        put = simulate(rule, launches(800.0, 100.0, 0.011, grain, 1.5), second=Second(270.0, 0.0))
        added = simulate(rule, launches(800.0, 100.0, 0.011, grain, 1.5), second=Second(170.0, 0.0, How.ADD))
        assert equal(put, other)
        assert equal(added, other)


def test_carried_remainder_stays_with_it() -> None:
    """Loses 1.4 a step on a grain of 1. e is −0.4, 0.2, −0.2, 0.4 …: 3 + e follows, not 3."""
    carried = Rule("average", Rounding("nearest-even", "end", carry=True))
    constants = Constants(1.4 * 32, 10.0, grain=1.0)
    assert trace(carried, constants, H).v[:4].tolist() == [10.0, 9.0, 7.0, 6.0]
    # At the start of step 3 e is 0.2: 5 − 1.4 + 0.2 = 3.8 → 4, then 4 − 1.4 − 0.2 = 2.4 → 2.
    assert trace(carried, constants, H, second=Second(5.0, 2 * H)).v[2:5].tolist() == [7.0, 4.0, 2.0]


def test_its_speed_is_not_rounded() -> None:
    """5.4 − 2 = 3.4 → 3 on a grain of 1; the average moves by (5.4 + 3.4)/2."""
    flight = trace(PLAIN, Constants(64.0, 6.0, grain=1.0), H, second=Second(5.4))
    assert flight.v[3:5].tolist() == [0.0, 3.0]
    assert flight.unrounded[4] == 5.4 - 2.0
    assert flight.y[4] - flight.y[3] == pytest.approx(0.5 * (5.4 + 3.4) * H, rel=1e-12)


# --- the ends of flights ---


def test_out_of_reach_waits_for_it() -> None:
    """0.28 high alone; from there 4 m/s more reach another 0.125. A level between is reached."""
    one = launches(64.0, 6.0, H)
    assert int(simulate(PLAIN, one, 0.35).status) == Status.OUT_OF_REACH
    for when in (None, 3 * H, 4 * H):
        assert int(simulate(PLAIN, one, 0.35, second=Second(4.0, when)).status) == Status.LANDS
    assert int(simulate(PLAIN, one, 0.5, second=Second(4.0)).status) == Status.OUT_OF_REACH


@pytest.mark.parametrize(
    ("mode", "gravity", "level", "second", "status"),
    [
        (Mode.NEAREST_EVEN, 400.0, 0.0, Second(100.0), Status.NEVER_SLOWS),
        (Mode.NEAREST_EVEN, 400.0, 0.0, Second(100.0, 0.1), Status.NEVER_SLOWS),
        (Mode.TOWARD_ZERO, 800.0, 0.0, Second(50.0), Status.HOVERS),
        (Mode.DOWN, 800.0, 1e4, Second(50.0), Status.OUT_OF_REACH),
        (Mode.DOWN, 800.0, 1e4, Second(50.0, 0.1), Status.OUT_OF_REACH),
    ],
)
def test_flights_still_end_early(
    monkeypatch: pytest.MonkeyPatch, mode: Mode, gravity: float, level: float, second: Second, status: Status
) -> None:
    """30,000 steps of 1 ms are left out once the second jump is spent, or is not to come any more."""
    flown = []
    advance = kernel.advance
    monkeypatch.setattr(kernel, "advance", lambda *given: flown.append(1) or advance(*given))
    codes = rule_codes(Rule("average", Rounding(mode, "before-move")), second)
    outcome = kernel.fly(codes, (gravity, 270.0, 1.0, 1.0, math.inf), 0.001, level, True)
    assert outcome[0] == status
    assert len(flown) <= 325


def test_foresight_changes_nothing(cases: list[Case], monkeypatch: pytest.MonkeyPatch) -> None:
    """What flights foresee is what flying to the end finds."""
    hard = [c for c in cases if any(t.status not in ("lands", "too-long") for t in c.twins)][:60]

    def fly(case: Case) -> tuple[Jumps, bytes]:
        batch = Launches(*np.array(case.rows).T)
        jumps = simulate(case.rule, batch, case.level, second=case.second, compiled=False)
        return jumps, bits(time_above(case.rule, batch, case.height, second=case.second, compiled=False))

    foreseen = [fly(case) for case in hard]
    monkeypatch.setattr(kernel, "_foreseen", lambda *given: -1)
    for case, (jumps, times) in zip(hard, foreseen, strict=True):
        whole, whole_times = fly(case)
        assert equal(jumps, whole)
        assert times == whole_times


@pytest.mark.parametrize("mode", [Mode.NEAREST_EVEN, Mode.TOWARD_ZERO, Mode.UP, Mode.DOWN])
@pytest.mark.parametrize("strength", [3.0, 5.0, 4.6, 100.0])
@pytest.mark.parametrize("last", [58, 59, 60])
def test_in_the_very_last_step(mode: Mode, strength: float, last: int) -> None:
    """Half-second steps: 30 s are over at n = 60. v_60 is compared with v_59, not with the new velocity."""
    rule = Rule("average", Rounding(mode))
    for speed in (3.0, 5.0):
        for how in How:
            second = Second(strength, (last - 1) * 0.5, how)
            words = TwinSecond(strength, (last - 1) * 0.5, how.value)
            twin = jump(words_of(rule), 0.5, speed, 0.5, grain=1.0, second=words)
            for compiled in (False, True):
                found = simulate(rule, launches(0.5, speed, 0.5, 1.0), second=second, compiled=compiled)
                assert Status(int(found.status)).text == twin.status


# --- against the textbook ---


@pytest.mark.parametrize("integrator", list(Integrator))
def test_two_arcs_as_the_step_shrinks(integrator: Integrator) -> None:
    """University Physics vol. 1, section 3.5, twice: v²/2g and v/g each, then √(2·height/g) down."""
    g, first, again = 9.80, 5.0, 4.0
    top = (first**2 + again**2) / (2 * g)
    whole = (first + again) / g + math.sqrt(2 * top / g)
    off = []
    for step in (1 / 64, 1 / 512, 1 / 4096):
        found = simulate(Rule(integrator), launches(g, first, step), second=Second(again))
        off.append(max(abs(float(found.apex) - top), abs(float(airtime(found, step)) - whole)))
        assert off[-1] < 6.0 * step
    assert off[2] < off[1] < off[0]


def test_set_at_a_time_as_the_step_shrinks() -> None:
    """Set to 4 m/s after 0.2 s at 9.8 m/s²: from 5·0.2 − 4.9·0.04 m up by 16/19.6 m."""
    g, step = 9.80, 1 / 4096
    found = simulate(PLAIN, launches(g, 5.0, step), second=Second(4.0, 0.2))
    assert float(found.apex) == pytest.approx(5.0 * 0.2 - 4.9 * 0.04 + 16.0 / 19.6, abs=2e-3)


# --- what it leaves alone, and the fronts ---


def test_one_that_never_comes_changes_nothing(cases: list[Case]) -> None:
    """Due only after the longest flight, it gives the same bits as none."""
    late = Second(100.0, 1e6)
    for case in cases[:200]:
        batch = Launches(*np.array(case.rows).T)
        assert equal(
            simulate(case.rule, batch, case.level, count_near_apex=True),
            simulate(case.rule, batch, case.level, second=late, count_near_apex=True),
        )
        plain = time_above(case.rule, batch, case.height)
        assert bits(time_above(case.rule, batch, case.height, second=late)) == bits(plain)


@pytest.mark.parametrize("landing", list(LandingTest))
def test_it_has_no_closed_form_and_is_stepped(landing: LandingTest) -> None:
    rule, second = Rule("semi-implicit", landing_test=landing), Second(200.0)
    many = launches(np.array([[800.0], [900.0]]), [270.0, 280.0, 300.0], 0.011, 1.0, 1.5)
    assert has_closed_form(rule, np.array([0.0, 1.0])).all()
    assert not has_closed_form(rule, np.array([0.0, 1.0]), second).any()
    assert closed_form(rule, many, second=second)[1].all()
    assert closed_time_above(rule, many, 10.0, second=second)[1].all()
    for level in (0.0, 60.0, -10.0):
        assert equal(fly_many(rule, many, level, second=second), simulate(rule, many, level, second=second))
        stepped = time_above(rule, many, level, second=second)
        assert bits(above(rule, many, level, second=second)) == bits(stepped)
        assert stepped.shape == (2, 3)
    higher = fly_many(rule, many, second=second).apex
    assert (higher > fly_many(rule, many).apex).all()


def test_workers_change_nothing() -> None:
    many = launches(np.linspace(500.0, 1500.0, 220)[:, None], np.linspace(50.0, 120.0, 160), 0.016, 1.0)
    second = Second(60.0, 0.05, How.ADD)
    one = simulate(PLAIN, many, second=second, compiled=True)
    assert equal(one, simulate(PLAIN, many, second=second, compiled=True, workers=2))
    times = time_above(PLAIN, many, 2.0, second=second, compiled=True)
    assert bits(times) == bits(time_above(PLAIN, many, 2.0, second=second, compiled=True, workers=2))


@pytest.mark.parametrize(
    ("second", "field"),
    [
        (Second(0.0), "second.launch_speed"),
        (Second(math.nan), "second.launch_speed"),
        (Second(-3.0), "second.launch_speed"),
        (Second(3.0, -0.1), "second.when"),
        (Second(3.0, math.nan), "second.when"),
    ],
)
def test_unusable_ones_are_refused(second: Second, field: str) -> None:
    for call in (
        lambda: simulate(PLAIN, launches(800.0, 270.0, 0.01), second=second),
        lambda: fly_many(PLAIN, launches(800.0, 270.0, 0.01), second=second),
        lambda: time_above(PLAIN, launches(800.0, 270.0, 0.01), 10.0, second=second),
        lambda: trace(PLAIN, Constants(800.0, 270.0), 0.01, second=second),
    ):
        with pytest.raises(InputError) as caught:
            call()
        assert [fault.field for fault in caught.value.faults] == [field]


def test_an_unknown_way_is_refused() -> None:
    with pytest.raises(ValueError, match="multiply"):
        replace(Second(3.0), how="multiply")  # type: ignore[arg-type]
