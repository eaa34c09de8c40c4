"""Findings of a search over several jumps: in words, from numbers that are checked by another way."""

import re
from dataclasses import replace
from pathlib import Path

import pytest

from designer.brief.model import Brief
from designer.brief.reading import parse_brief
from designer.motion.rule import Constants
from designer.objective.judge import judge
from designer.objective.verdict import Verdict
from designer.search.alone import alone, with_followers
from designer.search.findings import find_out
from designer.search.run import search
from tests.reference.make import small_brief

THREE = """
title = "Three"
[units]
length = "cm"
[loop]
steps = "each-frame"
aim_at = "60 Hz"
[rule]
integrator = "semi-implicit"
frame_time = "whole-ms-down"
[search]
gravity = { from = 1200, to = 2000, every = 20 }
launch_speed = { from = 300, to = 800, every = 10 }
grain = 0.125
[rates]
supported = ["60 Hz", "120 Hz"]
[jumps.walk]
targets = { apex = { aim = 120, within = 2 }, airtime = { aim = 0.76, within = 0.02 } }
[jumps.armour]
search = { launch_speed = { from = 300, to = 800, every = 10 } }
targets = { apex = { aim = 90, within = 2 }, airtime = { aim = 0.74, within = 0.02 } }
[jumps.hop]
search = { launch_speed = { from = 300, to = 800, every = 10 } }
targets = { apex = { aim = 60, within = 2 }, airtime = { aim = 0.5, within = 0.02 } }
"""


def three(text: str = THREE) -> Brief:
    return parse_brief(text, "three.toml")


def verdict_of(brief: Brief, gravity: float, *launches: float) -> Verdict:
    sets = [Constants(gravity, launch, grain=0.125) for launch in launches]
    return judge(brief, sets, bands=False)


def test_names_who_is_off_who_pulls_the_other_way_and_what_would_do() -> None:
    brief = three()
    verdict = verdict_of(brief, 1580.0, 630.0, 540.0, 450.0)
    said = find_out(brief, verdict)
    armour, hop = (next(one for one in said if f"{name}'s airtime" in one) for name in ("armour", "hop"))
    # Alone armour wants 8·90/0.74² = 1315 and hop 8·60/0.5² = 1920, on either side of 1580: 0.83 and 1.22.
    assert armour.startswith(
        "one gravity cannot serve armour and hop: armour's airtime ends 3.59 tolerances short"
    )
    assert hop.startswith("one gravity cannot serve hop and armour: hop's airtime ends 2.71 tolerances long")
    for sentence, ratio in ((armour, 1315 / 1580), (hop, 1920 / 1580)):
        told = re.search(r"gravity_factor ([\d.]+) for", sentence)
        assert told
        assert float(told[1]) == pytest.approx(ratio, abs=0.03)
        assert "would do" in sentence
    # Half a step of gravity is lost: 2·(540 − 1580·0.008)/1580 = 0.6675, 3.6 tolerances below 0.74.
    airtime = verdict.jumps[1].targets[1]
    assert airtime.value == pytest.approx(0.6675, abs=2e-3)


def test_what_is_told_was_tried() -> None:
    brief = three()
    verdict = verdict_of(brief, 1580.0, 630.0, 540.0, 450.0)
    for sentence in find_out(brief, verdict):
        told = re.search(
            r"gravity_factor ([\d.]+) for (\w+) \(with launch_speed ([\d.]+)\) would do: ([\d.]+) toler",
            sentence,
        )
        assert told, sentence
        sets = [
            replace(one.constants, gravity_factor=float(told[1]), launch_speed=float(told[3]))
            if one.name == told[2]
            else one.constants
            for one in verdict.jumps
        ]
        tried = judge(brief, sets, bands=False)
        jump = next(one for one in tried.jumps if one.name == told[2])
        worst = max(abs(target.deviation or 0.0) for target in jump.targets)
        assert f"{worst:.2g}" == told[4]
        assert worst <= 1.0


