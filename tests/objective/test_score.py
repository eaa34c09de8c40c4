"""The score against numbers worked out by hand from the formulas of the design (section 5)."""

import math
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from designer.brief.model import Choice, Gap, JumpBrief, Ledge, Target
from designer.objective.score import nine_digits, score
from designer.objective.table import fixed_lengths
from tests.reference.make import brief_of, table_of

APEX = Target("apex", within=2.0, aim=120.0)
AIRTIME = Target("airtime", within=0.02, aim=0.76, weight=3.0)
GAP = Target("max_gap", within=10.0, at_least=400.0)


def test_aims_count_at_the_nominal_rate_in_tolerances() -> None:
    table = table_of(apex=([123.0], [121.0], [125.0]), airtime=([0.75], [0.74], [0.77]))
    scores = score(brief_of(APEX, AIRTIME), [table])
    # d = 1.5 (weight 1) and −0.5 (weight 3); s = 2 and 1.5.
    assert scores.miss[0] == pytest.approx(math.sqrt((1.5**2 + 3 * 0.5**2) / 4))
    assert scores.rate_spread[0] == pytest.approx(math.sqrt((2.0**2 + 3 * 1.5**2) / 4))
    assert scores.worst[0] == pytest.approx(1.5)
    assert scores.violation[0] == 0.0


def test_bounds_count_at_the_worst_rate_and_only_beyond() -> None:
    brief = brief_of(GAP)
    below = table_of(max_gap=([450.0], [385.0], [470.0]))
    inside = table_of(max_gap=([450.0], [401.0], [470.0]))
    assert score(brief, [below]).miss[0] == pytest.approx(1.5)
    assert score(brief, [inside]).miss[0] == 0.0
    assert score(brief_of(replace(GAP, at_least=None, at_most=460.0)), [inside]).miss[0] == pytest.approx(1.0)


def test_spread_weight_weighs_the_spread_in_the_cost() -> None:
    brief = brief_of(APEX)
    brief = replace(brief, rates=replace(brief.rates, spread_weight=0.25))
    scores = score(brief, [table_of(apex=([122.0], [120.0], [124.0]))])
    assert scores.cost[0] == pytest.approx(1.0 + 0.25 * 2.0)


def test_without_targets_miss_and_spread_are_zero() -> None:
    scores = score(brief_of(), [table_of(apex=([1.0, 2.0], [1.0, 2.0], [3.0, 2.0]))])
    assert scores.cost.tolist() == [0.0, 0.0]


def test_features_fall_short_at_their_worst_rate_in_tolerances() -> None:
    brief = brief_of(
        APEX,
        ledges=(Ledge("awning", 110.0, "reach", 2.0), Ledge("sign", 124.0, "stay-out", 1.0)),
        gaps=(Gap("alley", 380.0, "cross", 0.0, 5.0), Gap("river", 500.0, "stay-out", 0.0)),
    )
    table = table_of(
        apex=([118.0, 118.0], [111.0, 113.0], [125.0, 122.0]),
        step_top=([118.0, 118.0], [111.0, 113.0], [125.0, 122.0]),
        max_gap=([400.0, 400.0], [390.0, 390.0], [505.0, 499.0]),
        sure_gap=([390.0, 390.0], [380.0, 386.0], [500.0, 490.0]),
    )
    scores = score(brief, [table])
    assert scores.shortfalls[0].tolist() == pytest.approx([1.0, 2.0, 5.0, 5.0])
    # Ledges in units of the apex' tolerance 2; gaps have no target, so in 1 % of the gap.
    assert scores.violation[0] == pytest.approx(1.0 / 2 + 2.0 / 2 + 5.0 / 3.8 + 5.0 / 5.0)
    assert scores.feasible.tolist() == [False, True]


def test_a_far_side_above_the_apex_falls_short_in_height() -> None:
    brief = brief_of(APEX, gaps=(Gap("roof", 300.0, "cross", far_level=121.0),))
    key = {"max_gap__121.0": ([0.0], [0.0], [0.0]), "sure_gap__121.0": ([0.0], [0.0], [0.0])}
    scores = score(brief, [table_of(apex=([118.0], [117.0], [119.0]), **key)])
    assert scores.shortfalls[0, 0] == pytest.approx(4.0)
    assert scores.violation[0] == pytest.approx(2.0)


def test_a_hair_of_a_shortfall_is_none() -> None:
    brief = brief_of(APEX, ledges=(Ledge("awning", 110.0, "reach"),))
    table = table_of(apex=([110.0], [110.0], [110.0]), step_top=([110.0], [110.0 - 9e-10], [110.0]))
    assert score(brief, [table]).feasible[0]


def test_a_jump_that_never_lands_is_infeasible() -> None:
    table = table_of([False], apex=([np.nan], [np.nan], [np.nan]))
    scores = score(brief_of(APEX), [table])
    assert math.isinf(scores.violation[0])
    assert math.isnan(scores.cost[0])
    assert not scores.feasible[0]


def test_jumps_count_by_their_weight() -> None:
    jumps = (JumpBrief("walk", (APEX,), 1.0), JumpBrief("hop", (APEX,), 3.0))
    tables = [replace(table_of(apex=([122.0], [122.0], [122.0])), name="walk"),
              replace(table_of(apex=([120.0], [120.0], [120.0])), name="hop")]  # fmt: skip
    assert score(brief_of(jumps=jumps), tables).miss[0] == pytest.approx(math.sqrt(1.0 / 4.0))


def test_terms_of_modules_count_like_targets_of_weight_one() -> None:
    table = table_of(apex=([120.0], [120.0], [120.0]))
    scores = score(brief_of(APEX), [table], {"beat": np.array([2.0])})
    assert scores.miss[0] == pytest.approx(math.sqrt(2.0))
    assert scores.worst[0] == 2.0


@given(st.floats(min_value=-1e30, max_value=1e30, allow_nan=False))
def test_nine_digits_is_decimal_rounding(x: float) -> None:
    # Python prints correctly rounded decimals; a value on the very edge may go to either side.
    expected = float(f"{x:.8e}")
    got = float(nine_digits(np.array([x]))[0])
    assert got == pytest.approx(expected, rel=1.01e-8)
    assert float(nine_digits(np.array([got]))[0]) == got


@given(st.integers(1, 999_999_999), st.integers(-12, 12))
def test_nine_digits_keeps_short_numbers(figures: int, exponent: int) -> None:
    x = float(f"{figures}e{exponent}")
    assert float(nine_digits(np.array([x]))[0]) == x


def test_nine_digits_leaves_the_odd_ones_alone() -> None:
    values = np.array([0.0, np.inf, -np.inf, np.nan])
    assert np.array_equal(nine_digits(values), values, equal_nan=True)


def test_fixed_lengths_count_even_where_nothing_else_is_fixed() -> None:
    search = {"step_up": Choice((7.0,)), "edge_allowance": Choice((3.0,))}
    assert fixed_lengths(brief_of(search=search, base=None)) == (7.0, 3.0)
    assert fixed_lengths(brief_of()) == (0.0, 0.0)


def test_noise_in_the_last_bits_is_not_out_of_tolerance() -> None:
    table = table_of(airtime=([0.78], [0.78], [0.78]))
    scores = score(brief_of(Target("airtime", within=0.02, aim=0.76)), [table])
    assert (0.78 - 0.76) / 0.02 > 1.0  # what binary64 makes of it
    assert scores.worst[0] == 1.0
