"""Random small games: the separated scan against a list of every set, scored one by one."""

import itertools
import math
import random
from dataclasses import replace

import numpy as np
import pytest

import designer.search.several.cell as adding
import designer.search.several.measure as measuring
from designer.brief.model import Brief, Gap, Ledge, Target
from designer.motion.rule import Constants, Rounding, Rule, Second
from designer.search.progress import Silent
from designer.search.several.assign import SeveralSpace, build_several
from designer.search.several.clash import clashes_of
from designer.search.several.exact import Placed
from designer.search.several.scan import SeveralScan, scan_several
from designer.search.several.study import SeveralEvaluator
from tests.reference.search_briefs import ms
from tests.reference.several_games import One, among, game, height, time

NAMES = ("walk", "sprint", "armour", "hop")
SPEEDS = [500.0, 520.0, 540.0, 560.0, 580.0, 600.0, 620.0, 640.0]
MOST_SETS = 4000


def some(rng: random.Random, values: list[float], most: int) -> object:
    return among(*sorted(rng.sample(values, rng.randint(1, most))))


def random_jump(rng: random.Random, k: int) -> One:
    other = NAMES[rng.randrange(k)] if k else ""
    kind = rng.choice(["own", "own", "like", "link"]) if k else "own"
    own: dict[str, object] = {"launch_speed": some(rng, SPEEDS, 3)}
    if kind != "own":
        own["launch_speed"] = other if kind == "like" else (other, some(rng, [0.8, 0.85, 0.9, 0.95, 1.0], 3))
    if rng.random() < 0.5:
        own["gravity_factor"] = some(rng, [0.8, 0.9, 1.0], 2)
    if rng.random() < 0.5:
        own["run_speed"] = some(rng, [280.0, 300.0, 320.0], 3)
    elif k and rng.random() < 0.4:
        own["run_speed"] = (other, among(1.0, 1.2))
    if rng.random() < 0.3:
        own["fall_factor"] = among(1.0, 1.3)
    if rng.random() < 0.2:
        own["terminal_speed"] = among(500.0, math.inf)
    targets = []
    if rng.random() < 0.8:
        targets.append(height(rng.choice([80.0, 100.0, 120.0]), within=rng.choice([2.0, 30.0])))
    if rng.random() < 0.6:
        targets.append(time(rng.choice([0.65, 0.7, 0.75]), within=rng.choice([0.02, 0.2]), weight=2.0))
    if rng.random() < 0.3:
        targets.append(Target("max_gap", within=10.0, at_least=220.0))
    second = None
    if rng.random() < 0.15:
        second = Second(rng.choice([200.0, 300.0]), rng.choice([None, 0.2]), rng.choice(["set", "add"]))
    return One(NAMES[k], tuple(targets), own, rng.choice([1.0, 0.5, 3.0]), second)


def random_game(rng: random.Random) -> Brief:
    names = NAMES[: rng.choice([2, 3, 3, 4])]
    fixed = rng.random() < 0.5
    shared = {"gravity": among(*(1500.0 + 20.0 * k for k in range(rng.choice([1, 2, 4]))))}
    if fixed:
        shared["step"] = among(*rng.choice([(0.008,), (0.008, 0.01), (0.004, 0.008)]))
    shared["grain"] = among(*rng.choice([(0.0,), (1.0,), (0.0, 0.5, 1.0), (4.0, 8.0)]))

    def by() -> tuple[str, ...]:
        return tuple(rng.sample(names, rng.randint(1, len(names))))

    ledges = tuple(
        Ledge(f"ledge {k}", rng.choice([70.0, 90.0, 110.0]), rng.choice(["reach", "stay-out"]), 1.0, by())
        for k in range(rng.randrange(3))
    )
    gaps = tuple(
        Gap(f"gap {k}", rng.choice([180.0, 240.0]), rng.choice(["cross", "stay-out"]), -30.0 * k, 2.0, by())
        for k in range(rng.randrange(2))
    )
    rule = Rule(
        rng.choice(["semi-implicit", "average"]),
        Rounding(rng.choice(["nearest-even", "toward-zero"]), at=rng.choice(["end", "before-move"])),
    )
    brief = game(
        rule,
        shared,
        rng.choice([ms(4, 8), ms(7, 8, 16), ms(8)]),
        *(random_jump(rng, k) for k in range(len(names))),
        spread_weight=rng.choice([0.0, 0.5, 1.0]),
        ledges=ledges,
        gaps=gaps,
    )
    today = Constants(1540.0, 560.0, 0.008 if fixed else None, 1.0)
    return replace(brief, jumps=tuple(replace(jump, today=today, base=today) for jump in brief.jumps))


