"""One jump, stepped: scalars and tuples in, a tuple out, a status instead of an exception.

One source for two uses. Called as they stand, these functions are plain Python for small work; `compiled()`
hands the same functions to Numba for large work. Both give the same bits, because every operation is one
binary64 operation, in the order that the update rule writes (no fast-math, no fused multiply-add).

One step of h seconds, from (y, v, e):

    a = gravity·h while v > 0, gravity·fall_factor·h while v ≤ 0; 0 in a first step without gravity
    u = max(v − a, −terminal_speed);   t = u + e;   w = snap(t);   e' = t − w where the remainder is carried
    m = w where rounding acts before the move, u where it acts at the end of the step
    y' = snap_position(y + v·h | y + m·h | y + 0.5·(v + m)·h);   v' = w

A second jump in the air acts once, at the start of a step, before the gravity of that step is chosen: v
becomes its launch speed, or v plus that, unrounded. It is due at the first step n > 1 that starts with v ≤ 0,
or at the first step n with (n − 1)·h ≥ when; a landing before that cancels it.

Codes is the tuple (integrator, mode, before_move, carry, launch_gravity, swept, contact_tolerance,
position_grain, position_mode, second, second_speed, second_when), with second one of NO_SECOND, SET, ADD and
second_when AT_APEX or seconds; numbers is (gravity, launch_speed, grain, fall_factor, terminal_speed).
"""

from __future__ import annotations

import hashlib
import math
import os
import signal
import threading
from contextlib import contextmanager
from functools import cache
from pathlib import Path
from typing import TYPE_CHECKING, Any, TypeAlias

from designer.motion import rounding
from designer.motion.jumps import LONGEST_FLIGHT, Status
from designer.motion.rounding import snap, whole

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator, Sequence

    import numpy as np
    from numpy.typing import NDArray

EXPLICIT = 0
SEMI_IMPLICIT = 1
AVERAGE = 2

NO_SECOND = 0
SET = 1
ADD = 2
AT_APEX = -1.0

_ONE_AT_A_TIME = threading.Lock()
_COMPILED: dict[Callable[..., None], Callable[..., None]] = {}

_LANDS = int(Status.LANDS)
_NEVER_SLOWS = int(Status.NEVER_SLOWS)
_HOVERS = int(Status.HOVERS)
_TOO_LONG = int(Status.TOO_LONG)
_OUT_OF_REACH = int(Status.OUT_OF_REACH)
_FLYING = -1
_POSITION_UP = rounding.UP

Codes: TypeAlias = tuple[int, int, bool, bool, bool, bool, float, float, int, int, float, float]
Numbers: TypeAlias = tuple[float, float, float, float, float]
State: TypeAlias = tuple[float, float, float]
Outcome: TypeAlias = tuple[int, int, float, int, float, float, int]
Columns: TypeAlias = "tuple[Sequence[float] | NDArray[np.float64], ...]"


def last_step(step: float) -> int:
    """Return N: a jump that has not landed at any n ≤ N never lands."""
    return math.floor(LONGEST_FLIGHT / step + 0.5)


def losses(codes: Codes, numbers: Numbers, step: float) -> tuple[float, float, float]:
    """Return a, what gravity takes from v in a step: in the first step, while v > 0, and while v ≤ 0."""
    rising = numbers[0] * step
    falling = numbers[0] * numbers[3] * step
    if not codes[4]:
        return 0.0, rising, falling
    return rising if numbers[1] > 0.0 else falling, rising, falling


def advance(codes: Codes, numbers: Numbers, step: float, state: State, loss: float) -> State:
    """Return (y, v, remainder) after one step in which gravity takes `loss` from v."""
    y, v, remainder = state
    grain = numbers[2]
    unrounded = max(v - loss, -numbers[4])
    wanted = unrounded + remainder  # without carry the remainder stays 0
    rounded = snap(wanted, grain, codes[1])
    moved = rounded if codes[2] else unrounded
    if codes[0] == AVERAGE:
        y = y + 0.5 * (v + moved) * step
    elif codes[0] == SEMI_IMPLICIT:
        y = y + moved * step
    else:
        y = y + v * step
    if codes[7] != 0.0:
        y = snap(y, codes[7], codes[8])
    return y, rounded, (wanted - rounded if codes[3] else 0.0)


