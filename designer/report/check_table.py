"""What `check` shows: every rate with every target, ledges and gaps with their bands, the rule read back."""

from __future__ import annotations

from collections.abc import Sequence

from rich.console import Group, RenderableType
from rich.text import Text

from designer.brief.model import Brief, Target
from designer.motion.measures import unit_of
from designer.motion.rule import Constants
from designer.objective.rows import binding
from designer.objective.score import views_of
from designer.objective.verdict import FeatureVerdict, RateRow, Verdict
from designer.report.cells import decimals, deviation_text, figure, spare_text
from designer.report.grid import Column, Grid
from designer.report.style import TERMINAL
from designer.report.words import (
    NO_VALUE,
    by_text,
    demand_text,
    feature_sentence,
    first_ticks,
    number,
    pseudo_code,
)

MOST_RATES = 40
"""How many rates check prints before it keeps to the telling ones."""


def _check_measures(brief: Brief, verdict: Verdict, jump: int) -> list[tuple[str, Target | None]]:
    """Return the measures that check prints: those with a target first, then the usual ones."""
    targets = [(target.measure, target) for target in brief.jumps[jump].targets]
    named = {measure for measure, _ in targets}
    usual = ["apex", "airtime"]
    usual += ["max_gap"] if verdict.jumps[jump].constants.run_speed else []
    usual += ["effective_gravity"] if verdict.jumps[jump].constants.grain else []
    return [*targets, *((name, None) for name in usual if name not in named)]


def _deviation_at(target: Target, value: float | None) -> float | None:
    """Return a target's deviation at one rate, in tolerances."""
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
    """Return the rows worth printing where there are many: ends, each measure's extremes, what is stuck."""
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
        Column("step", tuple(f"{number(row.step * 1000, 6)} ms" for _, row in rows)),
    )
    middle = []
    for measure, target in measures:
        unit = unit_of(measure, brief.length_unit)
        places = None if target is None else decimals(target.within)
        values = [row.measures.get(measure) for _, row in rows]
        words = measure if target is not None else measure.replace("_", " ")
        head = f"{words} ({unit})" if unit else words
        cells = [figure(value, places) for value in values]
        if target is not None:
            deviations = [deviation_text(_deviation_at(target, value)) for value in values]
            width = max(len(text.rstrip("!")) for text in deviations)
            # The deviation stands beside its measure; a blank keeps numbers in line where there is no "!".
            pairs = zip(cells, deviations, strict=True)
            cells = [
                f"{cell} {text.rstrip('!'):>{width}}{'!' if text.endswith('!') else ' '}"
                for cell, text in pairs
            ]
            head += ", off"
        middle.append(Column(head, tuple(cells), widest=22))
    if any(row.status != "lands" for _, row in rows):
        middle.append(Column("", tuple("" if r.status == "lands" else f"{r.status}!" for _, r in rows)))
    return Grid(left, tuple(middle))


def features_grid(brief: Brief, verdict: Verdict) -> Grid | None:
    """Return the table of ledges and gaps, or None where the brief has none."""
    features, found = brief.features, verdict.features
    if not features:
        return None
    head = "feature" if brief.blocks or brief.ceilings else "ledge or gap"
    return Grid(
        left=(Column(head, tuple(one.name for one in features), right=False, widest=24),),
        middle=(
            *_by_columns(brief, found),
            Column("demand", tuple(demand_text(one) for one in features), right=False, widest=28),
            Column("holds", tuple("yes" if one.holds else "no!" for one in found), right=False),
            Column(
                f"spare ({brief.length_unit})",
                tuple(spare_text(one, verdict) for one, verdict in zip(features, found, strict=True)),
            ),
            Column("worst at", tuple(one.worst_rate or NO_VALUE for one in found), right=False, widest=16),
        ),
    )


def _by_columns(brief: Brief, found: Sequence[FeatureVerdict]) -> tuple[Column, ...]:
    """Return which of several jumps must, and which has the least slack."""
    if not any(one.worst_jump is not None for one in found):
        return ()
    return (
        Column("by", tuple(by_text(brief, one.by) for one in found), right=False, widest=24),
        Column("tightest", tuple(one.worst_jump or NO_VALUE for one in found), right=False, widest=16),
    )


def rows_grid(brief: Brief, verdict: Verdict) -> Grid:
    """Return the table of the rows of a level list that fail, with every column that says where they are."""
    rows = verdict.failing_rows
    places = tuple(dict.fromkeys(name for row in rows for name in row.place))
    return Grid(
        left=(Column("row", tuple(row.name for row in rows), right=False, widest=24),),
        middle=(
            Column("in", tuple(row.source for row in rows), right=False),
            *(
                Column(name, tuple(row.place.get(name, "") for row in rows), right=False, widest=20)
                for name in places
            ),
            Column("must", tuple(row.must for row in rows), right=False),
            *_by_columns(brief, rows),
            Column(
                f"spare ({brief.length_unit})", tuple(f"{figure(row.spare, signed=True)}!" for row in rows)
            ),
            Column("worst at", tuple(row.worst_rate or NO_VALUE for row in rows), right=False, widest=16),
        ),
    )


