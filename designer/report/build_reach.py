"""The data of the pictures of reach against frame rate."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from typing import TYPE_CHECKING

import numpy as np

from designer.analysis.sweep import LOW_HZ, RateReach, reach_by_rate
from designer.brief.model import Brief, Gap, Ledge, Loop
from designer.objective.bands import band_names
from designer.report import findings, style
from designer.report.figures import Breach, Demand, ReachPicture, Thread
from designer.report.shown import Shown, pair, shown
from designer.report.words import number
from designer.search.result import Candidate, SearchResult

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]

WORDS = {"reach": "must reach", "cross": "must cross", "stay-out": "must stay out"}
KEY = "triangles: supported rates (hollow: watched); grey band: margin; hatched: demand broken"


def rate_word(brief: Brief) -> str:
    """Return what a rate is in this brief: "frame rate" or "tick rate"."""
    return "tick rate" if brief.loop is Loop.FIXED else "frame rate"


def _thread(one: Shown, sweep: RateReach, reach: Floats) -> Thread:
    constants = one.constants
    name = "today" if one.name == "today" else style.shorten(one.name)
    label = f"{name}: gravity {constants.gravity:g}\nlaunch_speed {constants.launch_speed:g}"
    return Thread(label, one.look, sweep.rate.astype(np.float64), reach)


def _demand(feature: Ledge | Gap, unit: str) -> Demand:
    value = feature.height if isinstance(feature, Ledge) else feature.width
    sign = -1.0 if feature.must == "stay-out" else 1.0
    label = f"{style.shorten(feature.name)}\n{value:g} {unit}, {WORDS[feature.must]}"
    return Demand(label, feature.must, value, value + sign * feature.margin)


def _breaches(
    threads: Sequence[Thread], demands: Sequence[Demand], span: tuple[float, float]
) -> tuple[Breach, ...]:
    """Return where each thread breaks each demand (float noise aside), in the supported span and beyond."""
    found = []
    for t, thread in enumerate(threads):
        supported = (thread.rate >= span[0]) & (thread.rate <= span[1])
        for d, demand in enumerate(demands):
            short = demand.bound - thread.reach if demand.must != "stay-out" else thread.reach - demand.bound
            where = np.nan_to_num(short, nan=-1.0) > 1e-9
            for part, counts in ((where & supported, True), (where & ~supported, False)):
                if part.any():
                    found.append(Breach(t, d, part, counts))
    return tuple(found)


def _y_range(threads: Sequence[Thread], demands: Sequence[Demand], at: Sequence[float],
             beyond: float = 1.5) -> tuple[float, float]:  # fmt: skip
    """Return a range that shows demands and supported rates whole, and of the rest `beyond` as much again."""
    core = [value for demand in demands for value in (demand.value, demand.bound)]
    finite: list[float] = []
    for thread in threads:
        supported = np.isin(thread.rate, np.round(np.asarray(at)))
        core += [float(v) for v in thread.reach[supported] if np.isfinite(v)]
        finite += [float(v) for v in thread.reach[np.isfinite(thread.reach)]]
    core = core or finite or [0.0, 1.0]
    low, high = min(core), max(core)
    span = max(high - low, 0.04 * max(abs(high), abs(low)), 1e-9)
    if finite:
        low = max(min(low, *finite, low), low - beyond * span)
        high = min(max(high, *finite, high), high + beyond * span)
    return low - 0.1 * span, high + 0.1 * span


def _remarks(
    brief: Brief,
    sets: Sequence[Shown],
    threads: Sequence[Thread],
    y: tuple[float, float],
    about: tuple[str, Sequence[int] | None],
) -> list[str]:
    """Return sentences on what the title leaves out: never landing, off the scale, beyond supported rates."""
    said = []
    for one, thread in zip(sets, threads, strict=True):
        stuck = ~np.isfinite(thread.reach)
        if stuck.any():
            bands = findings.bands_text(band_names(stuck, LOW_HZ))
            said.append(f"{one.name}: the jump never lands at {bands}.")
        for off, extreme, word in (
            (thread.reach > y[1], np.nanmax, "up to"),
            (thread.reach < y[0], np.nanmin, "down to"),
        ):
            if off.any():
                bands = findings.bands_text(band_names(off, LOW_HZ))
                said.append(f"{one.name}: off the scale at {bands}, {word} {extreme(thread.reach):.4g}.")
        said += findings.outside_sentences(brief, about[0], one.name, one.verdict, about[1])
    return said


def _picture(brief: Brief, sets: Sequence[Shown], reaches: Sequence[tuple[RateReach, Floats]],
             demands: tuple[Demand, ...], words: tuple[str, str, str],
             about: tuple[str, Sequence[int] | None]) -> ReachPicture:  # fmt: skip
    """Put one picture of reach against rate together; words are title, subtitle, y label.

    `about` is "ledge" or "gap", and the indices of those that the picture is about (None: all).
    """
    threads = tuple(_thread(one, *found) for one, found in zip(sets, reaches, strict=True))
    supported = tuple(hz for rate in brief.rates.supported for hz in findings.hz_of(rate))
    y_range = _y_range(threads, demands, supported)
    return ReachPicture(
        title=words[0],
        subtitle=words[1],
        y_label=words[2],
        threads=threads,
        demands=demands,
        breaches=_breaches(threads, demands, findings.supported_span(brief)),
        supported=supported,
        watched=tuple(hz for rate in brief.rates.watched for hz in findings.hz_of(rate)),
        y_range=y_range,
        remarks=tuple(_remarks(brief, sets, threads, y_range, about)),
        x_label=f"{rate_word(brief)} (Hz)",
    )


def reach_title(brief: Brief, result: SearchResult, best: Candidate) -> str:
    """Return the finding of the picture of reach against rate."""
    today = None if result.today is None else result.today.verdict
    return findings.reach_title(today, best, brief)


def reach(brief: Brief, sets: Sequence[Shown], title: str) -> ReachPicture:
    """Return the picture of the highest ledge that is made at every whole rate."""
    sweeps = [reach_by_rate(brief, one.constants) for one in sets]
    demands = tuple(_demand(ledge, brief.length_unit) for ledge in brief.ledges)
    stepped = any(one.constants.step_up for one in sets)
    what = "Highest ledge that is made (apex + step_up)" if stepped else "Apex of the jump"
    subtitle = f"{what} at each whole {rate_word(brief)}"
    if demands:
        subtitle += f"; {KEY}"
    label = f"{'step_top' if stepped else 'apex'} ({brief.length_unit})"
    return _picture(
        brief, sets, [(s, s.step_top) for s in sweeps], demands, (title, subtitle, label), ("ledge", None)
    )


def reach_panels(brief: Brief, result: SearchResult) -> list[ReachPicture]:
    """Return a picture for each set, on one scale, today's in grey beneath."""
    rows = shown(result)
    today = [one for one in rows if one.name == "today"]
    pictures = []
    for one in rows:
        sets = [one] if one.name == "today" else [*today, one]
        pictures.append(reach(brief, sets, panel_title(brief, one)))
    # One set that soars beyond the supported rates must not flatten the others' panels.
    ranges = [_y_range(p.threads, p.demands, p.supported, 0.3) for p in pictures]
    low, high = min(r[0] for r in ranges), max(r[1] for r in ranges)
    return [
        replace(
            p, subtitle="", breaches=_own(p), y_range=(low, high), remarks=(), label_threads=False, small=True
        )
        for p in pictures
    ]