def is_due(codes: Codes, n: int, step: float, v: float) -> bool:
    """Return whether a second jump still to come acts at the start of step n, where the velocity is v."""
    if codes[11] == AT_APEX:
        return v <= 0.0 and n > 1
    return (n - 1) * step >= codes[11]


def again(codes: Codes, n: int, v: float, rising: float, falling: float) -> tuple[float, float]:
    """Return what a second jump at the start of step n makes of the velocity v, and a for that step."""
    v = codes[10] if codes[9] == SET else v + codes[10]
    if n == 1 and not codes[4]:
        return v, 0.0
    return v, rising if v > 0.0 else falling


def fly(codes: Codes, numbers: Numbers, step: float, level: float, count_near: bool) -> Outcome:
    """Return (status, steps, apex, apex_step, fraction, landing_velocity, near_apex_steps) of one jump.

    near_apex_steps is −1 unless `count_near`: counting needs the apex first, so it flies twice. A level
    above 0 that is not reached by step N is out of reach, unless the jump never slows.
    """
    outcome = _flight(codes, numbers, step, level, math.inf)
    if not count_near:
        return outcome[0], outcome[1], outcome[2], outcome[3], outcome[4], outcome[5], -1
    if outcome[0] != _LANDS:
        return outcome
    return _flight(codes, numbers, step, level, 0.9 * outcome[2])


def _flight(codes: Codes, numbers: Numbers, step: float, level: float, near: float) -> Outcome:
    """Fly once, counting the n from 0 to the landing step at which y ≥ `near`."""
    y, v, before = 0.0, numbers[1], math.nan
    remainder = 0.0
    apex, apex_step, near_steps = 0.0, 0, 1 if near <= 0.0 else 0
    low, high = level - codes[6], level + codes[6]
    reached = level <= 0.0 or low <= 0.0
    loss, rising, falling = losses(codes, numbers, step)
    pending, acted, unaided = codes[9] != NO_SECOND, 0, math.nan
    for n in range(1, last_step(step) + 1):
        if pending and is_due(codes, n, step, v):
            pending, acted, unaided = False, n, v
            v, loss = again(codes, n, v, rising, falling)
        state = (y, v, remainder)
        following = advance(codes, numbers, step, state, loss)
        y_next, v_next, remainder = following
        if y_next > apex:
            apex, apex_step = y_next, n
        if y_next >= near:
            near_steps += 1
        reached = reached or y_next >= low
        if y_next <= high and y_next < y and reached:
            fraction = min(max((y - level) / (y - y_next), 0.0), 1.0) if codes[5] else 1.0
            return _LANDS, n, apex, apex_step, fraction, v_next, near_steps
        if v_next == v or (v_next <= 0.0 and not reached):
            # While v > 0 a second jump at the apex stays away; any other that is to come could change all.
            settled = not pending or (v_next > 0.0 and codes[11] == AT_APEX)
            if settled and acted != n:
                verdict = _foreseen(codes, numbers[2], n, state, following, reached)
                if verdict != _FLYING:
                    return verdict, 0, math.nan, 0, math.nan, math.nan, 0
        y, v, before = y_next, v_next, v
        loss = rising if v > 0.0 else falling
    if acted == last_step(step):
        before = unaided
    return _at_last(v, before, reached), 0, math.nan, 0, math.nan, math.nan, 0


