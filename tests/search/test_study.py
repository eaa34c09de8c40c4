"""The study: seeded, repeatable, near what a scan proves, and back on tidy numbers."""

import math
from dataclasses import replace

import numpy as np
import pytest

from designer.brief.model import Brief, Choice, Ledge, Target
from designer.motion.closed_form import constants_for
from designer.motion.rule import SEARCHABLE, Constants, Rounding, Rule
from designer.objective.modules import ObjectiveModule
from designer.search.evaluate import Evaluator, figures, penalised, significant
from designer.search.found import Found, by_scan, by_study
from designer.search.progress import Silent
from designer.search.refine import tidy_designs
from designer.search.run import search
from designer.search.seeds import seeds
from designer.search.space import build_space
from designer.search.study import run_study
from tests.reference.make import brief_of, small_brief
from tests.reference.search_briefs import FIXED, fixed_loop, ms, points

APEX = Target("apex", within=2.0, aim=120.0)
AIRTIME = Target("airtime", within=0.02, aim=0.76)


def grid_brief() -> Brief:
    """Return a brief of 25,000 designs that either route can take."""
    return fixed_loop(
        Rule("semi-implicit", Rounding(at="before-move")),
        {
            "gravity": points(1200.0, 2200.0, 10.0),
            "launch_speed": points(500.0, 800.0, 5.0),
            "step": Choice((0.004, 0.016)),
            "grain": Choice((0.0, 1.0)),
        },
        ms(4, 8, 16),
        APEX,
        AIRTIME,
        ledges=(Ledge("awning", 112.0, "reach"),),
    )


def free_brief(**changes: object) -> Brief:
    free = {"gravity": Choice(None, text="free"), "launch_speed": Choice(None, text="free")}
    known = {"run_speed": Choice((300.0,)), "grain": Choice((0.0,))}
    return replace(brief_of(APEX, AIRTIME, search=FIXED | known | free), **changes)


def study_of(brief: Brief, seed: int, trials: int, workers: int = 1) -> Found:
    space = build_space(brief)
    return by_study(brief, space, seed=seed, trials=trials, objectives=(), workers=workers, progress=Silent())


def test_study_comes_near_the_certified_best() -> None:
    """Within a quarter of the certified cost with 200 trials, refined (measured: within a tenth)."""
    brief = grid_brief()
    proved = by_scan(brief, build_space(brief), workers=1, progress=Silent()).leaders.best_cost
    for seed in (0, 1):
        found = study_of(brief, seed, 200).leaders.best_cost
        assert proved <= found <= 1.25 * proved


def test_same_seed_same_candidates_whatever_the_workers() -> None:
    one = search(free_brief(), seed=3, trials=64)
    again = search(free_brief(), seed=3, trials=64, workers=2)
    other = search(free_brief(), seed=4, trials=64)
    assert one == again
    assert one.method == "study"
    assert one.certificate is None
    assert one.evaluations != other.evaluations or one.front != other.front


def test_scan_is_the_same_whatever_the_workers() -> None:
    assert search(grid_brief(), workers=1) == search(grid_brief(), workers=2)


def test_study_finds_what_continuous_motion_says() -> None:
    """Without rounding, at a small step, the best must be near the textbook's constants (g = 8H/T²)."""
    brief = fixed_loop(
        Rule("average"),
        {
            "gravity": Choice(None, text="free"),
            "launch_speed": Choice(None, text="free"),
            "step": Choice((0.002,)),
            "grain": Choice((0.0,)),
        },
        ms(1, 2),
        APEX,
        AIRTIME,
    )
    best = search(brief, trials=80).best
    assert best is not None
    gravity, launch = (float(x) for x in constants_for(120.0, 0.76))
    assert best.verdict.constants.gravity == pytest.approx(gravity, rel=0.01)
    assert best.verdict.constants.launch_speed == pytest.approx(launch, rel=0.01)
    assert best.verdict.on_target
    assert figures(best.verdict.constants.gravity) <= 3
    assert figures(best.verdict.constants.launch_speed) <= 3


def test_everything_that_a_study_proposes_is_tidy() -> None:
    """Fewer figures than what was tried has, at hardly more cost, and never more than four."""
    brief = free_brief()
    result = search(brief, trials=64)
    assert result.best is not None
    for candidate in (*result.shortlist, *result.front):
        constants = candidate.verdict.constants
        assert figures(constants.gravity) + figures(constants.launch_speed) <= 6
    assert min(c.verdict.cost or math.inf for c in result.front) == result.best.verdict.cost


