"""Briefs that are TOML but cannot be used: each fault has its line, field, value and a way out."""

import pytest

from designer.brief.reading import parse_brief
from designer.errors import InputError
from tests.reference.crate_yard import BASE, FIXED, changed, line_of

APEX = "apex = { aim = 105, within = 2 }"
SUPPORTED = '["60 Hz", "75 Hz", "90 Hz"]'
GRAVITY = "{ from = 900, to = 2900, every = 10 }"
GRAINS = "{ among = [0, 0.125, 1] }"
HEAD = BASE.split("[[ledges]]", maxsplit=1)[0]
NOTHING = BASE.split("[today]", maxsplit=1)[0]

# name: (the text, a marker of the line or "" where there is none, field, words of the message)
FAULTS = {
    "not a number": (changed(("1500", "nan")), "nan", "today.gravity", "finite"),
    "infinite": (changed(("1500", "-inf")), "-inf", "today.gravity", "finite"),
    "too large": (changed(("1500", "1e300")), "1e300", "today.gravity", "between 1e-12 and 1e12"),
    "a whole number too large": (changed(("1500", "1" * 400)), "111", "today.gravity", "1e12"),
    "negative gravity": (changed(("1500", "-1500")), "-1500", "today.gravity", "drop the minus sign: 1500"),
    "no gravity": (changed(("1500", "0")), "gravity = 0", "today.gravity", "above 0"),
    "a launch downward": (changed(("580", "-580")), "-580", "today.launch_speed", "above 0"),
    "a negative grain": (changed(("grain = 1", "grain = -1")), "-1", "today.grain", "0 or more"),
    "a fall factor of 0": (changed(("grain = 1", "fall_factor = 0")), "fall_f", "today.fall_factor",
                           "above 0"),
    "a flag for a number": (changed(("1500", "false")), "gravity = false", "today.gravity",
                            "not true or false"),
    "a list for a number": (changed(("1500", "[1, 2]")), "[1, 2]", "today.gravity", "not a list"),
    "a date": (changed(("1500", "2031-01-01")), "2031", "today.gravity", "date"),
    "a number in quotation marks": (changed(("580", '"580"')), '"580"', "today.launch_speed",
                                    "write launch_speed = 580"),
    "an unknown unit": (changed(("97", '"97 ell"')), "ell", "ledges[1].height",
                        "say in [units] how long one is: ell"),
    "another metric unit": (changed(("97", '"0.97 m"')), "0.97 m", "ledges[1].height",
                            "0.97 m is 97 cm\nwrite height = 97"),
    "a misspelt unit": (changed(("97", '"1.5 tyle"')), "tyle", "ledges[1].height", 'height = "1.5 tile"'),
    "a length for a speed": (changed(("580", '"9 tile"')), '"9 tile"', "today.launch_speed",
                             'launch_speed = "9 tile/s"'),
    "a comma inside text": (changed(("97", '"1,5 tile"')), "1,5", "ledges[1].height", 'height = "1.5 tile"'),
    "a unit where there is none": (changed(("weight = 1", 'weight = "1 cm"')), "1 cm",
                                   "targets.airtime.weight",
                                   "weight = 1"),
    "a misspelt key": (changed(("grain = 1", "grian = 1")), "grian", "today.grian",
                       "grain is probably meant"),
    "a misspelt table": (changed(("[rates]", "[rate]")), "[rate]", "rate", "[rates] is probably meant"),
    "a misplaced constant": (changed(("integrator", "grain = 1\nintegrator")), "grain = 1", "rule.grain",
                             "grain belongs in [today] or [search]"),
    "a constant before any table": ("gravity = 7\n" + BASE, "gravity = 7", "gravity",
                                    "gravity belongs in [today] or [search]"),
    "the title in a table": (changed(("tile = 64", 'title = "x"')), 'title = "x"', "units.title",
                             "title belongs at the top of the file"),
    "a rate in the loop": (changed(("aim_at", 'supported = ["60 Hz"]\naim_at')), 'supported = ["60 Hz"]',
                           "loop.supported", "supported belongs in [rates]"),
    "a mode beside the rule": (changed(("landing_test", 'mode = "down"\nlanding_test')), '"down"',
                               "rule.mode",
                               "inside rounding"),
    "an unknown key": (changed(("margin = 2", "colour = 2")), "colour", "ledges[1].colour",
                       "take colour out"),
    "a name of no measure": (changed(("airtime =", "air_time =")), "air_time", "targets.air_time",
                             "airtime is probably meant"),
    "a reversed range": (changed((GRAVITY, "{ from = 2900, to = 900, every = 10 }")), "from = 2900",
                         "search.gravity", "write gravity = { from = 900, to = 2900, every = 10 }"),
    "a zero increment": (changed(("every = 10", "every = 0")), "every = 0", "search.gravity.every",
                         "above 0"),
    "a negative increment": (changed(("every = 10", "every = -5")), "every = -5", "search.gravity.every",
                             "above 0"),
    "too many points": (changed(("every = 10", "every = 0.0001")), "0.0001", "search.gravity",
                        "100000 points"),
    "half a range": (changed((GRAVITY, "{ from = 900 }")), "from = 900", "search.gravity", "to is missing"),
    "a range from below zero": (changed(("from = 900", "from = -900")), "-900", "search.gravity.from",
                                "above 0"),
    "a strange key in a range": (changed(("every = 10", "step = 10")), "step = 10", "search.gravity.step",
                                 "take step out"),
    "another jump's constant": (changed((GRAVITY, '{ of = "walk", from = 1, to = 2 }')), '"walk"',
                                "search.gravity.of", "only in the search of a jump"),
    "a bare list": (changed((GRAINS, "[0, 0.125, 1]")), "grain = [", "search.grain",
                    "write grain = { among = [0, 0.125, 1] }"),
    "an empty list": (changed((GRAINS, "{ among = [] }")), "among", "search.grain.among",
                      "at least one value"),
    "a bad list entry": (changed((GRAINS, "{ among = [0, -1] }")), "-1]", "search.grain.among[2]",
                         "0 or more"),
    "a word for a constant": (changed((GRAINS, '"any"')), '"any"', "search.grain", '"free"'),
    "a range of step_up": (changed((GRAINS, "0\nstep_up = { from = 1, to = 2 }")), "step_up",
                           "search.step_up",
                           "one number"),
    "a bare target": (changed((APEX, "apex = 105")), "apex = 105", "targets.apex",
                      "write apex = { aim = 105, within = 2 }"),
    "no tolerance": (changed((", within = 2 }", " }")), "aim = 105", "targets.apex.within",
                     "tolerance above 0"),
    "a tolerance of 0": (changed(("within = 2 }", "within = 0 }")), "within = 0 }", "targets.apex.within",
                         "above 0"),
    "a weight of 0": (changed(("weight = 1", "weight = 0")), "weight = 0", "targets.airtime.weight",
                      "above 0"),
    "an aim and a bound": (changed(("aim = 105,", "aim = 105, at_most = 110,")), "at_most", "targets.apex",
                           "not aim together with a bound"),
    "crossed bounds": (changed(("aim = 105,", "at_least = 110, at_most = 100,")), "110", "targets.apex",
                       "apex = { at_least = 100, at_most = 110, within = 2 }"),
    "no wish": (changed(("aim = 105, ", "")), "apex = {", "targets.apex", "aim, at_least or at_most"),
    "a negative aim": (changed(("aim = 105", "aim = -105")), "-105", "targets.apex.aim", "above 0"),
    "no targets": (changed(("[targets]\n" + APEX, ""), ("airtime", "# "), ("max_gap", "# ")), "", "targets",
                   "a search needs to know"),
    "empty targets": (changed((APEX, ""), ("airtime", "# "), ("max_gap", "# ")), "[targets]", "targets",
                      "at least one target"),
    "a rate without unit": (changed(('"90 Hz"', '"90"')), '"90"', "rates.supported[3]", 'write "90 Hz"'),
    "a rate that is a number": (changed(('aim_at = "60 Hz"', "aim_at = 60")), "aim_at = 60", "loop.aim_at",
                                'aim_at = "60 Hz"'),
    "a rate of 0": (changed(('"90 Hz"', '"0 Hz"')), '"0 Hz"', "rates.supported[3]", "1 and 10000 Hz"),
    "a negative rate": (changed(('"90 Hz"', '"-90 Hz"')), '"-90 Hz"', "rates.supported[3]", "1 and 10000 Hz"),
    "a rate too high": (changed(('"300 Hz"', '"10001 Hz"')), "10001", "rates.watched[1]", "1 and 10000 Hz"),
    "a rate in another unit": (changed(('"90 Hz"', '"90 fps"')), "fps", "rates.supported[3]",
                               'write "90 Hz"'),
    "a rate with a comma": (changed(('"90 Hz"', '"59,94 Hz"')), "59,94", "rates.supported[3]", '"59.94 Hz"'),
    "no rates in the list": (changed((SUPPORTED, "[]")), "supported = []", "rates.supported", "empty list"),
    "one rate bare": (changed((SUPPORTED, '"60 Hz"')), "supported", "rates.supported",
                      'supported = ["60 Hz"]'),
    "a reversed range of rates": (changed((SUPPORTED, '{ from = "90 Hz", to = "60 Hz" }')), "supported",
                                  "rates.supported", 'supported = { from = "60 Hz", to = "90 Hz" }'),
    "a range in two units": (changed((SUPPORTED, '{ from = "60 Hz", to = "9 ms" }')), "supported",
                             "rates.supported", "both ends in one unit"),
    "a range of broken rates": (changed((SUPPORTED, '{ from = "59.5 Hz", to = "90 Hz" }')), "59.5",
                                "rates.supported.from", "whole number"),
    "a range of rates with every": (changed((SUPPORTED, '{ from = "1 Hz", to = "9 Hz", every = 2 }')),
                                    "every = 2",
                                    "rates.supported.every", "no increment"),
    "a negative spread weight": (changed(("spread_weight = 1.0", "spread_weight = -1.0")), "-1.0",
                                 "rates.spread_weight", "0 or more"),
    "a ledge twice": (changed(('"crane"', '"crate"')), 'name = "crate"\nheight = 112', "ledges[2].name",
                      "number 1 has it already"),
    "a gap twice": (BASE + '[[gaps]]\nname = "Rails"\nwidth = 1\nmust = "cross"\n', '"Rails"', "gaps[2].name",
                    "number 1 has it already"),
    "a set twice": (BASE + '[[sets]]\nname = "old"\n[[sets]]\nname = "old"\ngrain = 0\n',
                    'name = "old"\ngrain = 0', "sets[2].name", "number 1 has it already"),
    "a set called today": (BASE + '[[sets]]\nname = "today"\n', '"today"', "sets[1].name", "[today]"),
    "another demand": (changed(('must = "reach"', 'must = "touch"')), "touch", "ledges[1].must",
                       '"stay-out"'),
    "a gap's word at a ledge": (changed(('must = "reach"', 'must = "cross"')), 'must = "cross"',
                                "ledges[1].must",
                                '"reach"'),
    "a ledge under the ground": (changed(("height = 97", "height = -97")), "-97", "ledges[1].height",
                                 "above 0"),
    "a ledge without name": (changed(('name = "crate"\n', "")), "[[ledges]]", "ledges[1].name", "add name"),
    "a ledge without height": (changed(("height = 97\n", "")), "[[ledges]]", "ledges[1].height",
                               "a length above 0"),
    "single brackets": (HEAD + '[ledges]\nname = "a"\nheight = 3\nmust = "reach"\n', "[ledges]", "ledges",
                        "write [[ledges]] instead of [ledges]"),
    "named tables": (HEAD + '[ledges.awning]\nheight = 3\nmust = "reach"\n', "[ledges.awning]", "ledges",
                     'name = "awning"'),
    "double brackets": (changed(("[search]", "[[search]]")), "[[search]]", "search",
                        "single square brackets"),
    "a table as text": (changed(('[loop]\nsteps = "each-frame"\naim_at = "60 Hz"', ""),
                                ("title", 'loop = "each-frame"\ntitle')), "loop =", "loop",
                                "[loop] alone on a line"),
    "nothing to judge": (NOTHING, "", "", "[today] with the constants"),
    "no loop": (changed(('[loop]\nsteps = "each-frame"\naim_at = "60 Hz"', "")), "", "loop", "who decides"),
    "no steps": (changed(('steps = "each-frame"\n', "")), "[loop]", "loop.steps", "how the game steps"),
    "another loop": (changed(('"each-frame"', '"every-frame"')), "every-frame", "loop.steps",
                     'steps = "each-frame"'),
    "nowhere to aim": (changed(('aim_at = "60 Hz"\n', "")), "[loop]", "loop.aim_at", 'add aim_at = "60 Hz"'),
    "an aim in a fixed loop": (FIXED.replace('"fixed"', '"fixed"\naim_at = "60 Hz"'), "aim_at", "loop.aim_at",
                               "take aim_at out"),
    "a step each frame": (changed(("grain = 1", 'step = "8 ms"')), '"8 ms"', "today.step", "take step out"),
    "a step nowhere": (FIXED.replace('step = "8 ms"', ""), "[today]", "today.step", 'add step = "8 ms"'),
    "a step that is a number": (FIXED.replace('"8 ms"', "8"), "step = 8", "today.step", 'step = "8 ms"'),
    "gravity nowhere": (changed(("gravity = 1500\n", ""), ("gravity = " + GRAVITY, "")), "[today]",
                        "today.gravity", "no default"),
    "no rule": (BASE.replace(BASE[BASE.index("[rule]") : BASE.index("[today]")], ""), "", "rule",
                "integrator"),
    "no integrator": (changed(('integrator = "semi-implicit"\n', "")), "[rule]", "rule.integrator",
                      "the order of the update"),
    "another integrator": (changed(('"semi-implicit"', '"semi_implicit"')), "semi_implicit",
                           "rule.integrator",
                           'integrator = "semi-implicit"'),
    "rounding as a word": (changed(('{ mode = "nearest-even", at = "end" }', '"down"')), '"down"',
                           "rule.rounding", 'rounding = { mode = "down" }'),
    "another place": (changed(('at = "end"', 'at = "start"')), '"start"', "rule.rounding.at", "before-move"),
    "a flag in quotation marks": (changed(("gravity = true", 'gravity = "yes"')), '"yes"',
                                  "rule.launch_gravity",
                                  "launch_gravity = true"),
    "a number for a flag": (changed(("gravity = true", "gravity = 1")), "gravity = 1", "rule.launch_gravity",
                            "launch_gravity = true"),
    "a title of nothing": (changed(('"Crate yard"', '""')), 'title = ""', "title", "not empty"),
    "a unit of nothing": (changed(("tile = 64", "tile = 0")), "tile = 0", "units.tile", "above 0"),
    "a unit named like time": (changed(("tile = 64", "ms = 64")), "ms = 64", "units.ms", "another name"),
    "the unit again": (changed(("tile = 64", "cm = 64")), "cm = 64", "units.cm", "which is the unit itself"),
    "a misspelt length": (changed(('length = "cm"', 'lenght = "cm"')), "lenght", "units.lenght",
                          'length = "cm"'),
    "another time": (changed(('time = "s"', 'time = "ms"')), 'time = "ms"', "units.time", 'time = "s"'),
}  # fmt: skip

