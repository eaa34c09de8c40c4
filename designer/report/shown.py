"""Which sets a picture shows, by what name, how each is drawn, and how it fares at every whole rate."""

from __future__ import annotations

import math
import re
from collections.abc import Sequence
from dataclasses import dataclass

from designer.analysis.breaks import Break, breaks
from designer.analysis.sweep import HIGH_HZ, LOW_HZ, RateReach, reach_by_rate
from designer.brief.model import Brief, Rate
from designer.motion.rule import Constants
from designer.objective.verdict import Verdict
from designer.report import style
from designer.report.style import Look
from designer.search.result import Candidate, SearchResult

NEAREST = "nearest"
"""The name of the set that comes nearest where nothing is feasible."""
TODAY = "today"


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


@dataclass(frozen=True, slots=True)
class View:
    """A set at every whole rate, measured once for all pictures."""

    shown: Shown
    sweep: RateReach
    breaks: tuple[Break, ...]
    """Ledges, then gaps."""
    supported: tuple[float, ...]
    """Hz; empty where the brief lists none."""
    nominal: tuple[float, ...]
    """Hz: the rates that its aims are judged at, in a fixed loop those of its own step."""

    @property
    def name(self) -> str:
        """Return "today", "A" …"""
        return self.shown.name

    @property
    def verdict(self) -> Verdict:
        """The set's verdict."""
        return self.shown.verdict

    @property
    def used(self) -> tuple[float, ...]:
        """Every rate that counts for this set, Hz, ascending."""
        return tuple(sorted({*self.supported, *self.nominal}))

    @property
    def span(self) -> tuple[float, float]:
        """The lowest and the highest rate that counts, Hz."""
        return self.used[0], self.used[-1]


def best_of(result: SearchResult) -> Candidate | None:
    """Return the best, or the nearest where nothing is feasible."""
    return result.best or result.nearest


def shown(result: SearchResult) -> list[Shown]:
    """Return today, the sets that people brought, and the shortlist (or the nearest), in that order."""
    rows = []
    if result.today is not None:
        rows.append(Shown(TODAY, style.TODAY_LOOK, result.today.verdict))
    for index, one in enumerate(result.sets):
        rows.append(Shown(one.label or f"set {index + 1}", style.brought_look(index), one.verdict))
    for index, one in enumerate(result.shortlist):
        rows.append(Shown(one.label or NEAREST, style.candidate_look(index), one.verdict))
    if not result.shortlist and result.nearest is not None:
        rows.append(Shown(result.nearest.label or NEAREST, style.candidate_look(0), result.nearest.verdict))
    return rows


def views(brief: Brief, result: SearchResult) -> list[View]:
    """Return every shown set measured at each whole rate from 20 to 1000 Hz, and farther where rates are."""
    rows = shown(result)
    supported = tuple(hz for rate in brief.rates.supported for hz in hz_of(rate))
    nominal = [tuple(hz_of(brief.nominal(one.constants))) for one in rows]
    everything = [*supported, *(hz for own in nominal for hz in own)]
    low = min([LOW_HZ, *(max(1, math.floor(hz)) for hz in everything)])
    high = max([HIGH_HZ, *(math.ceil(hz) for hz in everything)])
    seen = []
    for one, own in zip(rows, nominal, strict=True):
        sweep = reach_by_rate(brief, one.constants, low, high)
        seen.append(View(one, sweep, breaks(brief, sweep), supported, own))
    return seen


def hz_of(rate: Rate) -> list[float]:
    """Return the rates in Hz that a merged rate names; for steps in ms, what they come to."""
    found: list[float] = []
    for first, last in re.findall(r"(\d+(?:\.\d+)?)(?:–(\d+))? Hz", rate.name):
        found += range(int(first), int(last) + 1) if last else [float(first)]
    return found or [1.0 / rate.step]


def pair(rows: Sequence[View], best: Candidate) -> list[View]:
    """Return today, where there is one, and the best, of all that are shown."""
    proposed = [one for one in rows if one.verdict is best.verdict]
    proposed = proposed or [one for one in rows if one.verdict == best.verdict]
    today = [one for one in rows if one.name == TODAY and one is not proposed[-1]]
    return [*today, proposed[-1]]
