"""Numbers as tables show them: sensible figures, "–" for none, "!" for what is off."""

from __future__ import annotations

import math

from designer.brief.model import Block, Feature, Gap
from designer.motion.rule import Constants
from designer.objective.verdict import FeatureVerdict
from designer.report.words import NO_VALUE, number


def decimals(within: float) -> int:
    """Return how many decimals show a twentieth of a tolerance."""
    return max(0, -math.floor(math.log10(within / 10.0))) if within > 0 else 1


def figure(value: float | None, places: int | None = None, *, signed: bool = False) -> str:
    """Return a number with so many decimals (None: four significant figures), "–" where there is none."""
    if value is None or not math.isfinite(value):
        return NO_VALUE
    if places is None:
        places = 0 if value == 0 else max(0, 3 - math.floor(math.log10(abs(value))))
        places = min(places, 6)
    text = f"{value:{'+' if signed else ''}.{places}f}"
    if float(text) == 0.0:
        text = text.replace("-", "+" if signed else "")
    return text.replace("-", "−")


def constant_text(name: str, constants: Constants) -> str:
    """Return one constant as it would be typed: steps in ms, no terminal speed as "none"."""
    value = getattr(constants, name)
    if value is None:
        return "none" if name == "terminal_speed" else NO_VALUE
    return f"{number(value * 1000, 6)} ms" if name == "step" else number(value)


def deviation_text(deviation: float | None) -> str:
    """Return a deviation in tolerances, with "!" where it is out of tolerance or does not exist."""
    if deviation is None:
        return f"{NO_VALUE}!"
    off = abs(deviation) > 1.0
    # A hair beyond one tolerance should not read as exactly one.
    text = figure(deviation, 2 if off and abs(deviation) < 1.05 else 1, signed=True)
    return text + ("!" if off else "")


def size_of(feature: Feature) -> float:
    """Return what a feature's slack is measured against: a height, a width, the length of a block."""
    if isinstance(feature, Gap):
        return feature.width
    return feature.length if isinstance(feature, Block) else feature.height


def spare_text(feature: Feature, found: FeatureVerdict) -> str:
    """Return a feature's signed slack to a thousandth of its size, "!" where the demand does not hold."""
    size = size_of(feature)
    places = max(0, 3 - math.floor(math.log10(size))) if size > 0.0 else 3
    return figure(found.spare, places, signed=True) + ("" if found.holds else "!")
