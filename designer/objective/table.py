"""Measures of many designs at many steps, and their extremes over the rates: what the score is made of."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING, Any

import numpy as np

from designer.brief.model import Brief, JumpBrief, Loop
from designer.motion.batch import above, fly_many
from designer.motion.grain import flip_margin
from designer.motion.jumps import Jumps, Launches, Status
from designer.motion.measures import OF_FLIGHT, clearance, max_gap, of_flight, sure_gap
from designer.motion.rule import Constants

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]
    Scalars = Mapping[str, NDArray[np.float64] | float]


@dataclass(frozen=True, slots=True)
class Designs:
    """Scattered sets of constants, as arrays (designs,) in the brief's length and seconds."""

    gravity: Floats
    launch_speed: Floats
    step: Floats
    """NaN in a loop that steps each frame."""
    grain: Floats
    run_speed: Floats
    fall_factor: Floats
    terminal_speed: Floats
    """Infinity means no limit."""
    gravity_factor: Floats = field(default_factory=lambda: np.ones(1))
    """What the jump makes of the game's gravity; (1,) of ones where nothing else is said."""

    def launches(self, steps: Floats) -> Launches:
        """Return the designs as (designs, 1) against `steps`, (columns,) or (designs, columns), seconds."""
        return Launches(
            (self.gravity * self.gravity_factor)[:, None],
            self.launch_speed[:, None],
            steps,
            self.grain[:, None],
            self.fall_factor[:, None],
            self.terminal_speed[:, None],
        )

    def constants(self, index: int, brief: Brief) -> Constants:
        """Return one design as constants; step_up and edge_allowance are the brief's."""
        step_up, edge_allowance = fixed_lengths(brief)
        terminal = float(self.terminal_speed[index])
        factors = np.broadcast_to(self.gravity_factor, self.gravity.shape)
        return Constants(
            gravity=float(self.gravity[index]),
            launch_speed=float(self.launch_speed[index]),
            step=None if brief.loop is Loop.EACH_FRAME else float(self.step[index]),
            grain=float(self.grain[index]),
            run_speed=float(self.run_speed[index]),
            fall_factor=float(self.fall_factor[index]),
            terminal_speed=None if np.isinf(terminal) else terminal,
            step_up=step_up,
            edge_allowance=edge_allowance,
            gravity_factor=float(factors[index]),
        )

    @classmethod
    def of(cls, sets: Sequence[Constants]) -> Designs:
        """Return the designs that these constants are."""

        def column(name: str, none: float) -> Floats:
            values = (getattr(one, name) for one in sets)
            return np.array([none if value is None else value for value in values], dtype=np.float64)

        return cls(
            gravity=column("gravity", np.nan),
            launch_speed=column("launch_speed", np.nan),
            step=column("step", np.nan),
            grain=column("grain", 0.0),
            run_speed=column("run_speed", 0.0),
            fall_factor=column("fall_factor", 1.0),
            terminal_speed=column("terminal_speed", np.inf),
            gravity_factor=column("gravity_factor", 1.0),
        )


@dataclass(frozen=True, slots=True)
class Kinematics:
    """What does not depend on how fast one runs: arrays (designs, columns), a column a step."""

    steps: Floats
    """Seconds, (columns,) or (designs, columns)."""
    lands: NDArray[np.bool_]
    """Whether the jump lands at level 0."""
    flight: Mapping[str, Floats]
    """Measures by name (see designer.motion.measures.OF_FLIGHT)."""
    airtimes: Mapping[float, Floats]
    """Airtime to each landing level that a gap asks for; NaN where the level is out of reach."""
    above: Mapping[float, Floats] = field(default_factory=dict)
    """Seconds above each height that a block asks for."""

    def spread(self, where: NDArray[np.intp], steps: Floats) -> Kinematics:
        """Return the designs at these places, in this order and with these steps."""
        return Kinematics(
            steps,
            self.lands[where],
            {name: values[where] for name, values in self.flight.items()},
            {level: values[where] for level, values in self.airtimes.items()},
            {height: values[where] for height, values in self.above.items()},
        )


@dataclass(frozen=True, slots=True)
class Extremes:
    """A measure of each design, arrays (designs,); NaN where a jump never lands."""

    nominal: Floats
    low: Floats
    """Smallest over the nominal and supported rates."""
    high: Floats
    """Largest over the same."""


