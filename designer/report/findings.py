"""What the pictures show, in sentences that are made from the data before anything is drawn."""

from __future__ import annotations

import re
from collections.abc import Iterator, Sequence

from designer.brief.model import Brief, Gap, Ledge, Rate
from designer.objective.verdict import FeatureVerdict, Verdict
from designer.search.result import Candidate, SearchResult

FULL_RANGE = "20 to 1000 Hz"
CLAUSES = {
    ("ledge", "stay-out"): "opens",
    ("ledge", "reach"): "is out of reach",
    ("gap", "cross"): "is too wide",
    ("gap", "stay-out"): "can be crossed",
}
MOST_BANDS = 3
"""How many bands a title or a sentence names before it counts the others."""


def bands_text(bands: Sequence[str], most: int = MOST_BANDS) -> str:
    """Return bands as they stand in a sentence: "77–83 and 201–250 Hz"; beyond `most` the rest is counted."""
    if not bands:
        return "no rate"
    shown = [band.removesuffix(" Hz") for band in bands[:most]]
    rest = len(bands) - len(shown)
    if rest:
        return f"{', '.join(shown)} Hz and {rest if rest > 1 else 'one'} more band{'s' if rest > 1 else ''}"
    head = ", ".join(shown[:-1])
    return f"{head} and {shown[-1]} Hz" if head else f"{shown[-1]} Hz"


def width_of(bands: Sequence[str]) -> int:
    """Return how many whole rates a list of bands covers."""
    total = 0
    for band in bands:
        ends = [int(part) for part in band.removesuffix(" Hz").split("–")]
        total += ends[-1] - ends[0] + 1
    return total


def features(brief: Brief) -> Iterator[tuple[str, int, Ledge | Gap]]:
    """Yield "ledge" or "gap", the index in its list, and the feature."""
    for index, ledge in enumerate(brief.ledges):
        yield "ledge", index, ledge
    for index, gap in enumerate(brief.gaps):
        yield "gap", index, gap


def judged(verdict: Verdict, kind: str, index: int) -> FeatureVerdict:
    """Return the verdict on one feature."""
    return verdict.ledges[index] if kind == "ledge" else verdict.gaps[index]


def failing_clause(kind: str, must: str, name: str, bands: Sequence[str], most: int = MOST_BANDS) -> str:
    """Return "billboard opens at 201–250 Hz"; a demand that holds everywhere says so."""
    if not bands:
        return f"{name} holds throughout"
    return f"{name} {CLAUSES[kind, must]} at {bands_text(bands, most)}"


def compare(
    kind: str, today: Verdict | None, best: Candidate, brief: Brief, only: Sequence[int] | None = None
) -> str:
    """Return the finding about ledges or gaps: what fails today, where, and what becomes of it.

    `only` names the indices to speak of; None means all. Empty where the brief has none of the kind.
    """
    label = best.label or "the best"
    rows = [
        (index, feature)
        for what, index, feature in features(brief)
        if what == kind and (only is None or index in only)
    ]
    if not rows:
        return ""
    span = supported_span(brief)
    now = {index: judged(best.verdict, kind, index).failing for index, _ in rows}
    if today is not None:
        was = {index: judged(today, kind, index) for index, _ in rows}

        def weight(row: tuple[int, Ledge | Gap]) -> tuple[bool, int]:
            found = was[row[0]]
            return not found.holds, width_of(touching(found.failing, span)) - width_of(now[row[0]])

        index, feature = max(rows, key=weight)
        telling = touching(was[index].failing, span)
        if telling:
            clause = failing_clause(kind, feature.must, feature.name, telling)
            return f"Today {clause}; with {label} {_still(now[index], span)}"
    index, feature = max(rows, key=lambda row: width_of(touching(now[row[0]], span)))
    telling = touching(now[index], span)
    if telling:
        return f"With {label} {failing_clause(kind, feature.must, feature.name, telling)}"
    also = "today and " if today is not None else ""
    whole = not any(now.values()) and (today is None or not any(one.failing for one in was.values()))
    held = rows[0][1].name if len(rows) == 1 else f"Every {kind}"
    return f"{held} holds from {FULL_RANGE if whole else _span_text(span)}, {also}with {label}"


def hz_of(rate: Rate) -> list[float]:
    """Return the rates in Hz that a merged rate names; for steps in ms, what they come to."""
    found: list[float] = []
    for first, last in re.findall(r"(\d+(?:\.\d+)?)(?:–(\d+))? Hz", rate.name):
        found += range(int(first), int(last) + 1) if last else [float(first)]
    return found or [1.0 / rate.step]


