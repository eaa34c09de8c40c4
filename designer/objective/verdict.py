"""One set of constants, judged: what `check` prints and what a candidate carries."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from designer.brief.model import Target
from designer.motion.rule import Constants


@dataclass(frozen=True, slots=True)
class RateRow:
    """A jump at one rate."""

    rate: str
    step: float
    """Seconds."""
    supported: bool
    status: str
    """ "lands", "never-slows", "hovers" or "too-long"."""
    measures: Mapping[str, float | None]
    """By measure name (see designer.motion.measures.MEASURES); None where it does not exist."""


@dataclass(frozen=True, slots=True)
class TargetVerdict:
    """How far one measure of one jump is off."""

    target: Target
    value: float | None
    """The measure where it counts: at the nominal rate for an aim, else at the worst rate."""
    deviation: float | None
    """d (DEVELOPERS.md, score): signed, in tolerances; beyond ±1 is out of tolerance."""
    spread: float | None
    """max − min over nominal and supported rates, in the measure's unit."""


@dataclass(frozen=True, slots=True)
class JumpVerdict:
    """One jump at every rate."""

    name: str
    constants: Constants
    rates: tuple[RateRow, ...]
    """Supported rates, then watched ones."""
    nominal: RateRow
    spreads: Mapping[str, float | None]
    """apex, airtime and max_gap: max − min over nominal and supported rates."""
    targets: tuple[TargetVerdict, ...]
    cost: float | None = None
    """Cost of this jump's targets alone, its part in who pays for whom; None where it never lands."""


@dataclass(frozen=True, slots=True)
class FeatureVerdict:
    """A ledge or a gap: does the demand hold at every nominal and supported rate?"""

    name: str
    by: tuple[str, ...]
    must: str
    holds: bool
    spare: float | None
    """Signed slack after the margin, length; None where the jump never lands."""
    worst_rate: str | None
    failing: tuple[str, ...]
    """Bands of whole rates from 20 to 1000 Hz at which it fails: "77–83 Hz"."""
    worst_jump: str | None = None
    """Of several jumps that must, the one with the least slack."""
    place: Mapping[str, str] = field(default_factory=dict)
    """Where it is: columns of a level list."""
    source: str = ""
    """Of a row of a level list, its file and line."""


@dataclass(frozen=True, slots=True)
class Worst:
    """The largest |deviation|, and where."""

    value: float
    jump: str
    measure: str


@dataclass(frozen=True, slots=True)
class Verdict:
    """One set of constants against the whole brief."""

    constants: Constants
    """Of several jumps the first one's: gravity, step and grain are everybody's; jumps has each one's."""
    mark: str
    """A short hash of constants and rule."""
    jumps: tuple[JumpVerdict, ...]
    miss: float | None
    rate_spread: float | None
    cost: float | None
    worst: Worst | None
    violation: float | None
    """None where a jump never lands (infinite)."""
    feasible: bool
    ledges: tuple[FeatureVerdict, ...]
    gaps: tuple[FeatureVerdict, ...]
    flags: tuple[str, ...]
    """Ties, flips near by, rules that are stepped: "tie at 8 ms"."""
    extras: Mapping[str, float]
    """Terms of objective modules by name, empty without one."""
    blocks: tuple[FeatureVerdict, ...] = ()
    ceilings: tuple[FeatureVerdict, ...] = ()
    rows: int = 0
    """How many rows the level list has; of these, those that decide stand among the ledges and gaps."""
    failing_rows: tuple[FeatureVerdict, ...] = ()
    """Every row of the level list that fails, only where bands were asked for."""
    several: bool = False
    """Whether the brief has [jumps]."""

    @property
    def features(self) -> tuple[FeatureVerdict, ...]:
        """Every feature in the order of the brief."""
        return (*self.ledges, *self.gaps, *self.blocks, *self.ceilings)

    @property
    def sets(self) -> tuple[Constants, ...]:
        """The constants of each jump, in the order of the brief."""
        return tuple(jump.constants for jump in self.jumps)

    @property
    def on_target(self) -> bool:
        """Whether nothing is beyond its tolerance and every feature holds."""
        return self.feasible and (self.worst is None or self.worst.value <= 1.0)
