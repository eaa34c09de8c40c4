"""Aims as equations in the constants that may move, in continuous time: rank, solution, least worst miss.

The unknowns are logarithms of constants: there most measures are linear, so Newton's method is at home. Aims
that hang together while every smaller set of them is free (a circuit of the equations' matroid; Oxley,
Matroid Theory, ch. 1) have one dependency λ, and the least worst miss is where all deviations are equal in
size with the signs of λ (Cheney, Introduction to Approximation Theory, ch. 2). Both sources from memory.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from itertools import combinations
from typing import TYPE_CHECKING

import numpy as np

from designer.brief.model import Brief, Choice, JumpBrief, Loop, Target
from designer.motion.rule import LandingTest, Second
from designer.search.textbook import OF_THE_FALL, blur, measures

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]

NOT_SAID = {
    "gravity": 1.0,
    "launch_speed": 1.0,
    "run_speed": 0.0,
    "fall_factor": 1.0,
    "terminal_speed": math.inf,
    "gravity_factor": 1.0,
    "step_up": 0.0,
    "edge_allowance": 0.0,
}
"""The constants that a continuous jump has, and what they are where a brief says nothing."""
SMALL = 1e-4
"""How far a logarithm is moved for a derivative."""
DEPENDENT = 1e-3
"""Rows of length 1 whose smallest singular value is below this count as dependent."""
LARGEST_CIRCUIT, SMALL_CIRCUIT, MANY = 6, 4, 12
"""So many aims at most are looked at together; fewer where there are many to choose from."""
TINY = 1e-12
"""A measure of nothing (a gap without run speed) has no logarithm."""
LONGEST_STEP = 0.033
"""Seconds; where a fixed loop's step is free."""
ROUNDS = 60


@dataclass(frozen=True, slots=True)
class Part:
    """A constant of a jump: a fixed number times unknowns."""

    fixed: float
    unknowns: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Aim:
    """One aim of one jump."""

    jump: str
    target: Target

    @property
    def value(self) -> float:
        """The aim itself."""
        return self.target.aim or 0.0


