"""Hypervolume against published values, and what holds of every shortlist."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from designer.search.ranking import Leaders, Rows, absorb, contenders, undominated
from designer.search.shortlist import (
    FILLED,
    MOST,
    NOTICED,
    Options,
    against,
    choose,
    differences,
    differs,
    hypervolume,
)


def rows_of(miss: list[float], spread: list[float], violation: list[float] | None = None) -> Rows:
    count = len(miss)
    a, b = np.array(miss, dtype=float), np.array(spread, dtype=float)
    short = np.array(violation if violation is not None else [0.0] * count, dtype=float)
    index = np.arange(count)
    return Rows(index, a, b, a + b, short, a, index % 3 == 0, index // 2)


# {(1,2),(2,1)} at (3,3) is 3: published; {(5,5),(4,6),(2,7),(7,4)} at 10 is 38: read in moocore's own tests.
@pytest.mark.parametrize(
    ("points", "reference", "area"),
    [
        ([(1, 2), (2, 1)], (3, 3), 3),
        ([(5, 5), (4, 6), (2, 7), (7, 4)], (10, 10), 38),
        ([(1, 2), (2, 1), (2, 2), (5, 0)], (3, 3), 3),
        ([], (3, 3), 0),
    ],
)
def test_hypervolume_of_published_sets(
    points: list[tuple[int, int]], reference: tuple[float, float], area: float
) -> None:
    assert hypervolume(np.array(points, dtype=float), reference) == area


# Zitzler, Deb & Thiele, Evol. Comput. 8(2), 2000: the fronts of ZDT1 and ZDT2; areas computed exactly.
@pytest.mark.parametrize(("power", "area"), [(0.5, 0.8766666667), (2.0, 0.5433333333)])
def test_hypervolume_of_published_fronts(power: float, area: float) -> None:
    x = np.linspace(0.0, 1.0, 20_001)
    points = np.column_stack([x, 1.0 - x**power])
    assert hypervolume(points, (1.1, 1.1)) == pytest.approx(area, abs=1e-4)
    some = rows_of(points[:, 0].tolist(), points[:, 1].tolist())
    assert len(undominated(some)) == len(x)
    worse = rows_of([*points[:, 0], *(points[:, 0] + 0.01)], [*points[:, 1], *(points[:, 1] + 0.01)])
    assert undominated(worse).index.max() < len(x)


pairs = st.lists(
    st.tuples(st.integers(0, 12), st.integers(0, 12), st.sampled_from([0.0, 0.0, 0.0, 1.5, np.inf])),
    min_size=1,
    max_size=40,
)


@given(pairs, st.integers(1, 5))
@settings(max_examples=200, deadline=None)
def test_leaders_do_not_depend_on_lots_or_order(some: list[tuple[int, int, float]], lots: int) -> None:
    """Absorbing contenders lot by lot, in any order, remembers what absorbing all at once does."""
    rows = rows_of([m / 4 for m, _, _ in some], [s / 4 for _, s, _ in some], [v for _, _, v in some])
    whole = absorb(Leaders(), rows)
    piecemeal = Leaders()
    for lot in reversed(range(lots)):
        piecemeal = absorb(piecemeal, contenders(piecemeal, rows.take(rows.index % lots == lot)))
    for part in ("ranked", "front", "steady", "numbers", "pool"):
        assert getattr(piecemeal, part).index.tolist() == getattr(whole, part).index.tolist(), part


@given(pairs)
@settings(max_examples=200, deadline=None)
def test_ranking_and_front_against_plain_loops(some: list[tuple[int, int, float]]) -> None:
    """The order of designs, and dominance by definition; feasibility before cost: Deb 2000 (from memory)."""
    rows = rows_of([m / 4 for m, _, _ in some], [s / 4 for _, s, _ in some], [v for _, _, v in some])
    leaders = absorb(Leaders(), rows)
    landing = [k for k in range(len(rows)) if np.isfinite(rows.violation[k])]
    ranked = sorted(landing, key=lambda k: (rows.violation[k] > 0, rows.cost[k] + rows.violation[k], k))
    assert leaders.ranked.index.tolist() == ranked[:2]
    feasible = [k for k in landing if rows.violation[k] == 0]
    if feasible:
        found = {(rows.miss[k], rows.spread[k]) for k in feasible}
        front = {p for p in found if not any(q != p and q[0] <= p[0] and q[1] <= p[1] for q in found)}
        assert set(zip(leaders.front.miss, leaders.front.spread, strict=True)) == front
        assert len(leaders.front) == len(front)
        for k, miss, spread in zip(
            leaders.front.index, leaders.front.miss, leaders.front.spread, strict=True
        ):
            assert k == min(j for j in feasible if (rows.miss[j], rows.spread[j]) == (miss, spread))


@st.composite
def choices(draw: st.DrawFn) -> tuple[Options, list[int], list[int], list[int]]:
    count = draw(st.integers(1, 25))
    number = st.floats(0.0, 3.0, allow_nan=False)
    miss, spread = (np.array(draw(st.lists(number, min_size=count, max_size=count))) for _ in range(2))
    look = st.sampled_from([0.0, 100.0, 102.0, 110.0, 131.0])
    looks = np.array(draw(st.lists(st.lists(look, min_size=6, max_size=6), min_size=count, max_size=count)))
    options = Options(looks, miss, spread, miss + spread, miss <= 1.0)
    best = int(np.argmin(options.cost))
    others = draw(st.lists(st.integers(0, count - 1), max_size=2))
    some = st.lists(st.integers(0, count - 1), unique=True, max_size=count)
    return options, [best, *others], draw(some), draw(some)


@given(choices())
@settings(max_examples=300, deadline=None)
def test_every_shortlist(case: tuple[Options, list[int], list[int], list[int]]) -> None:
    """The best is first, those with a place are in, the rest differ by more than 5 % from all others."""
    options, always, front, pool = case
    picks = choose(options, always, np.array(front, dtype=np.int64), np.array(pool, dtype=np.int64))
    chosen = [pick.option for pick in picks]
    assert chosen[0] == always[0]
    assert set(always) <= set(chosen)
    assert len(set(chosen)) == len(chosen) <= MOST
    assert options.cost[chosen[1:]].tolist() == sorted(options.cost[chosen[1:]])
    for pick in picks:
        if pick.reason == "always":
            continue
        assert pick.option in (front if pick.reason == "front" else pool)
        for other in chosen:
            if other != pick.option:
                apart = differences(options.looks[pick.option], options.looks[other])
                assert apart.max() > NOTICED
    if len(picks) < min(FILLED, MOST):
        left = options.looks[np.array(pool, dtype=np.int64)]
        assert not differs(left, options.looks[chosen]).any()


def test_front_members_beyond_the_tolerance_are_worth_nothing() -> None:
    looks = np.array([[100.0] * 6, [120.0] * 6, [150.0] * 6])
    miss, spread = np.array([0.2, 2.5, 0.1]), np.array([0.5, 0.1, 0.8])
    options = Options(looks, miss, spread, miss + spread, miss <= 1.0)
    picks = choose(options, [0], np.array([0, 1, 2]), np.array([], dtype=np.int64))
    assert [(pick.option, pick.reason) for pick in picks] == [(0, "always"), (2, "front")]


def test_what_is_said_of_a_difference() -> None:
    looks = np.array([[100.0, 0.7, 0.0, 1000.0, 400.0, 0.0], [101.0, 0.8, 0.0, 880.0, 400.0, 0.0]])
    options = Options(
        looks, np.array([0.5, 0.5]), np.array([0.5, 0.56]), np.array([1.0, 1.06]), np.array([True, True])
    )
    assert against(options, 1, 0) == "14 % longer airtime, 12 % less gravity, at 6 % more cost"
