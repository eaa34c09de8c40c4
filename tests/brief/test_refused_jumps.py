"""What is refused in [jumps], each with the reason, its line and a way out."""

import pytest

from designer.brief.reading import parse_brief
from designer.errors import InputError
from tests.reference.crate_yard import BASE, changed
from tests.reference.jump_briefs import HEAD, yard

SET = '[[sets]]\nname = "fair"\ngravity = 1500\nrun_speed = 500\nwalk = { launch_speed = 600 }\n'
LIKE = '[jumps.sprint]\nlike = "walk"'
ARMOUR = 'launch_speed = { of = "walk", times = { from = 0.7, to = 0.95, every = 0.05 } }'
SECOND = 'second = { launch_speed = 520, when = "apex", how = "set" }'
BY = 'by = ["walk", "sprint"]'

# name: (the changes, field, words of the message)
REFUSED = {
    "a loop of like": (
        [
            ("[jumps.walk]\n", '[jumps.walk]\nlike = "double"\n'),
            ('[jumps.double]\nlike = "walk"', '[jumps.double]\nlike = "sprint"'),
        ],
        "jumps.walk.like",
        "walk → double → sprint → walk",
    ),
    "like itself": ([(LIKE, '[jumps.sprint]\nlike = "sprint"')], "jumps.sprint.like", "sprint → sprint"),
    "like a jump that is not there": (
        [(LIKE, '[jumps.sprint]\nlike = "wolk"')],
        "jumps.sprint.like",
        "walk is probably meant",
    ),
    "like that is no text": ([(LIKE, "[jumps.sprint]\nlike = 1")], "jumps.sprint.like", 'write like = "1"'),
    "times over a jump that is not there": (
        [('of = "walk"', 'of = "wakl"')],
        "jumps.armour.search.launch_speed.of",
        "walk is probably meant",
    ),
    "a loop of links": (
        [('launch_speed = "free"', 'launch_speed = { of = "armour" }')],
        "jumps.walk.search.launch_speed.of",
        "walk → armour → walk",
    ),
    "a loop of a link and a like": (
        [('launch_speed = "free"', 'launch_speed = { of = "sprint", times = 2 }')],
        "jumps.walk.search.launch_speed.of",
        "walk → sprint → walk",
    ),
    "a link to itself": (
        [('of = "walk"', 'of = "armour"')],
        "jumps.armour.search.launch_speed.of",
        "armour → armour",
    ),
    "a link of nothing": ([('of = "walk", ', "")], "jumps.armour.search.launch_speed", "of is missing"),
    "a link with more": (
        [('of = "walk"', 'of = "walk", plus = 3')],
        "jumps.armour.search.launch_speed.plus",
        "take plus out",
    ),
    "a factor of 0": ([("from = 0.7", "from = 0")], "jumps.armour.search.launch_speed.times.from", "above 0"),
    "a free factor": (
        [(ARMOUR, 'launch_speed = { of = "walk", times = "free" }')],
        "jumps.armour.search.launch_speed.times",
        "a number, above 0",
    ),
    "a link at the top level": (
        [("grain = { among = [0, 1] }", 'run_speed = { of = "walk" }')],
        "search.run_speed.of",
        "only in the search of a jump",
    ),
    "a gravity of its own": (
        [("search = { run_speed = 540 }", "search = { gravity = 9 }")],
        "jumps.sprint.search.gravity",
        "one game has one gravity; use gravity_factor",
    ),
    "today's gravity of its own": (
        [('like = "walk"\nsearch', 'like = "walk"\ntoday = { gravity = 9 }\nsearch')],
        "jumps.sprint.today.gravity",
        "one game has one gravity",
    ),
    "a step of its own": (
        [("search = { run_speed = 540 }", 'search = { step = "8 ms" }')],
        "jumps.sprint.search.step",
        "one game has one step",
    ),
    "a grain of its own": (
        [("search = { run_speed = 540 }", "search = { grain = 1 }")],
        "jumps.sprint.search.grain",
        "one game has one grain",
    ),
    "gravity beside the search": (
        [(LIKE, "[jumps.sprint]\ngravity = 1")],
        "jumps.sprint.gravity",
        "use gravity_factor",
    ),
    "a constant beside the search": (
        [(LIKE, "[jumps.sprint]\nrun_speed = 1")],
        "jumps.sprint.run_speed",
        "write search = { run_speed = … }",
    ),
    "a gravity factor of 0": (
        [("among = [0.8, 1]", "among = [0, 1]")],
        "jumps.armour.search.gravity_factor.among[1]",
        "above 0",
    ),
    "a negative gravity factor": (
        [("gravity_factor = { among = [0.8, 1] }", "gravity_factor = -1")],
        "jumps.armour.search.gravity_factor",
        "drop the minus sign: 1",
    ),
    "a free gravity factor": (
        [("{ among = [0.8, 1] }", '"free"')],
        "jumps.armour.search.gravity_factor",
        "write one of these",
    ),
    "a second jump before take-off": (
        [('"apex"', '"-0.1 s"')],
        "jumps.double.second.when",
        "after the take-off",
    ),
    "a second jump at take-off": ([('"apex"', "0")], "jumps.double.second.when", "above 0"),
    "a second jump at no time": ([('"apex"', '"top"')], "jumps.double.second.when", '"apex" or "0.30 s"'),
    "a second jump without a speed": (
        [("launch_speed = 520, ", "")],
        "jumps.double.second.launch_speed",
        "has no default",
    ),
    "a second jump downward": (
        [("launch_speed = 520", "launch_speed = -520")],
        "jumps.double.second.launch_speed",
        "above 0",
    ),
    "an unknown how": ([('how = "set"', 'how = "sets"')], "jumps.double.second.how", 'write how = "set"'),
    "a second that is no table": (
        [(SECOND, "second = 520")],
        "jumps.double.second",
        "second = { launch_speed",
    ),
    "a second key": ([('how = "set"', "speed = 3")], "jumps.double.second.speed", "take speed out"),
    "a must without by": ([(BY + "\n", "")], "ledges[1].by", "the jumps that must reach it"),
    "by a jump that is not there": ([(BY, 'by = ["sprnt"]')], "ledges[1].by", "sprint is probably meant"),
    "by one name": ([(BY, 'by = "walk"')], "ledges[1].by", 'write by = ["walk"]'),
    "by nobody": ([(BY, "by = []")], "ledges[1].by", "not an empty list"),
    "by a number": ([(BY, "by = [1]")], "ledges[1].by[1]", '"1"'),
    "targets at the top level": (
        [("[rates]", "[targets]\napex = { aim = 1, within = 1 }\n[rates]")],
        "targets",
        "move them to the jump",
    ),
    "a jump named like a key": ([("[jumps.double]", "[jumps.search]")], "jumps.search", "the jump's name"),
    "a jump named like a constant": ([("[jumps.double]", "[jumps.grain]")], "jumps.grain", "grain-jump"),
    "a jump that cannot be typed": ([("[jumps.double]", '[jumps."a=b"]')], "jumps.a=b", "can be typed"),
    "two jumps that differ in capitals": (
        [("[jumps.double]", "[jumps.Walk]")],
        "jumps.Walk",
        "only in capitals",
    ),
    "a jump that is no table": (
        [('[jumps.double]\nlike = "walk"\n' + SECOND, "[jumps]\ndouble = 1")],
        "jumps.double",
        "as in [jumps.walk]",
    ),
    "a misspelt key": ([("weight = 0.5", "wieght = 0.5")], "jumps.armour.wieght", "weight is probably meant"),
    "a weight of 0": ([("weight = 0.5", "weight = 0")], "jumps.armour.weight", "above 0"),
    "a target of no measure": (
        [("max_gap =", "maxgap =")],
        "jumps.sprint.targets.maxgap",
        "max_gap is probably meant",
    ),
    "a target without a tolerance": (
        [("at_least = 400, within = 10", "at_least = 400")],
        "jumps.sprint.targets.max_gap.within",
        "a tolerance",
    ),
    "targets that are no table": (
        [("targets = { max_gap = { at_least = 400, within = 10 } }", "targets = 3")],
        "jumps.sprint.targets",
        "a table of measures",
    ),
    "no launch speed": (
        [("launch_speed = 620\n", ""), ('launch_speed = "free", ', "")],
        "jumps.walk.launch_speed",
        "it has no default",
    ),
    "no gravity": (
        [("gravity = 1600\n", ""), ("gravity = { from = 800, to = 3200, every = 10 }\n", "")],
        "today.gravity",
        "it has no default",
    ),
    "a set for a jump that is not there": (
        [("[[ledges]]", SET + "armor = { run_speed = 1 }\n[[ledges]]")],
        "sets[1].armor",
        "armour is probably meant",
    ),
    "a jump's gravity in a set": (
        [("[[ledges]]", SET + "armour = { gravity = 1 }\n[[ledges]]")],
        "sets[1].armour.gravity",
        "in the set itself",
    ),
    "a jump in a set that is no table": (
        [("[[ledges]]", SET + "armour = 3\n[[ledges]]")],
        "sets[1].armour",
        "armour",
    ),
    "a block without a length": (
        [("[[ledges]]", '[[blocks]]\nname = "b"\nheight = 1\nmust = "stay-out"\n' + "[[ledges]]")],
        "blocks[1].length",
        "a length above 0",
    ),
    "a block that must be reached": (
        [("[[ledges]]", '[[blocks]]\nname = "b"\nheight = 1\nlength = 1\nmust = "reach"\n' + "[[ledges]]")],
        "blocks[1].must",
        '"clear", "stay-out"',
    ),
    "a block by nobody": (
        [("[[ledges]]", '[[blocks]]\nname = "b"\nheight = 1\nlength = 1\nmust = "clear"\n' + "[[ledges]]")],
        "blocks[1].by",
        "must clear it",
    ),
    "a ceiling without a body": (
        [("[[ledges]]", '[[ceilings]]\nname = "c"\nheight = 1\n' + "[[ledges]]")],
        "ceilings[1].body_height",
        "0 or more",
    ),
}


