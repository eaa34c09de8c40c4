"""Stepped jumps against outside values: the trade's case, ties, closed forms, textbooks, the courier."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from designer.motion import kernel
from designer.motion.jumps import Jumps, Status
from designer.motion.rule import Constants
from designer.motion.simulate import rule_codes, simulate, trace
from tests.reference import trade_case as trade
from tests.reference.jumps import airtime, launches, rule
from tests.reference.worked_examples import EXAMPLES, HEIGHTS, Example

# --- the trade's case: common practice, no source (SOURCES.md, section 3) ---

MS = np.arange(1, 41) / 1000


@pytest.mark.parametrize("mode", ["nearest-even", "nearest-away", "nearest-up"])
def test_trade_case_forty_steps(mode: str) -> None:
    """No step of it is a tie, so all three ways to nearest agree."""
    jumps = simulate(rule(mode=mode), launches(trade.GRAVITY, trade.LAUNCH_SPEED, MS, trade.GRAIN))
    np.testing.assert_allclose(jumps.apex, trade.APEX_BY_MS, rtol=0, atol=1e-9)


def test_trade_case_unrounded() -> None:
    """270²/1600; the average integrator samples it, low by at most g h²/8."""
    jumps = simulate(rule(), launches(trade.GRAVITY, trade.LAUNCH_SPEED, MS))
    low = trade.UNROUNDED_APEX - jumps.apex
    assert (low >= -1e-12).all()
    assert (low <= trade.GRAVITY * MS**2 / 8 + 1e-12).all()


@pytest.mark.parametrize(
    ("mode", "at", "table", "within"),
    [
        ("nearest-even", "before-move", trade.BEFORE_MOVE_APEX, 1e-9),
        ("toward-zero", "end", trade.TOWARD_ZERO_APEX, 5e-4),
    ],
)
def test_trade_case_variants(mode: str, at: str, table: dict[int, float], within: float) -> None:
    step = np.array(list(table)) / 1000
    jumps = simulate(rule(mode=mode, at=at), launches(trade.GRAVITY, trade.LAUNCH_SPEED, step, 1.0))
    np.testing.assert_allclose(jumps.apex, list(table.values()), rtol=0, atol=within)


def test_trade_case_where_steps_take_turns() -> None:
    """One step of the kernel at a time: 16, 17, 17 ms and again."""
    codes = rule_codes(rule())
    numbers = (trade.GRAVITY, trade.LAUNCH_SPEED, trade.GRAIN, 1.0, math.inf)
    state, heights = (0.0, trade.LAUNCH_SPEED, 0.0), []
    for n in range(30):
        step = trade.MIXED_STEPS_MS[n % 3] / 1000
        state = kernel.advance(codes, numbers, step, state, trade.GRAVITY * step)
        heights.append(state[0])
    assert max(heights) == pytest.approx(trade.MIXED_STEPS_APEX, abs=5e-4)


@pytest.mark.parametrize("gravity", trade.TIES)
@pytest.mark.parametrize("mode", ["nearest-even", "nearest-away", "nearest-up", "up", "toward-zero"])
def test_ties(gravity: float, mode: str) -> None:
    apex, milliseconds = trade.TIES[gravity][mode]
    tied = rule(mode=mode, at="before-move", landing_test="end-of-step")
    jumps = simulate(tied, launches(gravity, 270.0, 0.008, 1.0))
    assert float(jumps.apex) == pytest.approx(apex, abs=1e-9)
    assert int(jumps.steps) * 8 == milliseconds
    assert float(jumps.fraction) == 1.0


@pytest.mark.parametrize("mode", ["nearest-even", "nearest-away", "nearest-up", "up", "toward-zero"])
def test_stalled_tie(mode: str) -> None:
    tied = rule(mode=mode, at="before-move", landing_test="end-of-step")
    jumps = simulate(tied, launches(trade.STALLED_TIE_GRAVITY, 270.0, 0.008, 1.0))
    expected = Status.HOVERS if mode == "toward-zero" else Status.NEVER_SLOWS
    assert Status(int(jumps.status)) is expected


def test_parity_and_a_stall_after_one_step() -> None:
    gravity, speed, apex = trade.PARITY
    tied = rule(at="before-move", landing_test="end-of-step")
    assert float(simulate(tied, launches(gravity, speed, 0.008, 1.0)).apex) == pytest.approx(apex, abs=1e-9)
    flight = trace(tied, Constants(gravity, speed, grain=1.0), 0.008, max_steps=3)
    assert flight.v.tolist() == [269.0, 262.0, 256.0, 250.0]
    stalled = trace(tied, Constants(62.5, 269.0, grain=1.0), 0.008, max_steps=3)
    assert stalled.v.tolist() == [269.0, 268.0, 268.0, 268.0]
    assert stalled.status is Status.NEVER_SLOWS


def test_hovers_at_one_millisecond() -> None:
    """Toward zero, before the move; explicit hovers wherever it rounds."""
    for hovering in (rule(mode="toward-zero", at="before-move"), rule("explicit", "toward-zero")):
        assert int(simulate(hovering, launches(800.0, 270.0, 0.001, 1.0)).status) == Status.HOVERS


@pytest.mark.parametrize(("integrator", "seconds"), [("semi-implicit", 6.31), ("average", 12.6)])
def test_sinks_at_the_end_of_the_step(integrator: str, seconds: float) -> None:
    """At the end of the step a low jump sinks by g·h a second and lands (SOURCES.md, section 3, computed)."""
    jumps = simulate(rule(integrator, "toward-zero"), launches(800.0, 100.0, 0.001, 1.0))
    assert int(jumps.status) == Status.LANDS
    assert float(airtime(jumps, 0.001)) == pytest.approx(
        seconds, abs=0.05 if integrator == "average" else 0.005
    )


# --- closed forms of the unrounded steppers (SOURCES.md, section 3, checked there with exact fractions) ---


def test_launch_convention() -> None:
    """Without gravity in the launch step, semi-implicit has the apex of explicit with it."""
    one = launches(980.0, 400.0, 1 / 60)
    with_gravity = float(simulate(rule("semi-implicit"), one).apex)
    without = float(simulate(rule("semi-implicit", launch_gravity=False), one).apex)
    assert with_gravity == pytest.approx(78.33, abs=0.005)
    assert without == pytest.approx(85.00, abs=0.005)
    assert without - with_gravity == pytest.approx(400.0 / 60, abs=1e-9)
    assert without == pytest.approx(float(simulate(rule("explicit"), one).apex), abs=1e-9)


@pytest.mark.parametrize(
    ("speed", "gravity", "step", "integrator", "apex_step", "apex", "landing"),
    [
        (10, 20, 1 / 60, "explicit", 30, 31 / 12, 61),
        (10, 20, 1 / 60, "semi-implicit", 29, 29 / 12, 59),
        (10, 20, 1 / 60, "average", 30, 5 / 2, 60),
        (12, 30, 1 / 50, "explicit", 20, 63 / 25, 41),
        (12, 30, 1 / 50, "semi-implicit", 19, 57 / 25, 39),
        (12, 30, 1 / 50, "average", 20, 12 / 5, 40),
        (8, 9.81, 1 / 60, "explicit", 49, 49931 / 15000, 99),
        (8, 9.81, 1 / 60, "semi-implicit", 48, 15977 / 5000, 97),
        (8, 9.81, 1 / 60, "average", 49, 782873 / 240000, 98),
    ],
)
def test_stepped_closed_form_table(
    speed: float, gravity: float, step: float, integrator: str, apex_step: int, apex: float, landing: int
) -> None:
    jumps = simulate(rule(integrator, landing_test="end-of-step"), launches(gravity, speed, step))
    assert float(jumps.apex) == pytest.approx(apex, abs=1e-12)
    assert int(jumps.steps) == landing
    heights = trace(rule(integrator), Constants(gravity, speed), step).y
    assert heights[apex_step] == pytest.approx(apex, abs=1e-12)
    # Two equal tops may differ in the last bit: where 8/(9.81/60) etc. is whole, the next n is as high.
    assert int(jumps.apex_step) in (apex_step, apex_step + 1)


@pytest.mark.parametrize(("integrator", "ratio"), [("semi-implicit", 1.0), ("average", 0.5)])
def test_a_first_step_that_goes_nowhere_is_no_landing(integrator: str, ratio: float) -> None:
    """y_1 = y_0 there, and the landing is n = 2 (SOURCES.md, section 3)."""
    jumps = simulate(rule(integrator), launches(64.0, ratio * 64.0 / 32, 1 / 32))
    assert int(jumps.steps) == 2
    assert float(jumps.apex) == 0.0


# --- textbooks (see tests/reference/worked_examples.py for the sources) ---

BIAS = {"explicit": -1.0, "semi-implicit": 1.0, "average": 0.0}
"""c of SOURCES.md, section 3: the stepper samples the parabola of launch speed v0 − c·g·h/2."""


BOOSTER = next(e for e in EXAMPLES if "booster" in e.source)
"""It flies for 35 s, longer than a jump may; told in units of two seconds it is the same flight."""
QUICK_BOOSTER = replace(
    BOOSTER,
    gravity=4 * BOOSTER.gravity,
    launch_speed=2 * BOOSTER.launch_speed,
    landing_velocity=2 * -142.828569,
)
STEPPED = [QUICK_BOOSTER if e is BOOSTER else e for e in EXAMPLES]


def start_speed(example: Example, integrator: str, step: float) -> float:
    return example.launch_speed - BIAS[integrator] * example.gravity * step / 2


def stepped(example: Example, integrator: str, step: float) -> Jumps:
    exact = rule(integrator, contact_tolerance=0.0)
    jumps = simulate(exact, launches(example.gravity, example.launch_speed, step), example.level)
    assert int(jumps.status) == Status.LANDS
    return jumps


@pytest.mark.parametrize("integrator", list(BIAS))
@pytest.mark.parametrize("example", [e for e in STEPPED if e.apex is not None], ids=lambda e: e.source)
def test_apex_converges_to_the_textbook(example: Example, integrator: str) -> None:
    """Order 2 for average (low by at most g h²/8), order 1 for the others, with their known constant."""
    for step in (1 / 16, 1 / 64, 1 / 256):
        apex = float(stepped(example, integrator, step).apex)
        g, w = example.gravity, max(start_speed(example, integrator, step), 0.0)
        top = w * w / (2 * g)
        assert top - g * step**2 / 8 - 1e-9 <= apex <= top + 1e-9
        drift = example.launch_speed * step / 2 + g * step**2 / 8 if BIAS[integrator] else 0.0
        assert example.apex is not None
        assert abs(apex - example.apex) <= max(drift, 0.0) + g * step**2 / 8 + 1e-6


@pytest.mark.parametrize("integrator", list(BIAS))
@pytest.mark.parametrize(
    "example", [e for e in STEPPED if e.airtime or e.landing_velocity], ids=lambda e: e.source
)
def test_airtime_and_velocity_converge_to_the_textbook(example: Example, integrator: str) -> None:
    """The swept landing is a chord's: off by at most the chord's sag, g h²/8, over the speed there."""
    for step in (1 / 16, 1 / 64, 1 / 256):
        jumps = stepped(example, integrator, step)
        g, w = example.gravity, start_speed(example, integrator, step)
        down = math.sqrt(w * w - 2 * g * example.level)
        sag = g * step**2 / 8 / (down - g * step)
        flight = float(airtime(jumps, step))
        assert abs(flight - (w + down) / g) <= sag + 1e-9
        drift = abs(start_speed(example, integrator, step) - example.launch_speed)
        if example.airtime is not None:
            assert abs(flight - example.airtime) <= 2.5 * drift / g + sag + 2e-6
        if example.landing_velocity is not None:
            assert abs(float(jumps.landing_velocity) - example.landing_velocity) <= 3 * g * step


@pytest.mark.parametrize(("integrator", "order"), [("explicit", 1), ("semi-implicit", 1), ("average", 2)])
@pytest.mark.parametrize("example", [e for e in STEPPED if e.airtime and e.apex], ids=lambda e: e.source)
def test_order_of_convergence(example: Example, integrator: str, order: int) -> None:
    """The largest error of the apex over many steps near h falls by 2^order when h is halved."""

    def error(step: float) -> float:
        near = step * np.linspace(0.8, 1.0, 41)
        jumps = simulate(
            rule(integrator), launches(example.gravity, example.launch_speed, near), min(example.level, 0.0)
        )
        return float(np.max(np.abs(jumps.apex - example.launch_speed**2 / (2 * example.gravity))))

    if example.launch_speed > 0:
        coarse, fine = error(1 / 64), error(1 / 128)
        assert math.log2(coarse / fine) == pytest.approx(order, abs=0.25)


@pytest.mark.parametrize(("seconds", "height"), HEIGHTS)
def test_average_samples_the_true_parabola(seconds: float, height: float) -> None:
    """CP 2.7: 8.10, 6.40 and −5.10 m after 1, 2 and 3 s."""
    flight = trace(rule(), Constants(9.8, 13.0), 1 / 64, -100.0)
    assert flight.t[int(seconds * 64)] == seconds
    assert flight.y[int(seconds * 64)] == pytest.approx(height, abs=1e-9)


# --- the case of SEARCH section 14: gravity 1600, launch 620, grain 1, semi-implicit (computed there) ---

COURIER = rule("semi-implicit")
WHOLE_MS = np.array([16, 13, 11, 8, 6, 4]) / 1000
"""60, 72, 90, 120, 144 and 240 Hz in whole milliseconds, down."""


def test_courier_today() -> None:
    apex = simulate(COURIER, launches(1600.0, 620.0, WHOLE_MS, 1.0)).apex
    assert np.round(apex, 1).tolist() == [113.5, 115.1, 114.2, 115.9, 113.6, 126.7]


@pytest.mark.parametrize(
    ("mode", "apex"), [("nearest-even", 122.5), ("nearest-away", 122.5), ("toward-zero", 113.3)]
)
def test_courier_on_a_perfect_tie(mode: str, apex: float) -> None:
    """12.5 grains a step at an exact 1/128 s."""
    tied = rule("semi-implicit", mode)
    assert round(float(simulate(tied, launches(1600.0, 620.0, 1 / 128, 1.0)).apex), 1) == apex


@pytest.mark.parametrize(
    ("gravity", "speed", "grain", "low", "high"),
    [(1620, 635, 0.125, 119.6, 122.8), (1580, 625, 0.125, 118.8, 121.5), (1460, 595, 1.0, 115.8, 118.4)],
)
def test_courier_better_sets(gravity: float, speed: float, grain: float, low: float, high: float) -> None:
    apex = simulate(COURIER, launches(gravity, speed, WHOLE_MS, grain)).apex
    assert (round(float(apex.min()), 1), round(float(apex.max()), 1)) == (low, high)
