"""[jumps]: what each constant of several jumps is made of, and what is refused with the reason."""

import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from designer.brief.model import Block, Brief, Ceiling, Choice, Term
from designer.brief.reading import parse_brief
from designer.errors import InputError
from designer.motion.rule import Constants, How, Second
from tests.reference.crate_yard import BASE, changed
from tests.reference.jump_briefs import FEATURES, HEAD, JUMPS, yard


def read(*changes: tuple[str, str]) -> Brief:
    return parse_brief(yard(*changes), "yard.toml")


def made_of(brief: Brief, jump: str, constant: str) -> tuple[str, ...]:
    """Return the names of the variables that a constant is made of."""
    terms = next(one.terms for one in brief.jumps if one.name == jump)
    return tuple(brief.variables[place].name for place in terms[constant].places)


def choice(brief: Brief, name: str) -> Choice:
    return next(variable.choice for variable in brief.variables if variable.name == name)


def test_the_design_s_own_jumps() -> None:
    """DEVELOPERS.md, brief: the example with four jumps."""
    brief = read()
    assert brief.several
    assert [jump.name for jump in brief.jumps] == ["walk", "sprint", "armour", "double"]
    assert [variable.name for variable in brief.variables][:2] == ["gravity", "grain"]
    for jump in ("walk", "sprint", "double"):
        assert made_of(brief, jump, "launch_speed") == ("walk.launch_speed",)
        assert made_of(brief, jump, "gravity_factor") == ("gravity_factor",)
    assert made_of(brief, "armour", "launch_speed") == ("walk.launch_speed", "armour.launch_speed times")
    assert made_of(brief, "sprint", "run_speed") == ("sprint.run_speed",)
    assert made_of(brief, "double", "run_speed") == ("walk.run_speed",)
    assert choice(brief, "armour.launch_speed times").values == (0.7, 0.75, 0.8, 0.85, 0.9, 0.95)
    assert choice(brief, "armour.gravity_factor").values == (0.8, 1.0)
    assert choice(brief, "walk.launch_speed").is_free
    assert choice(brief, "terminal_speed").values == (math.inf,)
    assert brief.jumps[3].second == Second(520.0, None, How.SET)
    assert [jump.weight for jump in brief.jumps] == [1.0, 1.0, 0.5, 1.0]
    assert [len(jump.targets) for jump in brief.jumps] == [2, 1, 0, 0]
    assert [jump.like for jump in brief.jumps] == [None, "walk", "walk", "walk"]


def test_every_jump_shares_what_the_game_has_one_of() -> None:
    brief = read()
    assert {jump.terms["gravity"] for jump in brief.jumps} == {Term(0)}
    assert {jump.terms["grain"] for jump in brief.jumps} == {Term(1)}
    fixed = read(
        ('steps = "each-frame"\naim_at = "60 Hz"', 'steps = "fixed"'),
        ("gravity = 1600", 'gravity = 1600\nstep = "8 ms"'),
    )
    assert [variable.name for variable in fixed.variables][:3] == ["gravity", "step", "grain"]
    assert {jump.terms["step"] for jump in fixed.jumps} == {Term(1)}


def test_a_link_of_a_link_has_both_factors_in_order() -> None:
    brief = read(
        ("[[ledges]]", '[jumps.crawl]\nsearch.launch_speed = { of = "armour", times = 0.5 }\n[[ledges]]')
    )
    assert made_of(brief, "crawl", "launch_speed") == (
        "walk.launch_speed", "armour.launch_speed times", "crawl.launch_speed times",
    )  # fmt: skip
    assert choice(brief, "crawl.launch_speed times").values == (0.5,)
    assert made_of(brief, "crawl", "run_speed") == ("run_speed",)
    assert choice(brief, "run_speed").values == (540.0,)


def test_a_link_without_times_is_the_same_value() -> None:
    brief = read(("run_speed = 540 }\ntargets", 'run_speed = { of = "walk" } }\ntargets'))
    assert made_of(brief, "sprint", "run_speed") == ("walk.run_speed",)


def test_a_link_to_a_later_jump_and_to_one_that_is_like_another() -> None:
    brief = read(('launch_speed = "free", run_speed = 300', 'launch_speed = { of = "armour", times = 0.9 }'),
                 ('launch_speed = { of = "walk", times = { from = 0.7, to = 0.95, every = 0.05 } }',
                  "launch_speed = 500"))  # fmt: skip
    assert made_of(brief, "double", "launch_speed") == ("armour.launch_speed", "walk.launch_speed times")


