"""Several jumps as a space: its variables, what they make of each jump's constants, which jumps they tie.

With gravity, step and grain fixed, jumps are independent, but for variables that two of them use (a link, a
`like`): such jumps form a group. Once a group's links are fixed as well, its jumps are independent too.
"""

from __future__ import annotations

import hashlib
import math
from collections.abc import Mapping, Sequence
from dataclasses import astuple, dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from designer.brief.model import Brief, Choice, Loop, Term, Variable
from designer.errors import Fault, InputError
from designer.motion.rule import OWN, SEARCHABLE, SHARED, Constants, Rule
from designer.objective.score import views_of
from designer.objective.table import Designs
from designer.search.free import derive_free
from designer.search.space import NONE_SAID, Axis, Space, axis_of, values

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]
    Ints = NDArray[np.int64]

UNSAID = {**NONE_SAID, "gravity_factor": 1.0}
"""What a constant is where neither terms nor today name it."""
DECIDING = (*SEARCHABLE, "gravity_factor")
"""The constants in the order that decides between equals, the jumps in file order within each."""


@dataclass(frozen=True, slots=True)
class Jump:
    """One jump's own designs: every combination of the variables that only it or its group has."""

    number: int
    """Its place in the brief."""
    view: Brief
    links: tuple[int, ...]
    """Variables that it shares with others of its group, as places in the space's axes."""
    private: tuple[int, ...]
    """Variables that it has for itself."""
    own: Mapping[str, Floats]
    """Each of OWN, (designs,); the links count before the private variables, the last one fastest."""
    link_count: int
    private_count: int

    @property
    def count(self) -> int:
        """How many own designs there are."""
        return self.link_count * self.private_count


@dataclass(frozen=True, slots=True)
class Group:
    """Jumps that links tie together; a jump without links is a group of its own."""

    jumps: tuple[int, ...]
    links: tuple[int, ...]
    """Every variable that two of them use."""
    link_count: int
    """How many combinations the links have."""
    projections: tuple[Ints, ...]
    """For each jump the place among its own links of each combination of the group's, (link_count,)."""


@dataclass(frozen=True, slots=True)
class SeveralSpace(Space):
    """The sets among which a search of several jumps chooses, an axis for each variable."""

    brief: Brief | None = None
    terms: tuple[Mapping[str, Term], ...] = ()
    """For each jump what its constants are made of: places in the axes."""

    @property
    def of_brief(self) -> Brief:
        """The brief, which is always there."""
        if self.brief is None:
            raise ValueError("a space of several jumps needs its brief")
        return self.brief

    def shared(self, name: str) -> Axis:
        """Return the axis of gravity, step or grain."""
        return self.axes[self.terms[0][name].variable]

    def constant(self, term: Term, columns: Sequence[Floats] | Floats) -> Floats:
        """Return a constant from the values of all variables, arrays (designs,) one an axis."""
        value = columns[term.variable]
        for factor in term.factors:
            value = value * columns[factor]
        return value

    def each_designs(self, matrix: Floats) -> tuple[Designs, ...]:
        """Return the designs of each jump, of variables in a matrix (designs, variables)."""
        columns = np.ascontiguousarray(np.asarray(matrix, dtype=np.float64).T)
        return tuple(
            Designs(**{name: self.constant(terms[name], columns) for name in DECIDING})
            for terms in self.terms
        )

    def grid_hash(self, rule: Rule) -> str:
        """Return twelve hexadecimal digits that name this grid under this rule, links and all."""
        lines = [f"{axis.name}:{','.join(float(p).hex() for p in axis.points or ())}" for axis in self.axes]
        for jump, terms in zip(self.of_brief.jumps, self.terms, strict=True):
            made = [(name, terms[name].places) for name in DECIDING]
            lines.append(repr((jump.name, made, None if jump.second is None else astuple(jump.second))))
        lines.append(repr(astuple(rule)))
        return hashlib.sha256("\n".join(lines).encode()).hexdigest()[:12]


def set_of(brief: Brief, each: Sequence[Designs], at: int) -> tuple[Constants, ...]:
    """Return one set of constants, one Constants a jump, of the designs of each jump."""
    pairs = zip(views_of(brief), each, strict=True)
    return tuple(designs.constants(at, view) for view, designs in pairs)


def deciding_key(constants: Sequence[Constants]) -> tuple[float, ...]:
    """Return what decides between sets of equal cost (DEVELOPERS.md, score): the lower comes first."""
    none = {"step": 0.0, "terminal_speed": math.inf}

    def value(one: Constants, name: str) -> float:
        found = getattr(one, name)
        return none[name] if found is None else float(found)

    shared = [name in SHARED for name in DECIDING]
    return tuple(
        value(one, name)
        for name, once in zip(DECIDING, shared, strict=True)
        for one in (constants[:1] if once else constants)
    )


