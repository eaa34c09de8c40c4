"""Verdicts and search results as JSON documents (DEVELOPERS.md), the same bytes everywhere."""

from __future__ import annotations

import json
from dataclasses import asdict
from typing import Any

from designer.motion.rule import Constants
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


def constants_document(constants: Constants) -> Document:
    """Return constants in full; null for no step and no terminal speed."""
    return asdict(constants)


def _row(row: RateRow) -> Document:
    measures = {name: trimmed(row.measures[name]) for name in ROW_MEASURES}
    head = {"rate": row.rate, "step": row.step, "supported": row.supported, "status": row.status}
    return {**head, **measures}


def _jump(jump: JumpVerdict, with_rates: bool) -> Document:
    document: Document = {"name": jump.name, "constants": constants_document(jump.constants)}
    if with_rates:
        document["rates"] = [_row(row) for row in jump.rates]
    document["nominal"] = _row(jump.nominal)
    document["spreads"] = {name: trimmed(value) for name, value in jump.spreads.items()}
    return document


def _feature(feature: FeatureVerdict) -> Document:
    return {
        "name": feature.name,
        "by": list(feature.by),
        "must": feature.must,
        "holds": feature.holds,
        "spare": trimmed(feature.spare),
        "worst_rate": feature.worst_rate,
        "failing": list(feature.failing),
    }


def verdict_document(verdict: Verdict, *, with_rates: bool = True) -> Document:
    """Return what `check --json` prints; without the rates it is the body of a candidate."""
    worst = verdict.worst
    document: Document = {
        "constants": constants_document(verdict.constants),
        "mark": verdict.mark,
        "jumps": [_jump(jump, with_rates) for jump in verdict.jumps],
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
    if verdict.extras:
        document["terms"] = {name: trimmed(value) for name, value in verdict.extras.items()}
    return document


def candidate_document(candidate: Candidate | None) -> Document | None:
    """Return a candidate: label, why and kind of change, then its verdict without the rates."""
    if candidate is None:
        return None
    head = {"label": candidate.label, "why": candidate.why, "change": candidate.change}
    return {**head, **verdict_document(candidate.verdict, with_rates=False)}


def _certificate(certificate: Certificate | None) -> Document | None:
    if certificate is None:
        return None
    document = asdict(certificate)
    if certificate.runner_up is not None:
        document["runner_up"] |= {
            "cost": trimmed(certificate.runner_up.cost),
            "violation": trimmed(certificate.runner_up.violation),
        }
    return document


def search_document(result: SearchResult) -> Document:
    """Return what `search --json` prints and candidates.json holds.

    "sets" is there only where the brief has [[sets]]; "nearest" and "clashes" only where nothing is feasible.
    """
    document: Document = {
        "best": candidate_document(result.best),
        "today": candidate_document(result.today),
        "shortlist": [candidate_document(one) for one in result.shortlist],
        "front": [candidate_document(one) for one in result.front],
        "certificate": _certificate(result.certificate),
        "evaluations": result.evaluations,
        "seed": result.seed,
    }
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
