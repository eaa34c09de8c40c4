"""What the commands print for a person: rows are built as plain text first, rich only lays them out."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from pathlib import Path

from rich.console import Console, Group, RenderableType
from rich.table import Table
from rich.text import Text

from designer.brief.model import Brief
from designer.motion.rule import OWN, SEARCHABLE, SHARED, Constants
from designer.objective.rows import binding
from designer.objective.verdict import FeatureVerdict, Verdict
from designer.report.cells import constant_text, figure, spare_text
from designer.report.check_table import check_table, rule_lines
from designer.report.grid import Column, Grid
from designer.report.several_rows import (
    Row,
    measure_rows,
    own_rows,
    paying_rows,
    says_something,
    shared_rows,
    taking_lines,
    worst_rows,
)
from designer.report.style import TERMINAL
from designer.report.words import NO_VALUE, by_text, demand_text, number
from designer.search.result import Candidate, SearchResult

MOST_FLAGS = 2
"""How many things to mind the first screen tells of a set of several jumps."""


def columns_of(result: SearchResult) -> list[tuple[str, Candidate]]:
    """Return what gets a column: today, the sets that people brought, the shortlist or the nearest."""
    rows = [("today", result.today)] if result.today is not None else []
    rows += [(one.label or "set", one) for one in (*result.sets, *result.shortlist)]
    if not result.shortlist and result.nearest is not None:
        rows.append((result.nearest.label or "nearest", result.nearest))
    return rows


def candidate_sections(brief: Brief, result: SearchResult) -> list[list[Row]]:
    """Return the first screen's rows in sections: constants, measures, score, features, what it takes."""
    brief = binding(brief)
    sets = [candidate for _, candidate in columns_of(result)]
    verdicts = [one.verdict for one in sets]
    if brief.several:
        sections = [list(shared_rows(brief, verdicts))]
        for index in range(len(brief.jumps)):
            sections.append([*own_rows(brief, verdicts, index), *measure_rows(brief, verdicts, index)])
    else:
        sections = [list(_constant_rows(brief, verdicts)), list(measure_rows(brief, verdicts, 0))]
    score = list(_score_rows(verdicts))
    if brief.several:
        score[3:3] = worst_rows(verdicts)
    sections += [
        score,
        list(paying_rows(brief, verdicts, result.alone)) if brief.several else [],
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
        plain = not any(says_something(name, value) for value in values)
        if name == "step" and all(value is None for value in values):
            continue
        if plain and (choice is None or choice.is_fixed):
            continue
        wanted = "fixed" if choice is None or choice.is_fixed else choice.text
        yield Row(name, tuple(constant_text(name, one.constants) for one in verdicts), wanted)


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
    margins = [_flip_margin(one) for one in verdicts]
    if any(margin is not None for margin in margins):
        yield Row("flip margin", tuple(number(margin, 3) for margin in margins), "high")


def _flip_margin(verdict: Verdict) -> float | None:
    """Return how far the game's gravity may move before rounding flips for any jump."""
    margins = [jump.nominal.measures.get("flip_margin") for jump in verdict.jumps]
    return min((margin for margin in margins if margin is not None), default=None)


def _feature_rows(brief: Brief, verdicts: Sequence[Verdict]) -> Iterator[Row]:
    for index, feature in enumerate(brief.features):
        found = [one.features[index] for one in verdicts]
        spares = tuple(spare_text(feature, one) for one in found)
        yield Row(f"{feature.name}: spare", spares, demand_text(feature))
        by = "" if len(brief.jumps) == 1 else f"by {by_text(brief, feature.by)}"
        yield Row("  worst at", tuple(_worst_at(one) for one in found), by)


def _worst_at(found: FeatureVerdict) -> str:
    """Return at which rate a feature has the least slack, and of several jumps that must, for which."""
    rate = found.worst_rate or NO_VALUE
    return f"{found.worst_jump} {rate}" if found.worst_jump is not None and len(found.by) > 1 else rate


def candidates_table(brief: Brief, result: SearchResult) -> RenderableType:
    """Return the first screen: one table, and one line a candidate saying why it is there."""
    columns = columns_of(result)
    sections = candidate_sections(brief, result)
    rows = [row for section in sections for row in section]
    ends, total = set(), 0
    for section in sections:
        total += len(section)
        ends.add(total - 1)
    # Jumps make long tables: rather fold a cell than leave fewer sets side by side.
    widest = 11 if brief.several else 14
    cells = [
        Column(name, tuple(row.cells[index] for row in rows), widest=widest)
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
    return Group(grid, *(Text(line) for line in taking_lines(brief)), why)


def _why(label: str, candidate: Candidate) -> tuple[Text, Text]:
    """Return the line on one candidate: label and mark, then the reason and what to mind."""
    name = Text(f"{label}·{candidate.verdict.mark}", style=TERMINAL["best"])
    reason = Text(candidate.why)
    # That a rule is stepped is the same for every candidate: check says it, here it would only be noise.
    flags = [flag for flag in candidate.verdict.flags if "no closed form" not in flag]
    if candidate.verdict.several and len(flags) > MOST_FLAGS:
        flags[MOST_FLAGS:] = [f"{len(flags) - MOST_FLAGS} more things to mind, which check tells"]
    if flags:
        reason.append(f" ({'; '.join(flags)})", style=TERMINAL["quiet"])
    return name, reason


def _console() -> Console:
    return Console(highlight=False, soft_wrap=False)


def print_check(brief: Brief, name: str, verdict: Verdict, console: Console | None = None) -> None:
    """Print what `check` shows of one set to standard output."""
    out = console or _console()
    brief = binding(brief)
    out.print(Text(f"{brief.title}: {name}·{verdict.mark}", style=TERMINAL["head"]))
    for line in _constant_lines(verdict):
        out.print(Text(line))
    out.print()
    out.print(check_table(brief, verdict))
    out.print()
    out.print(rule_lines(brief, verdict))


def _constant_lines(verdict: Verdict) -> list[str]:
    """Return the constants in a line; of several jumps what they share, then a line each."""
    if not verdict.several:
        return [_constants_text(verdict.constants, SEARCHABLE)]
    own = [f"{jump.name}: {_constants_text(jump.constants, OWN)}" for jump in verdict.jumps]
    return [_constants_text(verdict.constants, SHARED), *own]


def _constants_text(constants: Constants, names: Sequence[str]) -> str:
    said = [name for name in names if _is_told(name, constants)]
    return ", ".join(f"{name} {constant_text(name, constants)}" for name in said)


def _is_told(name: str, constants: Constants) -> bool:
    value = getattr(constants, name)
    return value is not None and says_something(name, value)


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
    for finding in result.findings:
        out.print(Text(finding))
    for note in result.notes:
        out.print(Text(note))
    out.print(
        Text("! out of tolerance, or a demand that fails. A model of the build, not the build: playtest.")
    )
    out.print(Text(f"Written to {folder}"))
    best = result.best or result.nearest
    pick = f" --pick {best.label}" if best is not None and best.label else ""
    out.print(Text(f"Next: leapwright check {folder}{pick}"))