def test_tidy_numbers_are_found_for_every_grain() -> None:
    """The best that changes numbers only is among the tidy ones, though another grain may do better."""
    brief = replace(free_brief(), search=dict(free_brief().search or {}) | {"grain": Choice((0.0, 1.0))})
    evaluator = Evaluator(brief, build_space(brief))
    run_study(evaluator, seed=0, trials=96)
    tidy = tidy_designs(evaluator)
    matrix, scores = evaluator.everything()
    grain = SEARCHABLE.index("grain")
    assert set(tidy[:, grain]) == set(matrix[scores.feasible, grain]) == {0.0, 1.0}
    for row in tidy:
        near = (np.abs(matrix[:, :2] / row[:2] - 1.0) < 0.002).all(axis=1) & (matrix[:, grain] == row[grain])
        best = float(np.min(scores.cost[near & scores.feasible]))
        assert float(evaluator(row[None, :]).cost[0]) <= best + max(0.05, 0.01 * best) + 1e-9


def test_grid_constants_stay_on_their_points() -> None:
    search_for = {
        "gravity": Choice(None, 1200.0, 2200.0),
        "launch_speed": points(500.0, 800.0, 5.0),
        "step": Choice((0.004, 0.016)),
        "grain": Choice((0.0, 1.0)),
    }
    brief = replace(grid_brief(), search=FIXED | search_for)
    result = search(brief, trials=48)
    assert result.method == "study"
    for candidate in result.front:
        constants = candidate.verdict.constants
        assert constants.launch_speed % 5 == 0
        assert constants.step in (0.004, 0.016)
        assert constants.grain in (0.0, 1.0)
        assert 1200.0 <= constants.gravity <= 2200.0


def test_objective_modules_count() -> None:
    """A term that wants another gravity moves the best there, and stands in the verdict."""

    def heavy(constants: dict[str, np.ndarray], jumps: object) -> dict[str, np.ndarray]:
        return {"weight": (1500.0 - constants["gravity"]) / 10.0}

    module = ObjectiveModule("heavy", heavy)
    plain = search(small_brief()).best
    result = search(small_brief(), objectives=(module,), trials=96)
    assert plain is not None
    assert result.best is not None
    assert result.method == "study"
    assert "heavy" in result.notes[0]
    gravity = result.best.verdict.constants.gravity
    assert abs(gravity - 1500.0) < abs(plain.verdict.constants.gravity - 1500.0)
    assert result.best.verdict.extras["heavy: weight"] == pytest.approx((1500.0 - gravity) / 10.0)


def test_seeds_hold_today_sets_and_the_inverted_formulas() -> None:
    brief = grid_brief()
    today = Constants(1500.0, 600.0, 0.016, 1.0)
    brief = replace(brief, today=today)
    space = build_space(brief)
    start = Evaluator(brief, space).tidy(seeds(brief, space))
    assert start.shape[1] == len(SEARCHABLE)
    rows = {tuple(row[:4]) for row in start.tolist()}
    assert (1500.0, 600.0, 0.016, 1.0) in rows
    gravity, launch = (float(x) for x in constants_for(120.0, 0.76))
    near = [row for row in rows if abs(row[0] - gravity) <= 5 and abs(row[1] - launch) < 0.05 * launch]
    assert near
    # Grain 1 at 4, 8 and 16 ms: only multiples of 250 are whole grains at every step.
    assert any(row[0] % 250 == 0 and row[3] == 1.0 for row in rows)


def test_never_landing_designs_do_not_stop_a_study() -> None:
    brief = fixed_loop(
        Rule("semi-implicit", Rounding(at="before-move")),
        {
            "gravity": Choice(None, 1200.0, 2200.0),
            "launch_speed": Choice(None, 500.0, 800.0),
            "step": Choice((0.002,)),
            "grain": Choice((0.0, 16.0)),
        },
        ms(2, 4),
        APEX,
    )
    result = search(brief, trials=48)
    assert result.best is not None
    assert result.best.verdict.constants.grain == 0.0
    assert all(candidate.verdict.cost is not None for candidate in result.front)


def test_figures_and_significant() -> None:
    assert [figures(v) for v in (1500.0, 0.85, 1.636, 2.0, 0.0, 100.5)] == [2, 2, 4, 1, 1, 4]
    assert significant(1636.49, 3) == 1640.0
    assert significant(0.0123456, 2) == 0.012


def test_evaluator_measures_each_design_once() -> None:
    brief = grid_brief()
    space = build_space(brief)
    evaluator = Evaluator(brief, space)
    rows = evaluator.tidy(np.array([[1500.0, 600.0, 0.004, 0.0, 0.0, 1.0, np.inf]] * 3))
    scores = evaluator(rows)
    assert evaluator.count == 1
    assert len(set(scores.cost.tolist())) == 1
    assert np.isfinite(penalised(scores)).all()
    other = rows.copy()
    other[1, 0] = 1600.0
    assert len(evaluator(other).cost) == 3
    assert evaluator.count == 2
    matrix, everything = evaluator.everything()
    assert matrix[:, 0].tolist() == [1500.0, 1600.0]
    assert everything.cost[0] == scores.cost[0]