LATER = {
    "[keep]": (BASE + "[keep]\napex = { within = 1 }\n", "[keep]", "keep"),
    "[windows]": (BASE + '[windows]\ngrace = "100 ms"\n', "[windows]", "windows"),
    "[human]": (BASE + "[human]\npress_error = 0.02\n", "[human]", "human"),
    "constants per step": (changed(('time = "s"', 'time = "step"')), 'time = "step"', "units.time"),
    "half-kick": (changed(('"semi-implicit"', '"half-kick"')), "half-kick", "rule.integrator"),
    "constant-acceleration": (changed(('"semi-implicit"', '"constant-acceleration"')), "constant-acc",
                              "rule.integrator"),
    "random rounding": (changed(('"nearest-even"', '"random"')), '"random"', "rule.rounding.mode"),
    "drag": (changed(("launch_gravity =", "drag = 1\nlaunch_gravity =")), "drag = 1", "rule.drag"),
    "hold_factor": (changed(("launch_gravity =", "hold_factor = 1\nlaunch_gravity =")), "hold_factor",
                    "rule.hold_factor"),
    "number": (changed(("launch_gravity =", 'number = "float32"\nlaunch_gravity =')), "float32",
               "rule.number"),
    "clearance": (changed(("max_gap =", "clearance =")), "clearance", "targets.clearance"),
}  # fmt: skip