def _foreseen(codes: Codes, grain: float, n: int, state: State, following: State, reached: bool) -> int:
    """Return how the jump ends where one step proves it, else _FLYING; the same as flying on to N."""
    carry = codes[3]
    unsnapped = codes[7] == 0.0
    v = following[1]
    # Falling below the level. With carry the remainder may lift v again by a grain or two; and rounding the
    # position up can climb by itself where the grain has no exact binary value.
    falling = v < -4.0 * grain if carry else v <= 0.0
    if falling and not reached and (unsnapped or codes[8] != _POSITION_UP):
        return _OUT_OF_REACH
    # From here on: the same v under the same acceleration. The first step may have been without gravity.
    if v != state[1] or (n == 1 and not codes[4]):
        return _FLYING
    if following[0] == state[0] and following[2] == state[2]:
        return _at_last(v, v, reached)  # nothing changed in this step, so nothing ever will
    if v > 0.0 and not carry and unsnapped:
        return _NEVER_SLOWS
    return _FLYING


def _at_last(v: float, before: float, reached: bool) -> int:
    """Return the status of a jump that has not landed by step N, from its last two velocities."""
    if v == before and v > 0.0:
        return _NEVER_SLOWS
    if not reached:
        return _OUT_OF_REACH
    if v == before and v == 0.0:
        return _HOVERS
    return _TOO_LONG


def fly_each(
    codes: Codes, columns: Columns, level: float, count_near: bool, results: tuple[NDArray[Any], ...]
) -> None:
    """Fly one jump for each row of `columns` into the rows of `results`.

    `columns`: gravity, launch_speed, step, grain, fall_factor, terminal_speed, each (jumps,); lists of floats
    where this runs as plain Python. `results`: arrays (jumps,) in the order of `Jumps`.
    """
    gravity, launch_speed, step, grain, fall_factor, terminal_speed = columns
    status, steps, apex, apex_step, fraction, landing_velocity, near_apex_steps = results
    for i in range(len(gravity)):
        numbers = (gravity[i], launch_speed[i], grain[i], fall_factor[i], terminal_speed[i])
        outcome = fly(codes, numbers, step[i], level, count_near)
        status[i] = outcome[0]
        steps[i] = outcome[1]
        apex[i] = outcome[2]
        apex_step[i] = outcome[3]
        fraction[i] = outcome[4]
        landing_velocity[i] = outcome[5]
        near_apex_steps[i] = outcome[6]


def time_above(codes: Codes, numbers: Numbers, step: float, height: float) -> float:
    """Return the longest time that a jump is above `height` without a break; NaN where it never lands.

    It is followed to its landing at level 0, or at `height` where that is lower. A stay begins where a step
    that moves up comes to `height`, or with the launch, and ends where a landing at `height` would: at the
    ends of these steps, or, where landings are swept, where the segments cross `height`.
    """
    y, v, remainder = 0.0, numbers[1], 0.0
    low, high, ground = height - codes[6], height + codes[6], min(height, 0.0) + codes[6]
    over, since, longest = height <= 0.0 or low <= 0.0, 0.0, 0.0
    loss, rising, falling = losses(codes, numbers, step)
    pending, acted = codes[9] != NO_SECOND, 0
    for n in range(1, last_step(step) + 1):
        if pending and is_due(codes, n, step, v):
            pending, acted = False, n
            v, loss = again(codes, n, v, rising, falling)
        state = (y, v, remainder)
        following = advance(codes, numbers, step, state, loss)
        y_next, v_next, remainder = following
        if y_next > y and y_next >= low and not over:
            over, since = True, _crossing(codes[5], n, step, (height - y) / (y_next - y))
        elif y_next <= high and y_next < y:
            if over:
                longest = max(longest, _crossing(codes[5], n, step, (y - height) / (y - y_next)) - since)
                over = False
            if y_next <= ground:
                return longest
        if v_next == v and acted != n and (not pending or (v_next > 0.0 and codes[11] == AT_APEX)):
            verdict = _foreseen(codes, numbers[2], n, state, following, True)
            if verdict != _FLYING:
                return math.nan
        y, v = y_next, v_next
        loss = rising if v > 0.0 else falling
    return math.nan


