"""From a set, a little different in one thing."""

from dataclasses import replace

import pytest

from designer.brief.model import Brief, JumpBrief, Target
from designer.errors import InputError
from designer.motion.rule import Constants
from designer.objective.judge import judge
from designer.search.hold import changed, held
from designer.search.run import search
from tests.reference.make import small_brief

BRIEF = small_brief()
SET = Constants(1580.0, 625.0, run_speed=540.0)
VERDICT = judge(BRIEF, SET, bands=False)


def targets_of(brief: Brief) -> dict[str, Target]:
    return {target.measure: target for target in brief.jumps[0].targets}


def test_a_held_measure_is_aimed_at_what_it_is() -> None:
    other = held(BRIEF, VERDICT, ["apex"], ["airtime=0.80"])
    targets = targets_of(other)
    # Semi-implicit at 10 ms: v_n = 625 − 15.8 n is last positive at n = 39, and y_39 =
    # 0.01·(39·625 − 15.8·780) = 120.51.
    assert targets["apex"] == Target("apex", within=2.0, aim=120.51)
    assert targets["airtime"] == Target("airtime", within=0.02, aim=0.8)
    assert replace(other, jumps=BRIEF.jumps) == BRIEF
    assert changed(BRIEF, other) == {("jump", name): target for name, target in targets.items()}


def test_a_search_then_finds_the_other_airtime_at_the_same_height() -> None:
    brief = held(BRIEF, VERDICT, ["apex"], ["airtime=0.80"])
    best = search(brief).best
    assert best is not None
    apex, airtime = best.verdict.jumps[0].targets
    assert apex.value == pytest.approx(120.51, abs=1.0)
    assert airtime.value == pytest.approx(0.80, abs=0.01)


def test_values_are_read_as_in_a_brief() -> None:
    brief = replace(BRIEF, lengths={"tile": 64.0})
    targets = targets_of(held(brief, None, (), ["apex=1.875 tile", "airtime = 800 ms"]))
    assert (targets["apex"].aim, targets["airtime"].aim) == (120.0, 0.8)


def test_a_bound_becomes_an_aim_and_keeps_its_tolerance_and_weight() -> None:
    bound = Target("max_gap", within=10.0, weight=3.0, at_least=400.0)
    brief = replace(BRIEF, jumps=(JumpBrief(targets=(bound,)),))
    (target,) = held(brief, None, (), ["max_gap=420"]).jumps[0].targets
    assert target == Target("max_gap", within=10.0, weight=3.0, aim=420.0)


def test_jumps_are_named_where_there_are_several() -> None:
    (jump,) = BRIEF.jumps
    hop = JumpBrief("hop", (Target("apex", within=1.0, aim=60.0),))
    brief = replace(BRIEF, jumps=(replace(jump, name="walk"), hop))
    other = held(brief, None, (), ["hop.apex=70", "airtime=0.7"])
    assert changed(brief, other) == {
        ("walk", "airtime"): Target("airtime", within=0.02, aim=0.7),
        ("hop", "apex"): Target("apex", within=1.0, aim=70.0),
    }
    with pytest.raises(InputError, match=r"a jump's name before it, since 2 jumps have a target on apex"):
        held(brief, None, (), ["apex=70"])
    with pytest.raises(InputError, match=r"a jump: walk, hop"):
        held(brief, None, (), ["jog.apex=70"])
    with pytest.raises(InputError, match=r"targets on hop.apex, walk.airtime, walk.apex"):
        held(brief, None, (), ["hop.airtime=70"])


@pytest.mark.parametrize(
    ("hold", "settings", "words"),
    [
        (["apx"], [], "fix: write apex"),
        (["steps"], [], "a measure with a tolerance; the brief has targets on airtime, apex"),
        (["gravity"], [], "gravity is a constant"),
        (["apex", "apex"], [], "each measure once"),
        (["apex"], ["apex=118"], "each measure once, either held or set"),
        (["walk.apex"], [], "the measure alone: there is one jump"),
        ([], ["airtime"], "measure=value"),
        ([], ["airtime=0,8"], "decimals are written with a point"),
        ([], ["airtime=-1"], "above 0"),
        ([], ["airtime=nan"], "finite"),
        ([], ["airtime=8 km"], "units known here: s, ms"),
    ],
)
def test_what_makes_no_sense_is_refused_with_the_reason(
    hold: list[str], settings: list[str], words: str
) -> None:
    with pytest.raises(InputError) as refused:
        held(BRIEF, VERDICT, hold, settings)
    assert words in str(refused.value)


def test_nothing_to_hold_from() -> None:
    with pytest.raises(InputError, match="a set to hold it from"):
        held(BRIEF, None, ["apex"], ())


def test_a_set_that_never_lands_holds_nothing() -> None:
    stuck = judge(BRIEF, replace(SET, gravity=1.0, grain=50.0), bands=False)
    with pytest.raises(InputError, match="does not land"):
        held(BRIEF, stuck, ["apex"], ())


def test_every_fault_is_said_at_once() -> None:
    with pytest.raises(InputError) as refused:
        held(BRIEF, VERDICT, ["apx", "steps"], ["gravity=3", "airtime"])
    assert len(refused.value.faults) == 4
