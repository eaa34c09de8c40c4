"""Aims that are too many for the constants that may move; every number by hand or by brute force."""

import math
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from designer.brief.model import Brief, Choice, JumpBrief, Target, Term, Variable
from designer.motion.continuous import continuous_airtime, continuous_apex, continuous_landing_velocity
from designer.motion.rule import Constants, LandingTest, Rule, Second
from designer.search.aims import system_of
from designer.search.overdetermined import overdetermined
from designer.search.run import search
from tests.reference.make import brief_of, small_brief


def fixed(value: float) -> Choice:
    return Choice((value,))


def between(low: float, high: float) -> Choice:
    return Choice(None, low, high)


def aim(measure: str, value: float, within: float) -> Target:
    return Target(measure, within=within, aim=value)


APEX, AIRTIME, APEX_TIME = aim("apex", 1.2, 0.03), aim("airtime", 0.70, 0.02), aim("apex_time", 0.40, 0.02)


def one_jump(*targets: Target, **search: Choice) -> Brief:
    usual = {
        "gravity": between(5.0, 40.0),
        "launch_speed": between(2.0, 12.0),
        "grain": fixed(0.0),
        "run_speed": fixed(4.0),
        "fall_factor": fixed(1.0),
        "terminal_speed": fixed(math.inf),
    }
    return brief_of(*targets, search=usual | search, base=Constants(10.0, 5.0, run_speed=4.0))


def several(**jumps: tuple[tuple[Target, ...], dict[str, Choice | str]]) -> Brief:
    """Return a brief of jumps under one gravity; a constant that names a jump is that jump's variable."""
    variables = [Variable("gravity", between(800.0, 3200.0)), Variable("grain", fixed(0.0))]
    usual = {
        "launch_speed": between(300.0, 1000.0),
        "run_speed": fixed(300.0),
        "fall_factor": fixed(1.0),
        "terminal_speed": fixed(math.inf),
        "gravity_factor": fixed(1.0),
    }
    made: dict[str, JumpBrief] = {}
    for name, (targets, own) in jumps.items():
        terms = {"gravity": Term(0), "grain": Term(1)}
        for constant, choice in (usual | own).items():
            if isinstance(choice, str):
                terms[constant] = made[choice].terms[constant]
            else:
                terms[constant] = Term(len(variables))
                variables.append(Variable(f"{name}.{constant}", choice))
        made[name] = JumpBrief(name, targets, terms=terms)
    return brief_of(jumps=tuple(made.values()), variables=tuple(variables), search={})


def test_three_aims_for_two_constants() -> None:
    (said,) = overdetermined(one_jump(APEX, AIRTIME, APEX_TIME))
    # airtime = 2·apex_time: 0.80 and 0.70 are 0.10 apart, tolerances 0.02 + 2·0.02 together: 1.67 each.
    # With apex 1.2 and apex_time 0.40: gravity 2·1.2/0.4² = 15, launch_speed 6; the fall of 0.30 s takes
    # (0.4/0.3)² = 1.78 times that gravity.
    assert said == (
        "apex, airtime and apex_time are three aims for two constants (gravity and launch_speed): airtime "
        "0.7 makes apex_time 0.35, not 0.4 ± 0.02; at best both end 1.7 tolerances off. Free fall_factor "
        "(about 1.78, with gravity 15 and launch_speed 6), or drop one."
    )


def test_says_nothing_where_aims_agree_within_tolerances() -> None:
    # 2·0.36 = 0.72, 0.04 from 0.76, tolerances 0.06 together.
    assert overdetermined(one_jump(APEX, aim("airtime", 0.76, 0.02), aim("apex_time", 0.36, 0.02))) == ()


def test_says_nothing_where_there_are_constants_enough() -> None:
    assert overdetermined(one_jump(APEX, AIRTIME)) == ()
    assert overdetermined(one_jump(APEX, AIRTIME, APEX_TIME, fall_factor=between(1.0, 3.0))) == ()


def test_bounds_are_no_aims() -> None:
    bound = Target("apex_time", within=0.02, at_least=0.40)
    assert overdetermined(one_jump(APEX, AIRTIME, bound)) == ()


