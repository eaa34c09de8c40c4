"""Which sets a picture shows, by what name, and how each is drawn."""

from __future__ import annotations

from dataclasses import dataclass

from designer.motion.rule import Constants
from designer.objective.verdict import Verdict
from designer.report import style
from designer.report.style import Look
from designer.search.result import Candidate, SearchResult

NEAREST = "nearest"
"""The name of the set that comes nearest where nothing is feasible."""


@dataclass(frozen=True, slots=True)
class Shown:
    """One set in the pictures: its name, how it is drawn, and what it is."""

    name: str
    look: Look
    verdict: Verdict

    @property
    def constants(self) -> Constants:
        """The set's constants."""
        return self.verdict.constants


def best_of(result: SearchResult) -> Candidate | None:
    """Return the best, or the nearest where nothing is feasible."""
    return result.best or result.nearest


def shown(result: SearchResult) -> list[Shown]:
    """Return today, the sets that people brought, and the shortlist (or the nearest), in that order."""
    rows = []
    if result.today is not None:
        rows.append(Shown("today", style.TODAY_LOOK, result.today.verdict))
    for index, one in enumerate(result.sets):
        rows.append(Shown(one.label or f"set {index + 1}", style.brought_look(index), one.verdict))
    for index, one in enumerate(result.shortlist):
        rows.append(Shown(one.label or NEAREST, style.candidate_look(index), one.verdict))
    if not result.shortlist and result.nearest is not None:
        rows.append(Shown(result.nearest.label or NEAREST, style.candidate_look(0), result.nearest.verdict))
    return rows


def pair(result: SearchResult, best: Candidate) -> list[Shown]:
    """Return today, where there is one, and the best."""
    rows = shown(result)
    proposed = [one for one in rows if one.verdict is best.verdict or one.verdict == best.verdict]
    best_shown = (
        proposed[-1] if proposed else Shown(best.label or NEAREST, style.candidate_look(0), best.verdict)
    )
    today = [one for one in rows if one.name == "today" and one is not best_shown]
    return [*today, best_shown]
