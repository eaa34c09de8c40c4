"""A search from brief to proposals: which route, what it found, and how it is told."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

from designer.brief.model import Brief
from designer.errors import Fault, InputError
from designer.objective.modules import ObjectiveModule
from designer.objective.rows import binding
from designer.search.findings import find_out
from designer.search.found import Found, by_scan, by_study
from designer.search.overdetermined import overdetermined
from designer.search.progress import Progress, Silent
from designer.search.propose import propose
from designer.search.result import SearchResult
from designer.search.scan import plan, steps_to_simulate
from designer.search.several.assign import build_several
from designer.search.several.found import by_separated_scan, by_several_study
from designer.search.several.found import reason_to_study as several_reason
from designer.search.space import Space, build_space

RATES_PER_DESIGN = 10
"""Rates at which the budget's designs may be flown; with more of them, fewer designs."""
MOST_STEPS = 3e9
"""Steps that a scan may simulate where the rule has no closed form: about twenty seconds compiled."""


def reason_to_study(
    brief: Brief, space: Space, budget: int, objectives: Sequence[ObjectiveModule]
) -> str | None:
    """Return why no scan is possible, in words; None where one is."""
    if objectives:
        names = ", ".join(module.name for module in objectives)
        return f"the objective module {names} is asked design by design"
    endless = [axis.name for axis in space.axes if axis.points is None]
    if endless:
        return f"{', '.join(endless)} {'has' if len(endless) == 1 else 'have'} no increments"
    if space.size > budget:
        return f"the grid has {space.size:,} designs, more than the budget of {budget:,}"
    layout = plan(brief, space)
    flights = layout.flights * len(layout.steps)
    if flights > RATES_PER_DESIGN * budget:
        return (
            f"its {space.size:,} designs take {flights:,} jumps over {len(layout.steps)} steps, more than "
            f"{RATES_PER_DESIGN * budget:,} ({RATES_PER_DESIGN} times --budget)"
        )
    steps = steps_to_simulate(brief, layout)
    if steps > MOST_STEPS:
        return f"this rule has no closed form, and stepping the grid takes about {steps:.2g} steps"
    return None


def _check(workers: int, trials: int, budget: int) -> None:
    faults = [
        Fault("search", name, str(value), "a whole number, 1 or more", f"leave {name} out for the default")
        for name, value in (("workers", workers), ("trials", trials), ("budget", budget))
        if value < 1
    ]
    if faults:
        raise InputError(*faults)


def search(
    brief: Brief,
    *,
    seed: int = 0,
    workers: int = 1,
    trials: int = 600,
    budget: int = 20_000_000,
    objectives: Sequence[ObjectiveModule] = (),
    progress: Progress | None = None,
) -> SearchResult:
    """Search for constants that do what a brief asks, and propose a few.

    Scans every design where there are at most `budget` of them and each is cheap: then the best is certified.
    Otherwise Optuna runs `trials` trials and SciPy refines what it found. `seed` decides all randomness;
    `workers`, a number of threads, never changes the result. Raises InputError where the brief has no
    [search], or does not bound a free constant.
    """
    _check(workers, trials, budget)
    listen = progress or Silent()
    deciding = binding(brief)  # of a long level list only the rows that decide need to be scored
    found: Found
    if brief.several:
        several = build_several(deciding)
        notes = several.notes
        reason = several_reason(deciding, several, budget, objectives)
        if reason is None:
            found = by_separated_scan(deciding, several, workers=workers, progress=listen)
        else:
            found = by_several_study(
                deciding,
                several,
                seed=seed,
                trials=trials,
                objectives=objectives,
                workers=workers,
                progress=listen,
            ).because(reason)
    else:
        space = build_space(deciding)
        notes = space.notes
        reason = reason_to_study(deciding, space, budget, objectives)
        if reason is None:
            found = by_scan(deciding, space, workers=workers, progress=listen)
        else:
            found = by_study(
                deciding,
                space,
                seed=seed,
                trials=trials,
                objectives=objectives,
                workers=workers,
                progress=listen,
            ).because(reason)
    return told(brief, propose(brief, found, seed=seed, objectives=objectives, notes=notes))


def told(brief: Brief, result: SearchResult) -> SearchResult:
    """Return a result with what can be said of its aims and, of several jumps, of who pays for whom."""
    found = result.best or result.nearest
    findings = () if found is None else find_out(brief, found.verdict)
    return replace(result, notes=(*overdetermined(brief), *result.notes), findings=findings)