@dataclass(frozen=True, slots=True)
class JumpTable:
    """One jump of many designs."""

    name: str
    lands: NDArray[np.bool_]
    """Whether it lands at the nominal and every supported rate, (designs,)."""
    measures: Mapping[str, Extremes]
    """By measure; for landing levels other than 0 also "max_gap@-40.0" and "sure_gap@-40.0", for blocks
    "clearance@90.0"."""


Fly = Callable[..., Jumps]
Stay = Callable[..., "Floats"]


def at_level(measure: str, level: float) -> str:
    """Return the key of a measure at a landing level: "max_gap", "max_gap@-40.0"."""
    return measure if level == 0.0 else f"{measure}@{float(level)}"


def fixed_lengths(brief: Brief) -> tuple[float, float]:
    """Return step_up and edge_allowance, which no search varies: what [search] fixes, else [today]'s."""

    def length(name: str) -> float:
        choice = (brief.search or {}).get(name)
        if choice is not None and choice.values is not None:
            return choice.values[0]
        return 0.0 if brief.base is None else float(getattr(brief.base, name))

    return length("step_up"), length("edge_allowance")


def measures_needed(brief: Brief) -> tuple[str, ...]:
    """Return the measures of flight that targets, features and tables need."""
    targeted = {target.measure for jump in brief.jumps for target in jump.targets}
    return tuple(name for name in OF_FLIGHT if name in targeted | {"apex", "airtime"})


def kinematics(
    brief: Brief,
    launches: Launches,
    *,
    workers: int = 1,
    compiled: bool | None = None,
    names: Sequence[str] | None = None,
    fly: Fly = fly_many,
    stay: Stay = above,
) -> Kinematics:
    """Fly launches of shape (designs, 1) by steps (columns,) or (designs, columns) and measure them.

    The brief has one jump, or is the view of one: it is that jump's second jump in the air that counts.
    """
    names = measures_needed(brief) if names is None else names
    rule = brief.rule
    second = brief.jumps[0].second
    options: dict[str, Any] = {"workers": workers, "compiled": compiled}
    if second is not None:
        options["second"] = second
    levels = sorted({gap.far_level for gap in brief.gaps} - {0.0})
    flown = fly(rule, launches, 0.0, count_near_apex="time_near_apex" in names, **options)
    flight = {name: np.asfortranarray(of_flight(name, rule, launches, flown)) for name in names}
    airtimes = {0.0: flight["airtime"]}
    for level in levels:
        down = fly(rule, launches, level, **options)
        airtimes[level] = np.asfortranarray(of_flight("airtime", rule, launches, down))
    heights = sorted({block.height for block in brief.blocks})
    stays = {one: np.asfortranarray(stay(rule, launches, one, **options)) for one in heights}
    lands = flown.status == Status.LANDS
    for level in levels:
        # A far side below that is not reached in the longest flight: nobody can say how wide a gap that is.
        lands = lands & ~np.isnan(airtimes[level]) if level < 0.0 else lands
    lands = np.asfortranarray(lands)
    return Kinematics(np.asarray(launches.step, dtype=np.float64), lands, flight, airtimes, stays)


def _over(columns: Sequence[int], values: Floats) -> tuple[Floats, Floats]:
    """Return smallest and largest over some columns; NaN spreads."""
    low = high = values[:, columns[0]]
    for column in columns[1:]:
        low = np.minimum(low, values[:, column])
        high = np.maximum(high, values[:, column])
    return low, high


def _gap_extremes(
    kin: Kinematics, level: float, nominal: int, columns: Sequence[int], constants: Scalars
) -> dict[str, Extremes]:
    """Return max_gap and sure_gap at a level; both are 0 where the level is out of reach."""
    run, edge = constants["run_speed"], constants["edge_allowance"]
    designs, count = kin.lands.shape
    steps = np.broadcast_to(kin.steps, (designs, count))
    reaches, sures = [], []
    for column in columns:
        airtime = kin.airtimes[level][:, column]
        reach = max_gap(airtime, run, edge)
        sure = sure_gap(reach, run, steps[:, column])
        away = np.isnan(airtime) & (level > 0.0)
        reaches.append(np.where(away, 0.0, reach))
        sures.append(np.where(away, 0.0, sure))
    at = list(columns).index(nominal)
    found = {}
    for name, values in (("max_gap", reaches), ("sure_gap", sures)):
        low, high = values[0], values[0]
        for more in values[1:]:
            low, high = np.minimum(low, more), np.maximum(high, more)
        found[at_level(name, level)] = Extremes(values[at], low, high)
    return found


