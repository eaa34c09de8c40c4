"""A set of constants, of one jump or of several: what a designer notices of it, and what it would cost."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from designer.brief.model import Brief, NamedSet
from designer.motion.closed_form import has_closed_form
from designer.motion.rule import Constants
from designer.objective.score import score, views_of
from designer.objective.table import Designs, JumpTable, design_tables
from designer.objective.verdict import Verdict
from designer.search.shortlist import LOOKS

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]

Set = Constants | tuple[Constants, ...]
"""The constants of one jump, or of a brief with [jumps] those of each in file order."""


@dataclass(frozen=True, slots=True)
class Sets:
    """Scattered sets of several jumps."""

    each: tuple[Designs, ...]
    """The designs of each jump, with arrays (sets,)."""

    def constants(self, at: int, brief: Brief) -> tuple[Constants, ...]:
        """Return one set as constants."""
        pairs = zip(views_of(brief), self.each, strict=True)
        return tuple(designs.constants(at, view) for view, designs in pairs)


def first_of(constants: Set) -> Constants:
    """Return the first jump's constants: gravity, step and grain are everybody's."""
    return constants if isinstance(constants, Constants) else constants[0]


def today_of(brief: Brief) -> Set | None:
    """Return what the build has now; None where the brief does not say it of every jump."""
    if not brief.several:
        return brief.today
    found = tuple(jump.today for jump in brief.jumps if jump.today is not None)
    return found if len(found) == len(brief.jumps) else None


def named_set(brief: Brief, one: NamedSet) -> Set:
    """Return the constants of one of [[sets]]."""
    return one.jumps if brief.several else one.constants


def judged_set(verdict: Verdict) -> Set:
    """Return the constants that a verdict is about."""
    return tuple(jump.constants for jump in verdict.jumps) if verdict.several else verdict.constants


def steps_all(brief: Brief, constants: Set) -> bool:
    """Return whether every rate must be stepped: no closed form helps."""
    grain = np.array([first_of(constants).grain])
    second = any(jump.second is not None for jump in brief.jumps)
    return second or not bool(np.all(has_closed_form(brief.rule, grain)))


def look_names(brief: Brief) -> tuple[str, ...]:
    """Return the names of what a designer notices: LOOKS, or "walk.apex" of each jump and gravity once."""
    if not brief.several:
        return LOOKS
    own = [name for name in LOOKS if name != "gravity"]
    return (*(f"{jump.name}.{name}" for jump in brief.jumps for name in own), "gravity")


def tables_of(brief: Brief, designs: Designs | Sets) -> tuple[JumpTable, ...]:
    """Measure scattered sets, one table a jump."""
    if isinstance(designs, Designs):
        return design_tables(brief, designs)
    pairs = zip(views_of(brief), designs.each, strict=True)
    return tuple(design_tables(view, one)[0] for view, one in pairs)


def looks_of(brief: Brief, designs: Designs | Sets) -> Floats:
    """Return what a designer notices of each set, (sets, names) in the order of `look_names`."""
    each = (designs,) if isinstance(designs, Designs) else designs.each
    columns = []
    for table, one in zip(tables_of(brief, designs), each, strict=True):
        for name in LOOKS:
            if name == "gravity" and brief.several:
                continue
            measured = name in table.measures
            columns.append(table.measures[name].nominal if measured else getattr(one, name))
    if brief.several:
        columns.append(each[0].gravity)
    return np.asarray(np.nan_to_num(np.column_stack(columns)), dtype=np.float64)


def cost_without_grain(brief: Brief, constants: Set) -> float:
    """Return what the same constants cost where nothing is rounded."""
    each: Sequence[Constants] = (constants,) if isinstance(constants, Constants) else constants
    bare = [Designs.of([replace(one, grain=0.0)]) for one in each]
    tables = tables_of(brief, Sets(tuple(bare)) if brief.several else bare[0])
    return float(score(brief, tables).cost[0])