def faults(text: str) -> InputError:
    with pytest.raises(InputError) as caught:
        parse_brief(text, "yard.toml")
    return caught.value


@pytest.mark.parametrize("name", REFUSED)
def test_what_is_refused_with_the_reason(name: str) -> None:
    changes, field, words = REFUSED[name]
    error = faults(yard(*changes))
    assert [fault.field for fault in error.faults] == [field], str(error)
    (fault,) = error.faults
    assert words in f"{fault.allowed}\n{fault.fix}"
    assert fault.place.startswith("yard.toml, line ")
    assert fault.fix


def test_each_refusal_has_its_own_message() -> None:
    assert len({str(faults(yard(*case[0]))) for case in REFUSED.values()}) == len(REFUSED)


def test_a_misspelt_header() -> None:
    assert "[jumps] is probably meant" in str(faults(HEAD + "[jump.walk]\n"))


def test_jumps_without_a_jump_or_without_an_aim() -> None:
    assert "at least one jump" in str(faults(HEAD + "[jumps]\n"))
    assert "[jumps.walk] alone on a line" in str(faults(HEAD + "[[jumps]]\n"))
    assert "targets for at least one jump" in str(faults(HEAD + "[jumps.walk]\n"))
    bare = HEAD.split("[today]")[0] + "[rates]" + HEAD.split("[rates]")[1]
    assert "[today] with the constants" in str(faults(bare + "[jumps.walk]\n"))
    own = faults(bare + "[jumps.walk]\ntoday = { launch_speed = 1 }\n")
    assert "gravity in [today] or [search]" in str(own)


