"""A search over several jumps from brief to proposals, and what several jumps show that no single one can."""

import json
import math
import subprocess
import sys
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from designer.brief.model import Brief, Choice, Ledge, Loop, Target
from designer.motion.rule import Constants, Rounding, Rule
from designer.objective.modules import load_objective
from designer.search.found import by_scan
from designer.search.looks import judged_set
from designer.search.progress import Silent
from designer.search.result import SearchResult
from designer.search.run import search
from designer.search.several.assign import build_several, deciding_key
from designer.search.several.scan import scan_several
from designer.search.several.study import SeveralEvaluator
from designer.search.space import build_space
from tests.reference.search_briefs import ms, points
from tests.reference.several_briefs import SETS, three_jumps
from tests.reference.several_games import EIGHT, One, among, billion, game, height, time

ROOT = Path(__file__).parents[3]
RULE = Rule("semi-implicit", Rounding(at="end"))
HEAVY = One("heavy", (height(130.0), time(0.79)), {"launch_speed": points(450.0, 750.0, 3.0)})
HOP = One("hop", (height(72.0), time(0.66)), {"launch_speed": points(350.0, 650.0, 3.0)})
DASH = One("dash", (height(110.0), time(0.68)), {"launch_speed": points(450.0, 750.0, 3.0)})
SHARED = {"gravity": points(1100.0, 2200.0, 10.0), "grain": among(0.0, 0.125, 1.0)}


def gravity_of(result: SearchResult) -> float:
    assert result.best is not None
    return result.best.verdict.constants.gravity


def off(result: SearchResult) -> dict[str, float]:
    """How far each jump's worst target is off, in tolerances."""
    assert result.best is not None
    return {
        jump.name: max((target.deviation or 0.0 for target in jump.targets), key=abs)
        for jump in result.best.verdict.jumps
    }


def test_three_jumps_want_three_gravities_and_get_one() -> None:
    """8·height/time² is 1666, 1322 and 1903: alone each has its own; together one, with two of them well off.

    Then the jump that asks for the least may scale gravity for itself, and the others' tension is left.
    """
    alone = [gravity_of(search(game(RULE, SHARED, EIGHT, one))) for one in (HEAVY, HOP, DASH)]
    for found, textbook in zip(alone, (1666.0, 1322.0, 1903.0), strict=True):
        assert found == pytest.approx(textbook, rel=0.06)
    together = search(game(RULE, SHARED, EIGHT, HEAVY, HOP, DASH))
    assert min(alone) < gravity_of(together) < max(alone)
    assert off(together)["hop"] < -2.0
    assert off(together)["dash"] > 2.0
    own = replace(HOP, own={**HOP.own, "gravity_factor": points(0.7, 1.0, 0.01)})
    freed = search(game(RULE, SHARED, EIGHT, HEAVY, own, DASH))
    assert freed.best is not None
    assert together.best is not None
    assert freed.best.verdict.cost < 0.75 * together.best.verdict.cost
    hop = freed.best.verdict.jumps[1].constants
    assert hop.gravity_factor < 0.85
    assert hop.pull == pytest.approx(1322.0, rel=0.06)
    assert abs(off(freed)["hop"]) <= 1.0
    assert freed.alone["hop"] <= together.alone["hop"]  # with more to choose from, no jump fares worse alone


def test_hundreds_of_millions_and_a_billion_are_certified() -> None:
    for brief, least in ((game(RULE, SHARED, EIGHT, HEAVY, HOP, DASH), 3.4e8), (billion(), 1.1e9)):
        space = build_several(brief)
        assert space.size > least
        found = scan_several(brief, space, workers=2)
        assert found.certificate.complete
        assert found.certificate.grid_points == space.size
        assert found.evaluated < 1e-3 * space.size
        assert found.best is not None
        assert found.runner_up is not None
        assert found.best.cost <= found.runner_up.cost


MEMORY = """
import resource
from designer.search.run import search
from tests.reference.several_games import billion
assert search(billion()).certificate.grid_points > 1.1e9
print(resource.getrusage(resource.RUSAGE_SELF).ru_maxrss)
"""


def test_a_billion_takes_less_than_a_gigabyte() -> None:
    run = subprocess.run(
        [sys.executable, "-c", MEMORY], capture_output=True, text=True, cwd=ROOT, check=False
    )
    assert run.returncode == 0, run.stderr
    unit = 1 if sys.platform == "darwin" else 1024  # bytes there, kilobytes elsewhere
    assert int(run.stdout) * unit < 1 << 30


