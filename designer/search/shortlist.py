"""A few candidates that differ in what a designer would notice, each with the reason for showing it."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]
    Ints = NDArray[np.int64]

LOOKS = ("apex", "airtime", "max_gap", "gravity", "launch_speed", "run_speed")
"""What a designer notices; measures at the nominal rate."""
NOTICED = 0.05
"""Relative difference above which two designs count as different."""
FEWEST, FILLED, MOST = 3, 4, 6
"""Fewer than FEWEST candidates are excused in a note; designs beside the front fill up to FILLED only."""
LEAST_GAIN = 0.03
"""A member of the front is worth a place if it adds this share to the hypervolume."""


@dataclass(frozen=True, slots=True)
class Options:
    """Designs that may be shortlisted, arrays (designs,), and looks (designs, names)."""

    looks: Floats
    miss: Floats
    spread: Floats
    cost: Floats
    on_target: NDArray[np.bool_]
    """Whether nothing is beyond its tolerance."""
    names: tuple[str, ...] = LOOKS
    """What each look is: one of LOOKS, of several jumps with its jump, "walk.apex"."""


@dataclass(frozen=True, slots=True)
class Pick:
    """One place of the shortlist."""

    option: int
    """Which of the options."""
    reason: str
    """ "always", "front" or "different"."""


def hypervolume(points: Floats, reference: tuple[float, float]) -> float:
    """Return the area that points (n, 2) dominate below a reference point, both coordinates minimised.

    Zitzler & Thiele, IEEE Trans. Evol. Comput. 3(4), 1999 (from memory); with two objectives a sum of
    rectangles.
    """
    points = np.asarray(points, dtype=np.float64).reshape(-1, 2)
    points = points[(points < np.array(reference)).all(axis=1)]
    points = points[np.lexsort((points[:, 1], points[:, 0]))]
    area, ceiling = 0.0, reference[1]
    for x, y in points:
        if y < ceiling:
            area += (reference[0] - x) * (ceiling - y)
            ceiling = y
    return float(area)


def differences(looks: Floats, other: Floats) -> Floats:
    """Return relative differences of looks (…, names), in parts of the larger; 0 where both are 0 or none."""
    size = np.maximum(np.abs(looks), np.abs(other))
    with np.errstate(invalid="ignore", divide="ignore"):
        return np.nan_to_num(np.abs(looks - other) / size)


def differs(looks: Floats, others: Floats) -> NDArray[np.bool_]:
    """Return which designs, looks (designs, names), a designer could tell from all of others (m, names)."""
    apart = differences(looks[:, None, :], others[None, :, :]).max(axis=2)
    return np.asarray((apart > NOTICED).all(axis=1))


def _reference(options: Options, best: int) -> tuple[float, float]:
    """Return the tolerances, or somewhat beyond the best where even that misses them."""
    return max(1.0, 1.5 * float(options.miss[best])), max(1.0, 1.5 * float(options.spread[best]))


def choose(options: Options, always: Sequence[int], front: Ints, pool: Ints) -> list[Pick]:
    """Return the picks: those that always have a place, best first, then what differs from them.

    Members of the front are added greedily by the hypervolume that they add, with the tolerances as reference
    (Guerreiro, Fonseca & Paquete, Evol. Comput. 24(3), 2016; from memory). Where that leaves too few, the
    pool of designs nearly as good gives the one most different from all so far (Brill, Chang & Hopkins,
    Manage. Sci. 28(3), 1982; from memory).
    """
    picks = [Pick(k, "always") for k in dict.fromkeys(always)]
    reference = _reference(options, picks[0].option)
    pairs = np.column_stack([options.miss, options.spread])
    while len(picks) < MOST:
        chosen = [pick.option for pick in picks]
        left = front[differs(options.looks[front], options.looks[chosen])] if len(front) else front
        now = hypervolume(pairs[chosen], reference)
        gains = np.array([hypervolume(pairs[[*chosen, k]], reference) - now for k in left])
        if not len(left) or gains.max() <= LEAST_GAIN * now:
            break
        picks.append(Pick(int(left[np.lexsort((options.cost[left], -gains))[0]]), "front"))
    while len(picks) < FILLED:
        chosen = [pick.option for pick in picks]
        left = pool[differs(options.looks[pool], options.looks[chosen])] if len(pool) else pool
        if not len(left):
            break
        apart = differences(options.looks[left][:, None, :], options.looks[chosen][None, :, :])
        nearest = np.sqrt((apart**2).sum(axis=2)).min(axis=1)
        picks.append(Pick(int(left[np.lexsort((options.cost[left], -nearest))[0]]), "different"))
    return picks[:1] + sorted(picks[1:], key=lambda pick: (options.cost[pick.option], pick.option))


_MORE_LESS = {
    "apex": ("higher apex", "lower apex"),
    "airtime": ("longer airtime", "shorter airtime"),
    "max_gap": ("wider gap", "narrower gap"),
    "gravity": ("more gravity", "less gravity"),
    "launch_speed": ("faster launch", "slower launch"),
    "run_speed": ("faster run", "slower run"),
}


def against(options: Options, one: int, best: int, most: int = 2) -> str:
    """Return how a design differs from the best in what is noticed most, and in cost: a phrase for `why`."""
    mine, other = options.looks[one], options.looks[best]
    apart = differences(mine, other)
    told = []
    for k in np.argsort(-apart, kind="stable")[:most]:
        if apart[k] > NOTICED and other[k] != 0.0:
            jump, _, name = options.names[k].rpartition(".")
            words = _MORE_LESS[name][int(mine[k] < other[k])] + (f" of {jump}" if jump else "")
            told.append(f"{100.0 * abs(mine[k] / other[k] - 1.0):.0f} % {words}")
    cost, least = float(options.cost[one]), float(options.cost[best])
    if cost == least:
        price = "at the same cost"
    elif least > 0.0 and cost < 2.0 * least:
        price = f"at {max(1.0, 100.0 * (cost / least - 1.0)):.0f} % more cost"
    else:
        price = f"at cost {cost:.3g} against {least:.3g}"
    return f"{', '.join(told) or 'much like A to play'}, {price}"


def trade(options: Options, one: int, best: int) -> str:
    """Return what a member of the front does better than the best, and what worse."""
    better = options.miss[one] < options.miss[best]
    miss = f"miss {options.miss[one]:.3g} against {options.miss[best]:.3g}"
    spread = f"spread {options.spread[one]:.3g} against {options.spread[best]:.3g}"
    if better:
        return f"nearer to what was asked at the nominal rate ({miss}), less steady over the rates ({spread})"
    return f"steadier over the rates ({spread}), farther from what was asked ({miss})"
