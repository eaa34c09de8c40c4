"""One set of constants against the whole brief: what `check` shows and what a candidate carries."""

from __future__ import annotations

import base64
import hashlib
from collections.abc import Sequence
from dataclasses import astuple
from typing import TYPE_CHECKING

import numpy as np

from designer.brief.model import Brief
from designer.motion.rule import SHARED, Constants, Rule, Second
from designer.objective.bands import band_names
from designer.objective.flags import between
from designer.objective.modules import ObjectiveModule
from designer.objective.one_jump import OneJump, judge_jump, nine, one_number
from designer.objective.rows import binding, failing_rows
from designer.objective.score import NEGLIGIBLE, put_together, views_of
from designer.objective.verdict import FeatureVerdict, Verdict, Worst

if TYPE_CHECKING:
    from numpy.typing import NDArray


def mark(
    constants: Constants | Sequence[Constants], rule: Rule, seconds: Sequence[Second | None] = ()
) -> str:
    """Return four letters and digits that stay the same as long as constants and rule do.

    Of several jumps the constants of each, in the order of the brief, and their second jumps count.
    """
    if isinstance(constants, Constants):
        text = repr((_numbers(constants), astuple(rule)))
    else:
        second = tuple(None if one is None else astuple(one) for one in seconds)
        text = repr((tuple(_numbers(one) for one in constants), second, astuple(rule)))
    return base64.b32encode(hashlib.sha256(text.encode()).digest())[:4].decode().lower()


def _numbers(constants: Constants) -> tuple[object, ...]:
    """Return what counts for the mark: a factor of 1 on gravity says nothing."""
    numbers = astuple(constants)
    return numbers if constants.gravity_factor != 1.0 else numbers[:-1]


def judge(
    brief: Brief,
    constants: Constants | Sequence[Constants],
    *,
    bands: bool = True,
    compiled: bool | None = None,
    objectives: Sequence[ObjectiveModule] = (),
) -> Verdict:
    """Step one set of constants at every rate of the brief and score it.

    Of a brief with several jumps a set is one Constants a jump, in its order, with equal gravity, step and
    grain (ValueError). Every number comes from the kernel, to the last bit. With bands=False the bands of
    rates at which features fail are left out, which saves a sweep over a thousand rates. `compiled` is
    passed on to `simulate`. In a fixed loop the constants need a step (ValueError). Of a level list only the
    rows that decide are judged like ledges and gaps; with bands, all others that fail are named too.
    """
    sets = _each(brief, constants)
    every, brief = brief, binding(brief)
    views = views_of(brief)
    found = [
        judge_jump(view, one, bands=bands, compiled=compiled) for view, one in zip(views, sets, strict=True)
    ]
    tables = tuple(one.tables[0] for one in found)
    designs = {jump.name: one.designs for jump, one in zip(brief.jumps, found, strict=True)}
    terms = {name: d for module in objectives for name, d in module.terms(designs, tables).items()}
    scores = put_together(brief, [one.parts for one in found], terms)
    features = _features(brief, found)
    ends = np.cumsum([len(brief.ledges), len(brief.gaps), len(brief.blocks)]).tolist()
    return Verdict(
        constants=sets[0],
        mark=mark(sets, brief.rule, [jump.second for jump in brief.jumps])
        if brief.several
        else mark(sets[0], brief.rule),
        jumps=tuple(one.verdict for one in found),
        miss=one_number(scores.miss),
        rate_spread=one_number(scores.rate_spread),
        cost=one_number(scores.cost),
        worst=_worst(found, terms),
        violation=one_number(scores.violation),
        feasible=bool(scores.feasible[0]),
        ledges=tuple(features[: ends[0]]),
        gaps=tuple(features[ends[0] : ends[1]]),
        blocks=tuple(features[ends[1] : ends[2]]),
        ceilings=tuple(features[ends[2] :]),
        flags=(
            *_flags(brief, found),
            *between((found[0].verdict.nominal, *found[0].verdict.rates), features),
        ),
        extras={name: float(d[0]) for name, d in terms.items()},
        rows=sum(bool(one.source) for one in every.features),
        failing_rows=failing_rows(every, views, found) if bands and every is not brief else (),
        several=brief.several,
    )


def _each(brief: Brief, constants: Constants | Sequence[Constants]) -> tuple[Constants, ...]:
    """Return one set of constants a jump."""
    sets = (constants,) if isinstance(constants, Constants) else tuple(constants)
    if len(sets) != len(brief.jumps):
        names = ", ".join(jump.name for jump in brief.jumps)
        raise ValueError(f"a set of this brief has one Constants for each of {names}; got {len(sets)}")
    for name in SHARED:
        if len({getattr(one, name) for one in sets}) > 1:
            raise ValueError(f"{name} is everybody's: jumps of one set must have the same")
    return sets


def _flags(brief: Brief, found: Sequence[OneJump]) -> tuple[str, ...]:
    """Return what to know; of several jumps with the names of those of which it holds, unless of all."""
    if len(found) == 1:
        return found[0].flags
    holds: dict[str, list[str]] = {}
    for jump, one in zip(brief.jumps, found, strict=True):
        for flag in one.flags:
            holds.setdefault(flag, []).append(jump.name)
    said = [flag for flag, names in holds.items() if len(names) == len(found)]
    return (*said, *(f"{', '.join(names)}: {flag}" for flag, names in holds.items() if flag not in said))


def _worst(found: Sequence[OneJump], terms: dict[str, NDArray[np.float64]]) -> Worst | None:
    """Return the largest |deviation| and where; None without targets or where a jump never lands."""
    if not all(one.tables[0].lands[0] for one in found):
        return None
    every = [Worst(abs(nine(d)), "objective", name) for name, d in terms.items()]
    every += [worst for one in found for worst in one.worst]
    return max(every, key=lambda one: one.value, default=None)


def _features(brief: Brief, found: Sequence[OneJump]) -> list[FeatureVerdict]:
    """Return how each feature stands at the worst nominal or supported rate of the jumps that must."""
    names = [jump.name for jump in brief.jumps]
    seen = dict.fromkeys(names, 0)
    verdicts = []
    for feature in brief.features:
        least: tuple[float, str | None] = (np.inf, None)
        worst_jump = None
        fails: list[NDArray[np.bool_]] = []
        for name, one in zip(names, found, strict=True):
            if brief.several and name not in feature.by:
                continue
            at = seen[name]  # a view has its jump's features in the order of the brief
            seen[name] += 1
            if one.spares[at][0] < least[0]:
                least, worst_jump = one.spares[at], name
            fails += [one.fails[at]] if one.fails else []
        verdicts.append(
            FeatureVerdict(
                name=feature.name,
                by=feature.by,
                must=feature.must,
                holds=bool(least[0] >= -NEGLIGIBLE),
                spare=float(least[0]) if np.isfinite(least[0]) else None,
                worst_rate=least[1],
                failing=band_names(np.logical_or.reduce(fails)) if fails else (),
                worst_jump=worst_jump if brief.several else None,
                place=feature.place,
                source=feature.source,
            )
        )
    return verdicts
