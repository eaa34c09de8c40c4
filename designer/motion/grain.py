"""What a grain does to gravity: the gravity that acts, where rounding flips, gravities that it leaves alone.

With δ = g·h/q grains a step, rounding makes each step take a whole number D of grains, so the gravity that
acts is D·q/h. D flips where δ passes m + ½ (nearest modes) or a whole number (the directed ones).
"""

from __future__ import annotations

import math
from fractions import Fraction
from typing import TYPE_CHECKING

import numpy as np

from designer.motion.rule import Mode, Rule

if TYPE_CHECKING:
    from collections.abc import Iterable

    from numpy.typing import ArrayLike, NDArray

    Floats = NDArray[np.float64]
    Bools = NDArray[np.bool_]

NEAR = 1e-9
"""This many grains from a flip, float noise decides."""

LARGEST_DENOMINATOR = 1_000_000
"""Steps are whole ms, or 1 over a rate: as fractions of a second their denominators are no larger."""


def flip_margin(
    rule: Rule, gravity: ArrayLike, grain: ArrayLike, fall_factor: ArrayLike, steps: ArrayLike
) -> Floats:
    """Return how far gravity may move before rounding flips at one of the steps, in gravity's unit.

    gravity, grain, fall_factor: shapes that broadcast to S. steps: seconds, (columns,) or S + (columns,).
    The smallest margin over the steps and over both gravities in play (that of gravity·fall_factor is divided
    by the factor), shaped S; NaN without a grain and with carry, where nothing flips.
    """
    g, q, factor = (np.asarray(a, dtype=np.float64)[..., None] for a in (gravity, grain, fall_factor))
    h = np.asarray(steps, dtype=np.float64)
    rounds = (q > 0.0) & (not rule.rounding.carry)
    q = np.where(rounds, q, 1.0)
    margin = _grains_to_flip(rule, g * h / q) * q / h
    falls = factor > 0.0
    divisor = np.where(falls, factor, 1.0)
    falling = _grains_to_flip(rule, g * factor * h / q) * q / h / divisor
    margin = np.where(falls, np.minimum(margin, falling), margin)
    result: Floats = np.min(np.where(rounds, margin, np.nan), axis=-1)
    return result


def is_tie(rule: Rule, gravity: ArrayLike, grain: ArrayLike, step: ArrayLike) -> Bools:
    """Return where a step's gravity lies on a flip, to within float noise; any shapes that broadcast.

    In nearest modes that is a tie; in the others a whole number of grains, which noise may take either way.
    """
    g, q, h = (np.asarray(a, dtype=np.float64) for a in (gravity, grain, step))
    rounds = (q > 0.0) & (not rule.rounding.carry)
    off: Floats = _grains_to_flip(rule, g * h / np.where(rounds, q, 1.0))
    return rounds & (off < NEAR)


def effective_gravity_per_step(
    rule: Rule, gravity: ArrayLike, grain: ArrayLike, step: ArrayLike, *, falling: bool = False
) -> Floats:
    """Return the gravity that acts once v is on the grain, D·q/h, while rising or `falling`; broadcasts.

    `falling` says only which way: give it gravity·fall_factor. At a tie it is what the mode makes of one: the
    even D in nearest-even (from its second step on), the smaller one in nearest-up, the smaller rising and
    the larger falling in nearest-away. `gravity` itself without a grain, and with carry (exact in the mean).
    """
    g, q, h = (np.asarray(a, dtype=np.float64) for a in (gravity, grain, step))
    rounds = (q > 0.0) & (not rule.rounding.carry)
    grains = g * h / np.where(rounds, q, 1.0)
    return np.where(rounds, _grains_taken(rule.rounding.mode, grains, falling) * q / h, g)


def _grains_taken(mode: Mode, grains: Floats, falling: bool) -> Floats:
    """Return D, given δ: how many whole grains a step takes from a velocity on the grain."""
    low = np.floor(grains)
    if mode.is_nearest:
        even = low + np.mod(low, 2.0)
        tied = {Mode.NEAREST_EVEN: even, Mode.NEAREST_UP: low, Mode.NEAREST_AWAY: low + float(falling)}[mode]
        return np.where(np.abs(grains - low - 0.5) < NEAR, tied, np.floor(grains + 0.5))
    # Within noise of a whole number it is taken as that number.
    near = np.floor(grains + 0.5)
    whole = np.abs(grains - near) < NEAR
    up = mode is Mode.DOWN or (mode is Mode.TOWARD_ZERO and not falling)
    return np.where(whole, near, np.ceil(grains) if up else low)


