"""The data of the pictures of reach against frame rate."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import replace
from typing import TYPE_CHECKING

import numpy as np

from designer.analysis.breaks import Break, bound_of, size_of
from designer.brief.model import Brief, Gap, Ledge, Loop
from designer.report import findings, style
from designer.report.figures import Breach, Demand, ReachPicture, Thread
from designer.report.findings import Title
from designer.report.shown import TODAY, View, hz_of
from designer.report.words import number

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]

WORDS = {"reach": "must reach", "cross": "must cross", "stay-out": "must stay out"}


def rate_word(brief: Brief) -> str:
    """Return what a rate is in this brief: "frame rate" or "tick rate"."""
    return "tick rate" if brief.loop is Loop.FIXED else "frame rate"


def steps_vary(brief: Brief) -> bool:
    """Return whether sets run at steps of their own."""
    choice = (brief.search or {}).get("step")
    return brief.loop is Loop.FIXED and (choice is not None and not choice.is_fixed)


def _thread(brief: Brief, view: View, reach: Floats) -> Thread:
    constants = view.shown.constants
    name = style.shorten(view.name)
    at = f" at {brief.nominal(constants).name}" if steps_vary(brief) else ""
    gravity, speed = number(constants.gravity, 6), number(constants.launch_speed, 6)
    label = f"{name}{at}: gravity {gravity}\nlaunch_speed {speed}"
    own = view.nominal if brief.loop is Loop.FIXED else ()
    return Thread(name, label, view.shown.look, view.sweep.rate.astype(np.float64), reach, own)


def _demand(feature: Ledge | Gap, unit: str) -> Demand:
    label = f"{style.shorten(feature.name)}\n{size_of(feature):g} {unit}, {WORDS[feature.must]}"
    return Demand(label, feature.must, size_of(feature), bound_of(feature))


def _breaches(views: Sequence[View], picked: Sequence[Sequence[Break]]) -> tuple[Breach, ...]:
    """Return where each thread breaks each demand, within the rates that count for it and beyond."""
    found = []
    for t, (view, mine) in enumerate(zip(views, picked, strict=True)):
        rate = view.sweep.rate
        inside = (rate >= view.span[0]) & (rate <= view.span[1])
        for d, one in enumerate(mine):
            where = one.outright | one.margin_only
            for part, counts in ((where & inside, True), (where & ~inside, False)):
                if part.any():
                    found.append(Breach(t, d, part, counts))
    return tuple(found)


def _y_range(threads: Sequence[Thread], demands: Sequence[Demand], at: Sequence[Sequence[float]],
             beyond: float = 1.5) -> tuple[float, float]:  # fmt: skip
    """Return a range that shows demands and the rates that count (`at`, Hz for each thread) whole, and of
    the rest `beyond` as much again."""
    core = [value for demand in demands for value in (demand.value, demand.bound)]
    finite: list[float] = []
    for thread, used in zip(threads, at, strict=True):
        around = {whole for hz in used for whole in (math.floor(hz), math.ceil(hz))}
        counts = np.isin(thread.rate, list(around))
        core += [float(v) for v in thread.reach[counts] if np.isfinite(v)]
        finite += [float(v) for v in thread.reach[np.isfinite(thread.reach)]]
    core = core or finite or [0.0, 1.0]
    low, high = min(core), max(core)
    span = max(high - low, 0.04 * max(abs(high), abs(low)), 1e-9)
    if finite:
        low = max(min(low, *finite, low), low - beyond * span)
        high = min(max(high, *finite, high), high + beyond * span)
    return low - 0.1 * span, high + 0.1 * span


def _off_scale(
    threads: Sequence[Thread], views: Sequence[View], y: tuple[float, float], unit: str
) -> list[str]:
    """Return sentences on where a thread leaves the picture."""
    said = []
    for view, thread in zip(views, threads, strict=True):
        with np.errstate(invalid="ignore"):
            sides = ((thread.reach > y[1], np.nanmax, "up to"), (thread.reach < y[0], np.nanmin, "down to"))
        for off, extreme, word in sides:
            if off.any():
                bands = findings.bands_text(findings.bands_of(view, off))
                end = findings.length(float(extreme(thread.reach)), unit, 4)
                said.append(f"{thread.name}: off the scale at {bands}, {word} {end}.")
    return said


def _key(brief: Brief, threads: Sequence[Thread], demands: Sequence[Demand], broken: bool) -> str:
    """Return what the marks of a picture mean, those that it has."""
    said = []
    if brief.rates.supported:
        said.append("triangles: supported rates" + (" (hollow: watched)" if brief.rates.watched else ""))
    if any(thread.own for thread in threads):
        said.append("coloured triangles: a set's own rate")
    if any(demand.bound != demand.value for demand in demands):
        said.append("grey band: margin")
    if broken:
        said.append("hatched: demand broken (pale: beyond the rates that count)")
    return "".join(f"; {one}" for one in said)


def _picture(
    brief: Brief,
    views: Sequence[View],
    reaches: Sequence[Floats],
    picked: Sequence[Sequence[Break]],
    words: tuple[str, str],
    title: Title,
    kind: str,
) -> ReachPicture:
    """Put one picture of reach against rate together.

    `picked` are the breaks of the demands that it is about, for each view; words are subtitle and y label.
    """
    threads = tuple(_thread(brief, view, reach) for view, reach in zip(views, reaches, strict=True))
    demands = tuple(_demand(one.feature, brief.length_unit) for one in picked[0])
    breaches = _breaches(views, picked)
    used = [hz for view in views for hz in view.used]
    y_range = _y_range(threads, demands, [view.used for view in views])
    only = [one.index for one in picked[0]]
    remarks = findings.foot_sentences(views, kind, only, title.told)
    aim = hz_of(brief.aim_at) if brief.aim_at is not None else []
    return ReachPicture(
        title=title.text,
        subtitle=words[0] + _key(brief, threads, demands, bool(breaches)),
        y_label=words[1],
        threads=threads,
        demands=demands,
        breaches=breaches,
        supported=tuple(sorted({*views[0].supported, *aim})),
        watched=tuple(hz for rate in brief.rates.watched for hz in hz_of(rate)),
        span=(min(used), max(used)) if views[0].supported else None,
        y_range=y_range,
        remarks=(*remarks, *_off_scale(threads, views, y_range, brief.length_unit)),
        x_label=f"{rate_word(brief)} (Hz)",
    )


def reach(brief: Brief, views: Sequence[View], title: Title | None = None) -> ReachPicture:
    """Return the picture of the highest ledge that is made at every whole rate."""
    stepped = any(view.shown.constants.step_up for view in views)
    what = "Highest ledge that is made (apex + step_up)" if stepped else "Apex of the jump"
    subtitle = f"{what} at each whole {rate_word(brief)}"
    label = f"{'step_top' if stepped else 'apex'} ({brief.length_unit})"
    ledges = [[one for one in view.breaks if one.kind == "ledge"] for view in views]
    title = title or findings.reach_title(views, brief.length_unit)
    reaches = [view.sweep.step_top for view in views]
    return _picture(brief, views, reaches, ledges, (subtitle, label), title, "ledge")


def reach_panels(brief: Brief, views: Sequence[View]) -> list[ReachPicture]:
    """Return a picture for each set, on one scale, today's in grey beneath."""
    today = [one for one in views if one.name == TODAY]
    pictures, ranges = [], []
    for one in views:
        sets = [one] if one.name == TODAY else [*today, one]
        title = Title(findings.panel_title(one, brief.length_unit), tuple(() for _ in sets))
        picture = reach(brief, sets, title)
        pictures.append(picture)
        # One set that soars beyond the supported rates must not flatten the others' panels.
        ranges.append(_y_range(picture.threads, picture.demands, [view.used for view in sets], 0.3))
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


