"""The typed front: invariants of whole jumps, members of the rule by hand, shapes, workers, bad numbers."""

from __future__ import annotations

import math
import subprocess
import sys
from dataclasses import fields, replace
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from designer.errors import InputError
from designer.motion import kernel
from designer.motion.jumps import Jumps, Launches, Status
from designer.motion.rule import (
    Constants,
    Integrator,
    LandingTest,
    Mode,
    Place,
    PositionRounding,
    Rounding,
    Rule,
)
from designer.motion.simulate import CHUNK, simulate, trace
from tests.reference.jumps import airtime, equal, launches, rule

ROOT = Path(__file__).resolve().parents[2]
STEADY = settings(deadline=None, derandomize=True, database=None, max_examples=100)
MS = np.arange(1, 41) / 1000

# --- invariants ---

SPEEDS = st.integers(50, 600).map(float)
GRAVITIES = st.integers(300, 2000).map(float)
STEPS = st.sampled_from([0.008, 0.011, 0.016, 1 / 60, 1 / 64])
RULES = st.builds(
    lambda i, m, a, test, g: Rule(i, Rounding(m, a), landing_test=test, launch_gravity=g),
    st.sampled_from(list(Integrator)),
    st.sampled_from(list(Mode)),
    st.sampled_from(list(Place)),
    st.sampled_from(list(LandingTest)),
    st.booleans(),
)


@given(any_rule=RULES, gravity=GRAVITIES, speed=SPEEDS, step=STEPS, carry=st.booleans())
@STEADY
def test_grain_zero_is_no_rounding(
    any_rule: Rule, gravity: float, speed: float, step: float, carry: bool
) -> None:
    """Without a grain neither the mode nor the place nor the carry makes a difference."""
    one = launches(gravity, speed, step)
    plain = replace(any_rule, rounding=Rounding())
    other = replace(any_rule, rounding=replace(any_rule.rounding, carry=carry))
    assert equal(simulate(plain, one), simulate(other, one))


@given(any_rule=RULES, gravity=GRAVITIES, speed=SPEEDS, step=STEPS, grain=st.sampled_from([0.0, 0.25, 1.0]))
@STEADY
def test_twice_the_unit_is_twice_the_jump(
    any_rule: Rule, gravity: float, speed: float, step: float, grain: float
) -> None:
    """Binary scales exactly, so a unit half as long gives the same bits, doubled."""
    long = simulate(any_rule, launches(gravity, speed, step, grain))
    halved = replace(any_rule, contact_tolerance=2e-6)
    short = simulate(halved, launches(2 * gravity, 2 * speed, step, 2 * grain))
    assert short.status == long.status
    assert short.steps == long.steps
    assert np.array_equal(short.apex, 2 * long.apex, equal_nan=True)
    assert np.array_equal(short.fraction, long.fraction, equal_nan=True)


@given(any_rule=RULES, gravity=GRAVITIES, speed=SPEEDS, step=STEPS, grain=st.sampled_from([0.0, 0.25, 1.0]))
@STEADY
def test_off_equals_the_base(any_rule: Rule, gravity: float, speed: float, step: float, grain: float) -> None:
    """A terminal speed that is never met and a fall factor of 1 change nothing."""
    base = simulate(any_rule, launches(gravity, speed, step, grain))
    assert equal(base, simulate(any_rule, launches(gravity, speed, step, grain, 1.0, 1e9)))


@given(any_rule=RULES, gravity=GRAVITIES, speed=SPEEDS, step=STEPS, drop=st.floats(0.1, 50.0))
@STEADY
def test_lower_levels_are_reached_later(
    any_rule: Rule, gravity: float, speed: float, step: float, drop: float
) -> None:
    one = launches(gravity, speed, step)
    level, lower = simulate(any_rule, one), simulate(any_rule, one, -drop)
    assert float(airtime(lower, step)) >= float(airtime(level, step))
    assert lower.apex == level.apex


@given(any_rule=RULES, gravity=GRAVITIES, speed=SPEEDS, step=STEPS, cap=st.floats(20.0, 200.0))
@STEADY
def test_terminal_speed_is_met_to_a_grain(
    any_rule: Rule, gravity: float, speed: float, step: float, cap: float
) -> None:
    """The limit acts before rounding: v may exceed it by under a grain."""
    flight = trace(any_rule, Constants(gravity, speed, grain=1.0, terminal_speed=cap), step, -500.0)
    assert flight.v.min() > -cap - 1.0
    assert flight.unrounded.min() >= -cap


