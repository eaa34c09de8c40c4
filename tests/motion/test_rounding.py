"""One function rounds; its directions against a published table, its traps, and its array twin."""

from __future__ import annotations

import math
from fractions import Fraction

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from designer.motion.rounding import MODE_CODES, snap, snap_array
from designer.motion.rule import Mode
from tests.reference import twin
from tests.reference.rounding_table import COLUMNS, JUST_UNDER_HALF, TABLE

MODES = list(Mode)
STEADY = settings(deadline=None, derandomize=True, database=None, max_examples=150)
DYADIC = st.sampled_from([2.0**-16, 2.0**-8, 0.125, 0.5, 1.0, 4.0])
GRAINS = st.one_of(DYADIC, st.sampled_from([0.1, 0.3, 3.0, 7.5, 1 / 60]))
NUMBERS = st.one_of(
    st.floats(-1e6, 1e6),
    st.integers(-4000, 4000).map(lambda n: n / 2),
    st.integers(-4000, 4000).map(lambda n: n * 0.1),
)


def bits(x: float) -> bytes:
    return np.float64(x).tobytes()


def test_every_mode_has_its_own_code() -> None:
    assert set(MODE_CODES) == set(Mode)
    assert sorted(MODE_CODES.values()) == list(range(len(Mode)))


@pytest.mark.parametrize("mode", MODES)
@pytest.mark.parametrize("x", TABLE)
def test_published_table(x: float, mode: Mode) -> None:
    expected = TABLE[x][COLUMNS.index(mode.value)]
    assert snap(x, 1.0, MODE_CODES[mode]) == expected
    assert snap_array(x, 1.0, mode) == expected


@pytest.mark.parametrize("mode", MODES)
@pytest.mark.parametrize("grain", [0.125, 4.0])
def test_published_table_on_other_grains(grain: float, mode: Mode) -> None:
    """Powers of two scale exactly."""
    for x, row in TABLE.items():
        assert snap(x * grain, grain, MODE_CODES[mode]) == row[COLUMNS.index(mode.value)] * grain


def test_just_under_a_half() -> None:
    """SOURCES.md, section 4, computed: only the formula with + 0.5 is fooled."""
    assert snap(JUST_UNDER_HALF, 1.0, MODE_CODES[Mode.NEAREST_UP]) == 1.0
    for mode in (Mode.NEAREST_EVEN, Mode.NEAREST_AWAY):
        for sign in (1.0, -1.0):
            assert snap(sign * JUST_UNDER_HALF, 1.0, MODE_CODES[mode]) == 0.0
            assert snap_array(sign * JUST_UNDER_HALF, 1.0, mode) == 0.0


def test_minus_two_and_a_half_goes_up_or_away() -> None:
    """SOURCES.md, section 4: floor(−2.5 + ½) = −2 is half-up, not half-away."""
    assert snap(-2.5, 1.0, MODE_CODES[Mode.NEAREST_UP]) == -2.0
    assert snap(-2.5, 1.0, MODE_CODES[Mode.NEAREST_AWAY]) == -3.0


@pytest.mark.parametrize("mode", MODES)
@pytest.mark.parametrize("x", [2.0**52 + 1.0, -(2.0**52 + 1.0), 2.0**53 + 2.0, 1e300])
def test_what_has_no_fractions_stays(x: float, mode: Mode) -> None:
    assert snap(x, 1.0, MODE_CODES[mode]) == x
    assert snap_array(x, 1.0, mode) == x


@pytest.mark.parametrize("mode", MODES)
@pytest.mark.parametrize("x", [2.0**52 - 0.5, 2.0**51 + 0.5, -(2.0**52) + 0.5])
def test_just_under_the_guard(x: float, mode: Mode) -> None:
    expected = twin.snap(x, 1.0, mode.value)
    assert snap(x, 1.0, MODE_CODES[mode]) == expected
    assert snap_array(x, 1.0, mode) == expected