def _grains_to_flip(rule: Rule, grains: Floats) -> Floats:
    """Return how far δ is from the nearest flip, in grains."""
    rest = grains - np.floor(grains)
    off: Floats = np.abs(rest - 0.5) if rule.rounding.mode.is_nearest else np.minimum(rest, 1.0 - rest)
    return off


def aligned_gravities(rule: Rule, grain: float, steps: Iterable[float], low: float, high: float) -> Floats:
    """Return the gravities in [low, high] that rounding makes equal at every step, ascending, length/s².

    In nearest modes they are the multiples of q/gcd(steps): a whole number of grains at every step, which
    rounding leaves alone, as far from flips as can be. In the directed modes a whole number of grains is the
    flip itself; there each gravity is half a grain (at the longest step) to the side from which every step
    still takes those grains: below for down and toward-zero (which then fits the rise only), above for up.
    Empty without a grain and with carry, where there is nothing to align.
    """
    exact = [as_fraction(step) for step in steps]
    if not (grain > 0.0) or rule.rounding.carry or not exact:
        return np.empty(0)
    unit = Fraction(grain) / _common_measure(exact)
    aside = Fraction(0)
    if not rule.rounding.mode.is_nearest:
        aside = Fraction(grain) / (2 * max(exact))
        aside = aside if rule.rounding.mode is Mode.UP else -aside
    first = max(1, math.ceil((Fraction(low) - aside) / unit))
    last = math.floor((Fraction(high) - aside) / unit)
    return np.array([float(m * unit + aside) for m in range(first, last + 1)], dtype=np.float64)


def flip_gravities(
    rule: Rule, grain: float, steps: Iterable[float], low: float, high: float, *, fall_factor: float = 1.0
) -> Floats:
    """Return every gravity in [low, high] at which rounding flips at one of the steps, ascending, distinct.

    With a `fall_factor` also those at which gravity·fall_factor flips. Empty without a grain and with carry.
    """
    if not (grain > 0.0) or rule.rounding.carry:
        return np.empty(0)
    offset = 0.5 if rule.rounding.mode.is_nearest else 0.0
    found = [np.empty(0)]
    for step in steps:
        for factor in {1.0, fall_factor} - {0.0}:
            apart = grain / (step * factor)
            numbers = np.arange(math.floor(low / apart - offset), math.ceil(high / apart - offset) + 1.0)
            found.append((numbers + offset) * apart)
    flips = np.sort(np.concatenate(found))
    flips = flips[(flips > 0.0) & (flips >= low * (1.0 - 1e-12)) & (flips <= high * (1.0 + 1e-12))]
    # The same gravity computed from two steps may differ in its last bits.
    distinct: Floats = flips[np.diff(flips, prepend=-np.inf) > 1e-12 * flips]
    return distinct


def flips_near(rule: Rule, gravity: float, grain: float, step: float, count: int) -> Floats:
    """Return the `count` gravities nearest to `gravity` at which rounding flips at this step, nearest first.

    Only gravities above 0. Empty without a grain and with carry.
    """
    if not (grain > 0.0) or rule.rounding.carry or count < 1:
        return np.empty(0)
    apart = grain / step
    offset = 0.5 if rule.rounding.mode.is_nearest else 0.0
    middle = math.floor(gravity / apart - offset)
    first = middle - count if offset else max(1, middle - count)
    numbers = np.arange(max(0, first), middle + 2 * count + 2, dtype=np.float64)
    flips: Floats = (numbers + offset) * apart
    return flips[np.argsort(np.abs(flips - gravity), kind="stable")][:count]


def as_fraction(step: float) -> Fraction:
    """Return the step as the exact number of seconds that was meant: a whole number of ms, or 1 over a rate.

    The simplest fraction within two units in the last place (fractions as simple as these lie a million times
    farther apart); where there is none, the binary64 number itself.
    """
    exact = Fraction(step)
    for largest in (1_000, LARGEST_DENOMINATOR):
        simple = exact.limit_denominator(largest)
        if abs(simple - exact) <= exact / 2**51:
            return simple
    return exact


def _common_measure(numbers: list[Fraction]) -> Fraction:
    """Return the largest fraction of which every number is a multiple: gcd of fractions."""
    denominator = math.lcm(*(number.denominator for number in numbers))
    return Fraction(math.gcd(*(int(number * denominator) for number in numbers)), denominator)