def test_a_set_must_say_what_nothing_else_says() -> None:
    error = faults(
        yard(("launch_speed = 620\n", ""), ("[[ledges]]", SET.replace("walk = ", "double = ") + "[[ledges]]"))
    )
    (fault,) = error.faults
    assert fault.field == "sets[1].launch_speed"
    assert "launch_speed for walk, sprint, armour" in fault.allowed
    assert "add walk = { launch_speed = … }" in fault.fix


@pytest.mark.parametrize(
    ("old", "new", "field", "words"),
    [
        ("grain = 1", "gravity_factor = 1", "today.gravity_factor", "of [jumps.NAME]"),
        (
            "run_speed = 500\n\n[targets]",
            "gravity_factor = 1\n\n[targets]",
            "search.gravity_factor",
            "[jumps.NAME]",
        ),
        ("margin = 2", 'by = ["walk"]', "ledges[1].by", 'one, named "jump"'),
        ("grain = 1", "like = 1", "today.like", "like belongs in [jumps.NAME]"),
        ("launch_gravity = true", "second = 1", "rule.second", "second belongs in [jumps.NAME]"),
        ("title =", "walk = { launch_speed = 1 }\ntitle =", "walk", "take walk out"),
    ],
)
def test_what_only_several_jumps_have(old: str, new: str, field: str, words: str) -> None:
    error = faults(changed((old, new)))
    assert [fault.field for fault in error.faults] == [field]
    assert words in str(error)


def test_a_set_of_one_jump_knows_no_jumps() -> None:
    error = faults(BASE + '[[sets]]\nname = "a"\nwalk = { launch_speed = 1 }\ngravity_factor = 2\n')
    assert [fault.field for fault in error.faults] == ["sets[1].walk", "sets[1].gravity_factor"]


def test_what_is_wrong_in_several_jumps_is_said_at_once() -> None:
    text = yard(
        ("run_speed = 300", 'run_speed = "x"'),
        (LIKE, '[jumps.sprint]\nlike = "no"'),
        ("520", "0"),
        (BY, 'by = ["no"]'),
    )
    assert [fault.field for fault in faults(text).faults] == [
        "jumps.walk.search.run_speed",
        "jumps.sprint.like",
        "jumps.double.second.launch_speed",
        "ledges[1].by",
    ]
