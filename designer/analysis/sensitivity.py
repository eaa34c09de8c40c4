"""What one increment of each searched constant does to what was wanted."""

from __future__ import annotations

from bisect import bisect_left, bisect_right
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np

from designer.brief.model import Brief, Choice
from designer.motion.grain import effective_gravity_per_step
from designer.motion.rule import SEARCHABLE, Constants
from designer.objective.judge import judge
from designer.objective.verdict import Verdict

WITHOUT_INCREMENT = 0.01
"""How far a constant without increments is moved, as a share of its value."""


@dataclass(frozen=True, slots=True)
class Change:
    """What one nudge does to one target measure."""

    jump: str
    measure: str
    change: float | None
    """In the measure's unit, where the target counts it; None where either jump never lands."""
    in_tolerances: float | None
    """The change of the measure divided by the target's `within`."""


@dataclass(frozen=True, slots=True)
class Nudge:
    """One constant moved by one increment, everything else kept."""

    constant: str
    """A constant; with several jumps a variable of the brief, such as "walk.launch_speed"."""
    direction: int
    """+1 or −1."""
    before: float
    after: float
    """Infinity stands for no terminal speed."""
    share: bool
    """Whether the constant has no increments and was moved by 1 %."""
    changes: tuple[Change, ...]
    miss: float | None
    """Change of miss, in tolerances; None where either jump never lands."""
    rate_spread: float | None
    """Change of rate spread, in tolerances."""
    spares: Mapping[str, float | None]
    """Change of each feature's spare by "ledge NAME" or "gap NAME", length."""
    flips: tuple[str, ...]
    """Rates at which the step takes another number of grains: there the change is a jump, not a slope."""
    lands: bool
    """Whether the nudged jump lands at every nominal and supported rate."""

    @property
    def flip(self) -> bool:
        """Whether rounding turns to another effective gravity at some rate that is used."""
        return bool(self.flips)


@dataclass(frozen=True, slots=True)
class Sensitivity:
    """Every nudge of one set of constants: for each constant up, then down, where there is a neighbour."""

    base: Verdict
    nudges: tuple[Nudge, ...]


def one_increment(
    brief: Brief, constants: Constants | Sequence[Constants], base: Verdict | None = None
) -> Sensitivity:
    """Move each constant that the search may change by one increment, up and down, and judge again.

    Where the brief searches nothing, each constant that is not 0 is moved by 1 %. Steps that cross a flip
    are named with the rates at which they do, and stand as they are: never averaged with the others. Of
    several jumps the variables of the brief are moved (see `each_variable`).
    """
    base = judge(brief, constants, bands=False) if base is None else base
    if brief.several:
        return each_variable(brief, base)
    constants = base.constants
    nudges = []
    for name in SEARCHABLE:
        for direction, before, after, share in _neighbours(brief, constants, name):
            value = None if np.isinf(after) else after
            moved = replace(constants, **{name: value})  # type: ignore[arg-type]
            verdict = judge(brief, moved, bands=False)
            what = (name, direction, before, after, share)
            nudges.append(_nudge(what, base, verdict, _flips(brief, constants, moved)))
    return Sensitivity(base, tuple(nudges))


def _nudge(
    what: tuple[str, int, float, float, bool], base: Verdict, verdict: Verdict, flips: tuple[str, ...]
) -> Nudge:
    """Return what became of a set; what is name, direction, value before and after, whether by a share."""
    return Nudge(
        *what,
        changes=_changes(base, verdict),
        miss=_difference(base.miss, verdict.miss),
        rate_spread=_difference(base.rate_spread, verdict.rate_spread),
        spares=_spares(base, verdict),
        flips=flips,
        lands=verdict.violation is not None,
    )


def each_variable(brief: Brief, base: Verdict) -> Sensitivity:
    """Move each variable of a brief with several jumps by one increment, up and down, and judge again.

    Constants that are made of a variable move together (like, and links); the others stay. As in
    `one_increment`, every variable is moved by 1 % where the brief searches nothing.
    """
    nudges = []
    free = any(not variable.choice.is_fixed for variable in brief.variables)
    for place, variable in enumerate(brief.variables):
        held = variable_value(brief, base.sets, place)
        if held is None:
            continue
        for direction, after, share in _steps(variable.choice, held, searched=free):
            moved = moved_sets(brief, base.sets, place, after)
            flips: dict[str, None] = {}
            for jump, one, other in zip(brief.jumps, base.sets, moved, strict=True):
                flips |= dict.fromkeys(_flips(brief.view(jump.name), one, other))
            verdict = judge(brief, moved, bands=False)
            what = (variable.name, direction, held, after, share)
            nudges.append(_nudge(what, base, verdict, tuple(flips)))
    return Sensitivity(base, tuple(nudges))


def variable_value(brief: Brief, sets: Sequence[Constants], place: int) -> float | None:
    """Return what a variable is in a set; None where no constant of it tells. Infinity: no terminal speed."""
    for jump, constants in zip(brief.jumps, sets, strict=True):
        for name, term in jump.terms.items():
            if term.variable == place and not term.factors:
                value: float | None = getattr(constants, name)
                none = float("inf") if name == "terminal_speed" else None
                return none if value is None else value
    for jump, constants in zip(brief.jumps, sets, strict=True):
        for name, term in jump.terms.items():
            if term.factors[-1:] != (place,):
                continue
            before = _product(brief, sets, (term.variable, *term.factors[:-1]))
            value = getattr(constants, name)
            if not before or value is None:
                continue
            points = brief.variables[place].choice.values
            ratio = float(value) / before
            return ratio if points is None else min(points, key=lambda point: abs(point - ratio))
    return None


