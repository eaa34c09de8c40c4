"""What the pictures show, in sentences that are made from the data before anything is drawn."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from designer.analysis.breaks import Break
from designer.brief.model import Block, Brief, Ceiling, Feature, Gap, Ledge
from designer.objective.bands import band_names
from designer.objective.verdict import FeatureVerdict, Verdict
from designer.report.shown import NEAREST, TODAY, View
from designer.report.style import shorten

if TYPE_CHECKING:
    from numpy.typing import NDArray

OUTRIGHT = {
    ("ledge", "stay-out"): "opens",
    ("ledge", "reach"): "is out of reach",
    ("gap", "cross"): "is too wide",
    ("gap", "stay-out"): "can be crossed",
    ("block", "clear"): "is not cleared",
    ("block", "stay-out"): "can be cleared",
    ("ceiling", "stay-under"): "is hit",
}
SHORT_OF_MARGIN = "is short of its margin"
STUCK = "the jump never lands"
BETWEEN = "between supported rates"
MOST_BANDS = 3
"""How many bands a title or a sentence names before it counts the others."""


def quoted(name: str) -> str:
    """Return a name from the brief as it stands in a sentence: “billboard”."""
    return f"“{shorten(name)}”"


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


def failing_clause(
    kind: str, must: str, name: str, bands: Sequence[str], most: int = MOST_BANDS, margin: float | None = None
) -> str:
    """Return "“billboard” opens or is short of its margin at 201–250 Hz"; without a margin it just opens.

    The bands of a verdict do not tell outright failure from a broken margin; the pictures do (`parts`).
    """
    if not bands:
        return f"“{name}” holds throughout"
    what = OUTRIGHT[kind, must] + ("" if margin == 0.0 else f" or {SHORT_OF_MARGIN}")
    return f"“{name}” {what} at {bands_text(bands, most)}"


def judged(verdict: Verdict, kind: str, index: int) -> FeatureVerdict:
    """Return the verdict on one feature."""
    every = {
        "ledge": verdict.ledges, "gap": verdict.gaps, "block": verdict.blocks, "ceiling": verdict.ceilings
    }  # fmt: skip
    return every[kind][index]


def bands_of(view: View, mask: NDArray[np.bool_]) -> tuple[str, ...]:
    """Return the runs of a mask over a view's whole rates in words."""
    return band_names(mask, int(view.sweep.rate[0]))


def touching(bands: Sequence[str], span: tuple[float, float]) -> tuple[str, ...]:
    """Return the bands that reach into a span of rates, both ends included."""
    kept = []
    for band in bands:
        ends = [int(part) for part in band.removesuffix(" Hz").split("–")]
        if ends[0] <= span[1] and ends[-1] >= span[0]:
            kept.append(band)
    return tuple(kept)


def span_text(span: tuple[float, float]) -> str:
    """Return "from 60 to 240 Hz", or "at 50 Hz" for a span of one rate."""
    low, high = (f"{end:.5g}" for end in span)
    return f"at {low} Hz" if low == high else f"from {low} to {high} Hz"


@dataclass(frozen=True, slots=True)
class Part:
    """One way in which one set fails one demand (or lands nowhere), and where."""

    subject: str
    """ "“billboard” opens"."""
    inside: tuple[str, ...]
    """Bands that reach into the rates that count."""
    outside: tuple[str, ...]
    """The other bands."""
    counts: bool
    """Whether it fails at a rate that the brief lists (or the set's own), not only between those."""
    weight: tuple[int, int]
    """What to tell first: the kind of failure, then how many whole rates it covers inside the span."""
    worst: str = ""
    """The worst rate's name, for what fails at a listed rate but at no whole one."""

    def text(self, most: int = MOST_BANDS, where: str = "") -> str:
        """Return "“billboard” opens at 201–250 Hz", or "… opens WHERE, at 201–250 Hz"."""
        at = bands_text(self.inside, most) if self.inside else self.worst
        return f"{self.subject} {where}{', ' if where else ''}at {at}"


def parts(view: View, kind: str = "", only: Sequence[int] | None = None) -> list[Part]:
    """Return how a view fails: never landing first, then what fails where it counts, then between.

    `kind` ("ledge", "gap", "": both) and `only` (indices of it) say which features are meant.
    """
    stuck = ~view.sweep.lands
    never = view.verdict.violation is None
    found = [_part(view, STUCK, stuck, never, 3, "")] if stuck.any() or never else []
    for one in view.breaks:
        if (kind and one.kind != kind) or (only is not None and one.index not in only):
            continue
        found += _feature_parts(view, one)
    return sorted(found, key=lambda part: (part.counts, part.weight), reverse=True)


