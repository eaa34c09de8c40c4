"""What the commands print for a person: rows are built as plain text first, rich only lays them out."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path

from rich.console import Console, Group, RenderableType
from rich.padding import Padding
from rich.text import Text

from designer.brief.model import Brief, Gap, Ledge, Target
from designer.motion.measures import unit_of
from designer.motion.rule import SEARCHABLE, Constants
from designer.objective.verdict import FeatureVerdict, RateRow, Verdict
from designer.report.grid import Column, Grid
from designer.report.style import TERMINAL
from designer.report.words import NO_VALUE, demand_text, feature_sentence, first_ticks, number, pseudo_code
from designer.search.result import Candidate, SearchResult

DEFAULTS = {"grain": 0.0, "run_speed": 0.0, "fall_factor": 1.0, "terminal_speed": None}
"""Values that need no row where every set has them and nothing is searched."""
MOST_RATES = 40
"""How many rates check prints before it keeps to the telling ones."""


# ---- numbers


def decimals(within: float) -> int:
    """Return how many decimals show a twentieth of a tolerance."""
    return max(0, -math.floor(math.log10(within / 10.0))) if within > 0 else 1


def figure(value: float | None, places: int | None = None, *, signed: bool = False) -> str:
    """Return a number with so many decimals (None: four significant figures), "–" where there is none."""
    if value is None or not math.isfinite(value):
        return NO_VALUE
    if places is None:
        places = 0 if value == 0 else max(0, 3 - math.floor(math.log10(abs(value))))
        places = min(places, 6)
    text = f"{value:{'+' if signed else ''}.{places}f}"
    if float(text) == 0.0:
        text = text.replace("-", "+" if signed else "")
    return text.replace("-", "−")


def constant_text(name: str, constants: Constants) -> str:
    """Return one constant as it would be typed: steps in ms, no terminal speed as "none"."""
    value = getattr(constants, name)
    if value is None:
        return "none" if name == "terminal_speed" else NO_VALUE
    return f"{number(value * 1000)} ms" if name == "step" else number(value)


def deviation_text(deviation: float | None) -> str:
    """Return a deviation in tolerances, with "!" where it is out of tolerance or does not exist."""
    if deviation is None:
        return f"{NO_VALUE}!"
    return figure(deviation, 1, signed=True) + ("!" if abs(deviation) > 1.0 else "")


# ---- the first screen after a search


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
    """Return the rows of the first screen in sections: constants, measures, score, features, what it takes."""
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
        yield Row("flip margin", tuple(figure(margin) for margin in margins), "high")


def _feature_rows(brief: Brief, verdicts: Sequence[Verdict]) -> Iterator[Row]:
    for name, features in (("ledges", brief.ledges), ("gaps", brief.gaps)):
        for index, feature in enumerate(features):
            found = [getattr(one, name)[index] for one in verdicts]
            yield Row(f"{feature.name}: spare", tuple(spare_text(one) for one in found), demand_text(feature))
            worst = tuple(one.worst_rate or NO_VALUE for one in found)
            yield Row("  worst at", worst)


def spare_text(found: FeatureVerdict) -> str:
    """Return the signed slack of a feature, "!" where the demand does not hold."""
    return figure(found.spare, 1, signed=True) + ("" if found.holds else "!")


def candidates_table(brief: Brief, result: SearchResult) -> RenderableType:
    """Return the first screen: one table, and one line a candidate saying why it is there."""
    columns = columns_of(result)
    sections = candidate_sections(brief, result)
    rows = [row for section in sections for row in section]
    ends, total = set(), 0
    for section in sections:
        total += len(section)
        ends.add(total - 1)
    grid = Grid(
        left=(Column("", tuple(row.label for row in rows), right=False, widest=24),),
        middle=tuple(
            Column(name, tuple(row.cells[index] for row in rows), widest=14)
            for index, (name, _) in enumerate(columns)
        ),
        right=(Column("wanted", tuple(row.wanted for row in rows), right=False, widest=20),),
        sections=frozenset(ends - {total - 1}),
    )
    parts: list[RenderableType] = [grid]
    for label, candidate in columns:
        if label != "today":
            parts.append(_why(label, candidate))
    return Group(*parts)


def _why(label: str, candidate: Candidate) -> RenderableType:
    """Return the line on one candidate: label, mark, reason."""
    line = Text()
    line.append(label, style=TERMINAL["best"])
    line.append(f"·{candidate.verdict.mark}  {candidate.why}")
    flags = candidate.verdict.flags
    if flags:
        line.append(f" ({'; '.join(flags)})", style=TERMINAL["quiet"])
    return Padding(line, (0, 0, 0, 0))


# ---- check


def _check_measures(brief: Brief, verdict: Verdict, jump: int) -> list[tuple[str, Target | None]]:
    """Return the measures that check prints: those with a target first, then the usual ones."""
    targets = [(target.measure, target) for target in brief.jumps[jump].targets]
    named = {measure for measure, _ in targets}
    usual = ["apex", "airtime"]
    usual += ["max_gap"] if verdict.jumps[jump].constants.run_speed else []
    usual += ["effective_gravity"] if verdict.jumps[jump].constants.grain else []
    return [*targets, *((name, None) for name in usual if name not in named)]


def _deviation_at(target: Target, value: float | None) -> float | None:
    """Return d of DESIGN §5 at one rate, in tolerances."""
    if value is None:
        return None
    if target.aim is not None:
        return (value - target.aim) / target.within
    if target.at_least is not None and value < target.at_least:
        return (value - target.at_least) / target.within
    if target.at_most is not None and value > target.at_most:
        return (value - target.at_most) / target.within
    return 0.0


def check_rows(brief: Brief, verdict: Verdict, jump: int = 0) -> list[tuple[str, RateRow]]:
    """Return each rate once with what it counts as: nominal first, then supported, then watched."""
    judged = verdict.jumps[jump]
    nominal = judged.nominal
    rows = [("nominal", nominal)]
    for row in judged.rates:
        if row.step == nominal.step:
            rows[0] = ("nominal", row)
        else:
            rows.append(("supported" if row.supported else "watched", row))
    return rows


def telling(rows: Sequence[tuple[str, RateRow]], measures: Sequence[str]) -> list[tuple[str, RateRow]]:
    """Return the rows worth printing where there are many: the ends, each measure's extremes, what is stuck."""
    keep = {0, 1, len(rows) - 1}
    for measure in measures:
        values = [
            (value, index)
            for index, (_, row) in enumerate(rows)
            if (value := row.measures.get(measure)) is not None
        ]
        if values:
            keep |= {min(values)[1], max(values)[1]}
    stuck = [index for index, (_, row) in enumerate(rows) if row.status != "lands"]
    return [rows[index] for index in sorted(keep | set(stuck[:5]))]


