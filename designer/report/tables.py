"""What the commands print for a person: rows are built as plain text first, rich only lays them out."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path

from rich.console import Console, Group, RenderableType
from rich.table import Table
from rich.text import Text

from designer.brief.model import Brief, Gap, Ledge
from designer.motion.measures import unit_of
from designer.motion.rule import SEARCHABLE, Constants
from designer.objective.verdict import FeatureVerdict, Verdict
from designer.report.cells import constant_text, decimals, figure, spare_text
from designer.report.check_table import check_table, rule_lines
from designer.report.grid import Column, Grid
from designer.report.style import TERMINAL
from designer.report.words import NO_VALUE, demand_text, number
from designer.search.result import Candidate, SearchResult

DEFAULTS = {"grain": 0.0, "run_speed": 0.0, "fall_factor": 1.0, "terminal_speed": None}
"""Values that need no row where every set has them and nothing is searched."""


@dataclass(frozen=True, slots=True)
class Row:
    """One row of the candidates' table."""

    label: str
    cells: tuple[str, ...]
    """One for each set."""
    wanted: str = ""


def columns_of(result: SearchResult) -> list[tuple[str, Candidate]]:
    """Return what gets a column: today, the sets that people brought, the shortlist or the nearest."""
    rows = [("today", result.today)] if result.today is not None else []
    rows += [(one.label or "set", one) for one in (*result.sets, *result.shortlist)]
    if not result.shortlist and result.nearest is not None:
        rows.append((result.nearest.label or "nearest", result.nearest))
    return rows


def candidate_sections(brief: Brief, result: SearchResult) -> list[list[Row]]:
    """Return the first screen's rows in sections: constants, measures, score, features, what it takes."""
    sets = [candidate for _, candidate in columns_of(result)]
    verdicts = [one.verdict for one in sets]
    sections = [
        list(_constant_rows(brief, verdicts)),
        list(_measure_rows(brief, verdicts)),
        list(_score_rows(verdicts)),
        list(_feature_rows(brief, verdicts)),
        [
            Row("change", tuple(one.change for one in sets)),
            Row("mark", tuple(one.verdict.mark for one in sets)),
        ],
    ]
    return [rows for rows in sections if rows]


def _constant_rows(brief: Brief, verdicts: Sequence[Verdict]) -> Iterator[Row]:
    for name in SEARCHABLE:
        choice = (brief.search or {}).get(name)
        values = [getattr(one.constants, name) for one in verdicts]
        plain = all(value == DEFAULTS.get(name, math.nan) for value in values)
        if name == "step" and all(value is None for value in values):
            continue
        if plain and (choice is None or choice.is_fixed):
            continue
        wanted = "fixed" if choice is None or choice.is_fixed else choice.text
        yield Row(name, tuple(constant_text(name, one.constants) for one in verdicts), wanted)


def _measure_rows(brief: Brief, verdicts: Sequence[Verdict]) -> Iterator[Row]:
    several = len(brief.jumps) > 1
    for j, jump in enumerate(brief.jumps):
        for k, target in enumerate(jump.targets):
            unit = unit_of(target.measure, brief.length_unit)
            label = f"{jump.name} {target.measure}" if several else target.measure
            cells = []
            for one in verdicts:
                found = one.jumps[j].targets[k]
                off = found.deviation is None or abs(found.deviation) > 1.0
                cells.append(figure(found.value, decimals(target.within)) + ("!" if off else ""))
            yield Row(f"{label} ({unit})" if unit else label, tuple(cells), target.text)


def _score_rows(verdicts: Sequence[Verdict]) -> Iterator[Row]:
    parts: tuple[tuple[str, Callable[[Verdict], float | None]], ...] = (
        ("miss", lambda one: one.miss),
        ("rate spread", lambda one: one.rate_spread),
        ("cost", lambda one: one.cost),
    )
    for label, get in parts:
        yield Row(label, tuple(figure(get(one), 2) for one in verdicts), "low")
    for name in dict.fromkeys(name for one in verdicts for name in one.extras):
        yield Row(name, tuple(figure(one.extras.get(name), 2) for one in verdicts), "low")
    margins = [one.jumps[0].nominal.measures.get("flip_margin") for one in verdicts]
    if any(margin is not None for margin in margins):
        yield Row("flip margin", tuple(number(margin, 3) for margin in margins), "high")


