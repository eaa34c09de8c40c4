"""The brief as plain values: every length in the brief's unit, every time in seconds."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from enum import StrEnum

from designer.motion.rule import Constants, Rule, Second

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
class Variable:
    """One number that a search chooses: a shared constant, a jump's own one, or the factor of a link."""

    name: str
    """ "gravity", "walk.launch_speed", or "armour.launch_speed times" for the factor of a link."""
    choice: Choice


@dataclass(frozen=True, slots=True)
class Term:
    """What a constant of a jump is made of: a variable, times the factors of the links that lead to it."""

    variable: int
    """Place in Brief.variables."""
    factors: tuple[int, ...] = ()
    """Places in Brief.variables; the value is the variable times each of these, from left to right."""

    @property
    def places(self) -> tuple[int, ...]:
        """Every variable that it depends on."""
        return (self.variable, *self.factors)


@dataclass(frozen=True, slots=True)
class JumpBrief:
    """What is wanted of one jump."""

    name: str = ONLY_JUMP
    targets: tuple[Target, ...] = ()
    weight: float = 1.0
    like: str | None = None
    """The jump whose constants it takes where it names none itself; terms say the same exactly."""
    terms: Mapping[str, Term] = field(default_factory=dict)
    """What each of the brief's searched or fixed constants is made of, by name (SEARCHABLE, gravity_factor,
    step_up, edge_allowance); empty in a brief without [jumps]."""
    today: Constants | None = None
    """What the build has now for this jump; None where the brief has no today."""
    second: Second | None = None
    base: Constants | None = None
    """What its constants are where nothing else is said (Brief.base of its view)."""


@dataclass(frozen=True, slots=True)
class Ledge:
    """A height that must, or must not, be reachable."""

    name: str
    height: float
    must: str
    """ "reach" or "stay-out"."""
    margin: float = 0.0
    by: tuple[str, ...] = (ONLY_JUMP,)
    place: Mapping[str, str] = field(default_factory=dict)
    """Where it is: the columns of a level list that are no feature's, as they stand there."""
    source: str = ""
    """The file and line of a level list's row, "roofs.csv, line 12"; empty for one of the brief itself."""


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
    place: Mapping[str, str] = field(default_factory=dict)
    """Where it is: the columns of a level list that are no feature's, as they stand there."""
    source: str = ""
    """The file and line of a level list's row, "roofs.csv, line 12"; empty for one of the brief itself."""


@dataclass(frozen=True, slots=True)
class Block:
    """Something high and long that must, or must not, be cleared in one jump."""

    name: str
    height: float
    length: float
    must: str
    """ "clear" or "stay-out"."""
    margin: float = 0.0
    """Length that must be left over, or lacking."""
    by: tuple[str, ...] = (ONLY_JUMP,)
    place: Mapping[str, str] = field(default_factory=dict)
    """Where it is: the columns of a level list that are no feature's, as they stand there."""
    source: str = ""
    """The file and line of a level list's row, "roofs.csv, line 12"; empty for one of the brief itself."""


@dataclass(frozen=True, slots=True)
class Ceiling:
    """A height that the top of the body must stay under."""

    name: str
    height: float
    body_height: float
    """How far the top of the body is above what the apex measures."""
    must: str = "stay-under"
    margin: float = 0.0
    by: tuple[str, ...] = (ONLY_JUMP,)
    place: Mapping[str, str] = field(default_factory=dict)
    """Where it is: the columns of a level list that are no feature's, as they stand there."""
    source: str = ""
    """The file and line of a level list's row, "roofs.csv, line 12"; empty for one of the brief itself."""


Feature = Ledge | Gap | Block | Ceiling
"""Whatever a level wants of jumps."""


@dataclass(frozen=True, slots=True)
class NamedSet:
    """Constants that somebody brings along, to be judged beside the found ones."""

    name: str
    constants: Constants
    """Of several jumps the first one's."""
    jumps: tuple[Constants, ...] = ()
    """One a jump in file order; empty in a brief without [jumps]."""


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
    blocks: tuple[Block, ...] = ()
    ceilings: tuple[Ceiling, ...] = ()
    sets: tuple[NamedSet, ...] = ()
    lengths: Mapping[str, float] = field(default_factory=dict)
    """Named lengths of [units]: tile = 64."""
    variables: tuple[Variable, ...] = ()
    """What a search of several jumps chooses; empty in a brief without [jumps]."""

    @property
    def several(self) -> bool:
        """Whether the brief has [jumps]: then constants are sets, one of Constants a jump, in file order."""
        return bool(self.variables) or len(self.jumps) > 1

    def view(self, name: str) -> Brief:
        """Return the brief of one of several jumps: its targets, features and today; everything else alike.

        What applies to one jump (flight, measures, spares, bands, arcs) applies to a view.
        """
        if not self.several:
            return self
        jump = next(one for one in self.jumps if one.name == name)
        search = None
        if self.search is not None and jump.terms:
            search = {
                constant: self.variables[term.variable].choice
                for constant, term in jump.terms.items()
                if not term.factors
            }
        return replace(
            self,
            jumps=(jump,),
            today=jump.today,
            base=jump.base or jump.today or self.base,
            search=search,
            ledges=tuple(one for one in self.ledges if name in one.by),
            gaps=tuple(one for one in self.gaps if name in one.by),
            blocks=tuple(one for one in self.blocks if name in one.by),
            ceilings=tuple(one for one in self.ceilings if name in one.by),
            sets=(),
            variables=(),
        )

    @property
    def features(self) -> tuple[Feature, ...]:
        """Every ledge, then every gap, block and ceiling: the order of shortfalls and bands."""
        return (*self.ledges, *self.gaps, *self.blocks, *self.ceilings)

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