def test_says_nothing_of_what_only_steps_could_tell() -> None:
    # 0.80 − 0.73 = 0.07 against 0.06: beyond the tolerances, but a step of 10 ms moves apex_time by half.
    brief = one_jump(aim("airtime", 0.73, 0.02), APEX_TIME)
    assert overdetermined(brief) == ()
    rate = replace(brief.aim_at, step=0.001) if brief.aim_at else None
    assert "1.2 tolerances off" in overdetermined(replace(brief, aim_at=rate))[0]


def test_a_terminal_speed_that_may_move_can_take_it_up() -> None:
    targets = (APEX, AIRTIME, aim("landing_speed", 9.0, 0.3))
    assert overdetermined(one_jump(*targets))
    assert overdetermined(one_jump(*targets, terminal_speed=Choice((5.0, math.inf)))) == ()


def test_a_brief_without_search_has_nothing_to_move() -> None:
    assert overdetermined(replace(one_jump(APEX, AIRTIME, APEX_TIME), search=None)) == ()


def test_two_aims_for_one_constant_may_free_either() -> None:
    (said,) = overdetermined(one_jump(APEX, AIRTIME, gravity=fixed(15.0)))
    # 8·1.2/0.70² = 19.59 and √(2·19.59·1.2) = 6.857; at gravity 15 the apex of 1.2 lasts 0.8 s.
    assert "apex and airtime are two aims for one constant (launch_speed): apex 1.2 makes airtime 0.8" in said
    assert "Free fall_factor (about 1.78, with launch_speed 6) or gravity (about 19.6, with" in said


def test_an_aim_that_nothing_moves() -> None:
    (said,) = overdetermined(one_jump(APEX, gravity=fixed(15.0), launch_speed=fixed(6.5)))
    # 6.5²/30 = 1.408, 0.208 over 0.03 is 6.9.
    assert "nothing that may move changes it: it comes to 1.408, 6.9 tolerances off" in said
    assert "launch_speed (about 6)" in said


def test_aims_that_hang_together_although_constants_are_enough() -> None:
    (said,) = overdetermined(one_jump(AIRTIME, APEX_TIME))
    assert said.startswith("airtime and apex_time hang together, whatever gravity and launch_speed are:")


def test_a_gap_needs_its_run_speed() -> None:
    gap = aim("max_gap", 3.0, 0.1)
    (said,) = overdetermined(one_jump(APEX, AIRTIME, gap))
    # 4·0.7 = 2.8; 0.2 over (0.1 + 4·0.02) is 1.1. 3/0.7 = 4.29.
    assert "airtime 0.7 makes max_gap 2.8, not 3 ± 0.1; at best both end 1.1 tolerances off" in said
    assert "Free run_speed (about 4.29" in said
    assert overdetermined(one_jump(APEX, AIRTIME, gap, run_speed=between(1.0, 9.0))) == ()


WALK = (aim("apex", 120.0, 2.0), aim("airtime", 0.76, 0.02))
ARMOUR = (aim("apex", 90.0, 2.0), aim("airtime", 0.74, 0.02))
HOP = (aim("apex", 60.0, 2.0), aim("airtime", 0.50, 0.02))


def test_jumps_that_ask_for_different_gravities() -> None:
    (said,) = overdetermined(several(walk=(WALK, {}), armour=(ARMOUR, {})))
    # 8·120/0.76² = 1662, 8·90/0.74² = 1315, the one 0.79 of the other. Apart by 0.234 in logarithms,
    # tolerances 2/120 + 2·0.02/0.76 + 2/90 + 2·0.02/0.74 = 0.146: 1.6 each.
    assert said == (
        "one gravity cannot serve the aims of walk and armour: walk (apex 120 and airtime 0.76) asks for "
        "1662, armour (apex 90 and airtime 0.74) asks for 1315; at best they stay tolerances off, walk and "
        "armour by 1.6. Free gravity_factor for armour (about 0.79), or drop an aim."
    )


def test_a_factor_on_gravity_that_may_move_parts_them() -> None:
    own: dict[str, Choice | str] = {"gravity_factor": between(0.7, 1.0)}
    assert overdetermined(several(walk=(WALK, {}), armour=(ARMOUR, own))) == ()