def faults_of(text: str) -> InputError:
    with pytest.raises(InputError) as caught:
        parse_brief(text, "yard.toml")
    return caught.value


def place(text: str, marker: str) -> str:
    if not marker:
        return "yard.toml"
    # A marker over two lines tells which of two equal lines is meant.
    number = text.count("\n", 0, text.index(marker)) + 1 if "\n" in marker else line_of(text, marker)
    return f"yard.toml, line {number}"


@pytest.mark.parametrize("name", FAULTS)
def test_a_fault_says_where_what_and_how(name: str) -> None:
    text, marker, field, words = FAULTS[name]
    error = faults_of(text)
    assert len(error.faults) == 1, str(error)
    (fault,) = error.faults
    assert fault.place == place(text, marker)
    assert fault.field == field
    assert words in f"{fault.allowed}\n{fault.fix}"
    assert fault.allowed
    assert fault.fix


def test_each_fault_has_its_own_message() -> None:
    assert len({str(faults_of(case[0])) for case in FAULTS.values()}) == len(FAULTS)


@pytest.mark.parametrize("name", LATER)
def test_what_comes_later_is_no_slip(name: str) -> None:
    text, marker, field = LATER[name]
    error = faults_of(text)
    assert [(fault.place, fault.field) for fault in error.faults] == [(place(text, marker), field)]
    assert "not yet known in this version" in str(error)
    assert "probably meant" not in str(error)