@dataclass(frozen=True, slots=True)
class System:
    """Every aim that continuous time knows, and what each jump's constants are made of."""

    aims: tuple[Aim, ...]
    parts: Mapping[str, Mapping[str, Part]]
    """By jump and constant."""
    seconds: Mapping[str, Second | None]
    start: Mapping[str, float]
    """Each unknown's value to start from."""
    step: float
    landing_test: LandingTest

    def constants(self, jump: str, x: Mapping[str, float]) -> dict[str, float]:
        """Return a jump's constants for the logarithms x of the unknowns."""
        return {
            name: part.fixed * math.exp(sum(x[one] for one in part.unknowns))
            for name, part in self.parts[jump].items()
        }

    def values(self, aims: Sequence[Aim], x: Mapping[str, float]) -> list[float]:
        """Return the measure of each aim."""
        jumps = dict.fromkeys(aim.jump for aim in aims)
        found = {jump: measures(self.constants(jump, x), self.step, self.seconds[jump]) for jump in jumps}
        return [max(found[aim.jump][aim.target.measure], TINY) for aim in aims]

    def tolerances(self, aims: Sequence[Aim], x: Mapping[str, float]) -> Floats:
        """Return the tolerance of each aim with what the build's steps may add to it."""
        added = [
            blur(self.constants(aim.jump, x), self.step, self.landing_test)[aim.target.measure]
            for aim in aims
        ]
        return np.array([aim.target.within + more for aim, more in zip(aims, added, strict=True)])

    def freed(self, jump: str, constant: str) -> System:
        """Return the same with one constant of one jump made an unknown of its own."""
        name = f"{jump}.{constant} freed"
        parts = {**self.parts, jump: {**self.parts[jump], constant: Part(1.0, (name,))}}
        now = self.constants(jump, {one: math.log(value) for one, value in self.start.items()})[constant]
        return replace(self, parts=parts, start={**self.start, name: now if 0.0 < now < math.inf else 1.0})

    def unknowns(self, aims: Sequence[Aim]) -> list[str]:
        """Return the unknowns that move at least one of these aims."""
        names = list(self.start)
        moved = np.any(np.abs(self.rows(aims, names)) > DEPENDENT, axis=0)
        return [name for name, one in zip(names, moved, strict=True) if one]

    def rows(self, aims: Sequence[Aim], names: Sequence[str], x: Mapping[str, float] | None = None) -> Floats:
        """Return d log measure / d log unknown, (aims, unknowns), at x or the start."""
        at = x or {name: math.log(value) for name, value in self.start.items()}
        columns = []
        for name in names:
            up, down = (
                np.log(self.values(aims, {**at, name: at[name] + sign * SMALL})) for sign in (1.0, -1.0)
            )
            columns.append((up - down) / (2.0 * SMALL))
        return np.column_stack(columns) if columns else np.zeros((len(aims), 0))

    def rank(self, aims: Sequence[Aim]) -> int:
        """Return in how many ways the unknowns move these aims."""
        return _rank(_scaled(self.rows(aims, list(self.start))))

    def solve(self, aims: Sequence[Aim]) -> dict[str, float]:
        """Return logarithms of the unknowns that come nearest to the aims, in tolerances, least squares."""
        names = self.unknowns(aims)
        x = {name: math.log(value) for name, value in self.start.items()}
        scale = np.array([aim.value / aim.target.within for aim in aims])
        wanted = np.log([aim.value for aim in aims])
        for _ in range(ROUNDS):
            off = (wanted - np.log(self.values(aims, x))) * scale
            rows = self.rows(aims, names, x) * scale[:, None]
            change = np.clip(np.linalg.pinv(rows, rcond=DEPENDENT / 10) @ off, -1.0, 1.0)
            x |= {name: x[name] + float(one) for name, one in zip(names, change, strict=True)}
            if not names or np.max(np.abs(change)) < 1e-12:
                break
        return x

    def least_worst(self, circuit: Sequence[Aim], tolerances: Floats) -> tuple[float, dict[str, float]]:
        """Return how many tolerances the worst of a circuit's aims must be off, and where that is reached."""
        names = self.unknowns(circuit)
        x = self.solve(circuit)
        wanted = np.array([aim.value for aim in circuit])
        off = 0.0
        for _ in range(ROUNDS):
            value = np.array(self.values(circuit, x))
            deviation = (value - wanted) / tolerances
            rows = self.rows(circuit, names, x) * (value / tolerances)[:, None]
            if not names:
                return float(np.max(np.abs(deviation))), x
            dependency = np.linalg.svd(rows)[0][:, -1]
            off = float(dependency @ deviation) / float(np.sum(np.abs(dependency)))
            goal = off * np.sign(dependency)
            change = np.clip(np.linalg.pinv(rows, rcond=1e-6) @ (goal - deviation), -0.5, 0.5)
            x |= {name: x[name] + float(one) for name, one in zip(names, change, strict=True)}
            if np.max(np.abs(change)) < 1e-11:
                break
        return abs(off), x

    def circuits(self, aims: Sequence[Aim], needs: Sequence[str] = ()) -> Iterator[tuple[Aim, ...]]:
        """Yield the smallest sets of aims that hang together, with an aim of each of `needs`."""
        rows = _scaled(self.rows(aims, list(self.start)))
        largest = min(_rank(rows) + 1, len(aims), LARGEST_CIRCUIT if len(aims) <= MANY else SMALL_CIRCUIT)
        found: list[frozenset[int]] = []
        for size in range(1, largest + 1):
            for some in combinations(range(len(aims)), size):
                if any(one <= frozenset(some) for one in found):
                    continue
                if _rank(rows[list(some)]) < size:
                    found.append(frozenset(some))
                    if set(needs) <= {aims[k].jump for k in some}:
                        yield tuple(aims[k] for k in some)