def build_several(brief: Brief) -> SeveralSpace:
    """Return the space of a brief with several jumps, "free" variables included.

    Raises InputError where nothing may be searched or where the targets do not bound a free variable.
    """
    if not brief.variables:
        words = "a table [search] that says what may change"
        fix = 'add [search] with, for example, gravity = "free"; each jump may have a search of its own'
        raise InputError(Fault(brief.name, "search", "", words, fix))
    variables, terms = _settled(brief)
    bounded, notes = _free(brief, variables, terms)
    axes = tuple(
        replace(axis_of(one.name, choice), name=one.name)
        for one, choice in zip(variables, bounded, strict=True)
    )
    return SeveralSpace(axes, notes, brief, tuple(terms))


def _settled(brief: Brief) -> tuple[list[Variable], list[dict[str, Term]]]:
    """Return variables and terms with a fixed variable for each constant that no term names."""
    variables = list(brief.variables)
    terms = []
    for jump in brief.jumps:
        found = {name: term for name, term in jump.terms.items() if name in DECIDING}
        for name in DECIDING:
            if name in found and not (name == "step" and brief.loop is Loop.EACH_FRAME):
                continue
            found[name] = Term(len(variables))
            variables.append(Variable(f"{jump.name}.{name}", Choice((_default(brief, jump.name, name),))))
        terms.append(found)
    return variables, terms


def _default(brief: Brief, jump: str, name: str) -> float:
    if name == "step" and brief.loop is Loop.EACH_FRAME:
        return math.nan
    view = brief.view(jump)
    for source in (view.today, view.base):
        if source is not None:
            value = getattr(source, name)
            if value is not None or name == "terminal_speed":
                return math.inf if value is None else float(value)
    if name in UNSAID:
        return UNSAID[name]
    words = 'a value, a range, a list or "free"'
    raise InputError(
        Fault(brief.name, f"search.{name}", "", words, f"name {name} in [search], [today] or [jumps.{jump}]")
    )


def _free(
    brief: Brief, variables: Sequence[Variable], terms: Sequence[Mapping[str, Term]]
) -> tuple[list[Choice], tuple[str, ...]]:
    """Return the choices of all variables with every "free" one bounded by the jumps that use it."""
    choices = [variable.choice for variable in variables]
    if not any(choice.is_free for choice in choices):
        return choices, ()
    found: dict[int, list[Choice]] = {k: [] for k, choice in enumerate(choices) if choice.is_free}
    problem: InputError | None = None
    for jump, made in zip(brief.jumps, terms, strict=True):
        asked = {name: _as_asked(made[name], choices) for name in SEARCHABLE}
        mine = {name: made[name].variable for name in SEARCHABLE if asked[name].is_free}
        if not mine:
            continue
        try:
            bounded, _ = derive_free(brief.view(jump.name), asked)
        except InputError as error:
            problem = error
            continue
        for name, place in mine.items():
            if not made[name].factors:
                found[place].append(_per_factor(bounded[name], name, made, choices))
    if problem is not None and not all(found.values()):
        raise problem
    factors = Choice(None, 0.5, 2.0, "0.5 to 2")
    notes = []
    for place, several in found.items():
        choices[place] = _hull(several) if several else factors
        words = _words(choices[place], variables[place].name)
        notes.append(f'{variables[place].name} = "free" became {words}')
    return choices, tuple(notes)


def _as_asked(term: Term, choices: Sequence[Choice]) -> Choice:
    """Return the choice of a constant, times its factors where those have bounds."""
    choice = choices[term.variable]
    for place in term.factors:
        factor = choices[place]
        if choice.is_free or factor.is_free:
            return replace(choice, values=None, low=None, high=None)
        low, high = _ends(choice)
        least, most = _ends(factor)
        choice = Choice(None, low * least, high * most)
    return choice


def _per_factor(choice: Choice, name: str, made: Mapping[str, Term], choices: Sequence[Choice]) -> Choice:
    """Return the game's gravity for what a jump's own gravity may be: divided by the jump's factor."""
    factor = choices[made["gravity_factor"].variable]
    if name != "gravity" or factor.is_free or choice.values is not None:
        return choice
    least, most = _ends(factor)
    low, high = _ends(choice)
    return Choice(None, low / most, high / least, f"{low / most:g} to {high / least:g}")


