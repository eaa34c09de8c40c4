"""Sums of squares: bounds hold, and fronts of sums are those of every combination."""

import itertools

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from hypothesis.extra import numpy as hnp

from designer.search.several.fronts import (
    Beyond,
    Limit,
    Points,
    Price,
    added,
    least_cost,
    supports,
    undominated,
    vertices,
)

SUMS = hnp.arrays(np.float64, st.tuples(st.integers(1, 12), st.just(3)), elements=st.sampled_from(
    [0.0, 1e-18, 1e-3, 0.5, 1.0, 2.0, 3.0, 7.5, 100.0, 1e6]
))  # fmt: skip


def points(sums: np.ndarray, violated: bool = True) -> Points:
    none = np.zeros(len(sums))
    chosen = np.arange(len(sums), dtype=np.int32)[:, None]
    return Points(sums[:, 0].copy(), sums[:, 1].copy(), sums[:, 2].copy() if violated else none, chosen)


def triples(some: Points) -> set[tuple[float, float, float]]:
    return set(zip(some.squares.tolist(), some.spreads.tolist(), some.violation.tolist(), strict=True))


def front(every: set[tuple[float, ...]]) -> set[tuple[float, ...]]:
    def beats(a: tuple[float, ...], b: tuple[float, ...]) -> bool:
        return a != b and all(x <= y for x, y in zip(a, b, strict=True))

    return {one for one in every if not any(beats(other, one) for other in every)}


@given(SUMS, st.booleans())
def test_undominated_is_what_the_definition_says(sums: np.ndarray, violated: bool) -> None:
    some = points(sums, violated)
    assert triples(undominated(some)) == front(triples(some))
    assert len(undominated(some)) == len(triples(undominated(some)))  # equal ones once


@given(SUMS, SUMS)
def test_front_of_sums_is_the_front_of_the_sums_of_fronts(one: np.ndarray, other: np.ndarray) -> None:
    every = triples(added(points(one), points(other)))
    by_hand = {
        tuple(x + y for x, y in zip(a, b, strict=True))
        for a, b in itertools.product(triples(points(one)), triples(points(other)))
    }
    assert every == by_hand
    assert triples(undominated(added(undominated(points(one)), undominated(points(other))))) == front(every)


@given(SUMS, SUMS, st.sampled_from([0.0, 0.5, 1.0, 20.0]))
def test_supports_bound_every_sum(one: np.ndarray, other: np.ndarray, spread_weight: float) -> None:
    price = Price(3.0, spread_weight)
    lines = supports(one[:, 0], one[:, 1]) + supports(other[:, 0], other[:, 1])
    every = added(points(one, False), points(other, False))
    costs = price(every.squares, every.spreads)
    bound = float(least_cost(price, lines))
    assert bound <= costs.min()
    squares, spreads = vertices(lines)
    assert (squares >= 0.0).all()
    assert (spreads >= 0.0).all()


def test_bounds_are_close_on_a_smooth_front() -> None:
    """On x·y = 1 the bound is at most 3 % below the least cost, so that few cells have to be looked into."""
    x = np.geomspace(1e-3, 1e3, 2000)
    for spread_weight in (0.1, 1.0, 5.0):
        price = Price(1.0, spread_weight)
        least = price(x, 1.0 / x).min()
        assert 0.97 * least <= float(least_cost(price, supports(x, 1.0 / x))) <= least


def test_what_cannot_be_is_infinite() -> None:
    none = np.full(3, np.inf)
    assert least_cost(Price(1.0, 0.0), supports(none, none)) == np.inf
    assert not Limit(Price(1.0, 1.0), 5.0).may(supports(none, none), np.zeros(()))


@given(SUMS, SUMS)
def test_beyond_never_drops_what_a_front_does_not_dominate(front_: np.ndarray, more: np.ndarray) -> None:
    known = undominated(points(front_, False))
    beyond = Beyond(known.squares, known.spreads)
    new = points(more, False)
    kept = beyond.final(new)
    pairs = list(zip(known.squares.tolist(), known.spreads.tolist(), strict=True))
    expected = {
        (s, p, 0.0)
        for s, p, _ in triples(new)
        if not any(a <= s and b <= p for a, b in pairs)
    }  # fmt: skip
    assert triples(kept) == expected
    nothing = np.zeros(supports(new.squares, new.spreads).shape)
    may = beyond.keeps(new.squares, new.spreads, new.violation, nothing, 0.0)
    assert expected <= triples(new.take(may))
    if expected:
        assert beyond.may(supports(new.squares, new.spreads)[None])[0]


@given(SUMS, SUMS, st.floats(0.1, 50.0))
def test_a_limit_never_drops_what_ends_within_it(one: np.ndarray, rest: np.ndarray, cost: float) -> None:
    price = Price(2.0, 1.0)
    limit = Limit(price, cost)
    some, others = points(one), points(rest)
    lines = supports(others.squares, others.spreads)
    kept = triples(
        some.take(limit.keeps(some.squares, some.spreads, some.violation, lines, others.violation.min()))
    )
    for at, own in enumerate(triples_in_order(some)):
        sums = added(some.take(np.array([at])), others)
        if (price(sums.squares, sums.spreads, sums.violation) <= cost).any():
            assert own in kept


def triples_in_order(some: Points) -> list[tuple[float, float, float]]:
    return list(zip(some.squares.tolist(), some.spreads.tolist(), some.violation.tolist(), strict=True))


def test_limits_of_spreads_hold_whole_sums() -> None:
    some = points(np.array([[0.0, 2.0, 0.0], [1.0, 1.0, 0.0]]))
    assert len(Limit(Price(1.0, 1.0), spreads=1.5).final(some)) == 1
    assert Price(0.0, 1.0)(np.zeros(1), np.zeros(1))[0] == pytest.approx(0.0)
