"""Level lists: which rows decide, and of all rows those that fail."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

from designer.brief.levels import tightest
from designer.brief.model import Brief, Gap, Ledge
from designer.objective.one_jump import OneJump
from designer.objective.score import NEGLIGIBLE, feature_spare
from designer.objective.verdict import FeatureVerdict


def binding(brief: Brief) -> Brief:
    """Return the brief with only those rows of its level list that decide; others would change nothing."""
    given: tuple[Ledge | Gap, ...] = (*brief.ledges, *brief.gaps)
    if not any(one.source for one in given):
        return brief
    kept = tightest(given)
    return replace(
        brief,
        ledges=tuple(one for one in kept if isinstance(one, Ledge)),
        gaps=tuple(one for one in kept if isinstance(one, Gap)),
    )


def failing_rows(
    brief: Brief, views: Sequence[Brief], found: Sequence[OneJump]
) -> tuple[FeatureVerdict, ...]:
    """Return every row of the brief's level list that fails, in the order of the list.

    brief has all rows; views are those of its binding rows, with what was found of each jump.
    """
    failing = []
    names = [jump.name for jump in brief.jumps]
    rates: dict[tuple[object, ...], str | None] = {}
    for view, one in zip(views, found, strict=True):
        for feature, (_, rate) in zip(view.features, one.spares, strict=True):
            rates.setdefault((view.jumps[0].name, *_kind(feature)), rate)
    given: tuple[Ledge | Gap, ...] = (*brief.ledges, *brief.gaps)
    for row in given:
        if not row.source:
            continue
        least: tuple[float, str] | None = None
        for name, view, one in zip(names, views, found, strict=True):
            if brief.several and name not in row.by:
                continue
            table = one.tables[0]
            spare, _ = feature_spare(view, row, view.jumps[0], table)
            value = float(spare[0]) if table.lands[0] else float("-inf")
            if least is None or value < least[0]:
                least = (value, name)
        if least is None or least[0] >= -NEGLIGIBLE:
            continue
        failing.append(
            FeatureVerdict(
                name=row.name,
                by=row.by,
                must=row.must,
                holds=False,
                spare=least[0] if least[0] != float("-inf") else None,
                # Rows of one kind differ by a number only: the rate that is worst for one is so for all.
                worst_rate=rates.get((least[1], *_kind(row))),
                failing=(),
                worst_jump=least[1] if brief.several else None,
                place=row.place,
                source=row.source,
            )
        )
    return tuple(failing)


def _kind(feature: object) -> tuple[object, ...]:
    if isinstance(feature, Gap):
        return ("gap", feature.must, feature.far_level)
    if isinstance(feature, Ledge):
        return ("ledge", feature.must, 0.0)
    return ("other",)