def test_the_jump_at_odds_with_most_gets_the_factor() -> None:
    sprint = (aim("apex", 130.0, 2.0), aim("airtime", 0.79, 0.02))
    brief = several(walk=(WALK, {}), armour=(ARMOUR, {}), hop=(HOP, {}), sprint=(sprint, {}))
    (said,) = overdetermined(brief)
    # hop asks for 8·60/0.5² = 1920, sprint for 1666; these and walk agree within their tolerances.
    # 1315/√(1662·1920) = 0.736.
    assert "Free gravity_factor for armour (about 0.74), or" in said
    assert "walk and hop" not in said


def test_jumps_that_share_their_launch() -> None:
    sprint = (aim("apex", 130.0, 2.0),)
    (said,) = overdetermined(several(walk=(WALK, {}), sprint=(sprint, {"launch_speed": "walk"})))
    assert "since walk and sprint share gravity and walk.launch_speed" in said
    assert "walk's apex 120 makes sprint's apex 120, not 130 ± 2; at best both end 2.5 tolerances off" in said
    # √(2·1662·130) = 657.
    assert "Free launch_speed for sprint (about 657" in said


def test_a_second_jump_counts() -> None:
    # Walk fixes gravity 1662 and launch 632; again 632 at the apex doubles the apex to 240.
    double = (aim("apex", 240.0, 2.0),)
    brief = several(walk=(WALK, {}), double=(double, {"launch_speed": "walk"}))
    with_second = tuple(
        replace(jump, second=Second(631.6)) if jump.name == "double" else jump for jump in brief.jumps
    )
    assert overdetermined(replace(brief, jumps=with_second)) == ()
    assert "double's apex 120, not 240" in overdetermined(brief)[0]


@settings(max_examples=40, deadline=None)
@given(st.floats(5.0, 3000.0), st.floats(0.2, 1.5), st.floats(0.0, 3.0))
def test_the_least_worst_miss_of_two_times(gravity: float, rise: float, apart: float) -> None:
    launch = gravity * rise
    within = 0.05 * rise
    # Deviations of both are equal and opposite at the best: apart·(within + 2·within) between them.
    targets = (
        aim("apex", launch * launch / (2.0 * gravity), 0.01 * launch * rise),
        aim("airtime", 2.0 * rise + 3.0 * apart * within, within),
        aim("apex_time", rise, within),
    )
    system = system_of(one_jump(*targets))
    off, _ = system.least_worst(system.aims[1:], np.array([within, within]))
    assert off == pytest.approx(apart, abs=1e-9)


def test_the_least_worst_miss_against_brute_force() -> None:
    targets = (aim("apex", 1.2, 0.05), aim("airtime", 0.7, 0.02), aim("landing_speed", 8.0, 0.4))
    system = system_of(one_jump(*targets, fall_factor=fixed(1.4)))
    (circuit,) = system.circuits(system.aims)
    off, x = system.least_worst(circuit, np.array([one.within for one in targets]))
    gravity, launch = np.meshgrid(np.linspace(12.0, 24.0, 1201), np.linspace(5.0, 7.5, 1001))
    found = (continuous_apex(gravity, launch), continuous_airtime(gravity, launch, 0.0, 1.4),
             -continuous_landing_velocity(gravity, launch, 0.0, 1.4))  # fmt: skip
    deviations = [abs(value - one.aim) / one.within for value, one in zip(found, targets, strict=True)]
    worst = np.max(deviations, axis=0)
    assert off == pytest.approx(float(np.min(worst)), abs=0.02)
    assert off <= float(np.min(worst)) + 1e-9
    best = np.unravel_index(np.argmin(worst), worst.shape)
    assert math.exp(x["gravity"]) == pytest.approx(gravity[best], rel=0.01)


def test_an_aim_of_end_of_step_landings_gets_a_step_more() -> None:
    # 0.80 − 0.72 = 0.08 against 0.06: 1.33; with half a step on apex_time and one on airtime it is 0.08/0.08.
    brief = one_jump(aim("airtime", 0.72, 0.02), APEX_TIME)
    rule = Rule("semi-implicit", landing_test=LandingTest.END_OF_STEP)
    assert overdetermined(brief)
    assert overdetermined(replace(brief, rule=rule)) == ()


def test_a_search_says_it_first() -> None:
    brief = small_brief()
    (jump,) = brief.jumps
    target = aim("apex_time", 0.50, 0.02)
    wanted = replace(brief, jumps=(replace(jump, targets=(*jump.targets, target)),))
    result = search(wanted)
    assert result.notes[0] == overdetermined(wanted)[0]
    assert result.findings == ()