def rates_grid(brief: Brief, verdict: Verdict, jump: int = 0) -> Grid:
    """Return the table over the rates: each measure, and each target's deviation in tolerances."""
    measures = _check_measures(brief, verdict, jump)
    rows = check_rows(brief, verdict, jump)
    if len(rows) > MOST_RATES:
        rows = telling(rows, [measure for measure, _ in measures])
    left = (
        Column("rate", tuple(row.rate for _, row in rows), right=False, widest=16),
        Column("counts as", tuple(kind for kind, _ in rows), right=False),
        Column("step", tuple(f"{number(row.step * 1000, 5)} ms" for _, row in rows)),
    )
    middle = []
    for measure, target in measures:
        unit = unit_of(measure, brief.length_unit)
        places = None if target is None else decimals(target.within)
        values = [row.measures.get(measure) for _, row in rows]
        head = f"{measure} ({unit})" if unit else measure
        cells = [figure(value, places) for value in values]
        if target is not None:
            deviations = [deviation_text(_deviation_at(target, value)) for value in values]
            width = max(len(text.rstrip("!")) for text in deviations)
            # The deviation stands beside its measure; a blank keeps numbers in line where there is no "!".
            pairs = zip(cells, deviations, strict=True)
            cells = [
                f"{cell} {text.rstrip('!'):>{width}}{'!' if text.endswith('!') else ' '}" for cell, text in pairs
            ]
            head += " off"
        middle.append(Column(head, tuple(cells), widest=22))
    if any(row.status != "lands" for _, row in rows):
        middle.append(Column("", tuple("" if r.status == "lands" else f"{r.status}!" for _, r in rows)))
    return Grid(left, tuple(middle))


