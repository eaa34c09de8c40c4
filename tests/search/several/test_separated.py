"""The separated scan: equal to brute force in the twin, ties included, whatever blocks and workers do."""

import itertools
import math
from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import cache

import numpy as np
import pytest

import designer.search.several.cell as adding
import designer.search.several.measure as measuring
from designer.brief.model import Brief, Gap, Ledge, Target
from designer.motion.rule import Constants, Rounding, Rule, Second
from designer.motion.simulate import simulate
from designer.search.several.assign import build_several, deciding_key, set_of
from designer.search.several.exact import Placed
from designer.search.several.scan import SeveralScan, scan_several
from tests.reference import several_twin
from tests.reference.score_twin import nine
from tests.reference.search_briefs import ms, points
from tests.reference.several_briefs import three_jumps
from tests.reference.several_games import One, among, game, height, time
from tests.reference.several_twin import TwinScores, score_set

SPEEDS = points(540.0, 620.0, 20.0)
WALK = One("walk", (height(100.0), time(0.70)), {"launch_speed": SPEEDS, "run_speed": among(300.0)})
FRAMES = Rule("semi-implicit", Rounding(at="end"), frame_time="whole-ms-down")
BEFORE = Rule("average", Rounding("toward-zero", at="before-move"))


def with_today(brief: Brief, today: Constants) -> Brief:
    return replace(
        brief, today=today, jumps=tuple(replace(jump, today=today, base=today) for jump in brief.jumps)
    )


BRIEFS = {
    "like, a link with times and gravity_factor": with_today(
        game(
            FRAMES,
            {"gravity": points(1500.0, 1700.0, 50.0), "grain": among(0.0, 1.0)},
            ms(16, 8, 6),
            WALK,
            One(
                "sprint",
                (Target("max_gap", within=10.0, at_least=340.0),),
                {"launch_speed": "walk", "run_speed": among(480.0, 500.0)},
            ),
            One(
                "armour",
                (height(70.0, within=3.0), time(0.62)),
                {"launch_speed": ("walk", among(0.8, 0.9)), "gravity_factor": among(0.8, 1.0)},
                weight=0.5,
            ),
            ledges=(
                Ledge("awning", 92.0, "reach", 2.0, ("walk", "sprint")),
                Ledge("crate", 60.0, "reach", 1.0, ("armour",)),
                Ledge("billboard", 125.0, "stay-out", 1.0, ("walk", "sprint", "armour")),
            ),
            gaps=(Gap("alley", 330.0, "cross", -40.0, 5.0, ("sprint",)),),
        ),
        Constants(1600.0, 580.0, grain=1.0),
    ),
    "fixed loop, its step searched": with_today(
        game(
            BEFORE,
            {
                "gravity": points(1480.0, 1600.0, 40.0),
                "step": among(0.008, 0.01),
                "grain": among(0.5, 4.0),
            },
            ms(4, 8),
            WALK,
            One("hop", (height(84.0), time(0.66)), {"launch_speed": points(480.0, 560.0, 20.0)}),
            spread_weight=0.5,
        ),
        Constants(1500.0, 560.0, 0.008, 0.5),
    ),
    "ties: what nobody asks about, and cells of rounding": game(
        BEFORE,
        {"gravity": points(1590.0, 1610.0, 5.0), "grain": among(1.0, 8.0)},
        ms(10, 20),
        One(
            "walk",
            (height(100.0),),
            {
                "launch_speed": among(576.0, 584.0),
                "run_speed": among(1.0, 2.0),
                "terminal_speed": among(900.0, math.inf),
            },
        ),
        One("hop", (height(80.0),), {"launch_speed": among(512.0, 520.0), "fall_factor": among(1.0, 1.5)}),
        One("idle", (), {"launch_speed": among(400.0, 500.0)}),
    ),
    "on target, steady and aligned": game(
        Rule("average", Rounding(at="end")),
        {"gravity": points(1500.0, 2000.0, 125.0), "grain": among(0.0, 1.0)},
        ms(8, 16),
        One("walk", (height(100.0, within=20.0),), {"launch_speed": points(560.0, 640.0, 16.0)}),
        One("hop", (time(0.66, within=0.08),), {"launch_speed": points(480.0, 640.0, 32.0)}),
    ),
    "a second jump in the air, heavy fall": game(
        Rule("explicit", Rounding()),
        {"gravity": points(1500.0, 1600.0, 50.0), "grain": among(1.0)},
        ms(16, 8),
        One("walk", (height(100.0), time(0.66)), {"launch_speed": SPEEDS, "fall_factor": among(1.0, 1.5)}),
        One(
            "double",
            (height(150.0, within=5.0), time(0.95, within=0.05)),
            {"launch_speed": "walk", "fall_factor": "walk"},
            second=Second(360.0),
        ),
        One("dash", (time(0.9),), {"launch_speed": ("walk", among(0.9, 1.0))}, second=Second(200.0, 0.3)),
    ),
    "nothing feasible": game(
        FRAMES,
        {"gravity": points(1500.0, 1700.0, 50.0), "grain": among(0.0, 1.0)},
        ms(16, 8),
        WALK,
        One("hop", (height(84.0),), {"launch_speed": ("walk", among(0.85, 0.9, 0.95))}),
        ledges=(
            Ledge("high", 99.0, "reach", 1.0, ("walk", "hop")),
            Ledge("low", 96.0, "stay-out", 1.0, ("hop",)),
        ),
    ),
    "one feasible set, then the nearest": game(
        FRAMES,
        {"gravity": among(1600.0), "grain": among(0.0)},
        ms(16, 8),
        One("walk", (height(100.0),), {"launch_speed": among(540.0, 580.0)}),
        One("hop", (height(84.0),), {"launch_speed": among(500.0, 540.0)}),
        ledges=(
            Ledge("sill", 98.0, "reach", 0.0, ("walk",)),
            Ledge("roof", 85.0, "stay-out", 0.0, ("hop",)),
        ),
    ),
    "some never land": game(
        Rule("semi-implicit", Rounding(at="before-move")),
        {"gravity": among(1500.0, 1600.0), "grain": among(0.0, 16.0)},
        ms(2, 4),
        One("walk", (height(100.0),), {"launch_speed": SPEEDS}),
        One("hop", (height(84.0),), {"launch_speed": SPEEDS, "gravity_factor": among(0.9, 1.0)}),
    ),
    "a single jump of [jumps]": game(
        FRAMES,
        {"gravity": points(1500.0, 1700.0, 25.0), "grain": among(0.0, 1.0)},
        ms(16, 8),
        WALK,
        ledges=(Ledge("awning", 92.0, "reach", 2.0, ("walk",)),),
    ),
    "three jumps of one game": three_jumps(),
}  # fmt: skip


