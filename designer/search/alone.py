"""Where one of several jumps would go with a gravity of its own, all else as a found set has it."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from designer.brief.model import Brief, Choice, JumpBrief
from designer.motion.rule import Constants
from designer.objective.score import Scores, score
from designer.objective.table import Designs, design_tables
from designer.objective.verdict import JumpVerdict, Verdict

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]

FACTORS = tuple(k / 100 for k in range(50, 161))
"""What is tried as a jump's gravity_factor: two decimals are what a person types."""
MOST_LAUNCHES = 200
AROUND = (0.5, 1.6)
"""Launch speeds are tried between these times what they are."""
FEW_RATES = 6
KEPT = 200
"""So many designs are looked at again at every rate."""


@dataclass(frozen=True, slots=True)
class Alone:
    """One jump by itself."""

    factor: float
    """gravity_factor of its lowest cost."""
    launch_speed: float
    better: bool
    """Whether that is better than the found set, with another factor."""


def alone(brief: Brief, verdict: Verdict, name: str) -> Alone:
    """Scan one jump over factors on gravity and, where it is its own to choose, launch speed."""
    view = brief.view(name)
    jump = _verdict_of(verdict, name)
    now = jump.constants
    launches = _launches(brief, verdict, view.jumps[0], now.launch_speed)
    factors, speeds = (part.ravel() for part in np.meshgrid(FACTORS, launches, indexing="ij"))
    # A glance at a few rates leaves those that are worth the look at all of them.
    first = _in_order(_few_rates(view), now, factors, speeds)[0][:KEPT]
    factors, speeds = factors[first], speeds[first]
    order, found = _in_order(view, now, factors, speeds)
    best = int(order[0])
    before = score(view, design_tables(view, Designs.of([now])))
    factor = float(factors[best])
    better = _key(found, best) < _key(before, 0) and factor != now.gravity_factor
    return Alone(factor, float(speeds[best]), better)


def with_followers(brief: Brief, verdict: Verdict, name: str, change: Alone) -> tuple[Constants, ...]:
    """Return a set in which one jump has changed so, and those that take its constants with it.

    A jump that is like it takes its gravity_factor, unless it has one of its own; one whose launch speed is
    made of its takes the best of the shares that [search] gives it, or keeps the one that it has.
    """
    leader = _brief_of(brief, name)
    was = _verdict_of(verdict, name).constants
    family = {name, *_descendants(brief, name)}
    sets = []
    for jump, found in zip(brief.jumps, verdict.jumps, strict=True):
        own = found.constants
        if jump.name == name:
            own = replace(own, gravity_factor=change.factor, launch_speed=change.launch_speed)
        elif change.launch_speed != was.launch_speed and _uses(jump, "launch_speed", leader):
            own = replace(own, launch_speed=own.launch_speed / was.launch_speed * change.launch_speed)
        if jump.name in family and jump.terms.get("gravity_factor") == leader.terms.get("gravity_factor"):
            own = replace(own, gravity_factor=change.factor)
        sets.append(_best_share(brief, jump, leader, own, change))
    return tuple(sets)


def _best_share(brief: Brief, jump: JumpBrief, leader: JumpBrief, own: Constants, change: Alone) -> Constants:
    """Return a follower's constants with the share of the leader's launch speed that suits it best."""
    if jump.name == leader.name or not _uses(jump, "launch_speed", leader):
        return own
    shares = jump.terms["launch_speed"].factors[len(leader.terms["launch_speed"].factors) :]
    if len(shares) != 1 or list(_users(brief, jump, shares[0])):
        return own
    points = _points(brief.variables[shares[0]].choice, own.launch_speed / change.launch_speed)
    speeds = np.array([change.launch_speed * value for value in points])
    order, _ = _in_order(brief.view(jump.name), own, np.full(len(speeds), own.gravity_factor), speeds)
    return replace(own, launch_speed=float(speeds[order[0]]))


def _key(scores: Scores, at: int) -> tuple[float, bool, float]:
    """Return what orders designs of one jump: feasible, within tolerances, cost."""
    return float(scores.violation[at]), bool(scores.worst[at] > 1.0), float(scores.cost[at])