def _product(brief: Brief, sets: Sequence[Constants], places: Sequence[int]) -> float | None:
    """Return the product of variables as they are in a set; None where one is not known."""
    product: float | None = None
    for place in places:
        value = variable_value(brief, sets, place)
        if value is None:
            return None
        product = value if product is None else product * value
    return product


def moved_sets(brief: Brief, sets: Sequence[Constants], place: int, after: float) -> tuple[Constants, ...]:
    """Return a set in which one variable has another value, and every constant that is made of it."""
    moved = []
    for jump, constants in zip(brief.jumps, sets, strict=True):
        changes: dict[str, float | None] = {}
        for name, term in jump.terms.items():
            if place not in term.places:
                continue
            value: float | None = None
            for one in term.places:
                factor = after if one == place else variable_value(brief, sets, one)
                value = factor if value is None or factor is None else value * factor
            changes[name] = None if value is not None and np.isinf(value) else value
        moved.append(replace(constants, **changes))  # type: ignore[arg-type]
    return tuple(moved)


def _neighbours(brief: Brief, constants: Constants, name: str) -> Iterator[tuple[int, float, float, bool]]:
    """Yield direction, value, neighbouring value and whether it is 1 % away, for one constant."""
    held = getattr(constants, name)
    if name == "terminal_speed" and held is None:
        held = float("inf")
    if held is None:
        return
    search = brief.search or {}
    searched = any(not choice.is_fixed for choice in search.values())
    for direction, after, share in _steps(search.get(name), held, searched=searched):
        yield direction, held, after, share


def _steps(choice: Choice | None, held: float, *, searched: bool) -> Iterator[tuple[int, float, bool]]:
    """Yield direction, neighbouring value and whether it is 1 % away."""
    if choice is not None and choice.values is not None and not choice.is_fixed:
        up = bisect_right(choice.values, held)
        down = bisect_left(choice.values, held) - 1
        if up < len(choice.values):
            yield 1, choice.values[up], False
        if down >= 0:
            yield -1, choice.values[down], False
    elif (_without_points(choice) or not searched) and held != 0.0 and np.isfinite(held):
        yield 1, held * (1.0 + WITHOUT_INCREMENT), True
        yield -1, held * (1.0 - WITHOUT_INCREMENT), True


def _without_points(choice: Choice | None) -> bool:
    """Whether a constant may move but has no increments."""
    return choice is not None and choice.values is None


def _difference(before: float | None, after: float | None) -> float | None:
    return None if before is None or after is None else after - before


def _changes(base: Verdict, moved: Verdict) -> tuple[Change, ...]:
    """Return the change of each target measure of each jump."""
    found = []
    for jump, other in zip(base.jumps, moved.jumps, strict=True):
        for was, now in zip(jump.targets, other.targets, strict=True):
            change = _difference(was.value, now.value)
            scaled = None if change is None else change / was.target.within
            found.append(Change(jump.name, was.target.measure, change, scaled))
    return tuple(found)


def _spares(base: Verdict, moved: Verdict) -> dict[str, float | None]:
    """Return the change of each feature's spare."""
    pairs = [("ledge", a, b) for a, b in zip(base.ledges, moved.ledges, strict=True)]
    pairs += [("gap", a, b) for a, b in zip(base.gaps, moved.gaps, strict=True)]
    pairs += [("block", a, b) for a, b in zip(base.blocks, moved.blocks, strict=True)]
    pairs += [("ceiling", a, b) for a, b in zip(base.ceilings, moved.ceilings, strict=True)]
    return {f"{kind} {a.name}": _difference(a.spare, b.spare) for kind, a, b in pairs}


def _flips(brief: Brief, before: Constants, after: Constants) -> tuple[str, ...]:
    """Return the names of the rates, nominal and supported, at which a step takes another count of grains.

    A new grain or a new step counts where it changes the gravity that rounding makes of the same one.
    """
    steps = {rate.step: rate.name for rate in brief.rates.supported}
    nominal = {
        brief.nominal(before).step: brief.nominal(before).name,
        brief.nominal(after).step: brief.nominal(after).name,
    }
    if len(nominal) == 1:
        steps = nominal | steps
    found = [name for step, name in steps.items() if _pull(brief, before, step) != _pull(brief, after, step)]
    if len(nominal) == 2:
        old, new = nominal
        if _effective(brief, before, old) != _effective(brief, after, new):
            found.append(nominal[new])
    return tuple(found)


def _effective(brief: Brief, constants: Constants, step: float) -> tuple[float, ...]:
    """Return the effective gravity of rising and of falling, length/s²; empty where nothing is rounded."""
    if constants.grain == 0.0 or brief.rule.rounding.carry:
        return ()
    rise, fall = constants.pull, constants.pull * constants.fall_factor
    both = (
        effective_gravity_per_step(brief.rule, rise, constants.grain, step),
        effective_gravity_per_step(brief.rule, fall, constants.grain, step, falling=True),
    )
    return tuple(round(float(pull), 9) for pull in both)


def _pull(brief: Brief, constants: Constants, step: float) -> tuple[float, ...]:
    """Return what a rounded step takes from v, in grains, or in speed where the grain itself may change."""
    return tuple(round(value * step, 9) for value in _effective(brief, constants, step))
