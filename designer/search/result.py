"""What a search hands over."""

from __future__ import annotations

from dataclasses import dataclass

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

    constants: Constants
    cost: float
    violation: float


@dataclass(frozen=True, slots=True)
class Certificate:
    """Proof that no point of the grid does better than the best."""

    kind: str
    """ "grid"."""
    method: str
    """ "enumerated"."""
    grid_points: int
    evaluated: int
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
