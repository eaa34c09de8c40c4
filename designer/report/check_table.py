"""What `check` shows: every rate with every target, ledges and gaps with their bands, the rule read back."""

from __future__ import annotations

from collections.abc import Sequence

from rich.console import Group, RenderableType
from rich.text import Text

from designer.brief.model import Brief, Gap, Ledge, Target
from designer.motion.measures import unit_of
from designer.motion.rule import Constants
from designer.objective.verdict import RateRow, Verdict
from designer.report.cells import decimals, deviation_text, figure, spare_text
from designer.report.grid import Column, Grid
from designer.report.style import TERMINAL
from designer.report.words import NO_VALUE, demand_text, feature_sentence, first_ticks, number, pseudo_code

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
    features: list[Ledge | Gap] = [*brief.ledges, *brief.gaps]
    found = [*verdict.ledges, *verdict.gaps]
    if not features:
        return None
    return Grid(
        left=(Column("ledge or gap", tuple(one.name for one in features), right=False, widest=24),),
        middle=(
            Column("demand", tuple(demand_text(one) for one in features), right=False, widest=28),
            Column("holds", tuple("yes" if one.holds else "no!" for one in found), right=False),
            Column(
                f"spare ({brief.length_unit})",
                tuple(spare_text(one, verdict) for one, verdict in zip(features, found, strict=True)),
            ),
            Column("worst at", tuple(one.worst_rate or NO_VALUE for one in found), right=False, widest=16),
        ),
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
        parts.append(
            Text("off: deviation in tolerances; an aim counts at the nominal rate, a bound at the worst.")
        )
    parts.append(Text(score_text(verdict)))
    features = features_grid(brief, verdict)
    if features is not None:
        parts.append(features)
        parts.append(Text("At every whole rate from 20 to 1000 Hz:", style=TERMINAL["head"]))
        every: list[Ledge | Gap] = [*brief.ledges, *brief.gaps]
        pairs = zip(every, [*verdict.ledges, *verdict.gaps], strict=True)
        parts += [Text(f"  {feature_sentence(feature, found)}") for feature, found in pairs]
    parts += [Text(f"Mind: {flag}") for flag in verdict.flags]
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
        *(
            tuple(number(getattr(tick, name), 9) for tick in ticks)
            for name in ("v_before", "u", "v_after", "y_after")
        ),
    ]
    heads = ("step", "v before", "u (not rounded)", "v after", "y after")
    parts += [
        Text(""),
        Text(f"First steps at {brief.nominal(constants).name}", style=TERMINAL["head"]),
        Grid((), tuple(Column(head, column) for head, column in zip(heads, cells, strict=True))),
    ]
    return Group(*parts)