class Everything:
    """Every set of a grid, scored; equal constants once."""

    def __init__(self, brief: Brief, space: SeveralSpace) -> None:
        every = np.array(list(itertools.product(*(axis.points or () for axis in space.axes))))
        self.evaluator = SeveralEvaluator(brief, space)
        keys = self.keys(every)
        _, at = np.unique(keys, axis=0, return_index=True)
        self.matrix, self.rows = every[at], [tuple(row) for row in keys[at].tolist()]
        self.scores = self.evaluator(self.matrix)
        self.cost, self.spread, self.miss = (
            np.where(values < 1e-10, 0.0, values)
            for values in (self.scores.cost, self.scores.rate_spread, self.scores.miss)
        )

    def keys(self, matrix: np.ndarray) -> np.ndarray:
        return np.nan_to_num(self.evaluator.deciding(matrix), nan=0.0, posinf=np.inf)

    def ordered(self, which: np.ndarray, *values: np.ndarray) -> list[tuple[float, ...]]:
        """The keys of some sets, by values, then by key."""
        at = np.flatnonzero(which)
        return [self.rows[k] for k in sorted(at, key=lambda k: (*(v[k] for v in values), self.rows[k]))]

    def front(self) -> list[tuple[float, float]]:
        found: list[tuple[float, float]] = []
        good = self.scores.feasible
        for pair in sorted(set(zip(self.miss[good].tolist(), self.spread[good].tolist(), strict=True))):
            if not found or pair[1] < found[-1][1]:
                found.append(pair)
        return found


def key_of(found: SeveralScan, every: Everything, placed: Placed | None) -> tuple[float, ...] | None:
    return None if placed is None else tuple(every.keys(found.chooser.matrix([placed.chosen]))[0].tolist())


def head(some: list[tuple[float, ...]]) -> tuple[float, ...] | None:
    return some[0] if some else None


@pytest.mark.parametrize("seed", range(30))
def test_random_games_equal_the_list_of_every_set(seed: int, monkeypatch: pytest.MonkeyPatch) -> None:
    rng = random.Random(seed)
    brief = random_game(rng)
    space = build_several(brief)
    while space.size > MOST_SETS:
        brief = random_game(rng)
        space = build_several(brief)
    monkeypatch.setattr(measuring, "BLOCK_JUMPS", rng.choice([100, 1000, 200_000]))
    monkeypatch.setattr(adding, "MOST_POINTS", rng.choice([3, 50, 400_000]))
    found = scan_several(brief, space)
    every = Everything(brief, space)
    scores = every.scores
    good = every.ordered(scores.feasible, every.cost)
    bad = every.ordered(np.isfinite(scores.violation) & ~scores.feasible, every.cost + scores.violation)
    ranked = good + bad
    assert key_of(found, every, found.best) == head(good)
    assert key_of(found, every, found.nearest) == (None if good else head(bad))
    assert key_of(found, every, found.runner_up) == head(ranked[1:])
    now = brief.jumps[0].today
    designs = every.evaluator.designs(every.matrix).each[0]
    same = (designs.grain == now.grain) & (True if now.step is None else designs.step == now.step)
    assert key_of(found, every, found.numbers) == head(every.ordered(scores.feasible & same, every.cost))
    near = scores.feasible & (scores.worst <= 1.0 + 5e-9)
    assert key_of(found, every, found.steady) == head(every.ordered(near, every.spread, every.cost))
    listed = found.chooser.scores(list(found.front)) if found.front else None
    pairs = [] if listed is None else zip(
        np.where(listed.miss < 1e-10, 0.0, listed.miss).tolist(),
        np.where(listed.rate_spread < 1e-10, 0.0, listed.rate_spread).tolist(),
        strict=True,
    )  # fmt: skip
    assert list(pairs) == every.front()
    if not good:
        check_clashes(brief, found, every)


def check_clashes(brief: Brief, found: SeveralScan, every: Everything) -> None:
    """Demands that are said to clash never hold together, and fewer always do."""
    clashes = clashes_of(brief, found.chooser.measurer, Silent())
    landed = np.isfinite(every.scores.violation)
    if not landed.any():
        assert [clash.demands for clash in clashes] == [("land at every nominal and supported rate",)]
        return
    fails = every.scores.shortfalls[landed] > 0.0
    count = fails.shape[1]
    size = next(
        size
        for size in range(1, count + 1)
        if any(
            fails[:, one].any(axis=1).all() for one in map(list, itertools.combinations(range(count), size))
        )
    )
    assert clashes
    assert all(len(clash.demands) == size for clash in clashes)
    least = min(
        every.scores.shortfalls[landed][:, one].sum(axis=1).min()
        for one in map(list, itertools.combinations(range(count), size))
        if fails[:, one].any(axis=1).all()
    )
    assert min(clash.short_over_rates for clash in clashes) >= least * (1.0 - 1e-8)
