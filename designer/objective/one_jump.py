"""One jump of one set of constants, stepped at every rate: what `judge` puts together."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

from designer.brief.model import Brief, Rate
from designer.motion.grain import flip_margin
from designer.motion.jumps import Jumps, Launches, Status
from designer.motion.measures import MEASURES, OF_FLIGHT, max_gap, sure_gap
from designer.motion.rule import Constants, Rule
from designer.motion.simulate import simulate, time_above
from designer.objective.bands import band_names, failures, sweep_rates
from designer.objective.flags import find_flags
from designer.objective.score import (
    Parts,
    deviation,
    feature_spare,
    nine_digits,
    parts,
    put_together,
    spread_of,
)
from designer.objective.table import Designs, JumpTable, Kinematics, extremes, kinematics, own_scalars
from designer.objective.verdict import JumpVerdict, RateRow, TargetVerdict, Worst

if TYPE_CHECKING:
    from numpy.typing import NDArray


@dataclass(frozen=True, slots=True)
class OneJump:
    """Everything about one jump of a set."""

    designs: Designs
    tables: tuple[JumpTable, ...]
    parts: Parts
    verdict: JumpVerdict
    worst: tuple[Worst, ...]
    """The |deviation| of each target; empty where the jump never lands."""
    spares: tuple[tuple[float, str | None], ...]
    """For each feature of the view the least slack (−infinity where the jump never lands) and its rate."""
    fails: tuple[NDArray[np.bool_], ...]
    """For each feature of the view, at which whole rates it fails; empty without bands."""
    flags: tuple[str, ...]


def judge_jump(view: Brief, constants: Constants, *, bands: bool, compiled: bool | None) -> OneJump:
    """Step one jump (a brief with one, or the view of one) at every rate of the brief."""
    rates = (view.nominal(constants), *view.rates.supported, *view.rates.watched)
    designs = Designs.of([constants])
    launches = designs.launches(np.array([[rate.step for rate in rates]]))
    statuses: dict[float, NDArray[np.int8]] = {}

    def fly(rule: Rule, batch: Launches, level: float, **options: Any) -> Jumps:
        flown = simulate(rule, batch, level, **options)
        statuses[level] = flown.status
        return flown

    kin = kinematics(view, launches, compiled=compiled, names=OF_FLIGHT, fly=fly, stay=time_above)
    supported = range(1, 1 + len(view.rates.supported))
    tables = extremes(view, kin, 0, supported, own_scalars(constants, designs))
    found = parts(view, tables)
    rows = _rate_rows(view, constants, rates, kin, statuses[0.0][0])
    fails: list[NDArray[np.bool_]] = []
    stuck: tuple[str, ...] = ()
    if bands:
        fails, never = failures(view, sweep_rates(view, constants, compiled=compiled))
        stuck = band_names(never)
    return OneJump(
        designs=designs,
        tables=tables,
        parts=found,
        verdict=_jump(view, tables[0], constants, rows, one_number(put_together(view, [found]).cost)),
        worst=_worst(view, tables[0]),
        spares=_spares(view, constants, kin, rates),
        fails=tuple(fails),
        flags=find_flags(view, constants, rows, stuck),
    )


def one_number(values: NDArray[np.float64]) -> float | None:
    """Return the one number of an array, None where it does not exist."""
    value = float(np.ravel(values)[0])
    return value if np.isfinite(value) else None


def nine(values: NDArray[np.float64]) -> float:
    """Return the one deviation of an array to nine digits, so that 1.0000000000000009 is not beyond 1."""
    return float(nine_digits(values)[0])


def _rate_rows(
    view: Brief,
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
    used = steps[: 1 + len(view.rates.supported)]
    margin = flip_margin(view.rule, constants.pull, constants.grain, constants.fall_factor, used)
    columns["flip_margin"] = np.broadcast_to(margin / constants.gravity_factor, steps.shape)
    rows = []
    for i, rate in enumerate(rates):
        lands = statuses[i] == Status.LANDS
        measures = {name: one_number(columns[name][i]) if lands else None for name in MEASURES}
        rows.append(RateRow(rate.name, rate.step, rate.supported, Status(statuses[i]).text, measures))
    return tuple(rows)


def _jump(
    view: Brief, table: JumpTable, constants: Constants, rows: tuple[RateRow, ...], cost: float | None
) -> JumpVerdict:
    """Return the jump at every rate, with how far each target is off."""
    lands = bool(table.lands[0])

    def spread(name: str) -> float | None:
        return one_number(spread_of(table.measures[name])) if lands else None

    targets = []
    for target in view.jumps[0].targets:
        measure = table.measures[target.measure]
        d = nine(deviation(target, measure)) if lands else None
        if target.aim is not None:
            value = measure.nominal
        elif target.at_least is None or (d is not None and d > 0):
            value = measure.high
        else:
            value = measure.low
        targets.append(TargetVerdict(target, one_number(value) if lands else None, d, spread(target.measure)))
    spreads = {name: spread(name) for name in ("apex", "airtime", "max_gap")}
    return JumpVerdict(view.jumps[0].name, constants, rows[1:], rows[0], spreads, tuple(targets), cost)


def _worst(view: Brief, table: JumpTable) -> tuple[Worst, ...]:
    if not table.lands[0]:
        return ()
    jump = view.jumps[0]
    return tuple(
        Worst(abs(nine(deviation(target, table.measures[target.measure]))), jump.name, target.measure)
        for target in jump.targets
    )


def _spares(
    view: Brief, constants: Constants, kin: Kinematics, rates: Sequence[Rate]
) -> tuple[tuple[float, str | None], ...]:
    """Return the least slack of each feature over nominal and supported rates, and where it is."""
    lengths = own_scalars(constants, Designs.of([constants]))
    columns = range(1 + len(view.rates.supported))
    tables = [extremes(view, kin, column, (), lengths)[0] for column in columns]
    found = []
    for feature in view.features:
        least: tuple[float, str | None] = (np.inf, None)
        for rate, table in zip(rates, tables, strict=False):
            spare, _ = feature_spare(view, feature, view.jumps[0], table)
            value = float(spare[0]) if table.lands[0] else -np.inf
            if value < least[0]:
                least = (value, rate.name)
        found.append(least)
    return tuple(found)