@pytest.mark.parametrize("mode", MODES)
@pytest.mark.parametrize("x", [0.0, -0.0, -0.2, 0.2])
def test_zero_has_no_minus(x: float, mode: Mode) -> None:
    for result in (snap(x, 1.0, MODE_CODES[mode]), float(snap_array(x, 1.0, mode))):
        assert result != 0.0 or math.copysign(1.0, result) == 1.0


@pytest.mark.parametrize("mode", MODES)
@given(x=st.floats(allow_nan=False, allow_infinity=False))
@STEADY
def test_grain_zero_changes_nothing(x: float, mode: Mode) -> None:
    assert bits(snap(x, 0.0, MODE_CODES[mode])) == bits(x)
    assert snap_array(x, 0.0, mode).tobytes() == bits(x)


@pytest.mark.parametrize("mode", MODES)
@given(x=NUMBERS, grain=GRAINS)
@STEADY
def test_same_bits_as_the_array_twin_and_the_plain_twin(x: float, grain: float, mode: Mode) -> None:
    result = bits(snap(x, grain, MODE_CODES[mode]))
    assert snap_array(x, grain, mode).tobytes() == result
    assert bits(twin.snap(x, grain, mode.value)) == result


@pytest.mark.parametrize("mode", MODES)
@given(x=NUMBERS, grain=DYADIC)
@STEADY
def test_it_is_the_multiple_that_the_mode_means(x: float, grain: float, mode: Mode) -> None:
    """Against exact fractions, where the quotient is exact too; nearest-up's own fault set aside."""
    exact, low = Fraction(x) / Fraction(grain), math.floor(Fraction(x) / Fraction(grain))
    rest = exact - low
    half = Fraction(1, 2)
    goes_up = {
        Mode.NEAREST_EVEN: rest > half or (rest == half and low % 2 == 1),
        Mode.NEAREST_AWAY: rest > half or (rest == half and x > 0),
        Mode.NEAREST_UP: Fraction(x / grain + 0.5) >= low + 1,
        Mode.TOWARD_ZERO: rest > 0 and x < 0,
        Mode.DOWN: False,
        Mode.UP: rest > 0,
    }[mode]
    assert Fraction(snap(x, grain, MODE_CODES[mode])) == (low + goes_up) * Fraction(grain)


@pytest.mark.parametrize("mode", MODES)
@given(x=NUMBERS, grain=DYADIC)
@STEADY
def test_rounding_twice_is_rounding_once(x: float, grain: float, mode: Mode) -> None:
    once = snap(x, grain, MODE_CODES[mode])
    assert bits(snap(once, grain, MODE_CODES[mode])) == bits(once)


@pytest.mark.parametrize("mode", [mode for mode in MODES if mode.is_nearest])
@given(x=NUMBERS, grain=GRAINS)
@STEADY
def test_rounding_twice_is_rounding_once_to_nearest_for_any_grain(x: float, grain: float, mode: Mode) -> None:
    once = snap(x, grain, MODE_CODES[mode])
    assert bits(snap(once, grain, MODE_CODES[mode])) == bits(once)


@pytest.mark.parametrize("mode", [Mode.NEAREST_EVEN, Mode.NEAREST_AWAY, Mode.TOWARD_ZERO])
@given(x=NUMBERS, grain=GRAINS)
@STEADY
def test_these_modes_treat_both_signs_alike(x: float, grain: float, mode: Mode) -> None:
    assert snap(-x, grain, MODE_CODES[mode]) == -snap(x, grain, MODE_CODES[mode])


def test_arrays_broadcast_and_mix_grains() -> None:
    x = np.array([0.5, 1.5, -0.26])[:, None]
    grain = np.array([0.0, 0.5, 1.0])
    assert snap_array(x, grain, Mode.NEAREST_EVEN).tolist() == [
        [0.5, 0.5, 0.0],
        [1.5, 1.5, 2.0],
        [-0.26, -0.5, 0.0],
    ]
