"""Briefs that are in order: the six that people copy from, and odd ones that are allowed."""

from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from designer.brief.model import Gap, Ledge, Loop, Target
from designer.brief.reading import parse_brief, read_brief
from designer.errors import Fault, InputError
from designer.motion.closed_form import has_closed_form
from designer.motion.rule import FrameTime, Integrator, LandingTest, Mode, Place
from designer.objective.judge import judge
from tests.reference.crate_yard import BASE, FIXED, changed
from tests.reference.jump_briefs import YARD

OBJECTIVES = sorted((Path(__file__).resolve().parents[2] / "objectives").glob("*.toml"))


def test_there_are_six() -> None:
    assert [path.stem for path in OBJECTIVES] == [
        "harbour-crew", "heavy-knight", "low-gravity-salvage", "night-market-courier",
        "rhythm-hopper", "tile-platformer",
    ]  # fmt: skip


@pytest.mark.parametrize("path", OBJECTIVES, ids=lambda path: path.stem)
def test_a_brief_to_copy_from_is_a_whole_job(path: Path) -> None:
    brief = read_brief(path)
    assert brief.name == path.stem
    assert brief.search is not None
    assert brief.today is not None
    assert brief.jumps[0].targets
    assert brief.rates.supported
    assert brief.ledges
    assert brief.gaps
    assert all(len(line) <= 110 for line in path.read_text(encoding="utf-8").split("\n"))


@pytest.mark.parametrize("path", OBJECTIVES, ids=lambda path: path.stem)
def test_today_misses_something_that_teaches(path: Path) -> None:
    brief = read_brief(path)
    assert brief.today is not None
    today = [jump.today for jump in brief.jumps if jump.today] if brief.several else brief.today
    verdict = judge(brief, today, bands=False)
    assert all(row.status == "lands" for jump in verdict.jumps for row in jump.rates)
    assert not verdict.on_target


def test_they_are_different_games() -> None:
    briefs = [read_brief(path) for path in OBJECTIVES]
    assert {brief.loop for brief in briefs} == set(Loop)
    assert {brief.rule.integrator for brief in briefs} == set(Integrator)
    assert {brief.rule.landing_test for brief in briefs} == set(LandingTest)
    assert {brief.rule.frame_time for brief in briefs} == set(FrameTime)
    assert any(brief.sets for brief in briefs)
    grids = []
    for brief in briefs:
        assert brief.search is not None
        assert brief.today is not None
        closed = bool(has_closed_form(brief.rule, brief.today.grain))
        grids.append((closed, all(choice.values is not None for choice in brief.search.values())))
    # A scan by closed form, a scan that steps, and one that only a study can search.
    assert {(True, True), (False, True), (False, False)} <= set(grids)


def test_the_courier_is_the_design_s_own() -> None:
    """DEVELOPERS.md, brief, without what later versions know."""
    brief = read_brief(OBJECTIVES[0].with_name("night-market-courier.toml"))
    assert brief.title == "Night-market courier"
    assert (brief.length_unit, dict(brief.lengths)) == ("cm", {"tile": 64.0})
    rule = brief.rule
    assert (rule.integrator, rule.frame_time, rule.landing_test) == (
        "semi-implicit",
        "whole-ms-down",
        "swept",
    )
    assert (rule.rounding.mode, rule.rounding.at, rule.rounding.carry) == (
        Mode.NEAREST_EVEN,
        Place.END,
        False,
    )
    assert brief.aim_at is not None
    assert brief.aim_at.echo == "60 Hz → 16 ms (62.5 Hz)"
    assert brief.today is not None
    assert (brief.today.gravity, brief.today.launch_speed, brief.today.grain) == (1600.0, 620.0, 1.0)
    assert brief.search is not None
    assert len(brief.search["gravity"].values or ()) == 241
    assert len(brief.search["launch_speed"].values or ()) == 141
    assert brief.search["grain"].values == (0.0, 0.125, 1.0)
    assert brief.jumps[0].targets == (
        Target("apex", 2.0, aim=120.0),
        Target("airtime", 0.02, aim=0.76),
        Target("max_gap", 10.0, at_least=400.0),
    )
    assert [rate.step for rate in brief.rates.supported] == [0.016, 0.013, 0.011, 0.008, 0.006, 0.004]
    assert [rate.step for rate in brief.rates.watched] == [0.002]
    assert brief.ledges == (Ledge("awning", 110.0, "reach", 2.0), Ledge("billboard", 124.0, "stay-out", 1.0))
    assert brief.gaps == (Gap("alley", 380.0, "cross", -40.0, 5.0),)


