"""Jumps stepped in the build's own arithmetic: the typed front of the kernel."""

from __future__ import annotations

from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

from designer.errors import Fault, InputError
from designer.motion import kernel
from designer.motion.jumps import LONGEST_FLIGHT, Jumps, Launches, Status
from designer.motion.rounding import MODE_CODES
from designer.motion.rule import Constants, How, Integrator, LandingTest, Place, Rule, Second

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import NDArray

PLAIN_STEPS = 2_000_000
"""Work above this many steps is worth loading Numba for (about two seconds of plain Python)."""

CHUNK = 16_384
"""Jumps that one task flies; a chunk's result depends on nothing but its own launches."""

SHORTEST_STEP = 1e-6
LARGEST_NUMBER = 1e15
SMALLEST_GRAIN = 1e-12

INTEGRATOR_CODES = {
    Integrator.EXPLICIT: kernel.EXPLICIT,
    Integrator.SEMI_IMPLICIT: kernel.SEMI_IMPLICIT,
    Integrator.AVERAGE: kernel.AVERAGE,
}


@dataclass(frozen=True, slots=True)
class Trace:
    """One jump, step by step: float64 arrays over n = 0 … the landing step."""

    t: NDArray[np.float64]
    """n·h, seconds."""
    y: NDArray[np.float64]
    """Height, length."""
    v: NDArray[np.float64]
    """Velocity, length/s, upward positive."""
    unrounded: NDArray[np.float64]
    """u, the velocity before it was rounded, length/s; entry 0 is the launch speed."""
    status: Status
    """How the jump ends; where it does not land at the level, the arrays stop after a number of steps."""
    second_step: int | None = None
    """The step n at whose start the second jump acts, on v[n − 1]; None where none acts."""

    @property
    def lands(self) -> bool:
        """Whether the jump lands at the level that was asked for."""
        return self.status is Status.LANDS


def simulate(
    rule: Rule,
    launches: Launches,
    level: float = 0.0,
    *,
    second: Second | None = None,
    workers: int = 1,
    compiled: bool | None = None,
    count_near_apex: bool = False,
) -> Jumps:
    """Step every launch until it lands at `level`, and return what became of it.

    The result has the launches' broadcast shape and does not depend on `workers` or `compiled`. Where
    `compiled` is None, large work is compiled by Numba and small work runs as plain Python, unless compiled
    code is there already. near_apex_steps is −1 unless `count_near_apex`. `second`: a second jump in the air,
    the same for every launch. Raises InputError where a number cannot be used.
    """
    columns = launches.broadcast()
    _validate(rule, launches, level, workers, second)
    shape = columns[0].shape
    size = columns[0].size
    if compiled is None:
        compiled = kernel.is_compiled() or _is_large(launches, level, size, second)
    results = _empty(size)
    codes = rule_codes(rule, second)
    fly_each = kernel.compiled() if compiled else kernel.fly_each
    plain = fly_each is kernel.fly_each  # so it is, too, where Numba is told not to compile

    def fly_chunk(rows: tuple[Any, ...], part: slice) -> None:
        fly_each(codes, rows, float(level), bool(count_near_apex), tuple(r[part] for r in results))

    _run(fly_chunk, columns, 1 if plain else workers, plain)
    return Jumps(*(result.reshape(shape) for result in results))


