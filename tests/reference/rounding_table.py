"""Rounding to whole numbers, from published tables.

Source: the table in the public documentation of java.math.RoundingMode (its HALF_UP is our nearest-away,
HALF_EVEN nearest-even, DOWN toward-zero, CEILING up, FLOOR down). IEEE 754-2019 section 4.3 has the binary
ones (from memory). nearest-up stands in neither: it is floor(x + 1/2), written out here by hand.
"""

from __future__ import annotations

COLUMNS = ("toward-zero", "up", "down", "nearest-away", "nearest-even", "nearest-up")

TABLE = {
    5.5: (5, 6, 5, 6, 6, 6),
    2.5: (2, 3, 2, 3, 2, 3),
    1.6: (1, 2, 1, 2, 2, 2),
    1.1: (1, 2, 1, 1, 1, 1),
    -1.1: (-1, -1, -2, -1, -1, -1),
    -1.6: (-1, -1, -2, -2, -2, -2),
    -2.5: (-2, -2, -3, -3, -2, -2),
    -5.5: (-5, -5, -6, -6, -6, -5),
}
"""x → what each of COLUMNS makes of it."""

JUST_UNDER_HALF = 0.49999999999999994
"""The binary64 below 0.5: floor(x + 1/2) makes 1 of it, rounding to nearest 0 (computed)."""
