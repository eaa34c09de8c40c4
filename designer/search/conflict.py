"""Where nothing is feasible: which demands clash, and by how much."""

from __future__ import annotations

import math
from collections.abc import Callable, Collection, Sequence
from dataclasses import dataclass
from itertools import combinations
from typing import TYPE_CHECKING

import numpy as np

from designer.brief.model import Block, Brief, Feature, Gap, Ledge
from designer.objective.score import Scores, nine_digits, views_of
from designer.objective.table import fixed_lengths
from designer.search.result import Clash

if TYPE_CHECKING:
    from numpy.typing import NDArray

MOST_CLASHES = 3
"""How many clashes are told; more only confuse."""
MOST_BITS = 62
"""So many features fit into one of NumPy's whole numbers."""
LARGEST_SET = 3
"""Sets of more demands than this say nothing to a person."""


def failing_patterns(scores: Scores) -> set[int]:
    """Return which features fail together in designs that land: bit k stands for feature k."""
    short = scores.shortfalls[np.isfinite(scores.violation)] > 0.0
    features = short.shape[1]
    if features > MOST_BITS:
        return {sum(1 << int(k) for k in np.flatnonzero(row)) for row in np.unique(short, axis=0)}
    bits = short.astype(np.int64) @ (np.int64(1) << np.arange(features, dtype=np.int64))
    return {int(pattern) for pattern in np.unique(bits)}


def least_sums(shortfalls: NDArray[np.float64], sets: Sequence[Sequence[int]]) -> list[float]:
    """Return for each set of features the least sum of shortfalls, (designs, features), over the designs."""
    return [float(np.min(shortfalls[:, list(one)].sum(axis=1))) for one in sets]


def clashing_sets(patterns: Collection[int], features: int) -> list[tuple[int, ...]]:
    """Return the smallest sets of features that no design fulfils together, smallest first.

    A set that holds another clashing set is left out. Where even three never clash by themselves, it is the
    set of all features that fail somewhere.
    """
    found: list[tuple[int, ...]] = []
    for size in range(1, LARGEST_SET + 1):
        found += [
            one
            for one in combinations(range(features), size)
            if all(pattern & sum(1 << k for k in one) for pattern in patterns)
            and not any(set(smaller) <= set(one) for smaller in found if len(smaller) < size)
        ]
    return found or [tuple(k for k in range(features) if any(pattern >> k & 1 for pattern in patterns))]


VERBS = {
    "reach": "reach",
    "cross": "cross",
    "stay-out": "stay out of",
    "clear": "clear",
    "stay-under": "stay under",
}


@dataclass(frozen=True, slots=True)
class _Demand:
    """A ledge, gap, block or ceiling as a bound on a measure."""

    feature: Feature
    what: str
    """ "apex", "gap", or "clearance at 40.0" of a block."""
    at_least: bool
    bound: float
    jump: str | None = None
    """Of several jumps the one that must."""

    @property
    def name(self) -> str:
        """The feature's name, of several jumps with the one that must."""
        return self.feature.name if self.jump is None else f"{self.feature.name} ({self.jump})"

    def words(self, decimals: int) -> str:
        """Return "at least 120.0"."""
        return f"at {'least' if self.at_least else 'most'} {self.bound:.{decimals}f}"

    def sentence(self, decimals: int) -> str:
        """Return "reach awning: apex at least 112.0", of several jumps with "walk: " before it."""
        text = f"{VERBS[self.feature.must]} {self.feature.name}: {self.what} {self.words(decimals)}"
        text += f" to a far side at {self.level:g}" if self.level else ""
        return text if self.jump is None else f"{self.jump}: {text}"

    @property
    def level(self) -> float:
        """Return the level of a gap's far side; 0 for anything else."""
        return self.feature.far_level if isinstance(self.feature, Gap) else 0.0


def _demands(brief: Brief) -> list[_Demand]:
    """Return every feature as a bound, of several jumps one by one; step_up is off a ledge's height."""
    found = []
    for view in views_of(brief):
        rise, _ = fixed_lengths(view)
        jump = view.jumps[0].name if brief.several else None
        found += [_demand(feature, rise, jump) for feature in view.features]
    return found


def _demand(feature: Feature, rise: float, jump: str | None) -> _Demand:
    most = feature.must in ("stay-out", "stay-under")
    if isinstance(feature, Ledge):
        what, size = "apex", feature.height - rise
    elif isinstance(feature, Gap):
        what, size = "gap", feature.width
    elif isinstance(feature, Block):
        what, size = f"clearance at {feature.height:g}", feature.length
    else:
        what, size = "apex", feature.height - feature.body_height
    bound = size - feature.margin if most else size + feature.margin
    return _Demand(feature, what, not most, bound, jump)