def test_the_top_level_s_search_is_one_variable_for_all_that_take_it() -> None:
    brief = read(
        ("grain = {", "fall_factor = { among = [1, 1.5] }\ngrain = {"),
        ("search = { run_speed = 540 }", "search = { run_speed = 540, fall_factor = 2 }"),
    )
    taken = {jump.name: made_of(brief, jump.name, "fall_factor") for jump in brief.jumps}
    assert taken == {"walk": ("fall_factor",), "sprint": ("sprint.fall_factor",), "armour": ("fall_factor",),
                     "double": ("fall_factor",)}  # fmt: skip


def test_what_a_jump_s_today_names_is_its_own() -> None:
    brief = read(("[jumps.double]\n", "[jumps.double]\ntoday = { launch_speed = 560 }\n"))
    assert made_of(brief, "double", "launch_speed") == ("double.launch_speed",)
    assert choice(brief, "double.launch_speed").values == (560.0,)
    assert [jump.today and jump.today.launch_speed for jump in brief.jumps] == [620.0, 620.0, 620.0, 560.0]


def test_today_is_the_jump_s_own_then_the_like_s_then_the_top_level_s() -> None:
    brief = read(
        ("[jumps.walk]\n", "[jumps.walk]\ntoday = { run_speed = 310, terminal_speed = 900 }\n"),
        ("[jumps.sprint]\n", "[jumps.sprint]\ntoday = { run_speed = 500 }\n"),
        ('[jumps.double]\nlike = "walk"', '[jumps.double]\nlike = "sprint"'),
    )
    todays = {jump.name: jump.today for jump in brief.jumps}
    shared = {"gravity": 1600.0, "launch_speed": 620.0, "terminal_speed": 900.0}
    assert todays["walk"] == Constants(run_speed=310.0, **shared)
    assert todays["sprint"] == Constants(run_speed=500.0, **shared)
    assert todays["armour"] == todays["walk"]
    assert todays["double"] == todays["sprint"]
    assert brief.today == todays["walk"]


def test_there_is_no_today_where_one_launch_speed_is_not_said() -> None:
    brief = read(
        ("launch_speed = 620\n", ""),
        ("[jumps.walk]\n", "[jumps.walk]\ntoday = { launch_speed = 1 }\n"),
        ("[[ledges]]", "[jumps.hop]\nsearch.launch_speed = 300\n[[ledges]]"),
    )
    assert brief.today is None
    assert all(jump.today is None for jump in brief.jumps)
    # What is fixed still stands where nothing else is said.
    assert brief.view("hop").base == Constants(1600.0, 300.0, run_speed=540.0)


def test_a_view_is_a_brief_of_one_jump() -> None:
    brief = read()
    view = brief.view("sprint")
    assert not view.several
    assert view.search is not None
    assert view.search["launch_speed"].is_free
    assert view.search["run_speed"].values == (540.0,)
    assert [one.name for one in view.features] == ["crate", "crane", "rails"]
    assert [one.name for one in brief.view("armour").features] == ["crane"]
    assert parse_brief(BASE, "yard.toml").view("jump").today is not None


def test_a_brief_with_one_of_jumps_counts_as_several() -> None:
    brief = parse_brief(HEAD + "[jumps.hop]\ntargets = { apex = { aim = 90, within = 2 } }\n", "yard.toml")
    assert brief.several
    assert [jump.name for jump in brief.jumps] == ["hop"]


def test_nothing_is_searched_where_no_search_stands() -> None:
    head = HEAD.split("[search]")[0] + "[rates]" + HEAD.split("[rates]")[1]
    brief = parse_brief(head + "[jumps.a]\n[jumps.b]\ntoday = { launch_speed = 500 }\n", "yard.toml")
    assert brief.search is None
    assert brief.several
    assert [jump.today and jump.today.launch_speed for jump in brief.jumps] == [620.0, 500.0]


def test_by() -> None:
    brief = read(('by = ["walk", "sprint"]', 'by = ["sprint", "walk"]'))
    assert [one.by for one in brief.features] == [
        ("walk", "sprint"), ("walk", "sprint", "armour", "double"), ("sprint",),
    ]  # fmt: skip
    # One jump needs no by; and without [jumps] its name is "jump".
    alone = parse_brief(
        HEAD + JUMPS.split("[jumps.sprint]")[0] + FEATURES.replace("sprint", "walk"), "yard.toml"
    )
    assert {one.by for one in alone.features} == {("walk",)}
    assert parse_brief(changed(("margin = 2", 'by = ["jump"]')), "yard.toml").ledges[0].by == ("jump",)


