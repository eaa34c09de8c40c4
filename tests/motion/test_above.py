"""Time above a height: the twin, the closed form, the airtime that it ends with, and the textbook."""

from __future__ import annotations

import math
import random
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
import pytest

from designer.errors import InputError
from designer.motion import kernel
from designer.motion.batch import above, fly_many
from designer.motion.continuous import continuous_airtime, continuous_apex, times_at_height
from designer.motion.jumps import Launches, Status
from designer.motion.measures import clearance, head_top, of_flight
from designer.motion.rule import Constants, Integrator, LandingTest, Mode, Place, Rounding, Rule, Second
from designer.motion.simulate import Trace, time_above, trace
from designer.motion.stay import closed_time_above
from tests.motion.test_closed_form import RULES, corner_launches, random_launches
from tests.reference.jumps import launches
from tests.reference.random_cases import random_launch, random_rule, words_of
from tests.reference.twin import time_above as twin_time_above
from tests.reference.worked_examples import EXAMPLES, HEIGHTS

HEIGHTS_ABOVE = (25.0, 0.0, 2.5, -40.0, 110.0, 5e-7, 60.0)


def bits(a: object) -> bytes:
    return np.asarray(a, dtype=np.float64).tobytes()


# --- the kernel against the twin ---


@dataclass(frozen=True)
class Case:
    rule: Rule
    height: float
    rows: list[tuple[float, ...]]
    times: list[float]


@pytest.fixture(scope="module")
def cases() -> list[Case]:
    dice = random.Random(77)
    made = []
    for _ in range(700):
        rule = random_rule(dice)
        rows = [random_launch(dice) for _ in range(5)]
        top = rows[0][1] ** 2 / (2.0 * rows[0][0])
        height = dice.choice([dice.uniform(0.05, 1.05) * top, top, 0.5 * top, -0.5 * top, 0.0, 5e-7])
        times = []
        for g, v, h, q, factor, terminal in rows:
            time = twin_time_above(
                words_of(rule), g, v, h, height, grain=q, fall_factor=factor, terminal_speed=terminal
            )
            times.append(math.nan if time is None else time)
        made.append(Case(rule, height, rows, times))
    return made


@pytest.mark.parametrize("compiled", [False, True])
def test_same_bits_as_the_twin(cases: list[Case], compiled: bool) -> None:
    for case in cases:
        found = time_above(case.rule, Launches(*np.array(case.rows).T), case.height, compiled=compiled)
        assert bits(found) == bits(case.times), case
    times = np.array([time for case in cases for time in case.times])
    assert (times > 0.0).sum() > 1500
    assert (times == 0.0).sum() > 100
    assert np.isnan(times).sum() > 50


# --- the closed form against the kernel ---


def disagreements(rule: Rule, batch: Launches, height: float) -> tuple[int, np.ndarray, list[str]]:
    found, flagged = closed_time_above(rule, batch, height)
    stepped = time_above(rule, batch, height, compiled=True)
    assert found.shape == flagged.shape == stepped.shape
    near = np.abs(found - stepped) <= 2e-9 * batch.step
    wrong = np.flatnonzero(~(near | (np.isnan(found) & np.isnan(stepped)) | flagged))
    told = [
        f"{rule} {height}: {[float(c[i]) for c in batch.broadcast()]} {found[i]} {stepped[i]}" for i in wrong
    ]
    return int(flagged.sum()), found[~flagged], told


@pytest.mark.parametrize("tidy", [True, False])
def test_agrees_with_the_kernel_wherever_it_is_not_flagged(tidy: bool) -> None:
    wrong: list[str] = []
    kept: list[np.ndarray] = []
    flags = jumps = 0
    for i, rule in enumerate(RULES):
        for k in (0, 1):
            batch = random_launches(4000 + 7 * i + k + 3000 * tidy, 100, tidy)
            more, sound, told = disagreements(rule, batch, HEIGHTS_ABOVE[(i + k) % len(HEIGHTS_ABOVE)])
            flags, jumps, wrong = flags + more, jumps + 100, wrong + told
            kept.append(sound)
    assert not wrong, f"{len(wrong)}: {wrong[:4]}"
    assert jumps > 28_000
    assert flags < 0.09 * jumps
    times = np.concatenate(kept)
    assert (times > 0.0).sum() > 0.4 * jumps
    assert (times == 0.0).sum() > 1000
    assert np.isnan(times).sum() > 50


