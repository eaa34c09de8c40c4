"""Several jumps of one game: the score against the plain twin, and what a verdict says of each."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from designer.brief.model import Block, Brief, Ceiling, JumpBrief, Ledge, Target, Term
from designer.motion.rule import Constants, How, Rule, Second
from designer.objective.judge import judge, mark
from designer.objective.score import parts, put_together, score, views_of
from designer.objective.table import Designs, design_tables
from designer.objective.verdict import Verdict
from tests.reference.make import brief_of
from tests.reference.several_briefs import ARMOUR, RULE, SETS, SPRINT, WALK, three_jumps
from tests.reference.several_twin import score_set

BRIEF = three_jumps(
    blocks=(
        Block("cart", 60.0, 150.0, "clear", 4.0, ("walk", "sprint")),
        Block("wall", 100.0, 60.0, "stay-out", 2.0, ("armour",)),
        Block("kerb", 20.0, 190.0, "stay-out", 0.0, ("walk", "armour")),
    ),
    ceilings=(Ceiling("arcade", 290.0, 180.0, margin=1.0, by=("walk", "sprint", "armour")),),
)
DOUBLE = replace(
    BRIEF,
    jumps=(
        BRIEF.jumps[0],
        replace(BRIEF.jumps[1], second=Second(350.0)),
        replace(BRIEF.jumps[2], second=Second(300.0, 0.3, How.ADD)),
    ),
)
OTHERS = (
    SETS,
    tuple(replace(one, gravity=1550.0, launch_speed=0.97 * one.launch_speed) for one in SETS),
    tuple(replace(one, gravity=1650.0, step_up=3.0) for one in SETS),
    (WALK, SPRINT, replace(ARMOUR, gravity_factor=0.7, edge_allowance=12.0)),
    tuple(replace(one, gravity=700.0, fall_factor=1.7, terminal_speed=400.0) for one in SETS),
)


@pytest.mark.parametrize("brief", [BRIEF, DOUBLE])
@pytest.mark.parametrize("sets", OTHERS)
def test_a_verdict_is_what_the_twin_says(brief: Brief, sets: tuple[Constants, ...]) -> None:
    twin = score_set(brief, sets)
    verdict = judge(brief, sets, bands=False)
    assert verdict.miss == pytest.approx(twin.miss, rel=1e-8)
    assert verdict.rate_spread == pytest.approx(twin.spread, rel=1e-8)
    assert verdict.cost == pytest.approx(twin.cost, rel=1e-8)
    assert verdict.violation == pytest.approx(twin.violation, rel=1e-8, abs=1e-12)
    assert verdict.worst is not None
    assert (verdict.worst.jump, verdict.worst.measure) == twin.worst[1:]
    assert verdict.worst.value == pytest.approx(twin.worst[0], rel=1e-8)
    for one in verdict.features:
        assert one.spare == pytest.approx(twin.spares[one.name], abs=1e-9)
        assert one.holds == (twin.spares[one.name] >= -1e-9)
    assert {jump.name: jump.cost for jump in verdict.jumps} == pytest.approx(dict(twin.costs), rel=1e-8)


def test_the_twin_sees_something_in_every_set() -> None:
    found = [score_set(BRIEF, sets) for sets in OTHERS]
    assert len({one.cost for one in found}) == len(found)
    assert min(one.violation for one in found) >= 0.0 < max(one.violation for one in found)
    assert {one.worst[1] for one in found} >= {"walk", "armour"}


def test_parts_of_many_designs_put_together_are_the_scores() -> None:
    tables, found = [], []
    for index, view in enumerate(views_of(BRIEF)):
        designs = Designs.of([sets[index] for sets in (OTHERS[0], OTHERS[1], OTHERS[3])])
        # The lengths are those of the view's base, so edge_allowance of the last set does not count here.
        tables.append(design_tables(view, designs)[0])
        found.append(parts(view, (tables[-1],)))
    scores = put_together(BRIEF, found)
    again = score(BRIEF, tables)
    for i, sets in enumerate((OTHERS[0], OTHERS[1])):
        verdict = judge(BRIEF, sets, bands=False)
        assert (verdict.miss, verdict.rate_spread, verdict.cost, verdict.violation) == (
            scores.miss[i], scores.rate_spread[i], scores.cost[i], scores.violation[i],
        )  # fmt: skip
        shortfalls = [max(0.0, -(one.spare or 0.0)) for one in verdict.features]
        assert scores.shortfalls[i] == pytest.approx(shortfalls, abs=1e-9)
    assert np.array_equal(scores.cost, again.cost)
    total = sum(part.squares for part in found)
    weight = sum(jump.weight * target.weight for jump in BRIEF.jumps for target in jump.targets)
    assert scores.miss == pytest.approx(np.sqrt(total / weight), rel=1e-8)


def as_jumps(one: Brief, *, name: str) -> Brief:
    """Return a brief with one jump as a brief with [jumps.NAME]."""
    assert one.base is not None
    jump = replace(one.jumps[0], name=name, today=one.base, base=one.base, terms={"gravity": Term(0)})
    by = {"by": (name,)}
    ledges = tuple(replace(ledge, **by) for ledge in one.ledges)
    gaps = tuple(replace(gap, **by) for gap in one.gaps)
    return replace(one, jumps=(jump,), ledges=ledges, gaps=gaps, variables=three_jumps().variables)


def test_one_named_jump_has_the_numbers_of_a_brief_without_jumps() -> None:
    plain = replace(
        three_jumps().view("walk"),
        ledges=(Ledge("awning", 110.0, "reach", 2.0), Ledge("billboard", 118.0, "stay-out", 1.0)),
        gaps=(),
    )
    plain = replace(plain, jumps=(replace(plain.jumps[0], name="jump"),), search=None)
    named = as_jumps(plain, name="walk")
    assert named.several
    assert not plain.several
    one, two = judge(plain, WALK), judge(named, WALK)
    assert one.flags
    assert one.flags == two.flags
    for verdict in (one, two):
        assert verdict.ledges[1].failing
    assert [replace(a, by=(), worst_jump=None) for a in one.features] == [
        replace(b, by=(), worst_jump=None) for b in two.features
    ]
    assert (one.miss, one.rate_spread, one.cost, one.violation) == (
        two.miss, two.rate_spread, two.cost, two.violation,
    )  # fmt: skip
    assert one.jumps[0].rates == two.jumps[0].rates


def test_a_feature_fails_where_any_of_its_jumps_does() -> None:
    each = {name: judge(BRIEF.view(name), one) for name, one in zip(("walk", "sprint"), SETS, strict=False)}
    verdict = judge(BRIEF, SETS)
    awning = verdict.ledges[0]
    spares = {name: one.ledges[0].spare for name, one in each.items()}
    assert awning.spare == min(spares.values())
    assert awning.worst_jump == min(spares, key=lambda name: spares[name])

    def rates(bands: tuple[str, ...]) -> set[int]:
        ends = [[int(part) for part in band.removesuffix(" Hz").split("–")] for band in bands]
        return {hz for pair in ends for hz in range(pair[0], pair[-1] + 1)}

    either = set.union(*(rates(one.ledges[0].failing) for one in each.values()))
    assert rates(awning.failing) == either
    board = rates(verdict.ledges[2].failing)
    assert board
    assert board == set.union(
        *(
            rates(judge(BRIEF.view(j.name), c).ledges[-1].failing)
            for j, c in zip(BRIEF.jumps, SETS, strict=True)
        )
    )


def test_the_factor_makes_the_gravity_of_its_jump() -> None:
    # The factor is applied once, so armour at 0.9 of 1600 is a jump at gravity 1440 (to the bit).
    alone = judge(
        BRIEF.view("armour"), replace(ARMOUR, gravity=1600.0 * 0.9, gravity_factor=1.0), bands=False
    )
    verdict = judge(BRIEF, SETS, bands=False)
    one, two = verdict.jumps[2].nominal.measures, alone.jumps[0].nominal.measures
    assert {k: v for k, v in one.items() if k != "flip_margin"} == {
        k: v for k, v in two.items() if k != "flip_margin"
    }
    # Its flip margin is in units of the game's gravity: divided by its factor.
    assert one["flip_margin"] == pytest.approx((two["flip_margin"] or math.nan) / 0.9, rel=1e-12)


def test_flip_margin_as_a_target_is_divided_by_the_factor_too() -> None:
    view = BRIEF.view("armour")
    wanted = replace(view.jumps[0], targets=(Target("flip_margin", within=1.0, at_least=100.0),))
    view = replace(view, jumps=(wanted,))
    table = design_tables(view, Designs.of([ARMOUR]))[0]
    row = judge(view, ARMOUR, bands=False).jumps[0].nominal.measures["flip_margin"]
    assert table.measures["flip_margin"].low[0] == row


def test_a_jump_that_never_lands_leaves_no_score() -> None:
    hovers = replace(ARMOUR, gravity_factor=0.001)
    verdict = judge(BRIEF, (WALK, SPRINT, hovers), bands=False)
    assert (verdict.miss, verdict.cost, verdict.violation, verdict.worst) == (None, None, None, None)
    assert not verdict.feasible
    assert [jump.cost is None for jump in verdict.jumps] == [False, False, True]
    assert [one.spare is None for one in verdict.ledges[:2]] == [False, True]
    assert any(flag.startswith("armour: ") and "at 60 Hz" in flag for flag in verdict.flags)


def test_flags_name_their_jump_unless_they_are_everybodys() -> None:
    sets = tuple(replace(one, gravity=1500.0, gravity_factor=1.0) for one in SETS)
    flags = judge(BRIEF, sets, bands=False).flags
    # 1500 · 0.006 s = 9 and 1500 · 0.016 = 24 grains; nothing ties. At 1562.5 the step of 8 ms takes 12.5.
    assert not any("tie" in flag for flag in flags)
    tied = tuple(replace(one, gravity=1562.5, gravity_factor=1.0) for one in SETS)
    assert "tie at 8 ms" in judge(BRIEF, tied, bands=False).flags
    mixed = (*tied[:2], replace(tied[2], gravity_factor=0.9))
    said = judge(BRIEF, mixed, bands=False).flags
    assert "walk, sprint: tie at 8 ms" in said


def test_a_flip_is_told_in_the_games_gravity() -> None:
    # armour: at 0.9, 8 ms and grain 1, 12.5 grains a step need 1562.5 / 0.9 = 1736.1 of the game's gravity.
    sets = tuple(replace(one, gravity=1735.0) for one in SETS)
    flags = [one for one in judge(BRIEF, sets, bands=False).flags if one.startswith("armour: flip")]
    assert flags == ["armour: flip at gravity 1736.11, 1.11 away, at 8 ms"]


def test_a_set_needs_one_gravity_and_one_constants_a_jump() -> None:
    with pytest.raises(ValueError, match="walk, sprint, armour"):
        judge(BRIEF, WALK)
    with pytest.raises(ValueError, match="gravity is everybody's"):
        judge(BRIEF, (WALK, SPRINT, replace(ARMOUR, gravity=1500.0)))


def test_the_mark_follows_every_jump() -> None:
    verdicts: list[Verdict] = [judge(BRIEF, sets, bands=False) for sets in OTHERS]
    assert len({one.mark for one in verdicts}) == len(OTHERS)
    assert verdicts[0].mark == judge(BRIEF, SETS).mark == mark(SETS, RULE, [None, None, None])
    assert mark(SETS, RULE) != mark(SETS, Rule("explicit"))
    assert verdicts[0].sets == SETS


def test_the_mark_of_one_set_does_not_know_of_factors() -> None:
    # The mark that today's set of results/sample-night-market-courier had before there were several jumps.
    constants = Constants(gravity=1600.0, launch_speed=620.0, grain=1.0, run_speed=540.0)
    assert mark(constants, RULE) == "meex"
    assert mark(constants, RULE) != mark(replace(constants, gravity_factor=0.9), RULE)


def test_jumps_without_targets_cost_nothing() -> None:
    jump = JumpBrief("walk", terms={"gravity": Term(0)}, today=WALK, base=WALK)
    brief = replace(brief_of(jumps=(jump,)), variables=BRIEF.variables)
    verdict = judge(brief, WALK, bands=False)
    assert (verdict.miss, verdict.cost, verdict.worst) == (0.0, 0.0, None)
