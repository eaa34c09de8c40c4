"""The scan: equal to brute force in the twin, certified, and the same whatever flies it."""

import math
from dataclasses import replace
from functools import cache

import numpy as np
import pytest

import designer.search.scan as scanning
from designer.brief.model import Brief, Choice, Gap, Ledge, Loop, Rate, Target
from designer.motion.rule import Constants, Rounding, Rule
from designer.motion.simulate import simulate
from designer.search.scan import scan
from designer.search.space import build_space
from tests.reference.make import brief_of
from tests.reference.score_twin import ORDER, TwinScore, brute_force, front, nine, score_design, twin_rule
from tests.reference.search_briefs import FIXED, alignment, fixed_loop, millions, ms, points
from tests.reference.twin import jump

HEIGHT = Target("apex", within=2.0, aim=84.0)
TIME = Target("airtime", within=0.02, aim=0.62)
AROUND = {
    "gravity": points(1500.0, 2100.0, 40.0),
    "launch_speed": points(520.0, 600.0, 16.0),
}
ROOFS = (Ledge("sill", 80.0, "reach", 1.0), Ledge("roof", 92.0, "stay-out", 1.0))
GAPS = (
    Gap("near", 150.0, "cross", margin=2.0),
    Gap("drop", 240.0, "stay-out", far_level=-30.0, margin=1.0),
    Gap("up", 100.0, "cross", far_level=40.0),
    Gap("too high", 50.0, "stay-out", far_level=95.0),
)


def each_frame(rule: Rule, search: dict[str, Choice], **changes: object) -> Brief:
    rates = (Rate("60 Hz", 1 / 60), Rate("75 Hz", 1 / 75), Rate("144 Hz", 1 / 144))
    brief = brief_of(HEIGHT, TIME, rule=rule, rates=rates, search=FIXED | {"grain": Choice((0.0,))} | search)
    return replace(brief, aim_at=rates[0], **changes)


BRIEFS = {
    "semi-implicit, before the move": fixed_loop(
        Rule("semi-implicit", Rounding(at="before-move")),
        AROUND | {"step": Choice((0.008, 0.016)), "grain": Choice((0.0, 0.5, 1.0))},
        ms(4, 7, 16),
        HEIGHT,
        TIME,
        ledges=ROOFS,
    ),
    "average at the end, gaps at three levels": each_frame(
        Rule("average", landing_test="end-of-step"),
        AROUND | {"grain": Choice((0.0, 1.0)), "run_speed": Choice((300.0, 340.0))},
        gaps=GAPS,
        base=Constants(1600.0, 560.0, step_up=2.0, edge_allowance=6.0),
    ),
    "explicit toward zero, heavy fall, terminal speed": each_frame(
        Rule("explicit", Rounding("toward-zero")),
        AROUND
        | {
            "grain": Choice((1.0,)),
            "fall_factor": Choice((1.0, 1.4)),
            "terminal_speed": Choice((400.0, math.inf)),
        },
        ledges=ROOFS,
    ),
    "carry, which is stepped": each_frame(
        Rule("average", Rounding(carry=True)), AROUND | {"grain": Choice((0.3, 1.0))}, ledges=ROOFS[:1]
    ),
    "bounds and weights": fixed_loop(
        Rule("semi-implicit", launch_gravity=False),
        AROUND | {"step": Choice((0.01,)), "grain": Choice((0.25,))},
        ms(5, 20),
        Target("apex", within=3.0, at_least=80.0, at_most=90.0),
        Target("airtime", within=0.02, aim=0.6, weight=2.5),
    ),
    "nothing feasible": fixed_loop(
        Rule("average"),
        AROUND | {"step": Choice((0.016,)), "grain": Choice((0.0, 1.0))},
        ms(4, 16),
        HEIGHT,
        TIME,
        ledges=(Ledge("high", 83.0, "reach", 1.0), Ledge("low", 84.0, "stay-out", 1.0)),
    ),
    "some never land": fixed_loop(
        Rule("semi-implicit", Rounding(at="before-move")),
        AROUND | {"step": Choice((0.004,)), "grain": Choice((0.0, 16.0))},
        ms(2, 4),
        HEIGHT,
    ),
}


@cache
def truth_of(name: str) -> list[TwinScore]:
    return brute_force(BRIEFS[name])


def tuples(brief: Brief, indices: object) -> list[tuple[float, ...]]:
    designs = build_space(brief).designs(np.asarray(indices))
    columns = [np.nan_to_num(getattr(designs, name), nan=0.0, posinf=np.inf).tolist() for name in ORDER]
    return list(zip(*columns, strict=True))


def close(a: float, b: float | None) -> bool:
    return b is not None and math.isclose(a, b, rel_tol=2e-8, abs_tol=1e-12)