@pytest.mark.parametrize("kind", ["whole", "terminal", "limit", "low", "long"])
def test_agrees_with_the_kernel_in_corners(kind: str) -> None:
    wrong: list[str] = []
    for i, rule in enumerate(RULES):
        batch = corner_launches(kind, 5000 + i, 60)
        top = float(batch.launch_speed[0] ** 2 / (2.0 * batch.gravity[0]))
        wrong += disagreements(rule, batch, (0.3, 0.5, 0.8, 1.0)[i % 4] * top)[2]
    assert not wrong, f"{len(wrong)}: {wrong[:4]}"


@pytest.mark.parametrize("tolerance", [0.0, 0.25, 20.0])
def test_agrees_with_the_kernel_at_other_tolerances(tolerance: float) -> None:
    wrong: list[str] = []
    for i, integrator in enumerate(Integrator):
        for mode in Mode:
            rule = Rule(integrator, Rounding(mode), contact_tolerance=tolerance)
            batch = random_launches(8000 + i, 80, True)
            for height in (0.1, 30.0, 19.0, 5e-7, -7.0):
                wrong += disagreements(rule, batch, height)[2]
    assert not wrong, wrong[:4]


@pytest.mark.parametrize("integrator", list(Integrator))
def test_a_sample_at_the_very_height_is_left_to_the_kernel(integrator: Integrator) -> None:
    """Heights that a sample of the way up meets to the last bit: there noise decides the step."""
    rule = Rule(integrator, landing_test="end-of-step", contact_tolerance=0.0)
    batch = random_launches(6, 120, False)
    flags = 0
    for row in zip(*batch.broadcast(), strict=True):
        g, v, h = (float(x) for x in row[:3])
        y = trace(rule, Constants(g, v), h, max_steps=200).y
        k = int(np.argmax(y)) // 2
        if k < 2:
            continue
        for height in (y[k], np.nextafter(y[k], 0.0), np.nextafter(y[k], np.inf)):
            flagged, _, told = disagreements(rule, launches(g, [v], h), float(height))
            assert not told, told
            flags += flagged
    assert flags > 100


def test_what_is_flagged_is_stepped() -> None:
    """Carry, grains of a tenth and ties have no closed form here; the answer is the kernel's."""
    batch = random_launches(3, 400, True)
    for rule in (Rule("average"), Rule("semi-implicit", Rounding(carry=True)), Rule("explicit")):
        for grain in (0.1, 1.0):
            some = Launches(
                batch.gravity,
                batch.launch_speed,
                batch.step,
                np.float64(grain),
                batch.fall_factor,
                batch.terminal_speed,
            )
            flagged = closed_time_above(rule, some, 20.0)[1]
            stepped = time_above(rule, some, 20.0)
            found = above(rule, some, 20.0)
            assert bits(found[flagged]) == bits(stepped[flagged])
            assert found == pytest.approx(stepped, rel=0.0, abs=1e-9, nan_ok=True)
            assert flagged.any()


# --- what it is ---


@pytest.mark.parametrize("rule", RULES[::7])
def test_it_ends_when_a_landing_at_the_height_would(rule: Rule) -> None:
    """At the take-off level and below it is the airtime; above, the airtime less the way up."""
    batch = random_launches(21, 120, True)
    for height in (0.0, -30.0):
        flown = fly_many(rule, batch, height)
        airtime = of_flight("airtime", rule, batch, flown)
        assert above(rule, batch, height) == pytest.approx(airtime, rel=0.0, abs=1e-9, nan_ok=True)
        stepped = time_above(rule, batch, height)
        landed = flown.status == Status.LANDS
        assert np.array_equal(np.isnan(stepped), ~landed)