@dataclass(frozen=True)
class Judged:
    """One set in the twin, with what decides between equals."""

    key: tuple[float, ...]
    score: TwinScores
    sets: tuple[Constants, ...]

    @property
    def order(self) -> tuple[object, ...]:
        if self.score.violation == 0:
            return 0, clean(self.score.cost), self.key
        rank = math.inf if self.score.cost is None else self.score.cost + self.score.violation
        return 1, rank, self.key


def clean(value: float | None) -> float:
    return 0.0 if value is None or value < 1e-10 else value


@cache
def truth_of(name: str) -> tuple[Judged, ...]:
    """Every set of the grid in the twin, first ones first; a jump's row at a step is measured once."""
    brief = BRIEFS[name]
    space = build_several(brief)
    every = np.array(list(itertools.product(*(axis.points or () for axis in space.axes))))
    each = space.each_designs(every)
    rows: dict[object, object] = {}
    plain = several_twin.measure_row

    def remembered(brief: Brief, jump: object, constants: Constants, step: float) -> object:
        key = (jump.name, constants, step)  # type: ignore[attr-defined]
        if key not in rows:
            rows[key] = plain(brief, jump, constants, step)  # type: ignore[arg-type]
        return rows[key]

    several_twin.measure_row = remembered  # type: ignore[assignment]
    try:
        sets = {set_of(brief, each, k) for k in range(len(every))}
        judged = [Judged(deciding_key(one), score_set(brief, one), one) for one in sets]
    finally:
        several_twin.measure_row = plain
    return tuple(sorted(judged, key=lambda one: one.order))


def close(a: float, b: float | None) -> bool:
    return b is not None and math.isclose(a, clean(b), rel_tol=2e-8, abs_tol=1e-10)


def check(found: SeveralScan, placed: Placed | None, expected: Judged | None) -> None:
    if expected is None:
        assert placed is None
        return
    assert placed is not None
    assert deciding_key(found.chooser.constants(placed.chosen)) == expected.key
    assert close(placed.cost, expected.score.cost)
    assert close(float(placed.score.violation[0]), expected.score.violation)


def first(some: Sequence[Judged]) -> Judged | None:
    return some[0] if some else None


