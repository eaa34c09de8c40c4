"""The data of the sensitivity picture."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from designer.analysis.sensitivity import Nudge, one_increment
from designer.brief.model import Brief
from designer.report import style
from designer.report.findings import plain
from designer.report.score_figures import Bar
from designer.report.shown import NEAREST
from designer.search.result import Candidate


@dataclass(frozen=True, slots=True)
class SensitivityPicture:
    """What one increment of each constant does: a column of bars a measure, a row a nudge."""

    title: str
    subtitle: str
    labels: tuple[str, ...]
    columns: tuple[tuple[str, tuple[Bar, ...]], ...]
    limit: float
    alt: str


def sensitivity(brief: Brief, best: Candidate) -> SensitivityPicture | None:
    """Return the sensitivity of the best, or None where there is nothing to nudge."""
    found = one_increment(brief, best.verdict.sets)
    if not found.nudges:
        return None
    labels = tuple(
        nudge_label(nudge, brief.length_unit) + (" (flip)" if nudge.flip else "") for nudge in found.nudges
    )
    columns = []
    several = len(best.verdict.jumps) > 1
    for index, change in enumerate(found.nudges[0].changes):
        name = change.measure
        if several:
            name = f"{style.shorten(change.jump, style.HEAD_WIDTH)}\n{change.measure}"
        values = [nudge.changes[index].in_tolerances for nudge in found.nudges]
        columns.append((name, _bars(labels, found.nudges, values)))
    columns.append(("miss", _bars(labels, found.nudges, [nudge.miss for nudge in found.nudges])))
    columns.append(("rate spread", _bars(labels, found.nudges, [n.rate_spread for n in found.nudges])))
    name = best.label or NEAREST
    title = sensitivity_title(name, columns, found.nudges)
    subtitle = (
        "Change for one increment, in tolerances; tinted: within one tolerance; hatched: crosses a flip"
    )
    return SensitivityPicture(
        title, subtitle, labels, tuple(columns), _limit(columns), f"{title}. {subtitle}."
    )


def nudge_label(nudge: Nudge, unit: str) -> str:
    """Return "gravity 1600 → 1610 cm/s²", "step 10 → 11 ms"."""
    if nudge.share:
        return f"{nudge.constant} {'+' if nudge.direction > 0 else '−'}1 %"
    constant = nudge.constant.rpartition(".")[2]  # of several jumps it is "walk.launch_speed"
    plain_numbers = constant.endswith("_factor") or constant.endswith(" times")
    measured = {"step": "ms", "gravity": f"{unit}/s²"}.get(constant, "" if plain_numbers else f"{unit}/s")
    before, after = (_value(constant, value) for value in (nudge.before, nudge.after))
    measured = f" {measured}".rstrip()
    if np.isinf(nudge.after):
        return f"{nudge.constant} {before}{measured} → {after}"
    return f"{nudge.constant} {before} → {after}{measured}"


def _value(constant: str, value: float) -> str:
    """Return a constant as it stands beside its unit: a step in ms."""
    if np.isinf(value):
        return "none"
    return plain(value * 1000.0, 5) if constant == "step" else plain(value, 6)


def _bars(labels: Sequence[str], nudges: Sequence[Nudge], values: Sequence[float | None]) -> tuple[Bar, ...]:
    rows = zip(labels, values, nudges, strict=True)
    return tuple(Bar(label, value, nudge.flip) for label, value, nudge in rows)


def _limit(columns: Sequence[tuple[str, Sequence[Bar]]]) -> float:
    """Return how far the axes go: every bar, or where a few are far longer than the rest, the rest."""
    sizes = [abs(bar.value) for _, bars in columns for bar in bars if bar.value is not None]
    if not sizes:
        return 1.25
    usual = 3.0 * float(np.percentile(sizes, 80))
    return 1.3 * max(1.0, min(max(sizes), max(usual, 1.0)))


def sensitivity_title(
    name: str, columns: Sequence[tuple[str, Sequence[Bar]]], nudges: Sequence[Nudge]
) -> str:
    """Return what matters most: the steepest constant, and how many steps cross a flip."""
    steady = [
        (abs(bar.value), row, measure)
        for measure, bars in columns[:-2] or columns
        for row, bar in enumerate(bars)
        if bar.value is not None and not bar.flip
    ]
    flips = sum(nudge.flip for nudge in nudges)
    said = f"; {flips} of {len(nudges)} steps cross{'es' if flips == 1 else ''} a flip" if flips else ""
    if not steady:
        return f"{name}: every increment crosses a flip"
    size, row, measure = max(steady, key=lambda item: item[0])
    nudge = nudges[row]
    what = f"1 % of {nudge.constant}" if nudge.share else f"one increment of {nudge.constant}"
    return f"{name}: {what} moves {' '.join(measure.split())} by {plain(size, 2)} tolerances{said}"