def stays_of(flight: Trace, height: float, swept: bool) -> list[float]:
    """List the stays of a trace above a height, from its segments alone (no contact tolerance)."""
    t, y = flight.t, flight.y
    inside = y >= height
    found, since = [], 0.0
    for n in range(1, len(y)):
        if inside[n] == inside[n - 1]:
            continue
        share = (height - y[n - 1]) / (y[n] - y[n - 1]) if swept else 1.0
        moment = float(t[n - 1] + share * (t[n] - t[n - 1]))
        if inside[n]:
            since = moment
        else:
            found.append(moment - since)
    return found


@pytest.mark.parametrize("swept", [True, False])
def test_the_longest_stay_counts(swept: bool) -> None:
    """A second jump that comes only after the body has sunk below the block does not fill the hole."""
    rule = Rule("average", landing_test=LandingTest.SWEPT if swept else LandingTest.END_OF_STEP)
    constants = Constants(980.0, 300.0)
    for speed, longer in ((330.0, 1), (220.0, 0)):
        second = Second(speed, 0.57)
        flight = trace(rule, constants, 0.008, second=second)
        stays = stays_of(flight, 20.0, swept)
        assert len(stays) == 2
        assert stays[longer] == max(stays) > 1.2 * min(stays)
        one = launches(980.0, 300.0, 0.008)
        assert float(above(rule, one, 20.0, second=second)) == pytest.approx(stays[longer], rel=1e-12)
    # In time, it does: one stay.
    early = trace(rule, constants, 0.008, second=Second(220.0, 0.45))
    (only,) = stays_of(early, 20.0, swept)
    assert float(
        above(rule, launches(980.0, 300.0, 0.008), 20.0, second=Second(220.0, 0.45))
    ) == pytest.approx(only)


def test_samples_above_are_counted_where_landings_are_tested_at_the_end() -> None:
    rule = Rule("semi-implicit", landing_test="end-of-step")
    flight = trace(rule, Constants(980.0, 300.0), 0.008)
    samples = int((flight.y >= 20.0).sum())
    time = float(above(rule, launches(980.0, 300.0, 0.008), 20.0))
    assert time == pytest.approx(samples * 0.008, rel=1e-12)


def test_by_hand() -> None:
    """Average, 64 and 6 at 1/32 s: y is 0, 5, 8, 9, 8, 5, 0 thirty-seconds; 6.5 is passed at 1.5 and 4.5."""
    one = launches(64.0, 6.0, 1 / 32)
    assert trace(Rule("average"), Constants(64.0, 6.0), 1 / 32).y.tolist() == [
        y / 32 for y in (0, 5, 8, 9, 8, 5, 0)
    ]
    assert float(time_above(Rule("average"), one, 6.5 / 32)) == 3.0 / 32
    at_ends = Rule("average", landing_test="end-of-step")
    assert float(time_above(at_ends, one, 6.5 / 32)) == 3.0 / 32  # samples 2, 3 and 4
    assert float(time_above(at_ends, one, 8.5 / 32)) == 1.0 / 32  # sample 3
    assert float(time_above(Rule("average"), one, 8.5 / 32)) == 1.0 / 32
    assert float(time_above(Rule("average"), one, 9.0 / 32)) == 0.0  # touches it
    assert float(time_above(Rule("average"), one, 9.5 / 32)) == 0.0


def test_stuck_jumps_have_none() -> None:
    for gravity, mode in ((400.0, Mode.NEAREST_EVEN), (800.0, Mode.TOWARD_ZERO)):
        rule = Rule("average", Rounding(mode, Place.BEFORE_MOVE))
        one = launches(gravity, 270.0, 0.001, 1.0)
        assert fly_many(rule, one).status != Status.LANDS
        for time in (above(rule, one, 5.0), time_above(rule, one, 5.0, compiled=False)):
            assert np.isnan(time)


def test_stuck_jumps_are_seen_early(monkeypatch: pytest.MonkeyPatch) -> None:
    flown = []
    advance = kernel.advance
    monkeypatch.setattr(kernel, "advance", lambda *given: flown.append(1) or advance(*given))
    rule = Rule("average", Rounding("nearest-even", "before-move"))
    time_above(rule, launches(400.0, 270.0, 0.001, 1.0), 5.0, compiled=False)
    assert 0 < len(flown) < 5