def _contradiction(low: _Demand, high: _Demand) -> float:
    """Return by how much "at least" and "at most" overlap as written; 0 where they do not."""
    if low.at_least == high.at_least or low.what != high.what or low.jump != high.jump:
        return 0.0
    if not low.at_least:
        low, high = high, low
    # A jump lands later, hence farther, on a lower far side; the other way round nothing contradicts.
    both = isinstance(low.feature, Gap) and isinstance(high.feature, Gap)
    if both and high.level > low.level:
        return 0.0
    return max(0.0, low.bound - high.bound)


def _joined(words: Sequence[str]) -> str:
    return words[0] if len(words) == 1 else f"{', '.join(words[:-1])} and {words[-1]}"


def _decimals(demands: Sequence[_Demand]) -> int:
    """Return how many decimals show a hundredth of a percent of the largest bound, at least one."""
    size = max(abs(demand.bound) for demand in demands)
    return max(1, 3 - math.floor(math.log10(size))) if size > 0.0 else 1


def _clash(demands: Sequence[_Demand], over_rates: float, proved: bool) -> Clash:
    demands = sorted(demands, key=lambda demand: not demand.at_least)
    over_rates = float(nine_digits(np.array(over_rates)))
    places = _decimals(demands)
    short_by = max((_contradiction(a, b) for a, b in combinations(demands, 2)), default=0.0)
    short_by = float(nine_digits(np.array(short_by)))
    names = _joined([demand.name for demand in demands])
    bounds = _joined([demand.words(places) for demand in demands])
    if len(demands) == 1:
        least = f"short by {over_rates:.{places}f} or more at some rate"
        text = f"{names}: {demands[0].what} {bounds} cannot hold: every design of this search is {least}"
    else:
        holds = "cannot both hold" if len(demands) == 2 else "cannot all hold"
        over = f"about {over_rates:.{places}f} over the rates"
        short = f"short by {short_by:.{places}f}, {over}" if short_by else f"short by {over}"
        text = f"{names}: {bounds} {holds}: {short}"
    if not proved:
        text += " (of those tried)"
    return Clash(tuple(demand.sentence(places) for demand in demands), short_by, over_rates, text)


def never_lands(brief: Brief) -> Clash:
    """Return the clash of a search in which no design lands at all its rates."""
    steps = [1000 * rate.step for rate in brief.rates.supported]
    if brief.aim_at is not None:
        steps.append(1000 * brief.aim_at.step)
    between = " to ".join(f"{ms:.6g}" for ms in dict.fromkeys((min(steps), max(steps)))) + " ms"
    text = (
        f"no design of this search lands at all its rates ({between}): rounding eats the gravity of a short "
        "step; try a smaller grain, a stronger gravity or longer steps"
    )
    return Clash(("land at every nominal and supported rate",), 0.0, 0.0, text)


def find_clashes(
    brief: Brief,
    patterns: Collection[int],
    least: Callable[[Sequence[Sequence[int]]], list[float]],
    *,
    proved: bool,
) -> tuple[Clash, ...]:
    """Return the smallest sets of demands that clash, the least hopeless last.

    patterns says which features fail together in designs that land (see `failing_patterns`), least returns
    for sets of features the least sum of shortfalls; proved is False where not every design was looked at.
    """
    if not patterns:
        return (never_lands(brief),)
    return tell_clashes(brief, clashing_sets(patterns, count_demands(brief)), least, proved=proved)


def count_demands(brief: Brief) -> int:
    """Return how many demands there are: of several jumps each jump's own."""
    return sum(len(view.features) for view in views_of(brief))


def tell_clashes(
    brief: Brief,
    sets: Sequence[Sequence[int]],
    least: Callable[[Sequence[Sequence[int]]], list[float]],
    *,
    proved: bool,
) -> tuple[Clash, ...]:
    """Return sets of demands that clash as clashes, the least hopeless last."""
    demands = _demands(brief)
    found = [
        _clash([demands[k] for k in one], short, proved) for one, short in zip(sets, least(sets), strict=True)
    ]
    found.sort(key=lambda clash: (-clash.short_by, -clash.short_over_rates))
    return tuple(found[:MOST_CLASHES])
