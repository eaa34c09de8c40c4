"""The space that a search may use: seven axes, with points where the brief gives increments."""

from __future__ import annotations

import hashlib
import math
from collections.abc import Mapping
from dataclasses import astuple, dataclass
from typing import TYPE_CHECKING

import numpy as np

from designer.brief.model import Brief, Choice, Loop
from designer.errors import Fault, InputError
from designer.motion.rule import SEARCHABLE, Rule
from designer.objective.table import Designs
from designer.search.free import derive_free

if TYPE_CHECKING:
    from numpy.typing import NDArray

NONE_SAID = {"grain": 0.0, "run_speed": 0.0, "fall_factor": 1.0, "terminal_speed": math.inf}
"""What a constant is where neither [search] nor [today] names it."""


@dataclass(frozen=True, slots=True)
class Axis:
    """What one constant may be: either ascending points, or everything between two bounds."""

    name: str
    points: tuple[float, ...] | None
    low: float
    high: float

    @property
    def is_fixed(self) -> bool:
        """Whether there is nothing to choose."""
        return self.points is not None and len(self.points) == 1

    def clip(self, value: float) -> float:
        """Return the nearest value that the axis allows (the lower of two equally near points)."""
        if self.points is None:
            return min(max(value, self.low), self.high)
        if math.isnan(value):
            return self.points[0]
        if math.isinf(value):
            return self.points[-1]
        return min(self.points, key=lambda point: (0.0 if point == value else abs(point - value), point))


@dataclass(frozen=True, slots=True)
class Space:
    """The designs among which a search chooses, an axis for each of SEARCHABLE, in that order."""

    axes: tuple[Axis, ...]
    notes: tuple[str, ...] = ()
    """What each "free" constant became."""

    def axis(self, name: str) -> Axis:
        """Return the axis of a constant."""
        return self.axes[SEARCHABLE.index(name)]

    @property
    def is_grid(self) -> bool:
        """Whether every constant has points."""
        return all(axis.points is not None for axis in self.axes)

    @property
    def shape(self) -> tuple[int, ...]:
        """How many points each axis has; 1 for one without points."""
        return tuple(len(axis.points) if axis.points is not None else 1 for axis in self.axes)

    @property
    def size(self) -> int:
        """How many designs the grid has; meaningless where `is_grid` is false."""
        return math.prod(self.shape)

    def designs(self, indices: NDArray[np.int64]) -> Designs:
        """Return the grid's designs with these numbers.

        They count in the order of SEARCHABLE, the last constant fastest, so the lower number is the one
        that wins between equals (DEVELOPERS.md, score).
        """
        where = np.unravel_index(np.asarray(indices), self.shape)
        return Designs(*(values(axis)[at] for axis, at in zip(self.axes, where, strict=True)))

    def grid_hash(self, rule: Rule) -> str:
        """Return twelve hexadecimal digits that name this grid under this rule."""
        lines = [f"{axis.name}:{','.join(float(p).hex() for p in axis.points or ())}" for axis in self.axes]
        lines.append(repr(astuple(rule)))
        return hashlib.sha256("\n".join(lines).encode()).hexdigest()[:12]


def values(axis: Axis) -> NDArray[np.float64]:
    """Return the points of an axis as an array."""
    return np.array(axis.points, dtype=np.float64)


def _default(brief: Brief, name: str) -> float | None:
    """Return what a constant that the search leaves alone is: today's, the brief's, else the default."""
    for source in (brief.today, brief.base):
        if source is not None:
            value = getattr(source, name)
            return math.inf if value is None and name == "terminal_speed" else value
    return NONE_SAID.get(name)


def axis_of(name: str, choice: Choice) -> Axis:
    """Return the axis that a choice with points or bounds makes."""
    if choice.values is not None:
        return Axis(name, choice.values, choice.values[0], choice.values[-1])
    if choice.low is None or choice.high is None:
        raise ValueError(f"{name}: a range needs both ends")
    if choice.low == choice.high:
        return Axis(name, (choice.low,), choice.low, choice.low)
    return Axis(name, None, choice.low, choice.high)


def _choices(brief: Brief) -> Mapping[str, Choice]:
    """Return a choice for every constant; a loop that steps each frame has a step of NaN."""
    if brief.search is None:
        raise InputError(
            Fault(
                place=brief.name,
                field="search",
                value="",
                allowed="a table [search] that says what may change",
                fix='add [search] with, for example, gravity = "free" and launch_speed = "free"',
            )
        )
    found: dict[str, Choice] = {}
    for name in SEARCHABLE:
        if name == "step" and brief.loop is Loop.EACH_FRAME:
            found[name] = Choice((math.nan,))
        elif name in brief.search:
            found[name] = brief.search[name]
        else:
            value = _default(brief, name)
            if value is None:
                raise InputError(
                    Fault(brief.name, f"search.{name}", "", "a value, a range, a list or \"free\"",
                          f"name {name} in [search] or [today]")
                )  # fmt: skip
            found[name] = Choice((value,))
    return found


def build_space(brief: Brief) -> Space:
    """Return the space that [search] describes, "free" constants included.

    Raises InputError where there is no [search], or where the targets do not bound a free constant.
    """
    choices, notes = derive_free(brief, _choices(brief))
    return Space(tuple(axis_of(name, choices[name]) for name in SEARCHABLE), notes)
