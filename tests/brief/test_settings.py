"""--set for several jumps: names, faults, and who follows whom."""

from __future__ import annotations

from dataclasses import replace

import pytest

from designer.brief.reading import parse_brief
from designer.brief.settings import set_with_settings, with_settings
from designer.errors import InputError
from tests.reference.make import small_brief
from tests.reference.several_briefs import SETS, three_jumps

BRIEF = three_jumps()


def test_what_is_shared_is_set_for_everybody() -> None:
    found = set_with_settings(BRIEF, SETS, ["gravity=1500", "grain=0.125"])
    assert found == tuple(replace(one, gravity=1500.0, grain=0.125) for one in SETS)


def test_a_jump_that_is_like_another_follows_it_and_a_link_keeps_its_factor() -> None:
    walk, sprint, armour = set_with_settings(BRIEF, SETS, ["walk.launch_speed=600"])
    assert (walk.launch_speed, sprint.launch_speed) == (600.0, 600.0)
    # 527 = 620 · 0.85, a point of the factor's list: 600 · 0.85.
    assert armour.launch_speed == 600.0 * 0.85
    assert (walk.run_speed, sprint.run_speed) == (300.0, 540.0)


def test_what_is_named_itself_does_not_follow() -> None:
    settings = ["walk.launch_speed=600", "armour.launch_speed=520", "sprint.launch_speed=610"]
    found = set_with_settings(BRIEF, SETS, settings)
    assert [one.launch_speed for one in found] == [600.0, 610.0, 520.0]


def test_the_follower_alone_moves_nobody() -> None:
    found = set_with_settings(BRIEF, SETS, ["sprint.launch_speed=610", "armour.gravity_factor=0.8"])
    assert [one.launch_speed for one in found] == [620.0, 610.0, 527.0]
    assert [one.gravity_factor for one in found] == [1.0, 1.0, 0.8]


def test_likes_count_too_where_nothing_is_searched() -> None:
    bare = replace(BRIEF, jumps=tuple(replace(jump, terms={}) for jump in BRIEF.jumps))
    found = set_with_settings(bare, SETS, ["walk.launch_speed=600", "walk.run_speed=310"])
    # armour's launch speed is its own, sprint's run speed too.
    assert [one.launch_speed for one in found] == [600.0, 600.0, 527.0]
    assert [one.run_speed for one in found] == [310.0, 540.0, 310.0]


@pytest.mark.parametrize(
    ("setting", "words"),
    [
        ("launch_speed=600", "write walk.launch_speed=600"),
        ("walk.gravity=1500", "write gravity=1500"),
        ("wlak.launch_speed=600", "write walk.launch_speed=600"),
        ("nobody.launch_speed=600", "a jump: walk, sprint, armour"),
        ("walk.lanch_speed=600", "write walk.launch_speed=600"),
        ("walk.launch_speed=fast", "walk.launch_speed"),
        ("walk", "name=value"),
    ],
)
def test_faults_say_what_to_write(setting: str, words: str) -> None:
    with pytest.raises(InputError, match=words):
        set_with_settings(BRIEF, SETS, [setting])


def test_every_fault_is_told_at_once() -> None:
    with pytest.raises(InputError) as caught:
        set_with_settings(BRIEF, SETS, ["launch_speed=600", "walk.gravity=3", "grain=1"])
    assert [fault.field for fault in caught.value.faults] == ["launch_speed", "walk.gravity"]


def test_without_today_each_jump_needs_what_has_no_default() -> None:
    with pytest.raises(InputError) as caught:
        set_with_settings(BRIEF, (None, SETS[1], None), ["gravity=1500", "armour.launch_speed=500"])
    assert [fault.field for fault in caught.value.faults] == ["walk.launch_speed"]
    settings = ["gravity=1500", "armour.launch_speed=500", "walk.launch_speed=600"]
    found = set_with_settings(BRIEF, (None, SETS[1], None), settings)
    assert [one.launch_speed for one in found] == [600.0, 620.0, 500.0]
    assert {one.gravity for one in found} == {1500.0}


def test_a_brief_without_jumps_knows_neither_names_nor_factors() -> None:
    brief = small_brief()
    assert brief.today is not None
    assert with_settings(brief, brief.today, ["launch_speed=600"]).launch_speed == 600.0
    for setting in ("walk.launch_speed=600", "gravity_factor=0.9"):
        with pytest.raises(InputError) as caught:
            with_settings(brief, brief.today, [setting])
        assert "gravity_factor" not in caught.value.faults[0].allowed


def test_setting_what_is_there_already_changes_nothing() -> None:
    """Today's factor of a linked jump may be one that the search does not try: it is kept all the same."""
    brief = parse_brief(CREW, "crew.toml")
    today = [jump.today for jump in brief.jumps]
    assert set_with_settings(brief, today, ["walk.launch_speed=540"]) == tuple(today)


CREW = """
[units]
length = "cm"
[loop]
steps = "each-frame"
aim_at = "60 Hz"
[rule]
integrator = "semi-implicit"
[today]
gravity = 1500
[search]
gravity = { from = 1200, to = 2000, every = 20 }
[jumps.walk]
today = { launch_speed = 540 }
search = { launch_speed = { from = 480, to = 640, every = 10 } }
targets = { apex = { aim = 100, within = 2 } }
[jumps.laden]
like = "walk"
today = { launch_speed = 540 }
search.launch_speed = { of = "walk", times = { from = 0.7, to = 0.95, every = 0.05 } }
targets = { apex = { aim = 60, within = 2 } }
[rates]
supported = ["60 Hz"]
"""