def test_a_part_of_the_billion_equals_every_set() -> None:
    """Around the certified best, all 4 · 5⁴ neighbours scored one by one: none is cheaper."""
    brief = billion()
    found = scan_several(brief, build_several(brief))
    assert found.best is not None
    best = found.chooser.constants(found.best.chosen)
    variables = list(brief.variables)
    for k, one in enumerate(variables):
        values = one.choice.values or ()
        if one.name.endswith("launch_speed") or one.name == "gravity":
            jump = next((n for n, j in enumerate(brief.jumps) if j.name == one.name.partition(".")[0]), 0)
            now = best[jump].launch_speed if "launch" in one.name else best[0].gravity
            at = values.index(now)
            variables[k] = replace(one, choice=among(*values[max(0, at - 2) : at + 3]))
    near = replace(brief, variables=tuple(variables))
    space = build_several(near)
    evaluator = SeveralEvaluator(near, space)
    every = np.stack(np.meshgrid(*(axis.points for axis in space.axes), indexing="ij"), axis=-1)
    every = every.reshape(-1, len(space.axes))
    assert len(every) == 5 * 4 * 5**4
    cost = evaluator(every).cost
    assert float(cost.min()) == found.best.cost
    again = scan_several(near, space)
    assert again.best is not None
    assert again.chooser.constants(again.best.chosen) == best


def test_one_jump_of_jumps_finds_what_a_brief_without_finds() -> None:
    brief = game(RULE, SHARED, EIGHT[3:], HOP, ledges=(Ledge("sill", 70.0, "reach", 1.0, ("hop",)),))
    found = search(brief)
    jump = replace(brief.jumps[0], name="jump", terms={})
    names = {one.name.partition(".")[2] or one.name: one.choice for one in brief.variables}
    plain = replace(
        brief,
        jumps=(jump,),
        variables=(),
        search={name: choice for name, choice in names.items() if name != "gravity_factor"},
        ledges=(Ledge("sill", 70.0, "reach", 1.0),),
    )
    old = search(plain)
    assert found.best is not None
    assert old.best is not None
    assert found.best.verdict.constants == old.best.verdict.constants
    assert found.best.verdict.cost == old.best.verdict.cost
    assert [one.verdict.miss for one in found.front] == [one.verdict.miss for one in old.front]
    assert found.certificate is not None
    assert old.certificate is not None
    assert found.certificate.grid_points == old.certificate.grid_points
    second = found.certificate.runner_up, old.certificate.runner_up
    assert second[0] is not None
    assert second[1] is not None
    assert second[0].constants == (second[1].constants,)
    assert by_scan(plain, build_space(plain), workers=1, progress=Silent()).certificate == old.certificate


def test_proposals_of_several_jumps() -> None:
    """A is the certified best, today stands beside it, candidates differ in what one sees of some jump."""
    result = search(three_jumps(), workers=2)
    assert result.best is result.shortlist[0]
    assert result.best.label == "A"
    assert result.today is not None
    assert judged_set(result.today.verdict) == SETS
    assert result.today.change == "none"
    assert result.method == "scan"
    assert result.certificate is not None
    assert result.certificate.method == "separated"
    assert result.certificate.grid_points == 72
    assert result.evaluations == result.certificate.evaluated
    assert set(result.alone) == {"walk", "sprint", "armour"}
    costs = {jump.name: jump.cost for jump in result.best.verdict.jumps}
    assert all(result.alone[name] <= (costs[name] or 0.0) + 1e-8 for name in costs)
    for one in result.shortlist[1:]:
        assert any(_apart(one, other) for other in result.shortlist if other is not one)
    assert result.best.verdict.feasible
    for one in result.front:
        sets = judged_set(one.verdict)
        assert isinstance(sets, tuple)
        assert len({(part.gravity, part.step, part.grain) for part in sets}) == 1


def _apart(one: object, other: object) -> bool:
    pairs = zip(one.verdict.jumps, other.verdict.jumps, strict=True)  # type: ignore[attr-defined]
    for mine, theirs in pairs:
        for name in ("apex", "airtime", "max_gap"):
            a, b = mine.nominal.measures[name], theirs.nominal.measures[name]
            if max(a, b) > 0 and abs(a - b) / max(a, b) > 0.05:
                return True
        for name in ("gravity", "launch_speed", "run_speed"):
            a, b = getattr(mine.constants, name), getattr(theirs.constants, name)
            if max(a, b) > 0 and abs(a - b) / max(a, b) > 0.05:
                return True
    return False


def test_clashes_name_the_jump() -> None:
    """Hop's roof is below walk's sill, and both have one launch speed: they cannot both hold."""
    brief = game(
        RULE,
        {"gravity": points(1400.0, 1800.0, 50.0), "grain": among(0.0)},
        ms(8, 16),
        One("walk", (height(100.0),), {"launch_speed": points(500.0, 620.0, 20.0)}),
        One("hop", (height(80.0),), {"launch_speed": "walk"}),
        ledges=(
            Ledge("sill", 100.0, "reach", 2.0, ("walk",)),
            Ledge("roof", 90.0, "stay-out", 1.0, ("hop",)),
        ),
    )
    result = search(brief)
    assert result.best is None
    assert result.nearest is not None
    assert result.nearest.verdict.violation
    assert [clash.demands for clash in result.clashes] == [
        ("walk: reach sill: apex at least 102.0", "hop: stay out of roof: apex at most 89.0")
    ]
    assert "sill (walk)" in result.clashes[0].text
    assert result.clashes[0].short_over_rates >= 13.0 - 1e-6
    assert result.certificate is not None
    assert result.certificate.complete


