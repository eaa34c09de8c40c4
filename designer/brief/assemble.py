"""Parts of a brief made of tables in order, and the words for what a brief cannot do without."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from typing import Any

from designer.brief.choices import Path
from designer.brief.model import Brief, JumpBrief
from designer.brief.several import ReadJump
from designer.brief.terms import Terms
from designer.brief.units import Misread
from designer.motion.rule import CONTACT_TOLERANCE, SEARCHABLE, SHARED, PositionRounding, Rounding, Rule

EXAMPLES = {"gravity": "1600", "launch_speed": "620", "step": '"8 ms"'}
"""A value for each constant without a default."""

MISSING = {
    "loop": Misread(
        '[loop] with steps = "each-frame" or "fixed": who decides how long a step is',
        fix='add [loop], and below it steps = "each-frame" and aim_at = "60 Hz", or steps = "fixed"',
    ),
    "rule": Misread(
        "[rule] with the integrator that the build uses: explicit, semi-implicit or average",
        fix='add [rule], and below it integrator = "semi-implicit"',
    ),
}
"""What to say where a table is missing that every brief needs."""


def as_rule(table: Any) -> Rule:
    """Return the update rule that the model of [rule] describes."""
    tolerance = CONTACT_TOLERANCE if table.contact_tolerance is None else table.contact_tolerance
    return Rule(
        integrator=table.integrator,
        rounding=Rounding(table.rounding.mode, table.rounding.at, table.rounding.carry),
        frame_time=table.frame_time,
        landing_test=table.landing_test,
        launch_gravity=table.launch_gravity,
        contact_tolerance=tolerance,
        position=PositionRounding(table.position.grain, table.position.mode),
    )


def names_twice(section: str, names: Sequence[str]) -> list[tuple[Path, Misread]]:
    """Return a fault for each name in a list of tables that stands twice or that commands use."""
    wrong: list[tuple[Path, Misread]] = []
    seen: dict[str, int] = {}
    for index, name in enumerate(names):
        path = (section, index, "name")
        first = seen.setdefault(name.strip().casefold(), index)
        if name and first != index:
            words = f"a name of its own for each of [[{section}]]; number {first + 1} has it already"
            wrong.append((path, Misread(words, fix="give one of them another name")))
        if section == "sets" and name == "today":
            words = 'a name other than "today", which is the set of [today]'
            wrong.append((path, Misread(words, fix='name it differently, as in "yesterday"')))
    return wrong


def with_jumps(
    brief: Brief, jumps: Sequence[ReadJump], terms: Terms, *, today: bool, searched: bool
) -> Brief:
    """Return the brief with its several jumps.

    today: whether any table of today is there; searched: whether any search is. The brief's own today, base
    and search are then those of the first jump and of the top level.
    """
    todays = [terms.of_today(jump.name) for jump in jumps]
    whole = today and all(one is not None for one in todays)
    each = tuple(
        JumpBrief(
            name=jump.name,
            targets=jump.targets,
            weight=jump.weight,
            like=jump.like,
            terms=terms.terms[jump.name],
            today=now if whole else None,
            second=jump.second,
            base=terms.of_base(jump.name),
        )
        for jump, now in zip(jumps, todays, strict=True)
    )
    choices = {variable.name: variable.choice for variable in terms.variables}
    named = [name for name in SEARCHABLE if name in SHARED or name in terms.top.search]
    return replace(
        brief,
        jumps=each,
        today=each[0].today,
        base=each[0].base,
        search={name: choices[name] for name in named if name in choices} if searched else None,
        variables=tuple(terms.variables),
    )
