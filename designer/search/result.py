"""What a search hands over."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from designer.motion.rule import Constants
from designer.objective.verdict import Verdict


@dataclass(frozen=True, slots=True)
class Candidate:
    """A set of constants with its verdict and the reason for showing it."""

    label: str | None
    """"A" for the best, then B, C …; None outside the shortlist; a name for [[sets]]."""
    why: str
    change: str
    """What a build must change to use it: "none", "numbers", "code"; "new" where the brief has no today."""
    verdict: Verdict


@dataclass(frozen=True, slots=True)
class RunnerUp:
    """The second best of a certified grid."""

    constants: Constants | tuple[Constants, ...]
    """Of several jumps one each."""
    cost: float
    violation: float


@dataclass(frozen=True, slots=True)
class Certificate:
    """Proof that no point of the grid does better than the best."""

    kind: str
    """ "grid"."""
    method: str
    """ "enumerated", or "separated": jumps measured one by one, their sums put together."""
    grid_points: int
    evaluated: int
    """Designs measured; with several jumps those of each jump are counted, not their combinations."""
    complete: bool
    grid_hash: str
    runner_up: RunnerUp | None


@dataclass(frozen=True, slots=True)
class Clash:
    """Demands that cannot all hold, the smallest such set that was found."""

    demands: tuple[str, ...]
    """Each in words: "reach awning: apex at least 112.0"."""
    short_by: float
    """By how much the demands contradict each other as written; 0 where only the rates make them clash."""
    short_over_rates: float
    """The least sum of these shortfalls over the rates that any design reaches, length."""
    text: str
    """One sentence for a person."""


@dataclass(frozen=True, slots=True)
class SearchResult:
    """What `designer.search` returns: proposals, and how far they are proved."""

    best: Candidate | None
    """Lowest cost among feasible sets; None where nothing is feasible."""
    nearest: Candidate | None
    """Where nothing is feasible: the set with the lowest cost + violation."""
    today: Candidate | None
    sets: tuple[Candidate, ...]
    shortlist: tuple[Candidate, ...]
    front: tuple[Candidate, ...]
    certificate: Certificate | None
    evaluations: int
    """Designs measured."""
    seed: int
    method: str
    """ "scan" or "study"."""
    notes: tuple[str, ...]
    """What ran and why, what was left out, in sentences."""
    clashes: tuple[Clash, ...]
    alone: Mapping[str, float] = field(default_factory=dict)
    """Of several jumps, by name, the lowest cost that each could have alone in this search: JumpVerdict.cost
    less this is what a jump pays for the others. Without the jumps that nothing makes feasible alone."""
    findings: tuple[str, ...] = ()
    """Of several jumps, a sentence on each that the best (or nearest) set leaves out of tolerance: who pulls
    the other way, and what would do. Empty for one jump."""