def trace(
    rule: Rule,
    constants: Constants,
    step: float,
    level: float = 0.0,
    *,
    second: Second | None = None,
    max_steps: int | None = None,
) -> Trace:
    """Return one jump step by step, to the landing at `level`, or `max_steps` steps where given.

    `step` in seconds; constants.step is not looked at. A jump that does not land there is followed for
    `max_steps` (1000 unless given), at most to the end of the longest flight. Raises InputError where a
    number cannot be used.
    """
    launches = launches_of(constants, step)
    _validate(rule, launches, level, 1, second)
    codes = rule_codes(rule, second)
    gravity, launch_speed, step, grain, fall_factor, terminal = (float(x) for x in launches.broadcast())
    numbers = (gravity, launch_speed, grain, fall_factor, terminal)
    outcome = kernel.fly(codes, numbers, step, float(level), False)
    status = Status(outcome[0])
    count = outcome[1] if status is Status.LANDS else min(1000, kernel.last_step(step))
    if max_steps is not None:
        longest = outcome[1] if status is Status.LANDS else kernel.last_step(step)
        count = min(max(int(max_steps), 0), longest)
    y, v, unrounded = np.zeros(count + 1), np.zeros(count + 1), np.zeros(count + 1)
    state = (0.0, launch_speed, 0.0)
    v[0] = unrounded[0] = launch_speed
    loss, rising, falling = kernel.losses(codes, numbers, step)
    acted = None
    for n in range(1, count + 1):
        if second is not None and acted is None and kernel.is_due(codes, n, step, state[1]):
            acted = n
            again, loss = kernel.again(codes, n, state[1], rising, falling)
            state = (state[0], again, state[2])
        unrounded[n] = max(state[1] - loss, -terminal)
        state = kernel.advance(codes, numbers, step, state, loss)
        y[n], v[n] = state[0], state[1]
        loss = rising if v[n] > 0.0 else falling
    return Trace(np.arange(count + 1, dtype=np.float64) * step, y, v, unrounded, status, acted)


def time_above(
    rule: Rule,
    launches: Launches,
    height: float,
    *,
    second: Second | None = None,
    workers: int = 1,
    compiled: bool | None = None,
) -> NDArray[np.float64]:
    """Step every launch and return for how long it stays above `height` (length), in seconds.

    Shape, `second`, `workers` and `compiled` are those of `simulate`. The longest stay counts: a second jump
    may come too late to keep the body above. A stay begins in the first step that moves up to `height` (to
    within the contact tolerance), or with the launch where the height is 0 or lower, and ends in the first
    step after that which would land at `height`. Where the landing test is swept, its ends are where the
    segments of these two steps cross `height`, held to their own step; otherwise they are the steps' ends, so
    that the time is the number of samples above, times h. It ends as airtime(height) does; 0 where the jump
    never gets so high, NaN where it never lands at level 0 (at `height`, where that is lower).
    """
    columns = launches.broadcast()
    _validate(rule, launches, height, workers, second)
    size = columns[0].size
    if compiled is None:
        compiled = kernel.is_compiled(kernel.time_above_each) or _is_large(launches, height, size, second)
    results = np.empty(size)
    codes = rule_codes(rule, second)
    each = kernel.compiled(kernel.time_above_each) if compiled else kernel.time_above_each
    plain = each is kernel.time_above_each

    def chunk(rows: tuple[Any, ...], part: slice) -> None:
        each(codes, rows, float(height), results[part])

    _run(chunk, columns, 1 if plain else workers, plain)
    return results.reshape(columns[0].shape)


def launches_of(constants: Constants, step: float) -> Launches:
    """Return one set of constants at one step, in seconds, as a launch (arrays without axes)."""
    terminal = np.inf if constants.terminal_speed is None else constants.terminal_speed
    six = (constants.pull, constants.launch_speed, step, constants.grain, constants.fall_factor, terminal)
    return Launches(*(np.asarray(number, dtype=np.float64) for number in six))


def rule_codes(rule: Rule, second: Second | None = None) -> kernel.Codes:
    """Return the rule, and a second jump, as the numbers that the kernel knows."""
    return (
        INTEGRATOR_CODES[rule.integrator],
        MODE_CODES[rule.rounding.mode],
        rule.rounding.at is Place.BEFORE_MOVE,
        bool(rule.rounding.carry),
        bool(rule.launch_gravity),
        rule.landing_test is LandingTest.SWEPT,
        float(rule.contact_tolerance),
        float(rule.position.grain),
        MODE_CODES[rule.position.mode],
        kernel.NO_SECOND if second is None else kernel.SET if second.how is How.SET else kernel.ADD,
        0.0 if second is None else float(second.launch_speed),
        kernel.AT_APEX if second is None or second.when is None else float(second.when),
    )


def _empty(size: int) -> tuple[NDArray[Any], ...]:
    """Return the arrays (size,) of a Jumps, in the order of its fields."""
    kinds = (np.int8, np.int32, np.float64, np.int32, np.float64, np.float64, np.int32)
    return tuple(np.empty(size, dtype=kind) for kind in kinds)


