"""The update rule as an immutable value, and the constants that it advances."""

from __future__ import annotations

from dataclasses import dataclass, field, fields
from enum import StrEnum

CONTACT_TOLERANCE = 1e-6
"""How close to a level counts as touching it, in length units."""


class Integrator(StrEnum):
    """In which order position and velocity advance."""

    EXPLICIT = "explicit"
    SEMI_IMPLICIT = "semi-implicit"
    AVERAGE = "average"


class Mode(StrEnum):
    """To which multiple of the grain a number goes."""

    NEAREST_EVEN = "nearest-even"
    NEAREST_AWAY = "nearest-away"
    NEAREST_UP = "nearest-up"
    TOWARD_ZERO = "toward-zero"
    DOWN = "down"
    UP = "up"

    @property
    def is_nearest(self) -> bool:
        """Whether the mode goes to the nearest multiple (and differs only in ties)."""
        return self in (Mode.NEAREST_EVEN, Mode.NEAREST_AWAY, Mode.NEAREST_UP)


class Place(StrEnum):
    """Whether the position moves by the rounded velocity (before-move) or the unrounded one (end)."""

    END = "end"
    BEFORE_MOVE = "before-move"


class LandingTest(StrEnum):
    """Whether a landing counts at the end of its step or where the segment crosses the level."""

    SWEPT = "swept"
    END_OF_STEP = "end-of-step"


class FrameTime(StrEnum):
    """How a rate in Hz becomes a step."""

    EXACT = "exact"
    WHOLE_MS_DOWN = "whole-ms-down"
    WHOLE_MS_NEAREST = "whole-ms-nearest"


@dataclass(frozen=True, slots=True)
class Rounding:
    """How velocity is rounded every step."""

    mode: Mode = Mode.NEAREST_EVEN
    at: Place = Place.END
    carry: bool = False
    """Whether what rounding took away is added again before the next rounding."""

    def __post_init__(self) -> None:
        object.__setattr__(self, "mode", Mode(self.mode))
        object.__setattr__(self, "at", Place(self.at))


@dataclass(frozen=True, slots=True)
class PositionRounding:
    """How position is rounded every step; grain 0 means that it is not."""

    grain: float = 0.0
    mode: Mode = Mode.NEAREST_EVEN

    def __post_init__(self) -> None:
        object.__setattr__(self, "mode", Mode(self.mode))


@dataclass(frozen=True, slots=True)
class Rule:
    """How the build advances one step. An option with an unknown name fails here, with ValueError."""

    integrator: Integrator
    rounding: Rounding = field(default_factory=Rounding)
    frame_time: FrameTime = FrameTime.EXACT
    landing_test: LandingTest = LandingTest.SWEPT
    launch_gravity: bool = True
    """Whether gravity already acts in the step that launches."""
    contact_tolerance: float = CONTACT_TOLERANCE
    position: PositionRounding = field(default_factory=PositionRounding)

    def __post_init__(self) -> None:
        object.__setattr__(self, "integrator", Integrator(self.integrator))
        object.__setattr__(self, "frame_time", FrameTime(self.frame_time))
        object.__setattr__(self, "landing_test", LandingTest(self.landing_test))


@dataclass(frozen=True, slots=True)
class Constants:
    """One set of numbers: lengths in the brief's unit, time in seconds."""

    gravity: float
    """Length/s², downward, > 0."""
    launch_speed: float
    """Length/s, upward, > 0."""
    step: float | None = None
    """Seconds; None where the game steps once a drawn frame."""
    grain: float = 0.0
    """The multiple that velocity is snapped to, length/s; 0 means no rounding."""
    run_speed: float = 0.0
    """Length/s."""
    fall_factor: float = 1.0
    """Gravity is multiplied by this while the velocity is not upward."""
    terminal_speed: float | None = None
    """Largest speed of falling before rounding, length/s; None means no limit."""
    step_up: float = 0.0
    """How far above the apex a ledge may be and still be stepped onto, length."""
    edge_allowance: float = 0.0
    """What the two edges of a gap add to its reach, length."""
    gravity_factor: float = 1.0
    """What this jump makes of the game's one gravity; only where a brief has several jumps."""

    @property
    def pull(self) -> float:
        """The gravity that acts on this jump while it rises: gravity·gravity_factor, length/s²."""
        return self.gravity * self.gravity_factor


class How(StrEnum):
    """What a second jump does to the velocity."""

    SET = "set"
    ADD = "add"


@dataclass(frozen=True, slots=True)
class Second:
    """A second jump in the air, once a flight; it acts at the start of a step, before that step's gravity."""

    launch_speed: float
    """Length/s, upward, > 0."""
    when: float | None = None
    """Seconds after the launch, at the start of the first step n with (n − 1)·h ≥ when; None: at the apex."""
    how: How = How.SET

    def __post_init__(self) -> None:
        object.__setattr__(self, "how", How(self.how))


SEARCHABLE = ("gravity", "launch_speed", "step", "grain", "run_speed", "fall_factor", "terminal_speed")
"""Constants that a search may vary, in the order that decides between equals."""

SHARED = ("gravity", "step", "grain")
"""Constants of which a game has one, whatever jumps it has."""

OWN = ("launch_speed", "run_speed", "fall_factor", "terminal_speed", "gravity_factor")
"""Constants that a jump may have for itself and a search may vary."""

CONSTANT_NAMES = tuple(f.name for f in fields(Constants))