def check_table(brief: Brief, verdict: Verdict) -> RenderableType:
    """Return what check shows: the rates, the score, ledges and gaps with their bands, flags."""
    brief = binding(brief)
    parts: list[RenderableType] = []
    for index, jump in enumerate(verdict.jumps):
        if len(verdict.jumps) > 1:
            parts.append(Text(jump.name, style=TERMINAL["head"]))
        parts.append(rates_grid(brief, verdict, index))
        count = len(check_rows(brief, verdict, index))
        if count > MOST_RATES:
            parts.append(Text(f"{count} rates; shown are the ends and each measure's extremes."))
    if any(jump.targets for jump in brief.jumps):
        parts.append(
            Text("off: deviation in tolerances; an aim counts at the nominal rate, a bound at the worst.")
        )
    parts.append(Text(score_text(verdict)))
    features = features_grid(brief, verdict)
    if features is not None:
        parts.append(features)
        parts.append(Text("At every whole rate from 20 to 1000 Hz:", style=TERMINAL["head"]))
        pairs = zip(brief.features, verdict.features, strict=True)
        parts += [Text(f"  {feature_sentence(feature, found)}") for feature, found in pairs]
    parts += _level_lines(brief, verdict)
    parts += [Text(f"Mind: {flag}") for flag in verdict.flags]
    return Group(*parts)


def _level_lines(brief: Brief, verdict: Verdict) -> list[RenderableType]:
    """Return what becomes of the rows of a level list."""
    if not verdict.rows:
        return []
    fail = len(verdict.failing_rows)
    said = (
        f"Level list: {fail} of {verdict.rows} rows fail"
        if fail
        else f"Level list: all {verdict.rows} rows hold"
    )
    lines: list[RenderableType] = [Text(f"{said}; those that decide stand among the features above.")]
    return [*lines, rows_grid(brief, verdict)] if fail else lines


def score_text(verdict: Verdict) -> str:
    """Return miss, rate spread, cost, worst and violation in one sentence."""
    if verdict.violation is None:
        return "The jump never lands at a rate that counts: no score."
    text = f"Miss {figure(verdict.miss, 2)}, rate spread {figure(verdict.rate_spread, 2)}"
    text += f", cost {figure(verdict.cost, 2)}."
    if verdict.worst is not None:
        whose = f"{verdict.worst.jump}, " if verdict.several else ""
        text += f" Worst: {whose}{verdict.worst.measure}, {figure(verdict.worst.value, 2)} tolerances"
        text += "." if verdict.on_target else " (not on target)." if verdict.worst.value > 1.0 else "."
    if verdict.violation > 0.0:
        text += f" Violation {figure(verdict.violation, 2)}."
    return text


def rule_lines(brief: Brief, verdict: Verdict) -> RenderableType:
    """Return the rule read back as pseudo-code, and the first ticks.

    Of several jumps the first stands whole, the others with the lines in which they differ.
    """
    views = views_of(brief)
    parts: list[RenderableType] = [Text("The rule, read back", style=TERMINAL["head"])]
    codes = [pseudo_code(view, brief.rule, one) for view, one in zip(views, verdict.sets, strict=True)]
    if len(codes) > 1:
        parts.append(Text(f"  {brief.jumps[0].name}:"))
    parts += [Text(f"    {line}") for line in codes[0]]
    for jump, code in zip(brief.jumps[1:], codes[1:], strict=True):
        other = [line for line in code if line not in codes[0]]
        parts.append(Text(f"  {jump.name}: {'the same, but' if other else 'the same'}"))
        parts += [Text(f"    {line}") for line in other]
    for index, (view, constants) in enumerate(zip(views, verdict.sets, strict=True)):
        if codes.index(codes[index]) == index:
            parts += _first_steps(view, constants, named=len(views) > 1)
    return Group(*parts)


def _first_steps(view: Brief, constants: Constants, *, named: bool) -> list[RenderableType]:
    """Return the first ticks of one jump as a table."""
    ticks = first_ticks(view, constants)
    cells = [
        tuple(str(tick.tick) for tick in ticks),
        *(
            tuple(number(getattr(tick, name), 9) for tick in ticks)
            for name in ("v_before", "u", "v_after", "y_after")
        ),
    ]
    heads = ("step", "v before", "u (not rounded)", "v after", "y after")
    head = f"First steps at {view.nominal(constants).name}"
    head = f"{view.jumps[0].name}: f{head[1:]}" if named else head
    return [
        Text(""),
        Text(head, style=TERMINAL["head"]),
        Grid((), tuple(Column(head, column) for head, column in zip(heads, cells, strict=True))),
    ]
