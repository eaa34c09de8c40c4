"""From variables to the constants of each jump, and which jumps links tie together."""

import math
from dataclasses import replace

import numpy as np
import pytest

from designer.brief.model import Choice, Target
from designer.errors import InputError
from designer.motion.rule import Constants, Rule
from designer.search.several.assign import (
    build_several,
    deciding_key,
    jumps_and_groups,
    own_counts,
    set_of,
)
from tests.reference.search_briefs import ms, points
from tests.reference.several_briefs import three_jumps
from tests.reference.several_games import One, among, game, height, time

RULE = Rule("semi-implicit")
SHARED = {"gravity": points(1500.0, 1600.0, 50.0), "grain": among(0.0, 1.0)}


def test_variables_become_constants() -> None:
    """Armour's launch speed is walk's times 0.85; sprint shares walk's; each has a run speed of its own."""
    space = build_several(three_jumps())
    names = [axis.name for axis in space.axes]
    row = [axis.low for axis in space.axes]
    row[names.index("gravity")] = 1600.0
    row[names.index("walk.launch_speed")] = 610.0
    row[names.index("armour.launch_speed times")] = 0.85
    row[names.index("armour.gravity_factor")] = 0.9
    walk, sprint, armour = set_of(space.of_brief, space.each_designs(np.array([row])), 0)
    assert walk == Constants(1600.0, 610.0, None, 1.0, 300.0)
    assert sprint == replace(walk, run_speed=540.0)
    assert armour == replace(walk, launch_speed=610.0 * 0.85, gravity_factor=0.9)


def test_own_designs_agree_with_the_variables() -> None:
    space = build_several(three_jumps())
    jumps, groups = jumps_and_groups(space)
    assert [jump.count for jump in jumps] == [4, 4, 24]
    assert space.size == 72
    assert len(groups) == 1
    assert groups[0].link_count == 4
    own = jumps[2].own
    assert sorted(set(own["launch_speed"])) == sorted(
        {v * f for v in (600.0, 610.0, 620.0, 630.0) for f in (0.8, 0.85, 0.9)}
    )
    assert own_counts(space) == ([4, 4, 24], 4)


def test_links_tie_jumps_and_nothing_else_does() -> None:
    """A chain a → b → c is one group with two links; d, which has all for itself, is another."""
    speeds = among(500.0, 550.0)
    brief = game(
        RULE,
        SHARED,
        ms(8),
        One("a", (height(80.0),), {"launch_speed": speeds}),
        One("d", (height(80.0),), {"launch_speed": speeds, "run_speed": among(1.0, 2.0, 3.0)}),
        One("b", (height(80.0),), {"launch_speed": ("a", among(0.8, 0.9))}),
        One("c", (height(80.0),), {"launch_speed": ("b", among(0.5, 1.0)), "fall_factor": among(1.0, 2.0)}),
    )
    jumps, groups = jumps_and_groups(build_several(brief))
    assert [group.jumps for group in groups] == [(0, 2, 3), (1,)]
    assert groups[0].link_count == 4  # a's speed and b's factor; c's factors are c's alone
    assert [jump.count for jump in jumps] == [2, 6, 4, 16]
    first, _, second, third = jumps
    for link in range(4):
        a, b, c = (int(at[link]) for at in groups[0].projections)
        speed = first.own["launch_speed"][a]
        assert second.own["launch_speed"][b] / speed in (0.8, 0.9)
        assert third.own["launch_speed"][c * third.private_count] == second.own["launch_speed"][b] * 0.5


def test_a_shared_fixed_number_ties_nobody() -> None:
    brief = game(
        RULE,
        SHARED,
        ms(8),
        One("a", (), {"launch_speed": among(500.0)}),
        One("b", (), {"launch_speed": ("a", among(0.8, 0.9))}),
    )
    _, groups = jumps_and_groups(build_several(brief))
    assert [group.jumps for group in groups] == [(0,), (1,)]


def test_equals_are_decided_constant_by_constant() -> None:
    """DESIGN: gravity, every launch_speed, step, grain, every run_speed …; no terminal speed comes last."""
    one = Constants(1600.0, 600.0, 0.008, 1.0, 300.0, 1.0, None)
    other = replace(one, launch_speed=500.0, terminal_speed=900.0, gravity_factor=0.9)
    key = deciding_key((one, other))
    assert key == (1600.0, 600.0, 500.0, 0.008, 1.0, 300.0, 300.0, 1.0, 1.0, math.inf, 900.0, 1.0, 0.9)


def test_grid_hash_names_grid_links_and_second_jumps() -> None:
    brief = three_jumps()
    space = build_several(brief)
    again = build_several(three_jumps())
    assert space.grid_hash(brief.rule) == again.grid_hash(brief.rule)
    fewer = replace(
        brief, variables=(replace(brief.variables[0], choice=among(1600.0)), *brief.variables[1:])
    )
    assert build_several(fewer).grid_hash(brief.rule) != space.grid_hash(brief.rule)
    unlinked = tuple(
        replace(j, terms={**j.terms, "launch_speed": brief.jumps[0].terms["launch_speed"]})
        for j in brief.jumps
    )
    other = replace(brief, jumps=unlinked)
    assert build_several(other).grid_hash(brief.rule) != space.grid_hash(brief.rule)


def test_free_variables_are_bounded_by_the_jumps_that_use_them() -> None:
    """Gravity must serve walk (8·120/0.76² = 1662) and hop (8·84/0.66² = 1543; by its factor 0.8, 1929)."""
    free = Choice(None)
    brief = game(
        RULE,
        {"gravity": free, "grain": among(1.0)},
        ms(8, 16),
        One("walk", (height(120.0), time(0.76)), {"launch_speed": free}),
        One("hop", (height(84.0), time(0.66)), {"launch_speed": free, "gravity_factor": among(0.8)}),
    )
    space = build_several(brief)
    axes = {axis.name: axis for axis in space.axes}
    assert axes["gravity"].points is None
    assert axes["gravity"].low < 1543.0
    assert axes["gravity"].high > 1929.0
    assert axes["walk.launch_speed"].low < 4 * 120 / 0.76 < axes["walk.launch_speed"].high
    assert axes["hop.launch_speed"].low < 4 * 84 / 0.66 < axes["hop.launch_speed"].high
    assert len(space.notes) == 3


def test_what_nothing_bounds_is_refused() -> None:
    brief = game(
        RULE,
        {"gravity": Choice(None), "grain": among(1.0)},
        ms(8),
        One("walk", (Target("steps", 2.0, aim=40.0),), {"launch_speed": Choice(None)}),
    )
    brief = replace(brief, base=None, jumps=(replace(brief.jumps[0], base=None),))
    with pytest.raises(InputError):
        build_several(brief)


def test_nothing_to_search_is_refused() -> None:
    with pytest.raises(InputError, match="search"):
        build_several(replace(three_jumps(), variables=()))