def features_grid(brief: Brief, verdict: Verdict) -> Grid | None:
    """Return the table of ledges and gaps, or None where the brief has none."""
    features: list[Ledge | Gap] = [*brief.ledges, *brief.gaps]
    found = [*verdict.ledges, *verdict.gaps]
    if not features:
        return None
    bands = [", ".join(one.failing) if one.failing else "nowhere" for one in found]
    return Grid(
        left=(
            Column("ledge or gap", tuple(one.name for one in features), right=False, widest=18),
            Column("demand", tuple(demand_text(one) for one in features), right=False, widest=18),
            Column(f"spare ({brief.length_unit})", tuple(spare_text(one) for one in found), widest=11),
            Column("worst at", tuple(one.worst_rate or NO_VALUE for one in found), right=False, widest=10),
        ),
        middle=(Column("fails within 20–1000 Hz", tuple(bands), right=False, widest=44),),
    )


def check_table(brief: Brief, verdict: Verdict) -> RenderableType:
    """Return what check shows: the rates, the score, ledges and gaps with their bands, flags."""
    parts: list[RenderableType] = []
    for index, jump in enumerate(verdict.jumps):
        if len(verdict.jumps) > 1:
            parts.append(Text(jump.name, style=TERMINAL["head"]))
        parts.append(rates_grid(brief, verdict, index))
        count = len(check_rows(brief, verdict, index))
        if count > MOST_RATES:
            parts.append(Text(f"{count} rates; shown are the ends and each measure's extremes."))
    if any(jump.targets for jump in brief.jumps):
        parts.append(Text("off: deviation in tolerances; an aim counts at the nominal rate, a bound at the worst."))
    parts.append(Text(score_text(verdict)))
    features = features_grid(brief, verdict)
    if features is not None:
        parts.append(features)
        pairs = zip([*brief.ledges, *brief.gaps], [*verdict.ledges, *verdict.gaps], strict=True)
        parts += [Text(f"{feature_sentence(feature, found)}.") for feature, found in pairs if found.failing]
    parts += [Text(f"Mind: {flag}.") for flag in verdict.flags]
    return Group(*parts)


def score_text(verdict: Verdict) -> str:
    """Return miss, rate spread, cost, worst and violation in one sentence."""
    if verdict.violation is None:
        return "The jump never lands at a rate that counts: no score."
    text = f"Miss {figure(verdict.miss, 2)}, rate spread {figure(verdict.rate_spread, 2)}"
    text += f", cost {figure(verdict.cost, 2)}."
    if verdict.worst is not None:
        text += f" Worst: {verdict.worst.measure}, {figure(verdict.worst.value, 2)} tolerances"
        text += "." if verdict.on_target else " (not on target)." if verdict.worst.value > 1.0 else "."
    if verdict.violation > 0.0:
        text += f" Violation {figure(verdict.violation, 2)}."
    return text


def rule_lines(brief: Brief, constants: Constants) -> RenderableType:
    """Return the rule read back as pseudo-code, and the first ticks."""
    parts: list[RenderableType] = [Text("The rule, read back", style=TERMINAL["head"])]
    parts += [Text(f"    {line}") for line in pseudo_code(brief, brief.rule, constants)]
    ticks = first_ticks(brief, constants)
    cells = [
        tuple(str(tick.tick) for tick in ticks),
        *(tuple(number(getattr(tick, name), 9) for tick in ticks) for name in ("v_before", "u", "v_after", "y_after")),
    ]
    heads = ("step", "v before", "u (not rounded)", "v after", "y after")
    parts += [
        Text(""),
        Text(f"First steps at {brief.nominal(constants).name}", style=TERMINAL["head"]),
        Grid((), tuple(Column(head, column) for head, column in zip(heads, cells, strict=True))),
    ]
    return Group(*parts)


# ---- printing


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
        for demand in clash.demands:
            out.print(Text(f"  · {demand}"))
    certificate = result.certificate
    if certificate is not None and certificate.complete:
        points = f"{certificate.grid_points:,}".replace(",", " ")
        out.print(Text(f"Certified: none of the {points} points of the grid does better."))
    for note in result.notes:
        out.print(Text(note))
    out.print(Text("! out of tolerance, or a demand that fails. A model of the build, not the build: playtest."))
    out.print(Text(f"Written to {folder}"))
    best = result.best or result.nearest
    pick = f" --pick {best.label}" if best is not None and best.label else ""
    out.print(Text(f"Next: leapwright check {folder}{pick}"))
