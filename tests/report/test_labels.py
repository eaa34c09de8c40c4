"""Labels in a column: in order, near where they belong, never over each other."""

from __future__ import annotations

import itertools

import pytest
from hypothesis import given
from hypothesis import strategies as st

from designer.report.labels import spread


def test_labels_with_room_stay_where_they_are() -> None:
    assert spread([0.2, 0.8, 0.5], [0.1, 0.1, 0.1], 0.0, 1.0) == pytest.approx([0.2, 0.8, 0.5])


def test_labels_at_one_height_are_spread_evenly_around_it() -> None:
    assert spread([0.5, 0.5], [0.2, 0.2], 0.0, 1.0) == pytest.approx([0.4, 0.6])


@given(st.lists(st.tuples(st.floats(0, 1), st.floats(0.01, 0.1)), min_size=1, max_size=10))
def test_they_never_overlap_keep_their_order_and_stay_inside(rows: list[tuple[float, float]]) -> None:
    wanted, sizes = [row[0] for row in rows], [row[1] for row in rows]
    centres = spread(wanted, sizes, 0.0, 1.0)
    order = sorted(range(len(rows)), key=lambda i: wanted[i])
    for low, high in itertools.pairwise(order):
        assert centres[high] - centres[low] >= (sizes[low] + sizes[high]) / 2 - 1e-9
    for centre, size in zip(centres, sizes, strict=True):
        assert centre - size / 2 >= -1e-9
        assert centre + size / 2 <= 1 + 1e-9
