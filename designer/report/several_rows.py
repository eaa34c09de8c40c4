"""The first screen of several jumps: what all share once, each jump's own, and who pays for whom."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass

from designer.brief.model import Brief, JumpBrief, Term
from designer.motion.measures import unit_of
from designer.motion.rule import OWN, SHARED
from designer.objective.verdict import Verdict
from designer.report.cells import constant_text, decimals, figure
from designer.report.words import NO_VALUE

DEFAULTS = {"grain": 0.0, "run_speed": 0.0, "fall_factor": 1.0, "terminal_speed": None, "gravity_factor": 1.0}
"""Values that need no row where every set has them and nothing is searched."""


@dataclass(frozen=True, slots=True)
class Row:
    """One row of the candidates' table."""

    label: str
    cells: tuple[str, ...]
    """One for each set."""
    wanted: str = ""


def says_something(name: str, value: object) -> bool:
    """Return whether a constant's value is worth a place: it is there and not what it is by default."""
    return name not in DEFAULTS or value != DEFAULTS[name]


def term_text(brief: Brief, term: Term | None) -> str:
    """Return what a search does with a constant: "fixed", "300 to 1000 by 5", "0.7 to 0.95 × walk's"."""
    if term is None:
        return "fixed"
    first, *factors = (brief.variables[place] for place in term.places)
    if not factors:
        return "fixed" if first.choice.is_fixed else first.choice.text
    owner = first.name.rpartition(".")[0]
    times = " × ".join(factor.choice.text for factor in factors)
    return f"{times} × {owner}'s" if owner else f"{times} × {first.name}"


def shared_rows(brief: Brief, verdicts: Sequence[Verdict]) -> Iterator[Row]:
    """Yield a row for gravity, step and grain."""
    for name in SHARED:
        term = brief.jumps[0].terms.get(name)
        values = [getattr(one.constants, name) for one in verdicts]
        if name == "step" and all(value is None for value in values):
            continue
        wanted = term_text(brief, term)
        if wanted == "fixed" and not any(says_something(name, value) for value in values):
            continue
        yield Row(name, tuple(constant_text(name, one.constants) for one in verdicts), wanted)


def taken(brief: Brief, index: int) -> tuple[str, ...]:
    """Return the constants that a jump takes from an earlier one just as they are."""
    jump = brief.jumps[index]
    return tuple(
        name
        for name, term in jump.terms.items()
        if name in OWN and any(earlier.terms.get(name) == term for earlier in brief.jumps[:index])
    )


def own_rows(brief: Brief, verdicts: Sequence[Verdict], index: int) -> Iterator[Row]:
    """Yield a row for each constant that a jump has for itself: "walk: launch_speed"."""
    jump = brief.jumps[index]
    as_earlier = taken(brief, index)
    for name in OWN:
        values = [getattr(one.jumps[index].constants, name) for one in verdicts]
        wanted = term_text(brief, jump.terms.get(name))
        same = name in as_earlier and all(_as_earlier(brief, one, index, name) for one in verdicts)
        if same or (wanted == "fixed" and not any(says_something(name, value) for value in values)):
            continue
        cells = tuple(constant_text(name, one.jumps[index].constants) for one in verdicts)
        yield Row(f"{jump.name}: {name}", cells, wanted)


def _as_earlier(brief: Brief, verdict: Verdict, index: int, name: str) -> bool:
    """Return whether a jump has the same value as the first jump that is made of the same term."""
    term = brief.jumps[index].terms[name]
    first = next(k for k, jump in enumerate(brief.jumps) if jump.terms.get(name) == term)
    values = (getattr(verdict.jumps[k].constants, name) for k in (first, index))
    return len(set(values)) == 1


def measure_rows(brief: Brief, verdicts: Sequence[Verdict], index: int) -> Iterator[Row]:
    """Yield a row for each target of one jump, "!" where it is out of tolerance."""
    jump = brief.jumps[index]
    for k, target in enumerate(jump.targets):
        unit = unit_of(target.measure, brief.length_unit)
        label = f"{jump.name}: {target.measure}" if brief.several else target.measure
        cells = []
        for one in verdicts:
            found = one.jumps[index].targets[k]
            off = found.deviation is None or abs(found.deviation) > 1.0
            cells.append(figure(found.value, decimals(target.within)) + ("!" if off else ""))
        yield Row(f"{label} ({unit})" if unit else label, tuple(cells), target.text)


def worst_rows(verdicts: Sequence[Verdict]) -> Iterator[Row]:
    """Yield the worst deviation of each set, and of which jump and measure it is."""
    found = [one.worst for one in verdicts]
    if any(found):
        cells = [
            NO_VALUE if one is None else figure(one.value, 2) + ("!" if one.value > 1.0 else "")
            for one in found
        ]
        yield Row("worst", tuple(cells), "at most 1")
        where = tuple(NO_VALUE if one is None else f"{one.jump}: {one.measure}" for one in found)
        yield Row("  of", where)


def paid(jump_cost: float | None, alone: float | None) -> float | None:
    """Return what a jump pays for the others: its part of the cost less the best that it could have alone."""
    return None if jump_cost is None or alone is None else jump_cost - alone


def paying_rows(brief: Brief, verdicts: Sequence[Verdict], alone: Mapping[str, float]) -> Iterator[Row]:
    """Yield what each jump pays for sharing its game with the others, in tolerances."""
    for index, jump in enumerate(brief.jumps):
        if jump.name not in alone:
            continue
        more = [paid(one.jumps[index].cost, alone[jump.name]) for one in verdicts]
        cells = tuple(figure(value, 2, signed=True) for value in more)
        yield Row(f"{jump.name} pays", cells, f"alone {figure(alone[jump.name], 2)}")


def taking_lines(brief: Brief) -> list[str]:
    """Return for each jump that takes constants from another one as they are what it takes."""
    lines = []
    for index, jump in enumerate(brief.jumps):
        by_source: dict[str, list[str]] = {}
        for name in taken(brief, index):
            source = _source(brief, jump, index, name)
            if source is not None:
                by_source.setdefault(source, []).append(name)
        for source, names in by_source.items():
            lines.append(f"{jump.name} has {source}'s {', '.join(names)}.")
    return lines


def _source(brief: Brief, jump: JumpBrief, index: int, name: str) -> str | None:
    """Return the earlier jump whose own constant it is; None of what the top level says for all."""
    owner = brief.variables[jump.terms[name].variable].name.rpartition(".")[0]
    earlier = [one.name for one in brief.jumps[:index] if one.terms.get(name) == jump.terms[name]]
    return earlier[0] if owner else None