def _scaled(rows: Floats) -> Floats:
    """Return rows of length 1, or of zeros where nothing moves an aim."""
    lengths = np.linalg.norm(rows, axis=1, keepdims=True)
    scaled: Floats = rows / np.where(lengths > DEPENDENT, lengths, math.inf)
    return scaled


def _rank(scaled: Floats) -> int:
    return int(np.sum(np.linalg.svd(scaled, compute_uv=False) > DEPENDENT)) if scaled.size else 0


def _middle(choice: Choice) -> float | None:
    """Return a value to start from, above 0 and finite; None where the choice has none."""
    ends = choice.values or tuple(end for end in (choice.low, choice.high) if end is not None)
    usable = [end for end in ends if 0.0 < end < math.inf]
    return math.sqrt(usable[0] * usable[-1]) if usable else None


def _part(choice: Choice, name: str, start: dict[str, float]) -> Part:
    """Return a constant as a fixed number or an unknown, which then gets its place in `start`."""
    if choice.is_fixed and choice.values is not None:
        return Part(choice.values[0])
    start.setdefault(name, _middle(choice) or 1.0)
    return Part(1.0, (name,))


def _parts_of(brief: Brief, jump: JumpBrief, start: dict[str, float]) -> dict[str, Part]:
    """Return what the constants of one jump are made of."""
    base = jump.base or jump.today or brief.base
    found: dict[str, Part] = {}
    for name, default in NOT_SAID.items():
        said = getattr(base, name, None)
        found[name] = Part(default if said is None else float(said))
        if name in jump.terms:
            made = [
                _part(brief.variables[k].choice, brief.variables[k].name, start)
                for k in jump.terms[name].places
            ]
            unknowns = tuple(one for part in made for one in part.unknowns)
            found[name] = Part(math.prod(part.fixed for part in made), unknowns)
        elif brief.search is not None and name in brief.search and not jump.terms:
            found[name] = _part(brief.search[name], name, start)
    return found


def _nominal_step(brief: Brief) -> float:
    """Return the step at which aims are judged; where it may vary, the longest."""
    if brief.loop is Loop.EACH_FRAME and brief.aim_at is not None:
        return brief.aim_at.step
    shared = [one.choice for one in brief.variables if one.name == "step"]
    choice = (brief.search or {}).get("step") or (shared[0] if shared else None)
    if choice is not None:
        high = choice.values[-1] if choice.values else choice.high
        return high or LONGEST_STEP
    return (brief.base.step if brief.base is not None else None) or LONGEST_STEP


def _known(jump: JumpBrief, parts: Mapping[str, Part]) -> Iterator[Aim]:
    """Yield the aims that continuous time can speak of."""
    for target in jump.targets:
        if target.aim is None or target.measure == "flip_margin":
            continue
        if target.measure in OF_THE_FALL and parts["terminal_speed"].unknowns:
            continue  # a terminal speed that may move can take up what the others leave
        if target.measure in ("max_gap", "sure_gap") and parts["run_speed"] == Part(0.0):
            continue
        yield Aim(jump.name, target)


def system_of(brief: Brief) -> System:
    """Return the aims of a brief with [search] as equations."""
    start: dict[str, float] = {}
    parts = {jump.name: _parts_of(brief, jump, start) for jump in brief.jumps}
    step = _nominal_step(brief)
    aims = []
    for jump in brief.jumps:
        for aim in _known(jump, parts[jump.name]):
            one = measures(dict.fromkeys(NOT_SAID, 1.0), step, jump.second)
            if aim.target.measure in one:
                aims.append(aim)
    seconds = {jump.name: jump.second for jump in brief.jumps}
    return System(tuple(aims), parts, seconds, start, step, brief.rule.landing_test)