def test_blocks_and_ceilings() -> None:
    text = (
        '[[blocks]]\nname = "barrel"\nheight = "0.5 tile"\nlength = 90\nmust = "clear"\nmargin = 3\n'
        '[[blocks]]\nname = "wall"\nheight = 80\nlength = 120\nmust = "stay-out"\n'
        '[[ceilings]]\nname = "beam"\nheight = 300\nbody_height = 170\nmargin = 5\n'
    )
    brief = parse_brief(BASE + text, "yard.toml")
    assert brief.blocks == (Block("barrel", 32.0, 90.0, "clear", 3.0), Block("wall", 80.0, 120.0, "stay-out"))
    assert brief.ceilings == (Ceiling("beam", 300.0, 170.0, "stay-under", 5.0),)
    assert [one.name for one in brief.features][3:] == ["barrel", "wall", "beam"]
    several = parse_brief(
        yard(("[[gaps]]", text.replace('"clear"', '"clear"\nby = ["sprint"]') + "[[gaps]]")), "y.toml"
    )
    assert [one.by for one in several.blocks] == [("sprint",), ("walk", "sprint", "armour", "double")]
    assert several.ceilings[0].by == ("walk", "sprint", "armour", "double")
    assert [one.name for one in several.view("walk").features] == ["crate", "crane", "wall", "beam"]


SET = '[[sets]]\nname = "fair"\ngravity = 1500\nrun_speed = 500\nwalk = { launch_speed = 600 }\n'


def test_a_set_of_several_jumps() -> None:
    brief = read(("[[ledges]]", SET + "armour = { gravity_factor = 0.9, run_speed = 200 }\n[[ledges]]"))
    (one,) = brief.sets
    assert [made.gravity for made in one.jumps] == [1500.0] * 4
    # What walk has in a set is also that of the jumps that are like it; armour's is linked, so it is today's.
    assert [made.launch_speed for made in one.jumps] == [600.0, 600.0, 620.0, 600.0]
    assert [made.run_speed for made in one.jumps] == [500.0, 500.0, 200.0, 500.0]
    assert [made.gravity_factor for made in one.jumps] == [1.0, 1.0, 0.9, 1.0]
    assert one.constants == one.jumps[0]


def test_second() -> None:
    brief = read(('when = "apex", how = "set"', 'when = "300 ms", how = "add"'))
    assert brief.jumps[3].second == Second(520.0, 0.3, How.ADD)
    assert read((', when = "apex", how = "set"', "")).jumps[3].second == Second(520.0)
    assert read(("launch_speed = 520", 'launch_speed = "8 tile/s"')).jumps[3].second == Second(512.0)


NAMES = ("a", "b", "c", "d")
OWN = {"search": "search.run_speed = 300\n", "today": "today.run_speed = 200\n", "": ""}
WHOLE = st.tuples(
    st.sampled_from([None, *NAMES]),
    st.sampled_from(["search", "today", "", *(f"link {name}" for name in NAMES)]),
)


def plainly(
    said: dict[str, tuple[str | None, str]], jump: str, seen: tuple[str, ...]
) -> tuple[str, ...] | None:
    """Return what a jump's run speed is made of, by the words of the design; None where that goes round."""
    if jump in seen:
        return None
    like, own = said[jump]
    if own == "search" or (own == "today" and like is not None):
        return (f"{jump}.run_speed",)
    if own.startswith("link"):
        other = plainly(said, own.removeprefix("link "), (*seen, jump))
        return None if other is None else (*other, f"{jump}.run_speed times")
    if like is not None:
        return plainly(said, like, (*seen, jump))
    return (f"{jump}.run_speed",) if own == "today" else ("run_speed",)


def round_and_round(said: dict[str, tuple[str | None, str]], jump: str) -> bool:
    seen, at = [jump], said[jump][0]
    while at is not None and at not in seen:
        seen.append(at)
        at = said[at][0]
    return at is not None


@settings(max_examples=150, deadline=None)
@given(st.tuples(WHOLE, WHOLE, WHOLE, WHOLE))
def test_any_likes_and_links_are_settled_or_refused(drawn: tuple[tuple[str | None, str], ...]) -> None:
    said = dict(zip(NAMES, drawn, strict=True))
    text = HEAD
    for name, (like, own) in said.items():
        text += f"[jumps.{name}]\n" + ("" if like is None else f'like = "{like}"\n')
        of = own.removeprefix("link ")
        text += OWN.get(own, f'search.run_speed = {{ of = "{of}", times = 0.5 }}\n')
    text += "targets.apex = { aim = 90, within = 2 }\n"
    wanted = {name: plainly(said, name, ()) for name in NAMES}
    if None in wanted.values() or any(round_and_round(said, name) for name in NAMES):
        with pytest.raises(InputError, match="this goes round"):
            parse_brief(text, "yard.toml")
        return
    brief = parse_brief(text, "yard.toml")
    assert {name: made_of(brief, name, "run_speed") for name in NAMES} == wanted
