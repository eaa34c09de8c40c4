"""The grid, and what "free" constants become."""

import math
from dataclasses import replace

import numpy as np
import pytest

from designer.brief.model import Brief, Choice, Gap, Ledge, Target
from designer.errors import InputError
from designer.motion.rule import Constants, Rule
from designer.search.free import round_outward
from designer.search.space import Axis, build_space
from tests.reference.make import brief_of, small_brief
from tests.reference.search_briefs import FIXED, fixed_loop, ms, points

FREE = Choice(None, text="free")
BOTH = (Target("apex", within=2.0, aim=120.0), Target("airtime", within=0.02, aim=0.76))


def free_brief(*targets: Target, search: dict[str, Choice], **changes: object) -> Brief:
    known = {"run_speed": Choice((300.0,)), "grain": Choice((0.0,))}
    return replace(brief_of(*targets, search=FIXED | known | search), **changes)


def test_grid_counts_in_the_order_that_decides_between_equals() -> None:
    brief = fixed_loop(
        Rule("average"),
        {
            "gravity": Choice((900.0, 1000.0)),
            "launch_speed": Choice((300.0, 310.0, 320.0)),
            "step": Choice((0.004, 0.008)),
            "grain": Choice((0.0, 0.5)),
            "terminal_speed": Choice((500.0, math.inf)),
        },
        ms(8),
    )
    space = build_space(brief)
    assert space.shape == (2, 3, 2, 2, 1, 1, 2)
    designs = space.designs(np.arange(space.size))
    rows = list(
        zip(
            designs.gravity, designs.launch_speed, designs.step, designs.grain, designs.terminal_speed,
            strict=True,
        )
    )  # fmt: skip
    assert len(set(rows)) == space.size == 48
    assert rows == sorted(rows)
    assert designs.constants(1, brief).terminal_speed is None


def test_grid_hash_names_grid_and_rule() -> None:
    brief = small_brief()
    one = build_space(brief).grid_hash(brief.rule)
    assert one == build_space(brief).grid_hash(brief.rule)
    assert len(one) == 12
    assert one != build_space(brief).grid_hash(Rule("explicit"))
    fewer = replace(brief, search=dict(brief.search or {}) | {"grain": Choice((0.5,))})
    assert one != build_space(fewer).grid_hash(brief.rule)


@pytest.mark.parametrize(
    ("low", "high", "expected"),
    [(1234.5, 1267.0, (1200.0, 1300.0)), (0.0951, 0.1049, (0.095, 0.11)), (120.0, 120.0, (120.0, 120.0))],
)
def test_bounds_go_outward_to_two_figures(low: float, high: float, expected: tuple[float, float]) -> None:
    assert round_outward(low, high) == expected


def test_free_gravity_and_launch_hold_the_textbook_answer() -> None:
    space = build_space(free_brief(*BOTH, search={"gravity": FREE, "launch_speed": FREE}))
    gravity, launch = 8 * 120 / 0.76**2, 4 * 120 / 0.76  # continuous motion
    for axis, value in ((space.axis("gravity"), gravity), (space.axis("launch_speed"), launch)):
        assert axis.points is None
        assert 0.4 * value < axis.low < 0.9 * value
        assert 1.1 * value < axis.high < 2.5 * value
        assert axis.low == float(f"{axis.low:.1e}")
        assert axis.high == float(f"{axis.high:.1e}")
    assert len(space.notes) == 2
    assert "gravity" in space.notes[0]
    assert not space.is_grid


@pytest.mark.parametrize(
    ("changes", "name", "value"),
    [
        ({"search": {"gravity": points(1500, 1700, 10), "launch_speed": FREE}}, "launch_speed", 628.0),
        ({"search": {"gravity": FREE, "launch_speed": Choice((628.0,))}}, "gravity", 1643.0),
        (
            {
                "search": {"gravity": FREE, "launch_speed": FREE, "fall_factor": Choice((1.0, 2.0))},
                "ledges": (Ledge("a", 110.0, "reach"),),
            },
            "gravity",
            1211.0,
        ),
        (
            {
                "search": {"gravity": Choice((1600.0,)), "launch_speed": Choice((628.0,)), "run_speed": FREE},
                "gaps": (Gap("alley", 400.0, "cross"),),
            },
            "run_speed",
            510.0,
        ),
        (
            {
                "search": {
                    "gravity": Choice((1600.0,)),
                    "launch_speed": Choice((628.0,)),
                    "terminal_speed": FREE,
                }
            },
            "terminal_speed",
            600.0,
        ),
    ],
)
def test_free_bounds_hold_what_continuous_motion_needs(
    changes: dict[str, object], name: str, value: float
) -> None:
    """Values by the constant-gravity formulas: g = 8H/T², v = 4H/T, g = v²/2H, run = gap/T."""
    axis = build_space(free_brief(*BOTH, **changes)).axis(name)
    assert axis.low < value < axis.high


def test_free_grain_and_step() -> None:
    today = Constants(1600.0, 620.0, step=0.0125, grain=0.3)
    brief = fixed_loop(
        Rule("average"),
        {"gravity": Choice((1600.0,)), "launch_speed": Choice((620.0,)), "grain": FREE, "step": FREE},
        ms(4, 16),
        *BOTH,
        today=today,
    )
    space = build_space(brief)
    steps, grains = space.axis("step").points, space.axis("grain").points
    assert steps is not None
    assert grains is not None
    assert steps == tuple(sorted({*(n / 1000 for n in range(1, 34)), 0.0125}))
    assert grains[0] == 0.0
    assert 0.3 in grains
    powers = [q for q in grains if q not in (0.0, 0.3)]
    assert all(math.log2(q).is_integer() for q in powers)
    assert max(powers) <= 2 * 1600 * min(steps) < 2 * max(powers)  # the shortest step still slows the jump
    assert space.is_grid


def test_free_without_anything_to_go_by() -> None:
    brief = free_brief(search={"gravity": FREE, "launch_speed": FREE})
    with pytest.raises(InputError, match=r"search\.gravity"):
        build_space(brief)
    with pytest.raises(InputError, match=r"search\.run_speed"):
        build_space(free_brief(*BOTH, search={"gravity": FREE, "launch_speed": FREE, "run_speed": FREE}))
    around = build_space(replace(brief, today=Constants(1600.0, 620.0)))
    assert around.axis("gravity").low < 800.0
    assert around.axis("gravity").high > 3200.0


def test_no_search_table() -> None:
    with pytest.raises(InputError, match="search"):
        build_space(replace(small_brief(), search=None))


def test_clip() -> None:
    axis = Axis("grain", (0.0, 0.5, 1.0), 0.0, 1.0)
    assert [axis.clip(v) for v in (-1.0, 0.3, 0.25, 0.76, math.inf)] == [0.0, 0.5, 0.0, 1.0, 1.0]
    limits = Axis("terminal_speed", (100.0, math.inf), 100.0, math.inf)
    assert [limits.clip(v) for v in (90.0, math.inf)] == [100.0, math.inf]
    between = Axis("gravity", None, 900.0, 1100.0)
    assert [between.clip(v) for v in (800.0, 1000.0, 1200.0)] == [900.0, 1000.0, 1100.0]
