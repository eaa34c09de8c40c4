"""Verdicts and search results as JSON documents (DEVELOPERS.md), the same bytes everywhere."""

from __future__ import annotations

import json
from collections.abc import Sequence
from dataclasses import asdict
from typing import Any

from designer.motion.rule import SHARED, Constants
from designer.objective.verdict import FeatureVerdict, JumpVerdict, RateRow, Verdict
from designer.search.result import Candidate, Certificate, SearchResult

DIGITS = 12
"""Significant digits of measured numbers: fewer than a double holds, so that machines agree."""

ROW_MEASURES = (
    "apex",
    "apex_time",
    "airtime",
    "landing_speed",
    "max_gap",
    "sure_gap",
    "steps",
    "effective_gravity",
    "flip_margin",
)

Document = dict[str, Any]


def trimmed(value: float | None) -> float | int | None:
    """Return a measured number to DIGITS significant digits; whole ones without a fraction."""
    if value is None:
        return None
    short = float(f"{value:.{DIGITS}g}")
    return int(short) if short.is_integer() and abs(short) < 1e15 else short


def constants_document(constants: Constants, *, several: bool = False) -> Document:
    """Return constants in full; null for no step and no terminal speed.

    gravity_factor is there only where it says something: with several jumps, or where it is not 1.
    """
    document = asdict(constants)
    if not several and constants.gravity_factor == 1.0:
        del document["gravity_factor"]
    return document


def shared_document(constants: Constants) -> Document:
    """Return the constants of which a game with several jumps has one."""
    return {name: getattr(constants, name) for name in SHARED}


def _row(row: RateRow) -> Document:
    measures = {name: trimmed(row.measures[name]) for name in ROW_MEASURES}
    head = {"rate": row.rate, "step": row.step, "supported": row.supported, "status": row.status}
    return {**head, **measures}


def _jump(jump: JumpVerdict, with_rates: bool, several: bool) -> Document:
    constants = constants_document(jump.constants, several=several)
    document: Document = {"name": jump.name, "constants": constants}
    if with_rates:
        document["rates"] = [_row(row) for row in jump.rates]
    document["nominal"] = _row(jump.nominal)
    document["spreads"] = {name: trimmed(value) for name, value in jump.spreads.items()}
    if several:
        document["cost"] = trimmed(jump.cost)
    return document


def _feature(feature: FeatureVerdict) -> Document:
    document: Document = {
        "name": feature.name,
        "by": list(feature.by),
        "must": feature.must,
        "holds": feature.holds,
        "spare": trimmed(feature.spare),
        "worst_rate": feature.worst_rate,
        "failing": list(feature.failing),
    }
    if feature.worst_jump is not None:
        document["worst_jump"] = feature.worst_jump
    if feature.place:
        document["place"] = dict(feature.place)
    return document


def verdict_document(verdict: Verdict, *, with_rates: bool = True) -> Document:
    """Return what `check --json` prints; without the rates it is the body of a candidate."""
    worst = verdict.worst
    document: Document = {
        "constants": shared_document(verdict.constants)
        if verdict.several
        else constants_document(verdict.constants),
        "mark": verdict.mark,
        "jumps": [_jump(jump, with_rates, verdict.several) for jump in verdict.jumps],
        "miss": trimmed(verdict.miss),
        "rate_spread": trimmed(verdict.rate_spread),
        "cost": trimmed(verdict.cost),
        "worst": None
        if worst is None
        else {"value": trimmed(worst.value), "jump": worst.jump, "measure": worst.measure},
        "violation": trimmed(verdict.violation),
        "feasible": verdict.feasible,
        "ledges": [_feature(ledge) for ledge in verdict.ledges],
        "gaps": [_feature(gap) for gap in verdict.gaps],
        "flags": list(verdict.flags),
    }
    for kind, features in (("blocks", verdict.blocks), ("ceilings", verdict.ceilings)):
        if features:
            document[kind] = [_feature(one) for one in features]
    if verdict.rows and with_rates:
        document["levels"] = {
            "rows": verdict.rows,
            "failing": [{**_feature(one), "source": one.source} for one in verdict.failing_rows],
        }
    if verdict.extras:
        document["terms"] = {name: trimmed(value) for name, value in verdict.extras.items()}
    return document


def candidate_document(candidate: Candidate | None) -> Document | None:
    """Return a candidate: label, why and kind of change, then its verdict without the rates."""
    if candidate is None:
        return None
    head = {"label": candidate.label, "why": candidate.why, "change": candidate.change}
    return {**head, **verdict_document(candidate.verdict, with_rates=False)}


def _runner_up(constants: Constants | tuple[Constants, ...], names: Sequence[str]) -> Document:
    """Return the constants of the second best; of several jumps what is everybody's, then each jump's."""
    if isinstance(constants, Constants):
        return constants_document(constants)
    each = [
        {"name": name, "constants": constants_document(one, several=True)}
        for name, one in zip(names, constants, strict=True)
    ]
    return {**shared_document(constants[0]), "jumps": each}


def _certificate(certificate: Certificate | None, names: Sequence[str]) -> Document | None:
    if certificate is None:
        return None
    document = asdict(certificate)
    if certificate.runner_up is not None:
        document["runner_up"] |= {
            "constants": _runner_up(certificate.runner_up.constants, names),
            "cost": trimmed(certificate.runner_up.cost),
            "violation": trimmed(certificate.runner_up.violation),
        }
    return document


def search_document(result: SearchResult) -> Document:
    """Return what `search --json` prints and candidates.json holds.

    "sets" is there only where the brief has [[sets]]; "nearest" and "clashes" only where nothing is feasible.
    """
    best = result.best or result.nearest
    document: Document = {
        "best": candidate_document(result.best),
        "today": candidate_document(result.today),
        "shortlist": [candidate_document(one) for one in result.shortlist],
        "front": [candidate_document(one) for one in result.front],
        "certificate": _certificate(
            result.certificate, [jump.name for jump in best.verdict.jumps] if best else []
        ),
        "evaluations": result.evaluations,
        "seed": result.seed,
    }
    shown = result.best or result.nearest or result.today
    if shown is not None and shown.verdict.several:
        document["findings"] = list(result.findings)
    if result.alone:
        document["alone"] = {name: trimmed(cost) for name, cost in result.alone.items()}
    if result.findings:
        document["findings"] = list(result.findings)
    if result.sets:
        document["sets"] = [candidate_document(one) for one in result.sets]
    if result.best is None:
        document["nearest"] = candidate_document(result.nearest)
        document["clashes"] = [
            {**asdict(clash), "short_by": trimmed(clash.short_by),
             "short_over_rates": trimmed(clash.short_over_rates)}
            for clash in result.clashes
        ]  # fmt: skip
    return document


def to_json(document: Document) -> str:
    """Return a document as text: two spaces a level, non-ASCII letters as they are, a final newline."""
    return json.dumps(document, indent=2, ensure_ascii=False, allow_nan=False) + "\n"