def test_what_need_not_be_said() -> None:
    """The defaults of DEVELOPERS.md, brief."""
    brief = parse_brief(
        '[loop]\nsteps = "fixed"\n[rule]\nintegrator = "average"\n'
        '[today]\ngravity = 9.8\nlaunch_speed = 4\nstep = "50 Hz"\n',
        "little.toml",
    )
    assert (brief.name, brief.title) == ("little", "little")
    rule = brief.rule
    assert (rule.rounding.mode, rule.rounding.at) == (Mode.NEAREST_EVEN, Place.END)
    assert (rule.frame_time, rule.landing_test, rule.launch_gravity) == ("exact", "swept", True)
    assert rule.contact_tolerance == 1e-6
    assert rule.position.grain == 0.0
    assert brief.search is None
    assert brief.rates.supported == ()
    assert brief.rates.spread_weight == 1.0
    today = brief.today
    assert today is not None
    assert (today.grain, today.run_speed, today.fall_factor, today.terminal_speed) == (0.0, 0.0, 1.0, None)


def test_lengths_by_name_wherever_a_length_is_wanted() -> None:
    text = changed(
        ("height = 97", 'height = "1.5 tile"'),
        ("margin = 2", 'margin = "0.25 tile"'),
        ("width = 300", 'width = "4 tile"'),
        ("far_level = -30", 'far_level = "-0.5 tile"'),
        ("aim = 105, within = 2", 'aim = "1.75 tile", within = "3 cm"'),
        ("aim = 0.71", 'aim = "710 ms"'),
        ("launch_speed = 580", 'launch_speed = "9 tile/s"'),
        ("gravity = 1500", 'gravity = "24 tile/s^2"'),
    )
    brief = parse_brief(text, "yard.toml")
    assert (brief.ledges[0].height, brief.ledges[0].margin) == (96.0, 16.0)
    assert (brief.gaps[0].width, brief.gaps[0].far_level) == (256.0, -32.0)
    assert (brief.jumps[0].targets[0].aim, brief.jumps[0].targets[0].within) == (112.0, 3.0)
    assert brief.jumps[0].targets[1].aim == 0.71
    assert brief.today is not None
    assert (brief.today.gravity, brief.today.launch_speed) == (1536.0, 576.0)


def test_equal_rates_are_joined_in_the_brief() -> None:
    text = changed(('"75 Hz", "90 Hz"', '"16 ms", "90 Hz"'), ('"300 Hz"', '"62 Hz", "300 Hz"'))
    brief = parse_brief(text, "yard.toml")
    assert [rate.name for rate in brief.rates.supported] == ["60 Hz, 16 ms, 62 Hz", "90 Hz"]
    assert [rate.name for rate in brief.rates.watched] == ["300 Hz"]


def test_no_terminal_speed_is_said_as_none() -> None:
    brief = parse_brief(changed(("grain = 1", 'terminal_speed = "none"')), "yard.toml")
    assert brief.today is not None
    assert brief.today.terminal_speed is None


def faults_or_none(text: str) -> tuple[Fault, ...]:
    """Return what is wrong with a text; any other exception is a failure of the test."""
    try:
        parse_brief(text, "yard.toml")
    except InputError as error:
        return error.faults
    return ()


PIECES = [
    '"',
    "'",
    "[",
    "]",
    "{",
    "}",
    "=",
    ",",
    "#",
    ".",
    ":",
    ";",
    "%",
    "0",
    "-",
    "1e999",
    '"""',
    "nan",
    "[[",
]
PIECES += ["\\", "é", "“", "//", "{}", "..", "a.b = 1", '"60"', "0x1F", "²", "\n", "\t", " ", "\u2028"]


@settings(max_examples=150, deadline=None)
@given(
    st.sampled_from([BASE, FIXED, YARD]),
    st.lists(st.tuples(st.floats(0, 1), st.sampled_from(PIECES), st.integers(0, 12)), min_size=1, max_size=4),
)
def test_a_damaged_brief_is_read_or_refused_in_words(text: str, edits: list[tuple[float, str, int]]) -> None:
    for where, piece, gone in edits:
        at = int(where * len(text))
        text = text[:at] + piece + text[at + gone :]
    faults = faults_or_none(text)
    assert all(fault.place and fault.allowed and fault.fix for fault in faults)


@settings(max_examples=100, deadline=None)
@given(st.text(max_size=200))
def test_any_text_is_read_or_refused_in_words(text: str) -> None:
    with pytest.raises(InputError) as caught:
        parse_brief(text, "yard.toml")
    assert all(fault.allowed and fault.fix for fault in caught.value.faults)
