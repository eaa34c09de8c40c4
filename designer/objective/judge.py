"""One set of constants against the whole brief: what `check` shows and what a candidate carries."""

from __future__ import annotations

import base64
import hashlib
from collections.abc import Mapping, Sequence
from dataclasses import astuple
from typing import TYPE_CHECKING

import numpy as np

from designer.brief.model import Brief, Gap, JumpBrief, Ledge, Rate
from designer.motion.grain import flip_margin
from designer.motion.jumps import Jumps, Launches, Status
from designer.motion.measures import MEASURES, OF_FLIGHT, max_gap, sure_gap
from designer.motion.rule import Constants, Rule
from designer.motion.simulate import simulate
from designer.objective.bands import failing_bands, sweep_rates
from designer.objective.flags import find_flags
from designer.objective.modules import ObjectiveModule
from designer.objective.score import (
    NEGLIGIBLE,
    Scores,
    deviation,
    gap_spare,
    ledge_spare,
    nine_digits,
    score,
    spread_of,
)
from designer.objective.table import Designs, JumpTable, Kinematics, extremes, kinematics, scalars
from designer.objective.verdict import FeatureVerdict, JumpVerdict, RateRow, TargetVerdict, Verdict, Worst

if TYPE_CHECKING:
    from numpy.typing import NDArray


def mark(constants: Constants, rule: Rule) -> str:
    """Return four letters and digits that stay the same as long as constants and rule do."""
    text = repr((astuple(constants), astuple(rule)))
    return base64.b32encode(hashlib.sha256(text.encode()).digest())[:4].decode().lower()


def judge(
    brief: Brief,
    constants: Constants,
    *,
    bands: bool = True,
    compiled: bool | None = None,
    objectives: Sequence[ObjectiveModule] = (),
) -> Verdict:
    """Step one set of constants at every rate of the brief and score it.

    Every number comes from the kernel, to the last bit. With bands=False the bands of rates at which
    features fail are left out, which saves a sweep over a thousand rates. `compiled` is passed on to
    `simulate`. In a fixed loop the constants need a step (ValueError).
    """
    rates = (brief.nominal(constants), *brief.rates.supported, *brief.rates.watched)
    designs = Designs.of([constants])
    launches = designs.launches(np.array([[rate.step for rate in rates]]))
    statuses: dict[float, NDArray[np.int8]] = {}

    def fly(rule: Rule, batch: Launches, level: float, **options: bool) -> Jumps:
        flown = simulate(rule, batch, level, **options)
        statuses[level] = flown.status
        return flown

    kin = kinematics(brief, launches, compiled=compiled, names=OF_FLIGHT, fly=fly)
    supported = range(1, 1 + len(brief.rates.supported))
    tables = extremes(brief, kin, 0, supported, scalars(brief, designs, constants))
    terms = {name: d for module in objectives for name, d in module.terms(designs, tables).items()}
    scores = score(brief, tables, terms)
    rows = _rate_rows(brief, constants, rates, kin, statuses[0.0][0])
    worst = _worst(brief, tables, terms, bool(tables[0].lands[0]))
    failing: tuple[tuple[str, ...], ...] = ((),) * (len(brief.ledges) + len(brief.gaps))
    stuck: tuple[str, ...] = ()
    if bands:
        failing, stuck = failing_bands(brief, sweep_rates(brief, constants, compiled=compiled))
    features = [
        _feature(brief, feature, constants, kin, rates, bands_of)
        for feature, bands_of in zip(brief.features, failing, strict=True)
    ]
    return Verdict(
        constants=constants,
        mark=mark(constants, brief.rule),
        jumps=tuple(
            _jump(jump, table, constants, rows) for jump, table in zip(brief.jumps, tables, strict=True)
        ),
        miss=_number(scores.miss),
        rate_spread=_number(scores.rate_spread),
        cost=_number(scores.cost),
        worst=worst,
        violation=_number(scores.violation),
        feasible=bool(_feasible(scores)),
        ledges=tuple(features[: len(brief.ledges)]),
        gaps=tuple(features[len(brief.ledges) :]),
        flags=find_flags(brief, constants, rows, features, stuck),
        extras={name: float(d[0]) for name, d in terms.items()},
    )


def _feasible(scores: Scores) -> bool:
    return bool(scores.feasible[0])