RANGES = game(
    RULE,
    {"gravity": Choice(None, 1100.0, 2200.0), "grain": among(0.0, 0.125)},
    ms(6, 8, 16),
    One("walk", (height(120.0), time(0.76)), {"launch_speed": Choice(None, 450.0, 750.0)}),
    One(
        "armour",
        (height(96.0), time(0.74)),
        {"launch_speed": ("walk", Choice(None, 0.7, 1.0)), "gravity_factor": Choice(None, 0.8, 1.1)},
    ),
)


def told(result: SearchResult) -> tuple[object, ...]:
    def one(candidate: object) -> object:
        verdict = candidate.verdict  # type: ignore[attr-defined]
        return judged_set(verdict), verdict.cost, candidate.why  # type: ignore[attr-defined]

    return (
        [one(c) for c in result.shortlist],
        [one(c) for c in result.front],
        result.notes,
        result.evaluations,
    )


def test_ranges_without_increments_are_studied_from_a_coarse_scan() -> None:
    """The study, the same whatever the workers, is not worse than a separated scan of a coarse grid."""
    result = search(RANGES, trials=60)
    assert result.method == "study"
    assert result.certificate is None
    assert "no increments" in result.notes[0] + result.notes[1]
    assert result.best is not None
    variables = tuple(
        replace(one, choice=points(one.choice.low, one.choice.high, every))
        if one.choice.values is None
        else one
        for one, every in (
            (
                one,
                50.0
                if one.name == "gravity"
                else 20.0
                if "times" not in one.name and "factor" not in one.name
                else 0.05,
            )
            for one in RANGES.variables
        )
    )
    grid = search(replace(RANGES, variables=variables))
    assert grid.best is not None
    assert result.best.verdict.cost <= grid.best.verdict.cost
    sets = judged_set(result.best.verdict)
    assert isinstance(sets, tuple)
    assert 0.7 <= sets[1].launch_speed / sets[0].launch_speed <= 1.0
    assert told(search(RANGES, trials=60, workers=2)) == told(result)


def test_too_large_a_grid_is_studied() -> None:
    result = search(billion(), budget=10_000, trials=20)
    assert result.method == "study"
    assert "more than the budget" in " ".join(result.notes)
    assert result.best is not None
    assert result.best.verdict.cost < 1.1 * 2.38426495  # the certified cost of the benchmark's brief


def test_an_objective_module_sees_every_jump(tmp_path: Path) -> None:
    """A term that asks for equal airtimes: it is told per set, and what is found obeys it more."""
    file = tmp_path / "in_step.py"
    file.write_text(
        "def deviations(constants, jumps):\n"
        "    assert constants['gravity'].shape == constants['walk.launch_speed'].shape\n"
        "    apart = jumps['walk']['airtime'].nominal - jumps['armour']['airtime'].nominal\n"
        "    return {'apart': apart / 0.01}\n",
        encoding="utf-8",
    )
    module = load_objective(file)
    plain, result = search(three_jumps()), search(three_jumps(), objectives=(module,), trials=60)
    assert result.method == "study"
    assert result.best is not None
    assert plain.best is not None

    def apart(found: SearchResult) -> float:
        assert found.best is not None
        walk, _, armour = (jump.nominal.measures["airtime"] for jump in found.best.verdict.jumps)
        return abs(walk - armour)

    assert apart(result) <= apart(plain)
    assert set(result.best.verdict.extras) == {"in_step: apart"}


def test_loops_and_sets_without_a_today() -> None:
    """A fixed loop without today: everything is new; its step is the shared one."""
    brief = game(
        RULE,
        {"gravity": points(1500.0, 1700.0, 50.0), "step": among(0.008, 0.01), "grain": among(0.0)},
        ms(8, 16),
        One("walk", (height(100.0),), {"launch_speed": points(540.0, 620.0, 20.0)}),
        One(
            "run",
            (Target("max_gap", 10.0, at_least=200.0),),
            {"launch_speed": "walk", "run_speed": among(300.0)},
        ),
    )
    assert brief.loop is Loop.FIXED
    result = search(brief)
    assert result.best is not None
    assert result.best.change == "new"
    assert result.today is None
    sets = judged_set(result.best.verdict)
    assert isinstance(sets, tuple)
    assert sets[0].step == sets[1].step
    assert math.isfinite(deciding_key(sets)[0])
    assert json.dumps(result.alone)
    assert isinstance(sets[0], Constants)
    assert isinstance(brief, Brief)