@pytest.mark.parametrize("name", BRIEFS)
def test_separated_scan_equals_brute_force_in_the_twin(name: str, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(measuring, "BLOCK_JUMPS", 150)  # several blocks, flown in several parts
    monkeypatch.setattr(measuring, "KEPT_DESIGNS", 40)  # hardly any of them remembered
    monkeypatch.setattr(adding, "MOST_POINTS", 7)
    brief = BRIEFS[name]
    found = scan_several(brief, build_several(brief), workers=2)
    truth = truth_of(name)
    landed = [one for one in truth if math.isfinite(one.score.violation)]
    good = [one for one in landed if one.score.violation == 0]
    check(found, found.best, first(good))
    check(found, found.nearest, None if good else first(landed))
    check(found, found.runner_up, landed[1] if len(landed) > 1 else None)
    if brief.jumps[0].today is not None:
        now = brief.jumps[0].today
        same = [one for one in good if (one.sets[0].grain, one.sets[0].step) == (now.grain, now.step)]
        check(found, found.numbers, first(same))
    on_target = [one for one in good if nine(one.score.worst[0]) <= 1]
    on_target.sort(key=lambda one: (clean(one.score.spread), clean(one.score.cost), one.key))
    check(found, found.steady, first(on_target))
    check_front(found, good)
    check_alone(found, brief, name)


def check_front(found: SeveralScan, good: Sequence[Judged]) -> None:
    pairs = sorted({(clean(one.score.miss), clean(one.score.spread)) for one in good})
    expected: list[tuple[float, float]] = []
    for pair in pairs:
        if not expected or pair[1] < expected[-1][1] * (1 - 2e-8):
            if expected and close(expected[-1][0], pair[0]):
                expected.pop()
            expected.append(pair)
    scores = found.chooser.scores(list(found.front)) if found.front else None
    ours = [] if scores is None else list(zip(scores.miss.tolist(), scores.rate_spread.tolist(), strict=True))
    assert len(ours) == len(expected)
    assert all(close(a, c) and close(b, d) for (a, b), (c, d) in zip(ours, expected, strict=True))


def check_alone(found: SeveralScan, brief: Brief, name: str) -> None:
    """What each jump could have by itself: its least cost over the sets in which it fails nothing."""
    for number, jump in enumerate(brief.jumps):
        if not jump.targets:
            assert found.alone[number] == 0.0
            continue
        mine = tuple(feature for feature in brief.features if jump.name in feature.by)
        costs = [
            one.score.costs[jump.name]
            for one in truth_of(name)
            if jump.name in one.score.costs and all(_spare(brief, one, number, feature) for feature in mine)
        ]
        if not costs:
            assert found.alone[number] is None
        else:
            assert close(found.alone[number] or 0.0, min(costs))


def _spare(brief: Brief, one: Judged, number: int, feature: object) -> bool:
    jump, constants = brief.jumps[number], one.sets[number]
    steps = [
        brief.aim_at.step if brief.aim_at else constants.step,
        *(rate.step for rate in brief.rates.supported),
    ]
    rows = [several_twin.measure_row(brief, jump, constants, step) for step in steps]
    return all(several_twin.slack(brief, feature, jump, row)[0] >= -1e-9 for row in rows if row is not None)


def test_brute_force_covers_what_it_should() -> None:
    kinds = set()
    for name in BRIEFS:
        for one in truth_of(name):
            kinds.add(
                "stuck" if math.isinf(one.score.violation) else "bad" if one.score.violation else "good"
            )
    assert kinds == {"stuck", "bad", "good"}
    tied = truth_of("ties: what nobody asks about, and cells of rounding")
    assert sum(clean(one.score.cost) == clean(tied[0].score.cost) for one in tied) > 10
    good = [one for one in truth_of("one feasible set, then the nearest") if one.score.violation == 0]
    assert len(good) == 1
    steady = truth_of("on target, steady and aligned")
    assert any(one.score.worst[0] <= 1 and clean(one.score.spread) < 0.1 for one in steady)


@pytest.mark.parametrize("name", BRIEFS)
def test_certificate_says_what_was_done(name: str) -> None:
    brief = BRIEFS[name]
    space = build_several(brief)
    found = scan_several(brief, space)
    told = found.certificate
    assert (told.kind, told.method) == ("grid", "separated")
    assert told.complete
    assert told.grid_points == space.size
    jumps = found.chooser.measurer.jumps
    assert told.evaluated == found.chooser.measurer.cell_count * sum(jump.count for jump in jumps)
    assert told.grid_hash == space.grid_hash(brief.rule)


def told(found: SeveralScan) -> tuple[object, ...]:
    placed = (found.best, found.runner_up, found.nearest, found.numbers, found.steady)
    return (
        [None if one is None else (one.chosen, one.cost, one.rank) for one in placed],
        found.front,
        found.pool,
        found.alone,
        found.certificate,
    )


@pytest.mark.parametrize("name", ["like, a link with times and gravity_factor", "nothing feasible"])
def test_blocks_and_workers_change_nothing(name: str, monkeypatch: pytest.MonkeyPatch) -> None:
    brief = BRIEFS[name]
    space = build_several(brief)
    whole = told(scan_several(brief, space))
    for size, kept, workers in ((40, 10, 1), (60, 10_000, 3), (500, 100, 2)):
        monkeypatch.setattr(measuring, "BLOCK_JUMPS", size)
        monkeypatch.setattr(measuring, "KEPT_DESIGNS", kept)
        assert told(scan_several(brief, space, workers=workers)) == whole


def test_stepping_every_jump_finds_the_same() -> None:
    brief = BRIEFS["fixed loop, its step searched"]

    def fly(*given: object, count_near_apex: bool = False, **options: object) -> object:
        return simulate(*given, **options)  # type: ignore[arg-type]

    space = build_several(brief)
    closed, stepped = scan_several(brief, space), scan_several(brief, space, fly=fly)  # type: ignore[arg-type]
    assert closed.best is not None
    assert stepped.best is not None
    assert closed.best.chosen == stepped.best.chosen
    assert closed.best.cost == pytest.approx(stepped.best.cost, rel=1e-8)
