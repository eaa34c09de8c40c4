"""After a search over several jumps: who is out of tolerance, who pulls the other way, what would do.

Everything said is computed: where each jump would take its gravity by itself (see `designer.search.alone`),
and what a gravity_factor does, which was tried on the whole set.
"""

from __future__ import annotations

import math
from collections.abc import Mapping

from designer.brief.model import Brief
from designer.motion.measures import MEASURES
from designer.objective.judge import judge
from designer.objective.rows import binding
from designer.objective.verdict import JumpVerdict, TargetVerdict, Verdict
from designer.search.alone import FACTORS, Alone, alone, with_followers

ENDS = {"length": ("low", "high"), "time": ("short", "long"), "speed": ("slow", "fast")}
"""What is said of a measure below and above what is wanted, by its kind; low and high for the rest."""
REACHES = ("max_gap", "sure_gap")
WORTH_TELLING = 0.8
"""A gravity_factor that leaves more than this share of a deviation is no help."""


def find_out(brief: Brief, verdict: Verdict) -> tuple[str, ...]:
    """Return a sentence on each of several jumps that a set leaves out of tolerance; empty for one jump."""
    if not brief.several or any(jump.nominal.status != "lands" for jump in verdict.jumps):
        return ()
    deciding = binding(brief)  # of a long level list only the rows that decide
    verdict = judge(deciding, verdict.sets, bands=False)
    out = [jump for jump in verdict.jumps if _worst(jump) is not None]
    if not out:
        return ()
    found = {jump.name: alone(deciding, verdict, jump.name) for jump in verdict.jumps}
    return tuple(_sentence(deciding, verdict, jump, found) for jump in out)


def _worst(jump: JumpVerdict) -> TargetVerdict | None:
    """Return the target that is farthest out of tolerance; None where none is."""
    out = [one for one in jump.targets if one.deviation is not None and abs(one.deviation) > 1.0]
    return max(out, key=lambda one: abs(one.deviation or 0.0), default=None)


def _sentence(brief: Brief, verdict: Verdict, jump: JumpVerdict, found: Mapping[str, Alone]) -> str:
    target = _worst(jump)
    if target is None or target.deviation is None:
        raise ValueError(f"{jump.name} is within its tolerances")
    measure, off = target.target.measure, target.deviation
    end = ENDS.get(MEASURES[measure], ("low", "high"))[off > 0.0]
    if measure in REACHES:
        end = "far" if off > 0.0 else "short"
    ends = f"{jump.name}'s {measure} ends {abs(off):.3g} tolerances {end}"
    remedy = _remedy(brief, verdict, jump, found[jump.name])
    if remedy is None:
        return f"{ends}; no gravity_factor from {FACTORS[0]:g} to {FACTORS[-1]:g} alone would do much for it"
    other = _opponent(brief, verdict, jump, found)
    if other is not None:
        ends = f"one gravity cannot serve {jump.name} and {other}: {ends}"
    return f"{ends}; {remedy}"


def _opponent(brief: Brief, verdict: Verdict, jump: JumpVerdict, found: Mapping[str, Alone]) -> str | None:
    """Return the jump that wants gravity moved the other way most; None where none does."""
    changed = with_followers(brief, verdict, jump.name, found[jump.name])
    followers = {one.name for one, own in zip(verdict.jumps, changed, strict=True) if own != one.constants}

    def pull(one: JumpVerdict) -> float:
        """Return how far a jump would move its gravity, as a logarithm; 0 where that gains nothing."""
        change = found[one.name]
        return math.log(change.factor / one.constants.gravity_factor) if change.better else 0.0

    own = pull(jump)
    others = [
        (pull(one), one.name) for one in verdict.jumps if pull(one) * own < 0.0 and one.name not in followers
    ]
    return max(others, key=lambda one: abs(one[0]))[1] if others else None


def _remedy(brief: Brief, verdict: Verdict, jump: JumpVerdict, change: Alone) -> str | None:
    """Return what a gravity_factor of its own does for a jump, having tried it; None where that is little."""
    if not change.better:
        return None
    sets = with_followers(brief, verdict, jump.name, change)
    tried = judge(brief, sets, bands=False)
    before, after = _off(jump), _off(next(one for one in tried.jumps if one.name == jump.name))
    if after > max(1.0, WORTH_TELLING * before):
        return None
    what = f"gravity_factor {change.factor:g} for {jump.name}"
    if change.launch_speed != jump.constants.launch_speed:
        what += f" (with launch_speed {change.launch_speed:.6g})"
    told = f"{what} would do: {after:.2g} tolerances off at worst"
    if after > 1.0:
        told = f"{what} would bring it to {after:.3g}"
    # What follows this jump may pay for it; what others break already is not this one's to mend.
    spoiled = [
        f"{new.name} {_off(new):.3g} off"
        for old, new in zip(verdict.jumps, tried.jumps, strict=True)
        if new.name != jump.name and _off(new) > max(1.0, _off(old))
    ]
    if (tried.violation or 0.0) > (verdict.violation or 0.0):
        spoiled.append("a ledge or gap failing")
    return told + (f", but with {' and '.join(spoiled)}" if spoiled else "")


def _off(jump: JumpVerdict) -> float:
    """Return the largest deviation of a jump, in tolerances; infinite where it does not land."""
    if jump.nominal.status != "lands":
        return math.inf
    return max((abs(one.deviation) for one in jump.targets if one.deviation is not None), default=0.0)
