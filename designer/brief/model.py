"""The brief as plain values: every length in the brief's unit, every time in seconds."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from enum import StrEnum

from designer.motion.rule import Constants, Rule

ONLY_JUMP = "jump"
"""The name of the jump of a brief without [jumps]."""


class Loop(StrEnum):
    """Who decides how long a step is."""

    EACH_FRAME = "each-frame"
    FIXED = "fixed"


def step_name(step: float) -> str:
    """Return a step in seconds as one would write it in a brief: "8 ms", "60 Hz" where it is 1/60 s."""
    ms, hz = step * 1000.0, 1.0 / step
    if abs(ms - round(ms, 3)) > 1e-9 * ms and abs(hz - round(hz)) < 1e-9 * hz:
        return f"{round(hz)} Hz"
    return f"{ms:.6g} ms"


@dataclass(frozen=True, slots=True)
class Rate:
    """One or more rates that come to the same step."""

    name: str
    """As written; rates with the same step are named together: "60 Hz, 16 ms"."""
    step: float
    """Seconds."""
    supported: bool = True
    """False for watched rates, which are shown but never scored."""

    @property
    def echo(self) -> str:
        """What the rate became: "128 Hz → 7 ms (142.9 Hz)"."""
        return f"{self.name} → {self.step * 1000:.6g} ms ({1 / self.step:.1f} Hz)"


@dataclass(frozen=True, slots=True)
class Rates:
    """The rates at which the constants must hold, merged by step, in the order of the brief."""

    supported: tuple[Rate, ...]
    watched: tuple[Rate, ...] = ()
    spread_weight: float = 1.0


@dataclass(frozen=True, slots=True)
class Choice:
    """What a search may do with one constant."""

    values: tuple[float, ...] | None
    """The points that it may take, ascending and distinct; one for a fixed constant; None without increments.
    Infinity stands for "no terminal speed"."""
    low: float | None = None
    """Lower bound where there are no points; None where it follows from the targets ("free")."""
    high: float | None = None
    text: str = ""
    """As written in the brief, for tables: "800 to 3200 by 10"."""

    @property
    def is_fixed(self) -> bool:
        """Whether the search may not change it."""
        return self.values is not None and len(self.values) == 1

    @property
    def is_free(self) -> bool:
        """Whether bounds and points are to be derived from the targets."""
        return self.values is None and self.low is None


@dataclass(frozen=True, slots=True)
class Target:
    """What one measure should be: an aim, or one or both bounds; deviations count in units of `within`."""

    measure: str
    within: float
    weight: float = 1.0
    aim: float | None = None
    at_least: float | None = None
    at_most: float | None = None

    @property
    def text(self) -> str:
        """For tables: "120 ± 2", "≥ 400 (by 10)"."""
        if self.aim is not None:
            return f"{self.aim:g} ± {self.within:g}"
        bounds = [f"≥ {self.at_least:g}"] if self.at_least is not None else []
        bounds += [f"≤ {self.at_most:g}"] if self.at_most is not None else []
        return " and ".join(bounds) + f" (by {self.within:g})"


@dataclass(frozen=True, slots=True)
class JumpBrief:
    """What is wanted of one jump."""

    name: str = ONLY_JUMP
    targets: tuple[Target, ...] = ()
    weight: float = 1.0


@dataclass(frozen=True, slots=True)
class Ledge:
    """A height that must, or must not, be reachable."""

    name: str
    height: float
    must: str
    """ "reach" or "stay-out"."""
    margin: float = 0.0
    by: tuple[str, ...] = (ONLY_JUMP,)


@dataclass(frozen=True, slots=True)
class Gap:
    """A width that must, or must not, be crossable."""

    name: str
    width: float
    must: str
    """ "cross" or "stay-out"."""
    far_level: float = 0.0
    """Height of the far side over the take-off."""
    margin: float = 0.0
    by: tuple[str, ...] = (ONLY_JUMP,)


@dataclass(frozen=True, slots=True)
class NamedSet:
    """Constants that somebody brings along, to be judged beside the found ones."""

    name: str
    constants: Constants


@dataclass(frozen=True, slots=True)
class Brief:
    """A job as stated; read it with `designer.read_brief`."""

    name: str
    """The file's stem; results go to results/NAME/."""
    title: str
    length_unit: str
    loop: Loop
    rule: Rule
    rates: Rates
    aim_at: Rate | None = None
    """The rate at which aims are judged; None in a fixed loop, where it is the constants' own step."""
    today: Constants | None = None
    search: Mapping[str, Choice] | None = None
    """For each of SEARCHABLE (step only in a fixed loop) what the search may do; constants that [search] does
    not name are fixed at today's value or the default. None in a brief without [search]."""
    base: Constants | None = None
    """What constants are where nothing else is said (today, else the fixed values of [search]); None where
    gravity or launch_speed have no one value."""
    jumps: tuple[JumpBrief, ...] = (JumpBrief(),)
    ledges: tuple[Ledge, ...] = ()
    gaps: tuple[Gap, ...] = ()
    sets: tuple[NamedSet, ...] = ()
    lengths: Mapping[str, float] = field(default_factory=dict)
    """Named lengths of [units]: tile = 64."""

    @property
    def features(self) -> tuple[Ledge | Gap, ...]:
        """Every ledge, then every gap: the order of shortfalls and bands."""
        return (*self.ledges, *self.gaps)

    def nominal(self, constants: Constants) -> Rate:
        """Return the rate at which aims are judged for these constants."""
        if self.aim_at is not None:
            return self.aim_at
        if constants.step is None:
            raise ValueError("constants of a fixed loop need a step")
        for rate in (*self.rates.supported, *self.rates.watched):
            if rate.step == constants.step:
                return rate
        return Rate(step_name(constants.step), constants.step)
