"""The continuous jump: numbers by hand, and the other implementation of the same formulas."""

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from designer.motion.continuous import continuous_airtime, continuous_apex, continuous_landing_velocity
from designer.motion.rule import How, LandingTest, Second
from designer.search.textbook import blur, flight, measures


def constants(**changes: float) -> dict[str, float]:
    usual = {"gravity": 10.0, "launch_speed": 10.0, "run_speed": 3.0, "fall_factor": 1.0,
             "terminal_speed": math.inf, "gravity_factor": 1.0, "step_up": 0.25,
             "edge_allowance": 0.5}  # fmt: skip
    return usual | changes


def test_a_plain_jump_by_hand() -> None:
    found = measures(constants(), 0.1)
    # v²/2g = 5, v/g = 1 s up and 1 s down, 3·2 + 0.5 = 6.5 across; the last 0.5 of the height takes √(0.1) s
    # each way.
    expected = {"apex": 5.0, "apex_time": 1.0, "airtime": 2.0, "landing_speed": 10.0, "max_gap": 6.5,
                "sure_gap": 6.2, "step_top": 5.25, "steps": 20.0, "effective_gravity": 10.0,
                "time_near_apex": 2.0 * math.sqrt(0.1)}  # fmt: skip
    assert found == pytest.approx(expected, rel=1e-14)


def test_a_factor_on_gravity_counts_everywhere() -> None:
    assert measures(constants(gravity=5.0, gravity_factor=2.0), 0.1) == measures(constants(), 0.1)


def test_a_terminal_speed_by_hand() -> None:
    # From 20 up: 2 s of rise. Down at 10 m/s²: 10 m/s after 1 s and 5 m; the other 15 m take 1.5 s.
    found = flight(constants(launch_speed=20.0, terminal_speed=10.0))
    assert (found.apex, found.airtime, found.landing_speed) == pytest.approx((20.0, 4.5, 10.0))


@given(st.floats(1.0, 2000.0), st.floats(1.0, 900.0), st.floats(0.3, 4.0))
def test_equals_the_formulas_of_motion(gravity: float, launch: float, fall: float) -> None:
    found = flight(constants(gravity=gravity, launch_speed=launch, fall_factor=fall))
    assert found.apex == pytest.approx(float(continuous_apex(gravity, launch)))
    assert found.airtime == pytest.approx(float(continuous_airtime(gravity, launch, 0.0, fall)))
    assert found.landing_speed == pytest.approx(
        -float(continuous_landing_velocity(gravity, launch, 0.0, fall))
    )


@pytest.mark.parametrize(
    ("second", "apex", "apex_time", "airtime"),
    [
        # At the apex (5 m, 1 s) up again with 10 m/s: 10 m at 2 s, then √2 s down.
        (Second(10.0), 10.0, 2.0, 2.0 + math.sqrt(2.0)),
        # At 0.5 s the jump is at 3.75 m with 5 m/s; 5 more make 10: 8.75 m at 1.5 s, then √1.75 s down.
        (Second(5.0, 0.5, How.ADD), 8.75, 1.5, 1.5 + math.sqrt(1.75)),
        # At 1.5 s it is at 3.75 m with −5 m/s; set to 4: 0.8 m more, below the first top; √0.91 s down.
        (Second(4.0, 1.5), 5.0, 1.0, 1.9 + math.sqrt(0.91)),
        # At 1.5 s 2 more than −5: still falling, with 3 m/s: 3.75 = 3t + 5t².
        (Second(2.0, 1.5, How.ADD), 5.0, 1.0, 1.5 + (-3.0 + math.sqrt(9.0 + 75.0)) / 10.0),
        # After the landing there is none.
        (Second(10.0, 2.5), 5.0, 1.0, 2.0),
    ],
)  # fmt: skip
def test_a_second_jump_by_hand(second: Second, apex: float, apex_time: float, airtime: float) -> None:
    found = flight(constants(), second)
    assert (found.apex, found.apex_time, found.airtime) == pytest.approx((apex, apex_time, airtime))


def test_steps_blur_times_and_speeds() -> None:
    swept, late = (blur(constants(), 0.02, test) for test in (LandingTest.SWEPT, LandingTest.END_OF_STEP))
    assert (swept["apex_time"], swept["airtime"], late["airtime"]) == (0.01, 0.0, 0.02)
    assert late["max_gap"] == pytest.approx(0.06)
    assert swept["landing_speed"] == pytest.approx(0.2)
    assert swept["apex"] == pytest.approx(10.0 * 0.02**2 / 8.0)