def _ends(choice: Choice) -> tuple[float, float]:
    if choice.values is not None:
        return choice.values[0], choice.values[-1]
    if choice.low is None or choice.high is None:
        raise ValueError("a range needs both ends")
    return choice.low, choice.high


def _hull(several: Sequence[Choice]) -> Choice:
    """Return what holds every jump's bounds, or all of their points."""
    if all(choice.values is not None for choice in several):
        return Choice(tuple(sorted({value for choice in several for value in choice.values or ()})))
    ends = [_ends(choice) for choice in several]
    low, high = min(low for low, _ in ends), max(high for _, high in ends)
    return Choice(None, low, high, f"{low:g} to {high:g}")


def _words(choice: Choice, name: str) -> str:
    if choice.values is None:
        return f"{choice.low:g} to {choice.high:g}"
    listed = [f"{1000 * v:g} ms" if name == "step" else f"{v:g}" for v in choice.values]
    return ", ".join(listed) if len(listed) <= 12 else f"{listed[0]} to {listed[-1]} ({len(listed)} points)"


def _moving(space: SeveralSpace, jump: int) -> list[int]:
    """Return the variables with a choice that a jump's own constants depend on."""
    places = {place for name in OWN for place in space.terms[jump][name].places}
    return sorted(place for place in places if not space.axes[place].is_fixed)


def own_counts(space: SeveralSpace) -> tuple[list[int], int]:
    """Return how many own designs each jump has, and how many link combinations the largest group has."""
    moving = [_moving(space, k) for k in range(len(space.terms))]
    tied = {place for places in moving for place in places if sum(place in other for other in moving) > 1}
    groups = [
        {place for k in members for place in moving[k] if place in tied}
        for members in _components(moving, tied)
    ]
    links = max(math.prod(_sizes(space, tuple(places))) for places in groups)
    return [math.prod(_sizes(space, places)) for places in moving], links


def jumps_and_groups(space: SeveralSpace) -> tuple[tuple[Jump, ...], tuple[Group, ...]]:
    """Return each jump's own designs and the groups of jumps that links tie together; for grids only."""
    moving = [_moving(space, k) for k in range(len(space.terms))]
    users: dict[int, list[int]] = {}
    for number, places in enumerate(moving):
        for place in places:
            users.setdefault(place, []).append(number)
    tied = {place for place, numbers in users.items() if len(numbers) > 1}
    jumps = []
    for number, view in enumerate(views_of(space.of_brief)):
        links = tuple(place for place in moving[number] if place in tied)
        private = tuple(place for place in moving[number] if place not in tied)
        jumps.append(_jump(space, number, view, links, private))
    return tuple(jumps), tuple(_group(space, jumps, members) for members in _components(moving, tied))


def _jump(
    space: SeveralSpace, number: int, view: Brief, links: tuple[int, ...], private: tuple[int, ...]
) -> Jump:
    order = (*links, *private)
    shape = _sizes(space, order)
    count = math.prod(shape)
    at = dict(zip(order, np.unravel_index(np.arange(count), shape), strict=True)) if order else {}
    columns = [
        values(axis)[at[place]] if place in at else np.full(count, axis.low)
        for place, axis in enumerate(space.axes)
    ]
    own = {name: space.constant(space.terms[number][name], columns) for name in OWN}
    link_count = math.prod(_sizes(space, links))
    return Jump(number, view, links, private, own, link_count, count // link_count)


def _sizes(space: SeveralSpace, places: Sequence[int]) -> tuple[int, ...]:
    return tuple(len(space.axes[place].points or ()) for place in places)


def _components(moving: Sequence[Sequence[int]], tied: set[int]) -> list[list[int]]:
    """Return the sets of jumps that tied variables connect, each ascending, by first member."""
    label = list(range(len(moving)))
    for place in sorted(tied):
        members = [label[k] for k, places in enumerate(moving) if place in places]
        label = [min(members) if one in members else one for one in label]
    return [[k for k, one in enumerate(label) if one == first] for first in sorted(set(label))]


def _group(space: SeveralSpace, jumps: Sequence[Jump], members: Sequence[int]) -> Group:
    links = tuple(sorted({place for k in members for place in jumps[k].links}))
    shape = _sizes(space, links)
    count = math.prod(shape)
    at = dict(zip(links, np.unravel_index(np.arange(count), shape), strict=True)) if links else {}
    projections = []
    for k in members:
        mine = jumps[k].links
        place = np.ravel_multi_index([at[one] for one in mine], _sizes(space, mine)) if mine else 0
        projections.append(np.broadcast_to(np.asarray(place, dtype=np.int64), (count,)))
    return Group(tuple(members), links, count, tuple(projections))