@pytest.mark.parametrize("name", BRIEFS)
def test_scan_equals_brute_force_in_the_twin(name: str, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(scanning, "BLOCK_JUMPS", 100)  # several blocks, the last one not full
    brief = BRIEFS[name]
    found = scan(brief, build_space(brief), workers=2)
    truth = truth_of(name)
    assert found.certificate.complete
    assert found.evaluated == found.certificate.grid_points == len(truth)

    ranked = found.leaders.ranked
    assert tuples(brief, ranked.index) == [one.constants for one in truth[:2]]
    for cost, violation, one in zip(ranked.cost, ranked.violation, truth, strict=False):
        assert close(cost, one.cost)
        assert close(violation, one.violation)
    runner_up = found.certificate.runner_up
    assert runner_up is not None
    assert close(runner_up.cost, truth[1].cost)

    if truth[0].feasible:
        pairs = list(zip(found.leaders.front.miss, found.leaders.front.spread, strict=True))
        expected = front(truth)
        assert len(pairs) == len(expected)
        assert all(close(a, c) and close(b, d) for (a, b), (c, d) in zip(pairs, expected, strict=True))
        by_constants = {one.constants: one for one in truth}
        for constants, (miss, _) in zip(tuples(brief, found.leaders.front.index), pairs, strict=True):
            assert close(miss, by_constants[constants].miss)
        check_steadiest(found.leaders, brief, truth)


def check_steadiest(leaders: scanning.Leaders, brief: Brief, truth: list[TwinScore]) -> None:
    on_target = [one for one in truth if one.feasible and nine(one.worst) <= 1]
    assert len(leaders.steady) == min(1, len(on_target))
    if on_target:
        least = min(on_target, key=lambda one: (one.spread, one.cost, one.constants))
        assert tuples(brief, leaders.steady.index) == [least.constants]


def test_brute_force_covers_what_it_should() -> None:
    """The briefs above do have feasible, infeasible and never landing designs, and fronts of several."""
    kinds = set()
    for name in BRIEFS:
        for one in truth_of(name):
            kinds.add("never lands" if math.isinf(one.violation) else "good" if one.feasible else "bad")
    assert kinds == {"never lands", "good", "bad"}
    assert len(front(truth_of("semi-implicit, before the move"))) > 1


@pytest.mark.parametrize("name", ["semi-implicit, before the move", "nothing feasible"])
def test_blocks_and_workers_change_nothing(name: str, monkeypatch: pytest.MonkeyPatch) -> None:
    brief = BRIEFS[name]
    space = build_space(brief)
    whole = scan(brief, space)
    for size, workers in ((40, 1), (40, 3), (170, 2)):
        monkeypatch.setattr(scanning, "BLOCK_JUMPS", size)
        again = scan(brief, space, workers=workers)
        assert again.certificate == whole.certificate
        assert again.failing == whole.failing
        for part in ("ranked", "front", "steady", "numbers", "pool"):
            ours, theirs = getattr(again.leaders, part), getattr(whole.leaders, part)
            assert ours.index.tolist() == theirs.index.tolist(), part
            assert ours.cost.tolist() == theirs.cost.tolist(), part


def test_equals_are_decided_by_the_constants() -> None:
    """With a coarse grain before the move, gravities of one rounding cell are equal: the lowest leads."""
    brief = fixed_loop(
        Rule("average", Rounding(at="before-move")),
        {
            "gravity": points(980.0, 1020.0, 5.0),
            "launch_speed": Choice((400.0,)),
            "step": Choice((0.01,)),
            "grain": Choice((1.0,)),
        },
        ms(10),
        Target("apex", within=1.0, aim=80.0),
    )
    found = scan(brief, build_space(brief))
    assert tuples(brief, found.leaders.ranked.index)[0][0] == 980.0
    assert len(found.leaders.front) == 1  # exact equals collapse


def test_grain_alignment_is_found() -> None:
    """The issue's brief: only grain-aligned gravity is steady over the rates (1000/302 spreads 0.04 %)."""
    brief = alignment()
    found = scan(brief, build_space(brief))
    best = build_space(brief).designs(found.leaders.ranked.index).constants(0, brief)
    apexes = [_apex(brief, best, rate.step) for rate in brief.rates.supported]
    assert (max(apexes) - min(apexes)) / min(apexes) < 0.001
    assert abs(_apex(brief, best, 0.008) - 45.6) <= 0.5
    naive = replace(best, gravity=800.0, launch_speed=270.0)
    spread = [_apex(brief, naive, rate.step) for rate in brief.rates.supported]
    assert 0.27 < (max(spread) - min(spread)) / min(spread) < 0.29  # common practice, no source


def _apex(brief: Brief, constants: Constants, step: float) -> float:
    apex = jump(twin_rule(brief), constants.gravity, constants.launch_speed, step, grain=constants.grain).apex
    assert apex is not None
    return apex


@pytest.mark.parametrize("integrator", ["average", "semi-implicit"])
def test_millions_are_certified(integrator: str) -> None:
    """2.55 million designs at 8 rates; the best and the runner-up once more in the twin."""
    brief = millions(integrator)
    space = build_space(brief)
    found = scan(brief, space, workers=2)
    assert found.certificate.complete
    assert found.evaluated == space.size == 361 * 101 * 14 * 5
    for constants, cost in zip(
        tuples(brief, found.leaders.ranked.index), found.leaders.ranked.cost, strict=True
    ):
        assert close(cost, score_design(brief, constants).cost)


def test_loop_of_each_frame_has_no_step() -> None:
    brief = BRIEFS["carry, which is stepped"]
    assert brief.loop is Loop.EACH_FRAME
    space = build_space(brief)
    assert np.isnan(space.designs(np.array([0])).step).all()
    assert space.designs(np.array([0])).constants(0, brief).step is None


@pytest.mark.parametrize(
    "name", ["semi-implicit, before the move", "explicit toward zero, heavy fall, terminal speed"]
)
def test_stepping_every_jump_finds_the_same(name: str) -> None:
    brief = BRIEFS[name]
    space = build_space(brief)

    def fly(*given: object, count_near_apex: bool = False, **options: object) -> object:
        return simulate(*given, **options)  # type: ignore[arg-type]

    closed, stepped = scan(brief, space), scan(brief, space, fly=fly)  # type: ignore[arg-type]
    assert closed.leaders.front.index.tolist() == stepped.leaders.front.index.tolist()
    assert closed.leaders.ranked.cost.tolist() == pytest.approx(
        stepped.leaders.ranked.cost.tolist(), rel=1e-8
    )
