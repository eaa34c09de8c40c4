"""What each constant of several jumps is made of: variables, shared where the brief shares them."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from designer.brief.choices import Link, Path
from designer.brief.keys import JUMP_CONSTANTS
from designer.brief.model import Choice, Term, Variable
from designer.brief.several import ReadJump, follows
from designer.brief.units import Misread, plain
from designer.motion.rule import CONSTANT_NAMES, SHARED, Constants

DEFAULTS = {
    "grain": 0.0,
    "run_speed": 0.0,
    "fall_factor": 1.0,
    "terminal_speed": math.inf,
    "step_up": 0.0,
    "edge_allowance": 0.0,
    "gravity_factor": 1.0,
}
"""Constants that need not be said (DEVELOPERS.md, brief); infinity means no terminal speed."""


@dataclass(frozen=True, slots=True)
class Top:
    """What the top level of the brief says, by constant."""

    search: Mapping[str, Any]
    """A Choice, or (step_up, edge_allowance) a number."""
    today: Mapping[str, float]
    needed: tuple[str, ...]
    """Constants without a default: gravity, launch_speed and, in a fixed loop, step."""


class Terms:
    """Settles every constant of every jump; the brief's links and likes must lead somewhere.

    A constant is, in this order: what the jump's own search says; what its own today says, where it is like
    another jump; the other jump's; what the top level's [search] says, the same variable for all jumps that
    take it; the jump's own today; the top level's; the default.
    """

    def __init__(self, jumps: Sequence[ReadJump], top: Top) -> None:
        self.jumps = {jump.name: jump for jump in jumps}
        self.top = top
        self.variables: list[Variable] = []
        self.wrong: list[tuple[Path, Misread]] = []
        self._places: dict[str, int] = {}
        self._found: dict[tuple[str, str], Term | None] = {}
        for name in SHARED:
            if name != "step" or "step" in top.needed:
                self._shared(name)
        names = [name for name in CONSTANT_NAMES if name in JUMP_CONSTANTS]
        self.terms: dict[str, dict[str, Term]] = {}
        for jump in jumps:
            found = {name: self._term(jump, name) for name in names}
            shared = {name: Term(place) for name, place in self._places.items() if name in SHARED}
            every = {**shared, **{name: term for name, term in found.items() if term is not None}}
            self.terms[jump.name] = {name: every[name] for name in CONSTANT_NAMES if name in every}

    def fixed(self, jump: str, name: str) -> float | None:
        """Return the value of a constant that the search may not change; None of any other."""
        term = self.terms[jump].get(name)
        if term is None:
            return None
        value = 1.0
        for number, place in enumerate(term.places):
            choice = self.variables[place].choice
            if choice.values is None or not choice.is_fixed:
                return None
            value = choice.values[0] if number == 0 else value * choice.values[0]
        return value

    def today(self, jump: str, name: str) -> float | None:
        """Return today's value of a jump's constant: its own, else of the jump it is like, else all's."""
        at: str | None = jump if name not in SHARED else None
        while at is not None:
            if name in self.jumps[at].today:
                return self.jumps[at].today[name]
            at = self.jumps[at].like
        return self.top.today.get(name)

    def of_today(self, jump: str) -> Constants | None:
        """Return a jump's constants of today; None where one without a default is not said."""
        values = {name: self.today(jump, name) for name in CONSTANT_NAMES}
        return None if any(values[name] is None for name in self.top.needed) else as_constants(values)

    def of_base(self, jump: str) -> Constants | None:
        """Return `base` as constants; None where one without a default has no one value."""
        values = self.base(jump)
        return None if any(values[name] is None for name in self.top.needed) else as_constants(values)

    def base(self, jump: str) -> dict[str, float | None]:
        """Return a jump's constants where nothing else is said: today's, else fixed ones, else defaults."""
        values: dict[str, float | None] = {}
        for name in CONSTANT_NAMES:
            said = self.today(jump, name)
            said = self.fixed(jump, name) if said is None else said
            values[name] = DEFAULTS.get(name) if said is None else said
        return values

    def in_set(
        self, jump: str, top: Mapping[str, float], parts: Mapping[str, Mapping[str, float]]
    ) -> dict[str, float | None]:
        """Return a jump's constants in a set that names some: for it, for a jump that it is like, for all."""
        values = self.base(jump)
        for name in CONSTANT_NAMES:
            said = top.get(name)
            at: str | None = jump if name not in SHARED else None
            while at is not None:
                if name in parts.get(at, {}):
                    said = parts[at][name]
                    break
                own = self.jumps[at].search.get(name)
                at = None if isinstance(own, Link) else follows(self.jumps[at], name)
            values[name] = values[name] if said is None else said
        return values

    def _variable(self, name: str, chosen: Choice | float) -> int:
        """Return the place of a variable, which is made where there is none of this name."""
        if name not in self._places:
            self._places[name] = len(self.variables)
            self.variables.append(Variable(name, as_choice(chosen)))
        return self._places[name]

    def _shared(self, name: str) -> int | None:
        """Return the place of the top level's variable of a constant; None where it says nothing."""
        for source in (self.top.search, self.top.today, DEFAULTS):
            if name in source:
                return self._variable(name, source[name])
        return None

    def _term(self, jump: ReadJump, name: str) -> Term | None:
        key = (jump.name, name)
        if key not in self._found:
            self._found[key] = self._settle(jump, name)
        return self._found[key]

    def _settle(self, jump: ReadJump, name: str) -> Term | None:
        own = jump.search.get(name)
        other = follows(jump, name)
        if other is not None:
            term = self._term(self.jumps[other], name)
            if term is None or not isinstance(own, Link) or own.times is None:
                return term
            return Term(
                term.variable, (*term.factors, self._variable(f"{jump.name}.{name} times", own.times))
            )
        if own is not None:
            return Term(self._variable(f"{jump.name}.{name}", own))
        if name in jump.today and (jump.like is not None or name not in self.top.search):
            return Term(self._variable(f"{jump.name}.{name}", jump.today[name]))
        place = self._shared(name)
        if place is None:
            words = (
                f"{name} for {jump.name}, in its own search or today, or at the top level; it has no default"
            )
            fix = f'add search = {{ {name} = "free" }}, or today = {{ {name} = … }}'
            self.wrong.append((("jumps", jump.name, name), Misread(words, fix=fix)))
            return None
        return Term(place)


def as_choice(chosen: Choice | float) -> Choice:
    """Return a choice; of a number, the fixed one."""
    if isinstance(chosen, Choice):
        return chosen
    return Choice((chosen,), text="none" if math.isinf(chosen) else plain(chosen))


def as_constants(values: Mapping[str, float | None]) -> Constants:
    """Return constants with the defaults filled in; infinity becomes no terminal speed."""
    said = {name: value for name, value in values.items() if value is not None}
    if math.isinf(said.get("terminal_speed", math.inf)):
        said.pop("terminal_speed", None)
    return Constants(**said)