def _own(picture: ReachPicture) -> tuple[Breach, ...]:
    """Return the breaches of the panel's own set, the last thread."""
    return tuple(b for b in picture.breaches if b.thread == len(picture.threads) - 1)


def panel_title(brief: Brief, one: Shown) -> str:
    """Return what one panel shows: "B: billboard opens at 334–360 Hz"."""
    name = style.shorten(one.name)
    if not brief.ledges:
        spread = one.verdict.jumps[0].spreads.get("apex")
        return f"{name}: " + ("does not land" if spread is None else f"apex moves by {spread:.3g}")
    span = findings.supported_span(brief)
    pairs = zip(brief.ledges, one.verdict.ledges, strict=True)
    failing = [(ledge, findings.touching(found.failing, span)) for ledge, found in pairs]
    ledge, bands = max(failing, key=lambda pair: findings.width_of(pair[1]))
    if not bands:
        return f"{name}: every ledge holds, {span[0]:g}–{span[1]:g} Hz"
    return f"{name}: {findings.failing_clause('ledge', ledge.must, ledge.name, bands, most=2)}"


def gap_reaches(brief: Brief, result: SearchResult, best: Candidate) -> list[ReachPicture]:
    """Return a picture for each far level and kind of demand: what is crossed at every whole rate."""
    sets = pair(result, best)
    sweeps = [reach_by_rate(brief, one.constants) for one in sets]
    today = None if result.today is None else result.today.verdict
    pictures = []
    for level, must in dict.fromkeys((gap.far_level, gap.must) for gap in brief.gaps):
        mine = [i for i, gap in enumerate(brief.gaps) if (gap.far_level, gap.must) == (level, must)]
        demands = tuple(_demand(brief.gaps[i], brief.length_unit) for i in mine)
        sure = must == "cross"
        reaches = [(s, s.gaps[level].sure_gap if sure else s.gaps[level].max_gap) for s in sweeps]
        side = "level with the take-off" if level == 0.0 else f"at height {number(level)}"
        what = "Widest gap that is surely crossed" if sure else "Widest gap that can be crossed"
        subtitle = f"{what}, far side {side}; {KEY}"
        title = findings.compare("gap", today, best, brief, mine)
        label = f"{'sure_gap' if sure else 'max_gap'} ({brief.length_unit})"
        pictures.append(_picture(brief, sets, reaches, demands, (title, subtitle, label), ("gap", mine)))
    return pictures


def reach_alt(picture: ReachPicture) -> str:
    """Return a picture of reach in a few sentences."""
    lines = [picture.title + "."]
    for thread in picture.threads:
        finite = thread.reach[np.isfinite(thread.reach)]
        name = thread.label.split(":")[0]
        if len(finite):
            span = f"between {finite.min():.4g} and {finite.max():.4g}"
            lines.append(f"{picture.y_label} of {name} lies {span} from 20 to 1000 Hz.")
        else:
            lines.append(f"{name} never lands.")
    demands = ", ".join(demand.label.replace("\n", " ") for demand in picture.demands)
    return " ".join([*lines, f"Lines: {demands}." if demands else "", *picture.remarks]).strip()