def _run(
    fly: Callable[[tuple[Any, ...], slice], None],
    columns: tuple[NDArray[np.float64], ...],
    workers: int,
    plain: bool,
) -> None:
    """Fly every chunk of the launches, given as rows and a part of the results; what stops one stops all."""
    shape, size = columns[0].shape, columns[0].size

    def task(start: int) -> None:
        stop = min(start + CHUNK, size)
        place = np.unravel_index(np.arange(start, stop), shape) if shape else ()
        rows = [np.atleast_1d(column[place]) for column in columns]
        # Plain Python needs Python's own floats: quicker, and they never warn.
        fly(tuple(row.tolist() for row in rows) if plain else tuple(rows), slice(start, stop))

    starts = range(0, size, CHUNK)
    if workers == 1 or len(starts) < 2:
        for start in starts:
            task(start)
        return
    pool = ThreadPoolExecutor(workers)
    try:
        for _ in pool.map(task, starts):
            pass
    finally:
        pool.shutdown(cancel_futures=True)


def _is_large(launches: Launches, level: float, size: int, second: Second | None) -> bool:
    """Guess from the unrounded jump whether stepping is more than plain Python should do."""
    if size > PLAIN_STEPS:
        return True
    gravity, launch_speed, step, _, fall_factor, _ = launches.broadcast()
    if second is not None:
        launch_speed = launch_speed + second.launch_speed
    with np.errstate(all="ignore"):
        rise = np.abs(launch_speed) / gravity
        drop = 0.5 * launch_speed * rise + max(-level, 0.0)
        flight = rise + np.sqrt(2.0 * np.maximum(drop, 0.0) / (gravity * fall_factor))
        return float(np.sum(np.fmin(flight, LONGEST_FLIGHT) / step)) > PLAIN_STEPS


def _validate(rule: Rule, launches: Launches, level: float, workers: int, second: Second | None) -> None:
    """Raise InputError, with every fault, where the kernel could not make sense of a number."""
    seconds = f"{SHORTEST_STEP:g} to {LARGEST_NUMBER:g} s"
    speed, when = (1.0, 0.0) if second is None else (second.launch_speed, second.when or 0.0)
    checks = (
        ("gravity", launches.gravity, lambda x: (x > 0.0) & (x <= LARGEST_NUMBER), "more than 0"),
        ("launch_speed", launches.launch_speed, lambda x: np.abs(x) <= LARGEST_NUMBER, "a finite number"),
        ("step", launches.step, lambda x: (x >= SHORTEST_STEP) & (x <= LARGEST_NUMBER), seconds),
        ("grain", launches.grain, _is_grain, f"0, or at least {SMALLEST_GRAIN:g}"),
        ("fall_factor", launches.fall_factor, lambda x: (x >= 0.0) & (x <= LARGEST_NUMBER), "0 or more"),
        ("terminal_speed", launches.terminal_speed, lambda x: x > 0.0, "more than 0; infinity means none"),
        ("position.grain", rule.position.grain, _is_grain, f"0, or at least {SMALLEST_GRAIN:g}"),
        (
            "contact_tolerance",
            rule.contact_tolerance,
            lambda x: (x >= 0.0) & (x <= LARGEST_NUMBER),
            "0 or more",
        ),
        ("level", level, lambda x: np.abs(x) <= LARGEST_NUMBER, "a finite number"),
        ("workers", workers, lambda x: x >= 1, "1 or more"),
        ("second.launch_speed", speed, lambda x: (x > 0.0) & (x <= LARGEST_NUMBER), "more than 0"),
        ("second.when", when, lambda x: (x >= 0.0) & (x <= LARGEST_NUMBER), "0 s or later"),
    )
    faults = []
    for name, given, is_usable, allowed in checks:
        numbers = np.asarray(given, dtype=np.float64)
        bad = numbers[~is_usable(numbers)]
        if bad.size:
            fix = f"give {name} a number that is {allowed}"
            faults.append(Fault("jump to simulate", name, f"{bad[0]:g}", allowed, fix))
    if faults:
        raise InputError(*faults)


def _is_grain(x: NDArray[np.float64]) -> NDArray[np.bool_]:
    """Return where a grain is 0 or neither too fine nor too coarse to divide by."""
    return np.asarray((x == 0.0) | ((x >= SMALLEST_GRAIN) & (x <= LARGEST_NUMBER)))