def _feature_parts(view: View, one: Break) -> Iterator[Part]:
    """Yield how one feature fails: outright, and by its margin only; a listed rate counts where it is not
    a whole one too."""
    verdict = judged(view.verdict, one.kind, one.index)
    name, at_worst = quoted(one.feature.name), _outright_at_worst(one.feature, verdict)
    for outright, mask in ((True, one.outright), (False, one.margin_only)):
        what = OUTRIGHT[one.kind, one.feature.must] if outright else SHORT_OF_MARGIN
        counts = not verdict.holds and verdict.worst_rate is not None and at_worst is outright
        counts = counts or _at_used(view, mask)
        if mask.any() or counts:
            yield _part(view, f"{name} {what}", mask, counts, 2 if outright else 1, verdict.worst_rate or "")


def _outright_at_worst(feature: Ledge | Gap, verdict: FeatureVerdict) -> bool:
    """Return whether the worst rate breaks more than the margin."""
    if verdict.spare is None:
        return True
    beyond = verdict.spare + feature.margin
    return verdict.spare < 0.0 and (beyond <= 0.0 if feature.must == "stay-out" else beyond < 0.0)


def _at_used(view: View, mask: NDArray[np.bool_]) -> bool:
    """Return whether a mask holds at one of the used rates that are whole."""
    return bool(mask[np.isin(view.sweep.rate, view.used)].any())


def _part(view: View, subject: str, mask: NDArray[np.bool_], counts: bool, rank: int, worst: str) -> Part:
    bands = bands_of(view, mask)
    inside = touching(bands, view.span)
    rate = view.sweep.rate
    width = int((mask & (rate >= view.span[0]) & (rate <= view.span[1])).sum())
    outside = tuple(band for band in bands if band not in inside)
    return Part(subject, inside, outside, counts, (rank, width), worst or "a rate that counts")


@dataclass(frozen=True, slots=True)
class State:
    """What one set comes to, as a clause."""

    text: str
    fails: bool
    told: tuple[str, ...] = ()
    """Subjects of parts whose bands inside the span the clause names."""


def state(view: View, subject: str, kind: str = "", only: Sequence[int] | None = None,
          most: int = MOST_BANDS) -> State:  # fmt: skip
    """Return what fails at the rates that count; else between them; else how far `subject` holds."""
    found = parts(view, kind, only)
    counting = [part for part in found if part.counts]
    between = [part for part in found if part.inside and not part.counts]
    if counting:
        first, more = counting[0], len({part.subject.split("”")[0] for part in counting}) - 1
        rest = f", and {more} more fail{'s' if more == 1 else ''}" if more else ""
        return State(first.text(most) + rest, True, (first.subject,))
    if between:
        text = between[0].text(most, BETWEEN)
        return State(text, True, (between[0].subject,))
    rate = view.sweep.rate
    whole = (float(rate[0]), float(rate[-1]))
    return State(f"{subject} holds {span_text(view.span if found else whole)}", False)


@dataclass(frozen=True, slots=True)
class Title:
    """A finding, and which parts of each view it has told."""

    text: str
    told: tuple[tuple[str, ...], ...]


def with_name(name: str) -> str:
    """Return "with A", "with the nearest set"."""
    return "with the nearest set" if name == NEAREST else f"with {shorten(name)}"


def _upper(text: str) -> str:
    return text[:1].upper() + text[1:]


def compare(views: Sequence[View], kind: str, only: Sequence[int] | None = None) -> Title:
    """Return the finding about ledges or gaps of today (where there is one) and the best, the last view."""
    features = [one.feature for one in views[-1].breaks
                if one.kind == kind and (only is None or one.index in only)]  # fmt: skip
    subject = quoted(features[0].name) if len(features) == 1 else f"every {kind}"
    states = [state(view, subject, kind, only) for view in views]
    told = tuple(one.told for one in states)
    names = ["today" if view.name == TODAY else with_name(view.name) for view in views]
    if len(views) == 1:
        return Title(_upper(f"{names[0]} {states[0].text}"), told)
    if any(one.fails for one in states):
        both = "; ".join(f"{name} {one.text}" for name, one in zip(names, states, strict=True))
        return Title(_upper(both), told)
    first, second = (one.text.removeprefix(f"{subject} holds ") for one in states)
    if first == second:
        return Title(_upper(f"{subject} holds {first}, {names[0]} and {names[1]}"), told)
    return Title(_upper(f"{subject} holds {first} {names[0]} and {second} {names[1]}"), told)


def foot_sentences(
    views: Sequence[View], kind: str, only: Sequence[int] | None, told: Sequence[Sequence[str]]
) -> list[str]:
    """Return what the title has left out: first what fails among the rates that count, then beyond them."""
    inside, outside = [], []
    for view, said in zip(views, told, strict=True):
        found = parts(view, kind, only)
        here = [part.text() for part in found if part.inside and part.subject not in said]
        if here:
            inside.append(f"{shorten(view.name)}, {span_text(view.span)}: {_listed(here)}.")
        there = [f"{part.subject} at {bands_text(part.outside)}" for part in found if part.outside]
        if there:
            beyond = "beyond the supported rates" if view.supported else "at other rates"
            outside.append(f"{shorten(view.name)}, {beyond}: {_listed(there)}.")
    return inside + outside