@pytest.mark.parametrize("shape", [(), (1,), (0,), (7,), (5, 3), (2, 3, 4)])
def test_any_shape(shape: tuple[int, ...]) -> None:
    flat = random_launches(12, max(math.prod(shape), 1), True)
    columns = [column[: math.prod(shape)].reshape(shape) for column in flat.broadcast()]
    found = above(RULES[7], Launches(*columns), 12.0)
    assert found.shape == shape
    assert bits(np.ravel(found)) == bits(above(RULES[7], Launches(*(np.ravel(c) for c in columns)), 12.0))


def test_higher_is_shorter() -> None:
    batch = random_launches(5, 200, True)
    times = [above(Rule("semi-implicit"), batch, height) for height in (0.0, 5.0, 20.0, 60.0, 150.0)]
    for low, high in pairwise(times):
        assert not (high > low + 1e-12).any()


def test_heights_that_are_no_numbers_are_refused() -> None:
    for compiled in (None, False):
        with pytest.raises(InputError) as caught:
            time_above(Rule("average"), launches(800.0, 270.0, 0.01), math.nan, compiled=compiled)
        assert [fault.field for fault in caught.value.faults] == ["level"]


# --- against the textbook ---


@pytest.mark.parametrize("integrator", list(Integrator))
@pytest.mark.parametrize("landing", list(LandingTest))
def test_worked_examples_as_the_step_shrinks(integrator: Integrator, landing: LandingTest) -> None:
    """Each flight of worked_examples.py that rises (under 30 s), above half its apex: 2·√(2·(apex/2)/g)."""
    rising = [one for one in EXAMPLES if 0.0 < one.launch_speed < 14.0 * one.gravity]
    assert len(rising) > 10
    gravity = np.array([example.gravity for example in rising])
    speed = np.array([example.launch_speed for example in rising])
    rule = Rule(integrator, landing_test=landing)
    for i, (g, v) in enumerate(zip(gravity, speed, strict=True)):
        half = 0.5 * float(continuous_apex(g, v))
        exact = 2.0 * math.sqrt(2.0 * half / g)
        up, down = times_at_height(g, v, half)
        assert float(down - up) == pytest.approx(exact, rel=1e-12)
        off = [abs(float(above(rule, launches(g, v, h), half)) - exact) for h in (1 / 64, 1 / 1024, 1 / 8192)]
        assert off[2] < 4.0 / 8192, rising[i]
        assert off[2] <= off[0] + 1e-12
        if integrator is Integrator.AVERAGE and landing is LandingTest.SWEPT:
            assert off[2] < 1e-6


def test_printed_heights() -> None:
    """CP 2.7, up at 13.0 m/s: 8.10 m after 1.00 s on the way up, 6.40 m after 2.00 s on the way down."""
    top = 13.0 / 9.80
    one = launches(9.80, 13.0, 1 / 4096)
    for time, height in HEIGHTS[:2]:
        assert float(above(Rule("average"), one, height)) == pytest.approx(2.0 * abs(time - top), abs=1e-6)
    assert float(above(Rule("average"), one, HEIGHTS[2][1])) == pytest.approx(HEIGHTS[2][0], abs=1e-6)


def test_falls_faster_than_it_rises() -> None:
    up, down = times_at_height(1600.0, 620.0, 70.0, 1.8)
    found = above(Rule("average"), launches(1600.0, 620.0, 1e-5, 0.0, 1.8), 70.0)
    assert float(found) == pytest.approx(float(down - up), abs=1e-5)
    assert float(down) == pytest.approx(float(continuous_airtime(1600.0, 620.0, 70.0, 1.8)))


# --- the measures ---


def test_clearance_and_head_room() -> None:
    """University Physics vol. 1, section 4.3: along at a constant speed; 1.4 s at 5 m/s are 7 m."""
    assert float(clearance(np.float64(1.4), 5.0)) == 7.0
    assert np.isnan(clearance(np.array(np.nan), 5.0))
    assert head_top(np.array([0.5, 2.0]), 1.8).tolist() == [2.3, 3.8]
