"""What goes into a batch of jumps and what comes out: arrays that broadcast together."""

from __future__ import annotations

from dataclasses import dataclass
from enum import IntEnum
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import NDArray

LONGEST_FLIGHT = 30.0
"""Seconds after which a jump that has not landed counts as never landing."""


class Status(IntEnum):
    """How a jump ended; the kernels return these numbers."""

    LANDS = 0
    NEVER_SLOWS = 1
    HOVERS = 2
    TOO_LONG = 3
    OUT_OF_REACH = 4
    """Only where a level above the take-off was asked for and the jump never gets there."""

    @property
    def text(self) -> str:
        """The word that tables and JSON use: "never-slows"."""
        return self.name.lower().replace("_", "-")


@dataclass(frozen=True, slots=True)
class Launches:
    """Constants of many jumps: float64 arrays (or floats) that broadcast to one shape."""

    gravity: NDArray[np.float64]
    """Length/s²."""
    launch_speed: NDArray[np.float64]
    """Length/s."""
    step: NDArray[np.float64]
    """Seconds."""
    grain: NDArray[np.float64]
    """Length/s; 0 means no rounding."""
    fall_factor: NDArray[np.float64]
    terminal_speed: NDArray[np.float64]
    """Length/s; infinity means no limit."""

    def broadcast(self) -> tuple[NDArray[np.float64], ...]:
        """Return the six as arrays of one shape (views where possible), in the order of the fields."""
        six = (self.gravity, self.launch_speed, self.step, self.grain, self.fall_factor, self.terminal_speed)
        return np.broadcast_arrays(*(np.asarray(a, dtype=np.float64) for a in six))


@dataclass(frozen=True, slots=True)
class Jumps:
    """What became of each launch; all arrays have the launches' broadcast shape."""

    status: NDArray[np.int8]
    """A Status; where it is not LANDS the other arrays hold NaN or 0."""
    steps: NDArray[np.int32]
    """The landing step n."""
    apex: NDArray[np.float64]
    """The largest y_n up to the landing step, length."""
    apex_step: NDArray[np.int32]
    """The first n at which y_n is the apex."""
    fraction: NDArray[np.float64]
    """How far into the landing step the level is crossed, 0 to 1; 1 where the rule lands at the end."""
    landing_velocity: NDArray[np.float64]
    """v after the landing step, length/s, upward positive."""
    near_apex_steps: NDArray[np.int32]
    """How many n in 0 … landing step have y_n ≥ 0.9 apex; −1 where it was not counted (closed form)."""
