"""What the pictures show, in sentences that are made from the data before anything is drawn."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from designer.brief.model import Brief, Gap, Ledge
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
        return f"{', '.join(shown)} Hz and {rest} more band{'s' if rest > 1 else ''}"
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
        return f"{name} holds from {FULL_RANGE}"
    return f"{name} {CLAUSES[kind, must]} at {bands_text(bands, most)}"


def compare(kind: str, today: Verdict | None, best: Candidate, brief: Brief) -> str:
    """Return the finding about ledges or gaps: what fails today, where, and what becomes of it."""
    label = best.label or "the best"
    rows = [(index, feature) for what, index, feature in features(brief) if what == kind]
    if not rows:
        return ""
    now = {index: judged(best.verdict, kind, index).failing for index, _ in rows}
    if today is not None:
        was = {index: judged(today, kind, index).failing for index, _ in rows}
        index, feature = max(rows, key=lambda row: width_of(was[row[0]]) - 0.5 * width_of(now[row[0]]))
        if was[index]:
            clause = failing_clause(kind, feature.must, feature.name, was[index])
            return f"Today {clause}; with {label} {_still(now[index])}"
    index, feature = max(rows, key=lambda row: width_of(now[row[0]]))
    if now[index]:
        return f"With {label} {failing_clause(kind, feature.must, feature.name, now[index])}"
    also = "today and " if today is not None else ""
    return f"Every {kind} holds from {FULL_RANGE}, {also}with {label}"


def _still(bands: Sequence[str]) -> str:
    return f"at {bands_text(bands)}" if bands else "never"


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


def arc_title(name: str, verdict: Verdict) -> str:
    """Return what the arcs of one set show: whether every demand holds at the supported rates."""
    broken = [one.name for one in (*verdict.ledges, *verdict.gaps) if not one.holds]
    said = name if name == "today" else f"set {name}"
    said = said[0].upper() + said[1:]
    if not verdict.ledges and not verdict.gaps:
        apex = verdict.jumps[0].nominal.measures.get("apex")
        return f"{said}: apex {apex:.4g}" if apex is not None else f"{said}: the jump never lands"
    if not broken:
        return f"{said}: every ledge and gap holds at every supported rate"
    more = f" and {len(broken) - 2} more" if len(broken) > 2 else ""
    return f"{said}: {' and '.join(broken[:2])}{more} fail{'s' if len(broken) == 1 else ''}"