def _crossing(swept: bool, n: int, step: float, fraction: float) -> float:
    """Return when a height is crossed in step n: at its end, or `fraction`, held to 0 … 1, into it."""
    return (n - 1) * step + step * min(max(fraction, 0.0), 1.0) if swept else n * step


def time_above_each(codes: Codes, columns: Columns, height: float, results: NDArray[np.float64]) -> None:
    """Put `time_above` of each row of `columns` (see `fly_each`) into `results`, (jumps,)."""
    gravity, launch_speed, step, grain, fall_factor, terminal_speed = columns
    for i in range(len(gravity)):
        numbers = (gravity[i], launch_speed[i], grain[i], fall_factor[i], terminal_speed[i])
        results[i] = time_above(codes, numbers, step[i], height)


def compiled(function: Callable[..., None] = fly_each) -> Callable[..., None]:
    """Return `fly_each` or `time_above_each` as Numba compiles it; the first call imports Numba.

    Threads may call it at once.
    """
    with _ONE_AT_A_TIME, _uninterrupted():
        if function not in _COMPILED:
            _COMPILED[function] = _compile(function)
        return _COMPILED[function]


def is_compiled(function: Callable[..., None] = fly_each) -> bool:
    """Whether loading the compiled code is paid for already, so that even small work may as well use it."""
    return function in _COMPILED


@cache
def _register() -> None:
    """Tell Numba, once, what the functions that it compiles call."""
    from numba.extending import register_jitable

    helpers = (whole, snap, last_step, losses, is_due, again, _foreseen, _at_last, _flight, fly)
    for function in (*helpers, _crossing, time_above):
        register_jitable(function)
    register_jitable(inline="always")(advance)  # a quarter faster, measured


def _compile(function: Callable[..., None]) -> Callable[..., None]:
    """Compile, and keep the code on disk between runs.

    Numba looks only at the file of the function itself to see whether what it kept is stale, so the folder's
    name is a hash of every source that is compiled.
    """
    import numba
    import numpy as np

    _register()
    config: Any = numba.config
    before = config.CACHE_DIR
    folder = _cache_folder(numba.__version__, before)
    try:
        if folder is not None:
            config.CACHE_DIR = str(folder)
        made: Callable[..., None] = numba.njit(cache=folder is not None, nogil=True, error_model="numpy")(
            function
        )
        numbers = tuple(np.ones(1) for _ in range(6))
        kinds = (np.int8, np.int32, np.float64, np.int32, np.float64, np.float64, np.int32)
        results = tuple(np.empty(1, dtype=kind) for kind in kinds)
        codes = (0, 0, False, False, True, True, 0.0, 0.0, 0, NO_SECOND, 0.0, 0.0)
        # The first call compiles.
        if function is fly_each:
            made(codes, numbers, 0.0, False, results)
        else:
            made(codes, numbers, 0.0, np.empty(1))
    finally:
        config.CACHE_DIR = before
    return made


@contextmanager
def _uninterrupted() -> Iterator[None]:
    """Put Ctrl-C off until the block is done: in the midst of its work the compiler may lose it, or die."""
    if threading.current_thread() is not threading.main_thread():
        yield
        return
    asked: list[int] = []
    before = signal.signal(signal.SIGINT, lambda number, frame: asked.append(number))
    try:
        yield
    finally:
        signal.signal(signal.SIGINT, before)
    if asked:
        raise KeyboardInterrupt


def _cache_folder(version: str, chosen: str) -> Path | None:
    """Return a folder of the user's for compiled code, or None where none can be written."""
    try:
        base = Path(chosen or os.environ.get("XDG_CACHE_HOME") or Path.home() / ".cache")
        sources = b"".join(Path(file).read_bytes() for file in (__file__, rounding.__file__))
        mark = hashlib.sha256(sources + version.encode()).hexdigest()[:16]
        folder = base / "leapwright" / mark
        folder.mkdir(parents=True, exist_ok=True)
    except (OSError, RuntimeError):  # RuntimeError: no home folder
        return None
    return folder if os.access(folder, os.W_OK) else None