def _in_order(
    view: Brief, now: Constants, factors: Floats, speeds: Floats
) -> tuple[NDArray[np.intp], Scores]:
    """Return the order of designs; of equals the one that moves gravity least comes first."""
    found = score(view, design_tables(view, _designs(now, factors, speeds)))
    moved = np.abs(np.log(factors / now.gravity_factor))
    return np.lexsort((moved, found.cost, found.worst > 1.0, found.violation)), found


def _few_rates(view: Brief) -> Brief:
    """Return a view with a few of its supported rates, the longest and the shortest step among them."""
    rates = sorted(view.rates.supported, key=lambda rate: rate.step)
    count = min(FEW_RATES, len(rates))
    at = {round(k * (len(rates) - 1) / max(1, count - 1)) for k in range(count)}
    return replace(view, rates=replace(view.rates, supported=tuple(rates[k] for k in sorted(at))))


def _launches(brief: Brief, verdict: Verdict, jump: JumpBrief, now: float) -> Sequence[float]:
    """Return the launch speeds that a jump may choose for itself; only what it has where others choose."""
    term = jump.terms.get("launch_speed")
    if term is None:
        return (now,)
    if not term.factors:
        variable = brief.variables[term.variable]
        owned = variable.name == f"{jump.name}.launch_speed" or not list(_users(brief, jump, term.variable))
        return _points(variable.choice, now) if owned else (now,)
    factor, leader = term.factors[0], _leader(brief, term.variable)
    if len(term.factors) > 1 or leader is None or list(_users(brief, jump, factor)):
        return (now,)
    base = _verdict_of(verdict, leader).constants.launch_speed
    return tuple(base * value for value in _points(brief.variables[factor].choice, now / base))


def _points(choice: Choice, now: float) -> Sequence[float]:
    """Return the values that a choice has around one, and that itself."""
    low, high = AROUND[0] * now, AROUND[1] * now
    if choice.is_fixed:
        return (now,)
    if choice.values is None:
        low, high = max(low, choice.low or low), min(high, choice.high or high)
        return (now, *(float(v) for v in np.linspace(low, high, MOST_LAUNCHES)))
    points = [value for value in choice.values if low <= value <= high]
    every = max(1, math.ceil(len(points) / MOST_LAUNCHES))
    return tuple(dict.fromkeys([now, *points[::every]]))


def _users(brief: Brief, jump: JumpBrief, place: int) -> Iterator[str]:
    """Yield the other jumps that use a variable."""
    for one in brief.jumps:
        if one.name != jump.name and any(place in term.places for term in one.terms.values()):
            yield one.name


def _uses(jump: JumpBrief, constant: str, leader: JumpBrief) -> bool:
    """Return whether a jump's constant is made of the leader's."""
    own, led = jump.terms.get(constant), leader.terms.get(constant)
    if own is None or led is None:
        return False
    return own.variable == led.variable and own.factors[: len(led.factors)] == led.factors


def _leader(brief: Brief, variable: int) -> str | None:
    """Return the first jump whose launch speed is this variable and nothing else."""
    for jump in brief.jumps:
        term = jump.terms.get("launch_speed")
        if term is not None and term.places == (variable,):
            return jump.name
    return None


def _descendants(brief: Brief, name: str) -> set[str]:
    """Return the jumps that are like one, or like one of those."""
    found: set[str] = set()
    while True:
        more = {jump.name for jump in brief.jumps if jump.like is not None and jump.like in {name, *found}}
        if more <= found:
            return found
        found |= more


def _brief_of(brief: Brief, name: str) -> JumpBrief:
    return next(one for one in brief.jumps if one.name == name)


def _verdict_of(verdict: Verdict, name: str) -> JumpVerdict:
    return next(one for one in verdict.jumps if one.name == name)


def _designs(now: Constants, factors: Floats, launches: Floats) -> Designs:
    """Return designs that differ from a set in these two constants only."""
    one, count = Designs.of([now]), len(factors)
    same = {
        name: np.full(count, getattr(one, name)[0])
        for name in ("gravity", "step", "grain", "run_speed", "fall_factor", "terminal_speed")
    }
    return Designs(**same, launch_speed=launches, gravity_factor=factors)