def extremes(
    brief: Brief, kin: Kinematics, nominal: int, supported: Sequence[int], constants: Scalars
) -> tuple[JumpTable, ...]:
    """Return nominal, smallest and largest of each measure, one table a jump of the brief.

    nominal and supported are columns of the kinematics; constants holds run_speed, step_up, edge_allowance,
    gravity, gravity_factor, grain and fall_factor, each a float or an array (designs,).
    """
    columns = list(dict.fromkeys([nominal, *supported]))
    lands = np.logical_and.reduce([kin.lands[:, column] for column in columns])
    measures: dict[str, Extremes] = {}
    for name, values in kin.flight.items():
        measures[name] = Extremes(values[:, nominal], *_over(columns, values))
    apex, rise = measures["apex"], constants["step_up"]
    measures["step_top"] = Extremes(apex.nominal + rise, apex.low + rise, apex.high + rise)
    for level in kin.airtimes:
        measures |= _gap_extremes(kin, level, nominal, columns, constants)
    for height, times in kin.above.items():
        reach = clearance(times, np.reshape(constants["run_speed"], (-1, 1)))
        measures[at_level("clearance", height)] = Extremes(reach[:, nominal], *_over(columns, reach))
    if any(target.measure == "flip_margin" for jump in brief.jumps for target in jump.targets):
        measures["flip_margin"] = _flip_margins(brief, kin, columns, constants)
    return tuple(JumpTable(jump.name, lands, measures) for jump in brief.jumps)


def _flip_margins(brief: Brief, kin: Kinematics, columns: Sequence[int], constants: Scalars) -> Extremes:
    """Return the flip margin, one number a design; where rounding never flips, the whole of gravity.

    Farther than that gravity cannot move, so a target on the margin has a finite deviation there too.
    """
    designs, count = kin.lands.shape
    steps = np.broadcast_to(kin.steps, (designs, count))[:, columns]
    names = ("gravity", "grain", "fall_factor", "gravity_factor")
    g, q, falling, own = (np.asarray(constants[name]) for name in names)
    # A jump's own factor divides its margin: it is the game's gravity that a person would move.
    margin = np.broadcast_to(flip_margin(brief.rule, g * own, q, falling, steps) / own, (designs,))
    margin = np.where(np.isnan(margin), g, margin)
    return Extremes(margin, margin, margin)


def design_tables(
    brief: Brief,
    designs: Designs,
    *,
    workers: int = 1,
    compiled: bool | None = None,
    fly: Fly = fly_many,
) -> tuple[JumpTable, ...]:
    """Measure scattered designs at their own nominal step and at every supported rate."""
    nominal = designs.step if brief.aim_at is None else np.full(len(designs.gravity), brief.aim_at.step)
    supported = np.array([rate.step for rate in brief.rates.supported])
    steps = np.column_stack([nominal, np.broadcast_to(supported, (len(nominal), len(supported)))])
    kin = kinematics(brief, designs.launches(steps), workers=workers, compiled=compiled, fly=fly)
    return extremes(brief, kin, 0, range(1, len(supported) + 1), scalars(brief, designs))


def scalars(brief: Brief, designs: Designs) -> Scalars:
    """Return what `extremes` wants to know of designs beside their flight."""
    step_up, edge_allowance = fixed_lengths(brief)
    return {**_of_designs(designs), "step_up": step_up, "edge_allowance": edge_allowance}


def as_flown(constants: Constants) -> Constants:
    """Return the constants with the gravity that acts on the jump as their own, so without a factor on it."""
    return replace(constants, gravity=constants.pull, gravity_factor=1.0)


def own_scalars(constants: Constants, designs: Designs) -> Scalars:
    """Return the same for designs that all have the lengths of one set of constants, not the search's."""
    return {**_of_designs(designs), "step_up": constants.step_up, "edge_allowance": constants.edge_allowance}


def _of_designs(designs: Designs) -> Scalars:
    names = ("run_speed", "gravity", "grain", "fall_factor", "gravity_factor")
    return {name: getattr(designs, name) for name in names}


def weights(jumps: Sequence[JumpBrief]) -> float:
    """Return the sum of all targets' weights, each times its jump's."""
    return sum(jump.weight * target.weight for jump in jumps for target in jump.targets)
