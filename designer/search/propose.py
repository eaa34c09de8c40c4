"""From the designs worth remembering to candidates with verdicts and reasons."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

import numpy as np

from designer.brief.model import Brief, Loop
from designer.objective.judge import judge
from designer.objective.modules import ObjectiveModule
from designer.objective.table import Designs
from designer.objective.verdict import Verdict
from designer.search.found import Found
from designer.search.looks import (
    Set,
    Sets,
    cost_without_grain,
    first_of,
    judged_set,
    look_names,
    looks_of,
    named_set,
    steps_all,
    today_of,
)
from designer.search.ranking import STEADY_WITHIN, Leaders, Rows, join
from designer.search.result import Candidate, SearchResult
from designer.search.shortlist import FEWEST, LOOKS, NOTICED, Options, Pick, against, choose, differs, trade

if TYPE_CHECKING:
    from numpy.typing import NDArray

POOL = 2000
"""So many of the pool, the cheapest, are compared in what a designer notices."""
LUCKY = 1.05
"""Rounding that saves this share of the cost by chance is mentioned."""


def change_of(brief: Brief, constants: Set) -> str:
    """Return what a build must change: "none", "numbers" or "code"; "new" where the brief has no today."""
    today = today_of(brief)
    if today is None:
        return "new"
    if constants == today:
        return "none"
    shared, now = first_of(constants), first_of(today)
    same = shared.grain == now.grain
    if brief.loop is Loop.FIXED:
        same = same and shared.step == now.step
    return "numbers" if same else "code"


def steadiest(leaders: Leaders) -> tuple[Rows, str]:
    """Return the lowest rate spread among designs on target, else within twice the best cost; and which.

    The latter is always on the front: what dominates a design has no more cost and no more spread.
    """
    if len(leaders.steady):
        return leaders.steady, "steadiest over the rates among those on target"
    front = leaders.front
    rows = front.take(front.cost <= STEADY_WITHIN * leaders.best_cost)
    order = np.lexsort((rows.index, rows.cost, rows.spread))
    return rows.take(order[:1]), f"steadiest over the rates up to {STEADY_WITHIN:g} times the lowest cost"


class _Proposals:
    """Candidates of one search, each judged once."""

    def __init__(self, brief: Brief, found: Found, objectives: Sequence[ObjectiveModule]) -> None:
        self.brief, self.found, self.objectives = brief, found, objectives
        self._judged: dict[tuple[Set, bool], Verdict] = {}

    def verdict(self, constants: Set, *, bands: bool) -> Verdict:
        if (constants, True) in self._judged:
            return self._judged[constants, True]
        if (constants, bands) not in self._judged:
            # Bands take hundreds of rates a candidate: in plain Python that would be the longest part.
            stepped = steps_all(self.brief, constants)
            self._judged[constants, bands] = judge(
                self.brief,
                constants,
                bands=bands,
                compiled=True if stepped and bands else None,
                objectives=self.objectives,
            )
        return self._judged[constants, bands]

    def candidate(self, constants: Set, label: str | None, why: str, *, bands: bool = True) -> Candidate:
        return Candidate(label, why, change_of(self.brief, constants), self.verdict(constants, bands=bands))

    def constants(self, rows: Rows, at: int = 0) -> Set:
        return self.found.designs(rows.index).constants(at, self.brief)

    def shortlist(self) -> tuple[list[Candidate], list[str]]:
        """Return the shortlisted candidates, A first, and what to say about the list."""
        leaders = self.found.leaders
        steady, steady_why = steadiest(leaders)
        lowest = "lowest cost" if self.found.certificate else "lowest cost found"
        must = {lowest: leaders.feasible.take(np.array([0])), steady_why: steady}
        if len(leaders.numbers):
            must["best that changes numbers only"] = leaders.numbers
        pool = leaders.pool.take(np.lexsort((leaders.pool.index, leaders.pool.cost))[:POOL])
        rows = join([*must.values(), leaders.front, pool])
        _, first = np.unique(rows.index, return_index=True)
        rows = rows.take(first)  # ascending in index from here on
        designs = self.found.designs(rows.index)
        names = look_names(self.brief)
        looks = looks_of(self.brief, designs)
        options = Options(looks, rows.miss, rows.spread, rows.cost, rows.on_target, names)

        def places(part: Rows) -> NDArray[np.int64]:
            return np.asarray(np.searchsorted(rows.index, part.index), dtype=np.int64)

        always = {why: int(places(part)[0]) for why, part in must.items()}
        picks = choose(options, list(always.values()), places(leaders.front), places(pool))
        listed = []
        for letter, pick in zip("ABCDEF", picks, strict=False):
            reasons = [why for why, at in always.items() if at == pick.option]
            why = self._why(options, pick, picks[0].option, reasons, designs)
            constants = designs.constants(pick.option, self.brief)
            listed.append(self.candidate(constants, letter, why))
        apart = _apart(options.looks, [pick.option for pick in picks])
        return listed, self._remarks(apart, bool(len(leaders.numbers)))

    def _why(
        self, options: Options, pick: Pick, best: int, reasons: Sequence[str], designs: Designs | Sets
    ) -> str:
        one = pick.option
        parts = list(reasons)
        if pick.reason == "front":
            parts.append(trade(options, one, best))
        elif pick.reason == "different":
            parts.append(
                "different and on target" if options.on_target[one] else "different and nearly as good"
            )
        why = " and ".join(parts)
        if one != best:
            why += f": {against(options, one, best)}"
        return why + self._luck(designs, one, float(options.cost[one]))

    def _luck(self, designs: Designs | Sets, one: int, cost: float) -> str:
        """Say where rounding cancels an error by chance: the same constants cost more without it."""
        constants = designs.constants(one, self.brief)
        if not first_of(constants).grain or self.objectives:
            return ""
        without = cost_without_grain(self.brief, constants)
        if not without > LUCKY * cost:
            return ""
        spared = f"with grain 0 the same numbers would cost {without:.3g}, not {cost:.3g}"
        return f"; rounding happens to help: {spared}"

    def _remarks(self, count: int, has_numbers: bool) -> list[str]:
        said = []
        if count < FEWEST:
            said.append(
                f"Fewer than {FEWEST} candidates differ by more than {NOTICED:.0%} in {self._noticed()}: "
                "nothing else that is nearly as good does."
            )
        if today_of(self.brief) is not None and not has_numbers:
            nothing = (
                "Nothing that this search may use" if self.found.certificate else "Nothing that was tried"
            )
            said.append(
                f"{nothing} keeps today's step and grain and every ledge and gap, so no candidate changes "
                "numbers only."
            )
        return said

    def _noticed(self) -> str:
        if not self.brief.several:
            return f"{', '.join(LOOKS[:-1])} or {LOOKS[-1]}"
        own = [name for name in LOOKS if name != "gravity"]
        return f"gravity, or in {', '.join(own[:-1])} or {own[-1]} of a jump"


def _apart(looks: NDArray[np.float64], picks: Sequence[int]) -> int:
    """Return how many of some designs a designer could tell from one another, counted in their order."""
    kept: list[int] = []
    for pick in picks:
        if not kept or bool(differs(looks[[pick]], looks[kept])[0]):
            kept.append(pick)
    return len(kept)


def propose(
    brief: Brief,
    found: Found,
    *,
    seed: int,
    objectives: Sequence[ObjectiveModule] = (),
    notes: Sequence[str] = (),
) -> SearchResult:
    """Judge what a search found, today and the named sets, and give the reasons."""
    make = _Proposals(brief, found, objectives)
    leaders = found.leaders
    shortlist: list[Candidate] = []
    remarks: list[str] = []
    best = nearest = None
    if len(leaders.feasible):
        shortlist, remarks = make.shortlist()
        best = shortlist[0]
    elif len(leaders.infeasible):
        rows = leaders.infeasible
        why = f"nothing fulfils every demand; nearest to all of them: {_short(rows)}"
        nearest = make.candidate(make.constants(rows), None, why)
    named = {judged_set(candidate.verdict): candidate for candidate in shortlist}
    front = []
    for k in range(len(leaders.front)):
        constants = make.constants(leaders.front, k)
        why = "not dominated in miss and rate spread"
        front.append(named.get(constants) or make.candidate(constants, None, why, bands=False))
    now = today_of(brief)
    today = None if now is None else make.candidate(now, None, "what the build has now")
    sets = tuple(
        make.candidate(named_set(brief, one), one.name, "brought along in [[sets]]") for one in brief.sets
    )
    return SearchResult(
        best=best,
        nearest=nearest,
        today=today,
        sets=sets,
        shortlist=tuple(shortlist),
        front=tuple(front),
        certificate=found.certificate,
        evaluations=found.evaluations,
        seed=seed,
        method=found.method,
        notes=(*notes, *found.notes, *remarks),
        clashes=found.clashes,
        alone=found.alone,
    )


def _short(rows: Rows) -> str:
    return f"cost {rows.cost[0]:.3g}, short by {rows.violation[0]:.3g} tolerances"