def supported_span(brief: Brief) -> tuple[float, float]:
    """Return the lowest and highest rate that counts, supported or nominal, Hz."""
    hz = [value for rate in brief.rates.supported for value in hz_of(rate)]
    if brief.aim_at is not None:
        hz += hz_of(brief.aim_at)
    elif brief.base is not None and brief.base.step is not None:
        hz.append(1.0 / brief.base.step)
    return (min(hz), max(hz)) if hz else (20.0, 1000.0)


def touching(bands: Sequence[str], span: tuple[float, float]) -> tuple[str, ...]:
    """Return the bands that reach into the span of the supported rates."""
    kept = []
    for band in bands:
        ends = [int(part) for part in band.removesuffix(" Hz").split("–")]
        if ends[0] <= span[1] and ends[-1] >= span[0]:
            kept.append(band)
    return tuple(kept)


def _span_text(span: tuple[float, float]) -> str:
    return f"{span[0]:g} to {span[1]:g} Hz"


def _still(bands: Sequence[str], span: tuple[float, float]) -> str:
    """Say where a demand still fails with the best: nowhere, only outside the supported rates, or where."""
    if not bands:
        return "never"
    within = touching(bands, span)
    return f"at {bands_text(within)}" if within else f"at no rate from {_span_text(span)}"


def outside_sentences(
    brief: Brief, kind: str, name: str, verdict: Verdict, only: Sequence[int] | None = None
) -> list[str]:
    """Return what fails beyond the supported rates: nobody's demand, but worth knowing."""
    span = supported_span(brief)
    said = []
    for what, index, feature in features(brief):
        bands = judged(verdict, what, index).failing
        beyond = [band for band in bands if band not in touching(bands, span)]
        if what == kind and beyond and (only is None or index in only):
            said.append(failing_clause(kind, feature.must, feature.name, beyond))
    if len(said) > MOST_BANDS:
        said = [*said[:MOST_BANDS], f"{len(said) - MOST_BANDS} more fail somewhere"]
    return [f"{name}, beyond the supported rates: {'; '.join(said)}."] if said else []


def reach_title(today: Verdict | None, best: Candidate, brief: Brief) -> str:
    """Return the title of the picture of reach against frame rate."""
    found = compare("ledge", today, best, brief)
    return found or spread_title(today, best)


def spread_title(today: Verdict | None, best: Candidate) -> str:
    """Return how far the apex moves over the rates, where there is no ledge to talk about."""
    label = best.label or "the best"
    unsteady = best.verdict.jumps[0].spreads.get("apex")
    with_best = "does not land" if unsteady is None else f"moves by {unsteady:.3g}"
    if today is None:
        return f"With {label} the apex {with_best} over the supported rates"
    was = today.jumps[0].spreads.get("apex")
    with_today = "the jump never lands at some rate" if was is None else f"the apex moves by {was:.3g}"
    return f"Over the supported rates {with_today} today; with {label} it {with_best}"


def front_title(result: SearchResult) -> str:
    """Return what the trade-off shows: whether precision and sameness over the rates pull apart."""
    listed = [c for c in result.shortlist if c.verdict.miss is not None and c.verdict.rate_spread is not None]
    if not listed:
        return "No set makes the jump land at every supported rate"
    closest = min(listed, key=lambda c: (c.verdict.miss or 0.0, c.verdict.rate_spread or 0.0))
    steadiest = min(listed, key=lambda c: (c.verdict.rate_spread or 0.0, c.verdict.miss or 0.0))
    if closest is steadiest:
        return f"{closest.label} is both nearest to what was wanted and steadiest over the rates"
    return (
        f"{closest.label} is nearest to what was wanted (miss {closest.verdict.miss:.2g}), "
        f"{steadiest.label} is steadiest over the rates (spread {steadiest.verdict.rate_spread:.2g})"
    )


def arc_title(name: str, verdict: Verdict, brief: Brief) -> str:
    """Return what the arcs of one set show: whether every demand holds at the supported rates."""
    if not verdict.ledges and not verdict.gaps:
        apex = verdict.jumps[0].nominal.measures.get("apex")
        return f"{name}: apex {apex:.4g}" if apex is not None else f"{name}: the jump never lands"
    broken = [
        (kind, feature, judged(verdict, kind, index))
        for kind, index, feature in features(brief)
        if not judged(verdict, kind, index).holds
    ]
    if not broken:
        return f"{name}: every demand holds at the supported rates"
    kind, feature, found = broken[0]
    more = f", and {len(broken) - 1} more fail{'s' if len(broken) == 2 else ''}" if len(broken) > 1 else ""
    if found.worst_rate is None:
        return f"{name}: the jump never lands at a rate that counts"
    return f"{name}: {feature.name} {CLAUSES[kind, feature.must]} at {found.worst_rate}{more}"