def test_a_launch_speed_that_another_jump_has_stays() -> None:
    before, after = THREE.split("[jumps.armour]\n")
    brief = three(f'{before}[jumps.armour]\nlike = "walk"\n{after.split(chr(10), 1)[1]}')
    verdict = verdict_of(brief, 1580.0, 630.0, 630.0, 450.0)
    said = next(one for one in find_out(brief, verdict) if "armour's apex" in one)
    # At 1.23·1580 = 1943 half a step of gravity leaves 614.5: airtime 2·614.5/1943 = 0.6325, 5.4 tolerances
    # short, and apex 97.2, 3.6 high; less gravity makes the one worse, more the other.
    assert said.endswith("gravity_factor 1.23 for armour would bring it to 5.42")


LINKED = (
    THREE
    + """
[jumps.heavy-hop]
like = "armour"
search = { launch_speed = { of = "armour", times = { from = 0.5, to = 0.9, every = 0.05 } } }
targets = { apex = { aim = 44, within = 2 } }
"""
)


def test_a_jump_that_follows_takes_the_factor_and_its_best_share() -> None:
    brief = three(LINKED)
    verdict = verdict_of(brief, 1580.0, 630.0, 540.0, 450.0, 378.0)
    said = next(one for one in find_out(brief, verdict) if "armour's airtime" in one)
    # 0.84·1580 = 1327 and 500: heavy-hop reaches 44 with √(2·1327·44) = 342, and 10.6 for the step: 0.7·500.
    words = "gravity_factor 0.84 for armour (with launch_speed 500) would do: 0.15 tolerances off at worst"
    assert said.endswith(words)
    change = alone(brief, verdict, "armour")
    sets = with_followers(brief, verdict, "armour", change)
    assert [one.gravity_factor for one in sets] == [1.0, 0.84, 1.0, 0.84]
    assert sets[3].launch_speed == pytest.approx(350.0)
    assert sets[0] == verdict.jumps[0].constants


def test_what_follows_and_suffers_is_told() -> None:
    text = LINKED.replace("{ from = 0.5, to = 0.9, every = 0.05 }", "0.9").replace("aim = 44", "aim = 83")
    sets = verdict_of(three(text), 1580.0, 630.0, 540.0, 450.0, 486.0)

    def of_armour(brief: Brief) -> str:
        return next(one for one in find_out(brief, sets) if "armour's airtime" in one)

    # 0.9·540 = 486 reaches (486 − 12.6)²/3160 = 70.9, 6.0 tolerances below 83. 0.9·500 = 450 at 0.84 times
    # the gravity reaches (450 − 10.6)²/2654 = 72.7, 5.1 below: better than before, so nothing is told.
    assert of_armour(three(text)).endswith("would do: 0.15 tolerances off at worst")
    # From 0.9 above 69 to 1.9 above it.
    worse = of_armour(three(text.replace("aim = 83", "aim = 69")))
    assert re.search(r"at worst, but with heavy-hop 1\.\d+ off$", worse)


def test_nothing_to_say_within_tolerances_of_one_jump_and_of_none_that_lands() -> None:
    brief = three()
    on_target = [
        Constants(1660.0, 645.0, grain=0.125),
        Constants(1660.0, 500.0, grain=0.125, gravity_factor=0.79),
        Constants(1660.0, 490.0, grain=0.125, gravity_factor=1.16),
    ]
    verdict = judge(brief, on_target, bands=False)
    assert verdict.worst is not None
    assert verdict.worst.value <= 1.0
    assert find_out(brief, verdict) == ()
    alone = small_brief()
    off = judge(alone, Constants(1400.0, 660.0, run_speed=540.0), bands=False)
    assert find_out(alone, off) == ()
    assert find_out(brief, verdict_of(brief, 1.0, 640.0, 540.0, 450.0)) == ()


def test_a_search_tells_what_it_found(tmp_path: Path) -> None:
    brief = three()
    result = search(brief)
    assert result.best is not None
    assert result.findings == find_out(brief, result.best.verdict)
    assert any(one.startswith("one gravity cannot serve armour and hop") for one in result.findings)
    assert result.notes[0].startswith("one gravity cannot serve the aims of walk, armour and hop")