def _number(values: NDArray[np.float64]) -> float | None:
    """Return the one number of an array, None where it does not exist."""
    value = float(np.ravel(values)[0])
    return value if np.isfinite(value) else None


def _nine(values: NDArray[np.float64]) -> float:
    """Return the one deviation of an array to nine digits, so that 1.0000000000000009 is not beyond 1."""
    return float(nine_digits(values)[0])


def _rate_rows(
    brief: Brief,
    constants: Constants,
    rates: Sequence[Rate],
    kin: Kinematics,
    statuses: NDArray[np.int8],
) -> tuple[RateRow, ...]:
    """Return a row a rate, the nominal one first, with every measure there is."""
    steps = np.array([rate.step for rate in rates])
    columns: dict[str, NDArray[np.float64]] = {name: values[0] for name, values in kin.flight.items()}
    reach = max_gap(columns["airtime"], constants.run_speed, constants.edge_allowance)
    columns["max_gap"] = reach
    columns["sure_gap"] = sure_gap(reach, constants.run_speed, steps)
    columns["step_top"] = columns["apex"] + constants.step_up
    used = steps[: 1 + len(brief.rates.supported)]
    margin = flip_margin(brief.rule, constants.gravity, constants.grain, constants.fall_factor, used)
    columns["flip_margin"] = np.broadcast_to(margin, steps.shape)
    rows = []
    for i, rate in enumerate(rates):
        lands = statuses[i] == Status.LANDS
        measures = {name: _number(columns[name][i]) if lands else None for name in MEASURES}
        rows.append(RateRow(rate.name, rate.step, rate.supported, Status(statuses[i]).text, measures))
    return tuple(rows)


def _jump(jump: JumpBrief, table: JumpTable, constants: Constants, rows: tuple[RateRow, ...]) -> JumpVerdict:
    """Return one jump at every rate, with how far each target is off."""
    lands = bool(table.lands[0])

    def spread(name: str) -> float | None:
        return _number(spread_of(table.measures[name])) if lands else None

    targets = []
    for target in jump.targets:
        measure = table.measures[target.measure]
        d = _nine(deviation(target, measure)) if lands else None
        if target.aim is not None:
            value = measure.nominal
        elif target.at_least is None or (d is not None and d > 0):
            value = measure.high
        else:
            value = measure.low
        targets.append(TargetVerdict(target, _number(value) if lands else None, d, spread(target.measure)))
    spreads = {name: spread(name) for name in ("apex", "airtime", "max_gap")}
    return JumpVerdict(jump.name, constants, rows[1:], rows[0], spreads, tuple(targets))


def _worst(
    brief: Brief,
    tables: Sequence[JumpTable],
    terms: Mapping[str, NDArray[np.float64]],
    lands: bool,
) -> Worst | None:
    """Return the largest |deviation| and where; None without targets or where the jump never lands."""
    if not lands:
        return None
    found = [Worst(abs(_nine(d)), "objective", name) for name, d in terms.items()]
    for jump, table in zip(brief.jumps, tables, strict=True):
        for target in jump.targets:
            d = deviation(target, table.measures[target.measure])
            found.append(Worst(abs(_nine(d)), jump.name, target.measure))
    return max(found, key=lambda one: one.value, default=None)


def _feature(
    brief: Brief,
    feature: Ledge | Gap,
    constants: Constants,
    kin: Kinematics,
    rates: Sequence[Rate],
    failing: tuple[str, ...],
) -> FeatureVerdict:
    """Return how a ledge or gap stands at its worst nominal or supported rate."""
    worst_spare, worst_rate = np.inf, None
    for column in range(1 + len(brief.rates.supported)):
        for table in extremes(brief, kin, column, (), scalars(brief, Designs.of([constants]), constants)):
            if table.name not in feature.by:
                continue
            if isinstance(feature, Ledge):
                spare = ledge_spare(feature, table)
            else:
                spare = gap_spare(feature, table, brief.rule.contact_tolerance)[0]
            value = float(spare[0]) if table.lands[0] else -np.inf
            if value < worst_spare:
                worst_spare, worst_rate = value, rates[column].name
    return FeatureVerdict(
        name=feature.name,
        by=feature.by,
        must=feature.must,
        holds=bool(worst_spare >= -NEGLIGIBLE),
        spare=float(worst_spare) if np.isfinite(worst_spare) else None,
        worst_rate=worst_rate,
        failing=failing,
    )