def _listed(clauses: Sequence[str]) -> str:
    rest = len(clauses) - MOST_BANDS
    more = [f"{rest} more fail{'s' if rest == 1 else ''} somewhere"] if rest > 0 else []
    return "; ".join([*clauses[:MOST_BANDS], *more])


def reach_title(views: Sequence[View], unit: str = "") -> Title:
    """Return the title of the picture of reach against frame rate; without ledges it is about the apex."""
    if any(one.kind == "ledge" for one in views[-1].breaks):
        return compare(views, "ledge")
    return Title(spread_title(views, unit), tuple(() for _ in views))


def spread_title(views: Sequence[View], unit: str = "") -> str:
    """Return how far the apex moves over the rates that count, or how high it is where there is but one."""
    names = ["today" if view.name == TODAY else with_name(view.name) for view in views]
    single = all(len(view.used) == 1 for view in views)
    said, stuck = [], []
    for name, view in zip(names, views, strict=True):
        jump = view.verdict.jumps[0]
        value = jump.nominal.measures["apex"] if single else jump.spreads.get("apex")
        if value is None:
            stuck.append(f"{name} {STUCK}" + ("" if single else " at some rate"))
        else:
            said.append(f"{'' if single else 'by '}{length(value, unit, 4 if single else 3)} {name}")
    start = "The apex is" if single else "Over the supported rates the apex moves"
    return _upper("; ".join([f"{start} {' and '.join(said)}", *stuck] if said else stuck))


def length(value: float, unit: str, digits: int = 3) -> str:
    """Return a length with its unit, in plain decimals: "0.0812 m"."""
    return f"{plain(value, digits)} {unit}".rstrip()


def plain(value: float, digits: int = 3) -> str:
    """Return a number to so many significant digits, never with an exponent: "0.00005"."""
    if value == 0.0 or not math.isfinite(value):
        return f"{value:g}"
    places = max(0, digits - 1 - math.floor(math.log10(abs(value))))
    text = f"{value:.{places}f}"
    return text.rstrip("0").rstrip(".") if "." in text else text


def panel_title(view: View, unit: str = "") -> str:
    """Return what one panel of reach shows: "B: “billboard” opens at 334–360 Hz"."""
    name = shorten(view.name)
    ledges = [one.feature for one in view.breaks if one.kind == "ledge"]
    if not ledges:
        spread = view.verdict.jumps[0].spreads.get("apex")
        return f"{name}: " + (STUCK if spread is None else f"apex moves by {length(spread, unit)}")
    subject = quoted(ledges[0].name) if len(ledges) == 1 else "every ledge"
    return f"{name}: {state(view, subject, 'ledge', most=2).text}"


def arc_title(view: View, unit: str = "") -> str:
    """Return what the arcs of one set show: every demand at the rates drawn, and what breaks between them."""
    name = shorten(view.name)
    verdict = view.verdict
    # Blocks and ceilings are not swept over the rates: what the verdict says of them is all there is.
    unswept = [("block", one) for one in verdict.blocks] + [("ceiling", one) for one in verdict.ceilings]
    broken = [(kind, one) for kind, one in unswept if not one.holds and one.worst_rate is not None]
    if broken:
        kind, one = broken[0]
        rest = (
            f", and {len(broken) - 1} more fail{'s' if len(broken) == 2 else ''}" if len(broken) > 1 else ""
        )
        return f"{name}: {failing_clause(kind, one.must, one.name, [str(one.worst_rate)])}{rest}"
    if not view.breaks and not unswept:
        apex = view.verdict.jumps[0].nominal.measures.get("apex")
        return f"{name}: {STUCK}" if apex is None else f"{name}: apex {length(apex, unit, 4)}"
    found = state(view, "", most=2)
    if found.fails and any(part.counts for part in parts(view)):
        return f"{name}: {found.text}"
    where = "at its own rate" if not view.supported else "at the supported rates"
    held = f"{name}: every demand holds {where}"
    if not found.fails:
        return held
    return f"{held}; between them {found.text.replace(f' {BETWEEN},', '')}"


def kind_of(feature: Feature) -> str:
    """Return "ledge", "gap", "block" or "ceiling"."""
    if isinstance(feature, Gap):
        return "gap"
    if isinstance(feature, Block):
        return "block"
    return "ceiling" if isinstance(feature, Ceiling) else "ledge"


def features(brief: Brief) -> Iterator[tuple[str, int, Feature]]:
    """Yield "ledge", "gap", "block" or "ceiling", the index in its list, and the feature."""
    lists: tuple[Sequence[Feature], ...] = (brief.ledges, brief.gaps, brief.blocks, brief.ceilings)
    for every in lists:
        for index, feature in enumerate(every):
            yield kind_of(feature), index, feature