def gap_reaches(brief: Brief, views: Sequence[View]) -> list[ReachPicture]:
    """Return a picture for each far level and kind of demand: what is crossed at every whole rate."""
    pictures = []
    for level, must in dict.fromkeys((gap.far_level, gap.must) for gap in brief.gaps):
        mine = [i for i, gap in enumerate(brief.gaps) if (gap.far_level, gap.must) == (level, must)]
        picked = [[one for one in v.breaks if one.kind == "gap" and one.index in mine] for v in views]
        side = "level with the take-off" if level == 0.0 else f"at height {number(level)}"
        sure = must == "cross"
        what = "Widest gap that is surely crossed" if sure else "Widest gap that can be crossed"
        label = f"{'sure_gap' if sure else 'max_gap'} ({brief.length_unit})"
        title = findings.compare(views, "gap", mine)
        reaches = [found[0].reach for found in picked]
        words = (f"{what}, far side {side}", label)
        pictures.append(_picture(brief, views, reaches, picked, words, title, "gap"))
    return pictures


def reach_alt(picture: ReachPicture, lone: bool = False) -> str:
    """Return a picture of reach in a few sentences; of a lone panel only what it is about, its last set."""
    lines = [picture.title + "."]
    unit = picture.y_label.partition("(")[2].rstrip(")")
    for thread in picture.threads[-1:] if lone else picture.threads:
        finite = thread.reach[np.isfinite(thread.reach)]
        if len(finite):
            low, high = findings.plain(float(finite.min()), 4), findings.length(float(finite.max()), unit, 4)
            measure = picture.y_label.partition(" (")[0]
            rates = f"{thread.rate[0]:.0f} to {thread.rate[-1]:.0f} Hz"
            lines.append(f"{measure} of {thread.name}: {low} to {high} over {rates}.")
    if lone:
        return " ".join(lines)
    return " ".join([*lines, demands_alt(picture), *picture.remarks]).strip()


def demands_alt(picture: ReachPicture) -> str:
    """Return the lines across a picture as a sentence; empty without any."""
    demands = ", ".join(demand.label.replace("\n", " ") for demand in picture.demands)
    return f"Lines: {demands}." if demands else ""
