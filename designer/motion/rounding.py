"""The only place that rounds: a number to a multiple of a grain, in one of six directions.

`snap` is plain Python that Numba compiles as it stands (see kernel.py); `snap_array` is its NumPy twin.
Both give the same bits. The directions are those of IEEE 754-2019, section 4.3, and "nearest-up", which is
the formula floor(x/q + 0.5) as builds write it, with that formula's own faults.
"""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import numpy as np

from designer.motion.rule import Mode

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

NEAREST_EVEN = 0
NEAREST_AWAY = 1
NEAREST_UP = 2
TOWARD_ZERO = 3
DOWN = 4
UP = 5

MODE_CODES: dict[Mode, int] = {
    Mode.NEAREST_EVEN: NEAREST_EVEN,
    Mode.NEAREST_AWAY: NEAREST_AWAY,
    Mode.NEAREST_UP: NEAREST_UP,
    Mode.TOWARD_ZERO: TOWARD_ZERO,
    Mode.DOWN: DOWN,
    Mode.UP: UP,
}
"""The number by which `snap` knows each mode."""

ALL_WHOLE = 4503599627370496.0
"""2**52: from here on binary64 has no fractions."""


def snap(x: float, grain: float, mode_code: int) -> float:
    """Return mode(x/grain)·grain, with zero as +0.0; x itself where the grain is 0.

    Ties: NEAREST_EVEN to the even multiple, NEAREST_AWAY away from zero, NEAREST_UP upward.
    """
    if grain == 0.0:
        return x
    ratio = x / grain
    if abs(ratio) >= ALL_WHOLE:
        return ratio * grain
    # Adding 0.0 turns −0.0 into +0.0 and changes nothing else.
    return whole(ratio, mode_code) * grain + 0.0


def whole(ratio: float, mode_code: int) -> float:
    """Return a whole number next to `ratio`, where |ratio| < 2**52."""
    if mode_code == NEAREST_UP:
        return float(math.floor(ratio + 0.5))
    if mode_code == DOWN:
        return float(math.floor(ratio))
    if mode_code == UP:
        return float(math.ceil(ratio))
    size = abs(ratio)
    low = math.floor(size)
    if mode_code != TOWARD_ZERO:
        # Exact: size and its floor are close enough together (Sterbenz) or the floor is 0.
        rest = size - low
        if rest > 0.5 or (rest == 0.5 and (mode_code == NEAREST_AWAY or low % 2 == 1)):
            low += 1
    return float(low) if ratio >= 0.0 else -float(low)


def snap_array(x: ArrayLike, grain: ArrayLike, mode: Mode) -> NDArray[np.float64]:
    """Return what `snap` returns, bit for bit, for arrays that broadcast together."""
    numbers = np.asarray(x, dtype=np.float64)
    grains = np.asarray(grain, dtype=np.float64)
    unrounded = grains == 0.0
    grains = np.where(unrounded, 1.0, grains)
    ratio = numbers / grains
    wholes = np.where(np.abs(ratio) >= ALL_WHOLE, ratio, _whole_array(ratio, Mode(mode)))
    return np.where(unrounded, numbers, wholes * grains + 0.0)


def _whole_array(ratio: NDArray[np.float64], mode: Mode) -> NDArray[np.float64]:
    """Return a whole number next to each `ratio`; only meant where |ratio| < 2**52."""
    if mode is Mode.NEAREST_EVEN:
        return np.rint(ratio)
    if mode is Mode.NEAREST_UP:
        return np.floor(ratio + 0.5)
    if mode is Mode.TOWARD_ZERO:
        return np.trunc(ratio)
    if mode is Mode.DOWN:
        return np.floor(ratio)
    if mode is Mode.UP:
        return np.ceil(ratio)
    size = np.abs(ratio)
    low = np.floor(size)
    return np.copysign(np.where(size - low >= 0.5, low + 1.0, low), ratio)