@given(any_rule=RULES, gravity=GRAVITIES, speed=SPEEDS, step=STEPS, grain=st.sampled_from([0.0, 0.1, 1.0]))
@STEADY
def test_the_trace_is_the_jump(
    any_rule: Rule, gravity: float, speed: float, step: float, grain: float
) -> None:
    jumps = simulate(any_rule, launches(gravity, speed, step, grain), count_near_apex=True)
    flight = trace(any_rule, Constants(gravity, speed, grain=grain), step)
    assert flight.status == int(jumps.status)
    assert flight.lands == (int(jumps.status) == Status.LANDS)
    if flight.lands:
        assert (
            len(flight.y) == len(flight.t) == len(flight.v) == len(flight.unrounded) == int(jumps.steps) + 1
        )
        assert flight.y.max() == float(jumps.apex)
        assert int(np.argmax(flight.y)) == int(jumps.apex_step)
        assert flight.v[-1] == float(jumps.landing_velocity)
        assert int((flight.y >= 0.9 * flight.y.max()).sum()) == int(jumps.near_apex_steps)


# --- members of the rule, by hand ---


def test_fall_factor_acts_from_the_top() -> None:
    """Rising 10 steps under g, falling under 4 g: v by hand."""
    flight = trace(rule(), Constants(64.0, 20.0, fall_factor=4.0), 1 / 32)
    assert flight.v[:11].tolist() == [20.0 - 2.0 * n for n in range(11)]
    assert flight.v[11:].tolist() == [-8.0 * n for n in range(1, len(flight.v) - 10)]


def test_position_snaps_and_the_move_starts_from_there() -> None:
    """Semi-implicit by hand: moves of 0.3 and 0.1 on a grain of 0.25, to nearest, then down."""
    flight = trace(
        Rule("semi-implicit", position=PositionRounding(0.25, "nearest-even")), Constants(2.0, 5.0), 0.1, -1.0
    )
    assert flight.y[:3].tolist() == [0.0, 0.5, 1.0]
    down = trace(
        Rule("semi-implicit", position=PositionRounding(0.25, "down")), Constants(2.0, 5.0), 0.1, -1.0
    )
    assert down.y[:3].tolist() == [0.0, 0.25, 0.5]


def test_carry_by_hand() -> None:
    """Loses 1.4 a step on a grain of 1: the remainder makes every third step or so take 2."""
    carried = Rule("average", Rounding("nearest-even", "end", carry=True))
    flight = trace(carried, Constants(1.4 * 32, 10.0, grain=1.0), 1 / 32)
    assert flight.v[:6].tolist() == [10.0, 9.0, 7.0, 6.0, 4.0, 3.0]


def test_levels_above_and_below() -> None:
    """Average, v0 10, g 20: apex 2.5; at level 2 the flight is (10 + √20)/20 s, at −1 (10 + √140)/20 s."""
    one = launches(20.0, 10.0, 1 / 1024)
    for level in (2.0, -1.0, 0.0):
        jumps = simulate(rule(), one, level)
        exact = (10 + math.sqrt(100 - 40 * level)) / 20
        assert float(airtime(jumps, 1 / 1024)) == pytest.approx(exact, abs=1e-5)
    assert int(simulate(rule(), one, 3.0).status) == Status.OUT_OF_REACH


def test_near_apex_is_counted_only_where_asked() -> None:
    one = launches(20.0, 10.0, 1 / 64)
    assert int(simulate(rule(), one).near_apex_steps) == -1
    heights = trace(rule(), Constants(20.0, 10.0), 1 / 64).y
    expected = int((heights >= 0.9 * heights.max()).sum())
    assert int(simulate(rule(), one, count_near_apex=True).near_apex_steps) == expected > 10


# --- the front ---


def test_shapes_kinds_and_broadcasting() -> None:
    jumps = simulate(rule(), launches(np.array([[800.0], [900.0]]), 270.0, [0.008, 0.016, 0.02], 1.0))
    expected = (np.int8, np.int32, np.float64, np.int32, np.float64, np.float64, np.int32)
    for field, kind in zip(fields(Jumps), expected, strict=True):
        assert getattr(jumps, field.name).shape == (2, 3)
        assert getattr(jumps, field.name).dtype == kind
    single = simulate(rule(), launches(900.0, 270.0, 0.016, 1.0))
    assert single.apex.shape == ()
    assert jumps.apex[1, 1] == single.apex
    assert simulate(rule(), launches(np.empty((0, 3)), 270.0, 0.01)).apex.shape == (0, 3)