def _feature_rows(brief: Brief, verdicts: Sequence[Verdict]) -> Iterator[Row]:
    ledges: list[tuple[Ledge | Gap, list[FeatureVerdict]]] = [
        (ledge, [one.ledges[index] for one in verdicts]) for index, ledge in enumerate(brief.ledges)
    ]
    gaps = [(gap, [one.gaps[index] for one in verdicts]) for index, gap in enumerate(brief.gaps)]
    for feature, found in [*ledges, *gaps]:
        spares = tuple(spare_text(feature, one) for one in found)
        yield Row(f"{feature.name}: spare", spares, demand_text(feature))
        yield Row("  worst at", tuple(one.worst_rate or NO_VALUE for one in found))


def candidates_table(brief: Brief, result: SearchResult) -> RenderableType:
    """Return the first screen: one table, and one line a candidate saying why it is there."""
    columns = columns_of(result)
    sections = candidate_sections(brief, result)
    rows = [row for section in sections for row in section]
    ends, total = set(), 0
    for section in sections:
        total += len(section)
        ends.add(total - 1)
    cells = [
        Column(name, tuple(row.cells[index] for row in rows), widest=14)
        for index, (name, _) in enumerate(columns)
    ]
    # Today stays beside every candidate where the table splits.
    kept = 1 if len(columns) > 1 and columns[0][0] == "today" else 0
    grid = Grid(
        left=(Column("", tuple(row.label for row in rows), right=False, widest=24), *cells[:kept]),
        middle=tuple(cells[kept:]),
        right=(Column("wanted", tuple(row.wanted for row in rows), right=False, widest=19),),
        sections=frozenset(ends - {total - 1}),
    )
    why = Table.grid(padding=(0, 2, 0, 0))
    for label, candidate in columns:
        if label != "today":
            why.add_row(*_why(label, candidate))
    return Group(grid, why)


def _why(label: str, candidate: Candidate) -> tuple[Text, Text]:
    """Return the line on one candidate: label and mark, then the reason and what to mind."""
    name = Text(f"{label}·{candidate.verdict.mark}", style=TERMINAL["best"])
    reason = Text(candidate.why)
    # That a rule is stepped is the same for every candidate: check says it, here it would only be noise.
    flags = [flag for flag in candidate.verdict.flags if not flag.startswith("no closed form")]
    if flags:
        reason.append(f" ({'; '.join(flags)})", style=TERMINAL["quiet"])
    return name, reason


def _console() -> Console:
    return Console(highlight=False, soft_wrap=False)


def print_check(brief: Brief, name: str, verdict: Verdict, console: Console | None = None) -> None:
    """Print what `check` shows of one set to standard output."""
    out = console or _console()
    out.print(Text(f"{brief.title}: {name}·{verdict.mark}", style=TERMINAL["head"]))
    constants = [constant for constant in SEARCHABLE if _says_something(constant, verdict.constants)]
    out.print(Text(", ".join(f"{one} {constant_text(one, verdict.constants)}" for one in constants)))
    out.print()
    out.print(check_table(brief, verdict))
    out.print()
    out.print(rule_lines(brief, verdict.constants))


def _says_something(name: str, constants: Constants) -> bool:
    value = getattr(constants, name)
    return value is not None and value != DEFAULTS.get(name, math.nan)


def print_search(brief: Brief, result: SearchResult, folder: Path, console: Console | None = None) -> None:
    """Print the first screen after a search: the table, why each candidate, what was proved, what next."""
    out = console or _console()
    out.print(Text(brief.title, style=TERMINAL["head"]))
    out.print(candidates_table(brief, result))
    out.print()
    for clash in result.clashes:
        out.print(Text(f"Nothing is feasible: {clash.text}", style=TERMINAL["off"]))
        for demand in clash.demands if len(clash.demands) > 1 else ():
            out.print(Text(f"  · {demand}"))
    for note in result.notes:
        out.print(Text(note))
    out.print(
        Text("! out of tolerance, or a demand that fails. A model of the build, not the build: playtest.")
    )
    out.print(Text(f"Written to {folder}"))
    best = result.best or result.nearest
    pick = f" --pick {best.label}" if best is not None and best.label else ""
    out.print(Text(f"Next: leapwright check {folder}{pick}"))
