"""The textbook formulas against the textbooks' worked examples, and the formulas turned round."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from designer.motion.continuous import (
    constants_for,
    continuous_airtime,
    continuous_apex,
    continuous_height,
    continuous_landing_velocity,
    continuous_velocity,
    launch_speed_for,
    run_speed_for,
    times_at_height,
)
from tests.reference.worked_examples import EXAMPLES, HEIGHTS, Example

WITHIN = 1e-6
positive = st.floats(0.01, 1e4)


@pytest.mark.parametrize("example", EXAMPLES, ids=lambda example: example.source)
def test_worked_example(example: Example) -> None:
    """OpenStax University Physics vol. 1 (UP) and College Physics 2e (CP): sections named in each example."""
    thrown = (example.gravity, example.launch_speed)
    found = {
        "apex": continuous_apex(*thrown),
        "rise_time": example.launch_speed / example.gravity,
        "airtime": continuous_airtime(*thrown, example.level),
        "landing_velocity": continuous_landing_velocity(*thrown, example.level),
        "distance": example.run_speed * continuous_airtime(*thrown, example.level),
    }
    wanted = {name: getattr(example, name) for name in found if getattr(example, name) is not None}
    assert wanted
    # Some inputs are themselves given to six decimals only.
    for name, value in wanted.items():
        assert float(found[name]) == pytest.approx(value, abs=WITHIN, rel=1e-7), name


@pytest.mark.parametrize(("time", "height"), HEIGHTS)
def test_height_at_a_time(time: float, height: float) -> None:
    """College Physics 2e, section 2.7: 13.0 m/s upward."""
    assert float(continuous_height(9.80, 13.0, time)) == pytest.approx(height, abs=1e-12)


def test_velocity_at_a_height() -> None:
    """University Physics vol. 1, section 3.5: a booster of 200 m/s at 1000 m, ± 142.8 (142.828569)."""
    up, down = times_at_height(9.80, 200.0, 1000.0)
    assert float(continuous_velocity(9.80, 200.0, up)) == pytest.approx(142.828569, abs=WITHIN)
    assert float(continuous_velocity(9.80, 200.0, down)) == pytest.approx(-142.828569, abs=WITHIN)


def test_both_times_at_a_height() -> None:
    """University Physics vol. 1, section 4.3: 30 m/s at 45°, 10 m higher: 3.79 s (other root 0.54)."""
    up, down = times_at_height(9.80, 30.0 * np.sqrt(0.5), 10.0)
    assert float(up) == pytest.approx(0.538350, abs=WITHIN)
    assert float(down) == pytest.approx(3.790876, abs=WITHIN)


def test_inverse_of_the_worked_examples() -> None:
    """University Physics vol. 1, 3.5 (caught after 5.0 s; clears 2.50 m), 4.3 (90 m); College Physics 2.7."""
    gravity, speed = constants_for(30.625, 5.0)
    assert (float(gravity), float(speed)) == pytest.approx((9.80, 24.5), abs=WITHIN)
    assert float(launch_speed_for(9.80, 2.50)) == pytest.approx(7.0, abs=WITHIN)
    # A drop of 1.0000 m in 0.45173 s is the second half of a jump: g = 9.801039.
    assert float(constants_for(1.0, 2 * 0.45173)[0]) == pytest.approx(9.801039, abs=WITHIN)
    for speed, degrees in ((31.913099, 30.0), (37.042522, 70.0)):
        up, along = speed * np.sin(np.radians(degrees)), speed * np.cos(np.radians(degrees))
        assert float(run_speed_for(90.0, 9.80, up)) == pytest.approx(along, abs=WITHIN)
    # College Physics 2e, section 3.4: 24.77 m from 2.10 m up at 38.0°, 15.0 m/s (15.022891).
    up, along = 15.022891 * np.sin(np.radians(38.0)), 15.022891 * np.cos(np.radians(38.0))
    assert float(run_speed_for(24.77, 9.80, up, level=-2.10)) == pytest.approx(along, abs=WITHIN)


def test_sampled_motion_agrees_with_an_ode_solver() -> None:
    """SciPy's solve_ivp over a jump with heavier fall, as an outside integrator."""
    integrate = pytest.importorskip("scipy.integrate", reason="needs SciPy: pip install scipy")
    gravity, speed, factor, time = 30.0, 12.0, 2.5, 0.7

    def motion(_: float, state: np.ndarray) -> list[float]:
        return [state[1], -gravity * (1.0 if state[1] > 0.0 else factor)]

    top = speed / gravity
    rise = integrate.solve_ivp(motion, (0.0, top), [0.0, speed], rtol=1e-11, atol=1e-12)
    start = [rise.y[0, -1], -1e-300]
    fall = integrate.solve_ivp(motion, (top, time), start, rtol=1e-11, atol=1e-12)
    assert float(continuous_height(gravity, speed, time, factor)) == pytest.approx(fall.y[0, -1], abs=1e-9)
    assert float(continuous_velocity(gravity, speed, time, factor)) == pytest.approx(fall.y[1, -1], abs=1e-9)


@given(positive, positive, st.floats(0.1, 5.0))
def test_constants_for_is_the_inverse(apex: float, airtime: float, factor: float) -> None:
    gravity, speed = constants_for(apex, airtime, factor)
    assert float(continuous_apex(gravity, speed)) == pytest.approx(apex, rel=1e-12)
    assert float(continuous_airtime(gravity, speed, 0.0, factor)) == pytest.approx(airtime, rel=1e-12)


@given(positive, st.floats(-100.0, 1e4), st.floats(-500.0, 500.0), st.floats(0.1, 5.0))
def test_body_is_at_the_level_when_it_lands(
    gravity: float, speed: float, level: float, factor: float
) -> None:
    airtime = float(continuous_airtime(gravity, speed, level, factor))
    if level > float(continuous_apex(gravity, speed)):
        assert np.isnan(airtime)
        assert np.isnan(continuous_landing_velocity(gravity, speed, level, factor))
        return
    scale = abs(level) + float(continuous_apex(gravity, speed)) + abs(speed) * abs(airtime)
    assert float(continuous_height(gravity, speed, airtime, factor)) == pytest.approx(
        level, abs=1e-9 * scale + 1e-12
    )
    landing = float(continuous_landing_velocity(gravity, speed, level, factor))
    assert landing <= 0.0
    fastest = abs(speed) + gravity * max(factor, 1.0) * abs(airtime)
    assert float(continuous_velocity(gravity, speed, airtime, factor)) == pytest.approx(
        landing, abs=1e-6 * fastest + 1e-12
    )


def test_arrays_broadcast() -> None:
    airtime = continuous_airtime(np.array([[9.8], [20.0]]), np.array([4.0, 8.0, 12.0]), [-1.0, 0.0, 1.0])
    assert airtime.shape == (2, 3)
    assert float(airtime[1, 2]) == float(continuous_airtime(20.0, 12.0, 1.0))


def test_way_up_does_not_exist_below_the_take_off() -> None:
    up, down = times_at_height(9.8, 4.0, [-1.0, 0.5, 2.0])
    assert np.isnan(up).tolist() == [True, False, True]
    assert np.isnan(down).tolist() == [False, False, True]