def test_workers_and_compiling_change_nothing() -> None:
    gravity = np.linspace(500.0, 1500.0, 220)[:, None]
    many = launches(gravity, np.linspace(50.0, 120.0, 160), 0.016, 1.0)
    assert many.broadcast()[0].size > 2 * CHUNK
    one = simulate(rule(), many, compiled=True, count_near_apex=True)
    assert equal(one, simulate(rule(), many, compiled=True, workers=2, count_near_apex=True))
    few = Launches(gravity[::20], *(getattr(many, f.name) for f in fields(Launches)[1:]))
    plain = simulate(rule(), few, compiled=False, count_near_apex=True)
    picked = Jumps(*(np.ascontiguousarray(getattr(one, f.name)[::20]) for f in fields(Jumps)))
    assert equal(plain, picked)


def test_large_work_is_compiled_and_small_is_not(monkeypatch: pytest.MonkeyPatch) -> None:
    asked = []
    monkeypatch.setattr(kernel, "compiled", lambda: asked.append(1) or kernel.fly_each)
    monkeypatch.setattr(kernel, "is_compiled", lambda: False)
    simulate(rule(), launches(800.0, 270.0, MS, 1.0))
    assert not asked
    monkeypatch.setattr("designer.motion.simulate.PLAIN_STEPS", 1000)
    simulate(rule(), launches(800.0, 270.0, MS, 1.0))
    assert len(asked) == 1
    monkeypatch.setattr("designer.motion.simulate.PLAIN_STEPS", 1_000_000)
    monkeypatch.setattr(kernel, "is_compiled", lambda: True)  # it is paid for: then small work uses it too
    simulate(rule(), launches(800.0, 270.0, MS, 1.0))
    assert len(asked) == 2


def test_small_work_does_not_load_numba() -> None:
    script = (
        "import sys\n"
        "from designer.motion.jumps import Launches\n"
        "from designer.motion.rule import Constants, Rule\n"
        "from designer.motion.simulate import simulate, trace\n"
        "jumps = simulate(Rule('average'), Launches(800.0, 270.0, 0.008, 1.0, 1.0, float('inf')))\n"
        "trace(Rule('average'), Constants(800.0, 270.0), 0.008)\n"
        "assert int(jumps.steps) > 10\n"
        "heavy = {'numba', 'scipy', 'optuna', 'matplotlib'} & set(sys.modules)\n"
        "assert not heavy, heavy\n"
    )
    run = subprocess.run(
        [sys.executable, "-c", script], cwd=ROOT, capture_output=True, text=True, check=False
    )
    assert run.returncode == 0, run.stderr


@pytest.mark.parametrize(
    ("name", "value"),
    [
        ("gravity", 0.0),
        ("gravity", -9.8),
        ("gravity", math.nan),
        ("launch_speed", math.inf),
        ("step", 0.0),
        ("step", 1e-9),
        ("grain", -1.0),
        ("grain", 1e-300),
        ("fall_factor", -0.5),
        ("terminal_speed", 0.0),
        ("terminal_speed", math.nan),
    ],
)
def test_unusable_numbers_are_refused(name: str, value: float) -> None:
    good = launches(800.0, [270.0, 280.0], 0.008, 1.0)
    bad = replace(good, **{name: np.array([float(np.max(getattr(good, name))), value])})
    with pytest.raises(InputError) as caught:
        simulate(rule(), bad)
    assert [fault.field for fault in caught.value.faults] == [name]
    assert f"{value:g}" in str(caught.value)


def test_every_unusable_number_is_named_at_once() -> None:
    broken = rule(contact_tolerance=-1.0, position=PositionRounding(-1.0))
    with pytest.raises(ValueError, match="gravity") as caught:
        simulate(broken, launches(-1.0, 270.0, 0.0), math.nan, workers=0)
    assert isinstance(caught.value, InputError)
    named = {fault.field for fault in caught.value.faults}
    assert named == {"gravity", "step", "position.grain", "contact_tolerance", "level", "workers"}
    with pytest.raises(InputError):
        trace(rule(), Constants(-1.0, 270.0), 0.008)


def test_what_never_lands_is_traced_for_a_while() -> None:
    stuck = Constants(62.5, 270.0, grain=1.0)
    assert len(trace(rule(at="before-move"), stuck, 0.008).y) == 1001
    assert len(trace(rule(at="before-move"), stuck, 0.008, max_steps=7).y) == 8
    assert len(trace(rule(), Constants(800.0, 270.0), 0.008, max_steps=4).t) == 5