def test_the_value_stands_as_written() -> None:
    text = changed(("within = 2 }", "within = -0.50 }"), ("height = 97", "height = '97 ell'"))
    assert [fault.value for fault in faults_of(text).faults] == ["-0.50", "'97 ell'"]


def test_everything_wrong_is_said_at_once_in_the_order_of_the_file() -> None:
    text = changed(
        ('aim_at = "60 Hz"', "aim_at = 60"),
        ('"semi-implicit"', '"implicit"'),
        ("gravity = 1500", "gravity = -1"),
        ("every = 10", "every = 0"),
        ("among = [0, 0.125, 1]", "among = [-1, nan, 1]"),
        ("within = 2 }", "within = 0 }"),
        ('"75 Hz", "90 Hz"', '"75", "90"'),
        ('name = "crane"', 'name = "crate"'),
        ("height = 112", 'height = "112 ell"'),
        ('must = "cross"', 'must = "jump"'),
    )
    error = faults_of(text)
    assert [fault.field for fault in error.faults] == [
        "loop.aim_at", "rule.integrator", "today.gravity", "search.gravity.every", "search.grain.among[1]",
        "search.grain.among[2]", "targets.apex.within", "rates.supported[2]", "rates.supported[3]",
        "ledges[2].name", "ledges[2].height", "gaps[1].must",
    ]  # fmt: skip


def test_a_list_over_several_lines_has_the_entry_s_own_line() -> None:
    text = changed((SUPPORTED, '[\n  "60 Hz",  # most\n  "75",\n  "90 Hz",\n]'))
    (fault,) = faults_of(text).faults
    assert fault.place == place(text, '"75"')


def test_a_set_without_gravity_where_nothing_gives_one() -> None:
    bare = changed(("gravity = 1500\nlaunch_speed = 580\n", ""))
    (first, second) = faults_of(bare + '[[sets]]\nname = "old"\n').faults
    assert (first.field, second.field) == ("sets[1].gravity", "sets[1].launch_speed")
    assert parse_brief(bare, "yard.toml").base is None
