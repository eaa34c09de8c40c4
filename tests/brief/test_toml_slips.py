"""What people write who don't know TOML: each slip has its line, our words and the corrected line."""

from pathlib import Path

import pytest

from designer.brief.reading import parse_brief, read_brief
from designer.errors import InputError
from tests.reference.crate_yard import BASE, changed, line_of

APEX = "apex = { aim = 105, within = 2 }"
AIRTIME = "airtime = { aim = 0.71, within = 0.02, weight = 1 }"
LISTED = 'supported = ["60 Hz", "75 Hz", "90 Hz"]'

# name: (old, new, a marker of the faulty line, words of the message, the corrected line)
SLIPS = {
    "a number with a unit": (APEX, "apex = 1.5 body", "1.5 body", "quotation marks",
                             'apex = { aim = "1.5 body", within = "0.03 body" }'),
    "a decimal comma": (AIRTIME, "airtime = 0,76", "0,76", "decimals have a point",
                        "airtime = { aim = 0.76, within = 0.02 }"),
    "decimal commas in braces": (AIRTIME, "airtime = { aim = 0,71, within = 0,02 }", "0,71",
                                 "decimals have a point", "airtime = { aim = 0.71, within = 0.02 }"),
    "a bare rate": ('aim_at = "60 Hz"', "aim_at = 60 Hz", "aim_at = 60", "unit stands in quotation marks",
                    'aim_at = "60 Hz"'),
    "a rate in small letters": ('aim_at = "60 Hz"', "aim_at = 60fps", "60fps", "quotation marks",
                                'aim_at = "60 Hz"'),
    "a fraction": ('aim_at = "60 Hz"', "aim_at = 1/60", "1/60", "not a calculation", 'aim_at = "60 Hz"'),
    "a table over several lines": (APEX, "apex = {\n    aim = 105,   # cm\n    within = 2,\n}", "apex = {",
                                   "stands on one line", APEX),
    "such a table with colons": (APEX, "apex = {\n  aim: 105\n  within: 2\n}", "apex = {",
                                 "stands on one line", APEX),
    "a comma before the brace": (APEX, "apex = { aim = 105, within = 2, }", "2, }",
                                 "before the closing brace",
                                 APEX),
    "no comma between": (APEX, "apex = { aim = 105 within = 2 }", "105 within", "commas separate", APEX),
    "semicolons between": (APEX, "apex = { aim = 105; within = 2 }", "105;", "commas separate", APEX),
    "typographic quotation marks": ('"Crate yard"', "“Crate yard”", "“", "of the keyboard",
                                    'title = "Crate yard"'),
    "a typographic minus": ("far_level = -30", "far_level = −30", "−30", "minus signs", "far_level = -30"),
    "a colon": ("gravity = 1500", "gravity: 1500", "gravity:", "not :", "gravity = 1500"),
    "a colon and equals": ("gravity = 1500", "gravity := 1500", ":=", "not :=", "gravity = 1500"),
    "two equals signs": ("gravity = 1500", "gravity == 1500", "==", "not ==", "gravity = 1500"),
    "an arrow": ("gravity = 1500", "gravity => 1500", "=>", "not =>", "gravity = 1500"),
    "a tab": ("gravity = 1500", "gravity\t1500", "\t", "which is missing", "gravity = 1500"),
    "no equals sign": ("launch_speed = 580", "launch_speed 580", "speed 580", "which is missing",
                       "launch_speed = 580"),
    "no value": ("gravity = 1500", "gravity =", "gravity =\n", "a value after the equals sign", "gravity ="),
    "no quotation marks": ('"semi-implicit"', "semi-implicit", "integrator", "straight quotation marks",
                           'integrator = "semi-implicit"'),
    "no quotation marks round words": ('"Crate yard"', "Crate yard", "title", "straight quotation marks",
                                       'title = "Crate yard"'),
    "no quotation marks in braces": ('"nearest-even"', "nearest-even", "rounding", "straight quotation marks",
                                     'rounding = { mode = "nearest-even", at = "end" }'),
    "a key twice": ("gravity = 1500", "gravity = 1500\ngravity = 1400", "1400",
                    "each key once; it stands on line",
                    "keep one of the two lines"),
    "a table twice": ("[targets]", "[today]\ngravity = 1\n[targets]", "[today]\ngravity = 1\n",
                      "each table once",
                      "move these keys up to line"),
    "single brackets, several times": ("[[ledges]]", "[ledges]", "[ledges]", "double square brackets",
                                       "[[ledges]]"),
    "slashes as a comment": ("gravity = 1500", "gravity = 1500 // cm", "//", "comments begin with #",
                             "gravity = 1500"),
    "a line of slashes": ("[today]", "// our build\n[today]", "//", "comments begin with #", "# our build"),
    "a semicolon as a comment": ("[today]", "; our build\n[today]", "; our", "comments begin with #",
                                 "# our build"),
    "a list not closed": (LISTED, LISTED[:-1], "supported", "a list ends with ]", LISTED),
    "a brace not closed": (APEX, APEX[:-2], "apex =", "a table in braces ends with }", APEX),
    "text not closed": ('"Crate yard"', '"Crate yard', "title", "quotation mark that it began with",
                        'title = "Crate yard"'),
    "a header not closed": ("[today]", "[today", "[today", "table's name", "[today]"),
    "a header with a colon": ("[today]", "today:", "today:", "table's name", "[today]"),
    "keys beside a header": ("[today]\n", "[today] grain = 1\n", "[today] g", "alone on its line",
                             "grain = 1 on the next line"),
    "the unit glued on": ("margin = 2", "margin = 2cm", "2cm", "lengths are in cm already", "margin = 2"),
    "another unit glued on": ("height = 97", "height = 1.5tile", "1.5tile", "quotation marks",
                              'height = "1.5 tile"'),
    "a percent sign": ("within = 2 }", "within = 2% }", "2%", "percent sign",
                       "apex = { aim = 105, within = 2.1 }"),
    "yes": ("launch_gravity = true", "launch_gravity = yes", "yes", "true and false",
            "launch_gravity = true"),
    "a capital True": ("launch_gravity = true", "launch_gravity = True", "True", "true and false",
                       "launch_gravity = true"),
    "a semicolon at the end": ("gravity = 1500", "gravity = 1500;", "1500;", "without a semicolon",
                               "gravity = 1500"),
    "a comma at the end": ("gravity = 1500", "gravity = 1500,", "1500,", "without a semicolon or comma",
                           "gravity = 1500"),
    "plus or minus": (APEX, "apex = 105 ± 2", "±", "aim and within", APEX),
    "dots for a range": ("{ from = 900, to = 2900, every = 10 }", "900..2900", "900..", "from, to and every",
                         "gravity = { from = 900, to = 2900 }"),
    "a key of two words": ("launch_speed = 580", "launch speed = 580", "launch speed", "one word",
                           "launch_speed = 580"),
    "a comma in thousands": ("gravity = 1500", "gravity = 1,500", "1,500", "or, as a decimal, 1.500",
                             "gravity = 1500"),
    "a space in thousands": ("gravity = 1500", "gravity = 1 500", "1 500", "without spaces",
                             "gravity = 1500"),
    "no figure before the point": ("within = 0.02", "within = .02", ".02,", "before and after its point",
                                   "within = 0.02"),
    "no figure after the point": ("gravity = 1500", "gravity = 1500.", "1500.", "before and after its point",
                                  "gravity = 1500"),
    "NaN as a word": ("gravity = 1500", "gravity = NaN", "NaN", "an ordinary number",
                      "inf and nan have no use"),
    "backslashes": ('"Crate yard"', '"C:\\yard"', "yard", "a backslash", "title = 'C:\\yard'"),
    "round brackets": ("[0, 0.125, 1]", "(0, 0.125, 1)", "(0,", "square brackets", "[0, 0.125, 1]"),
    "something after the value": ('"Crate yard"', '"Crate" yard', "yard", "nothing but a comment",
                                  'title = "Crate"'),
}  # fmt: skip


def faults_of(text: str) -> InputError:
    with pytest.raises(InputError) as caught:
        parse_brief(text, "yard.toml")
    return caught.value


@pytest.mark.parametrize("name", SLIPS)
def test_a_slip_has_its_line_and_its_correction(name: str) -> None:
    old, new, marker, words, corrected = SLIPS[name]
    text = changed((old, new))
    line = text.count("\n", 0, text.index(marker)) + 1 if "\n" in marker else line_of(text, marker)
    fault = faults_of(text).faults[0]
    assert fault.place == f"yard.toml, line {line}"
    assert words in fault.allowed + fault.fix
    assert corrected in fault.fix


def test_each_slip_says_something_of_its_own() -> None:
    messages = [str(faults_of(changed(SLIPS[name][:2]))) for name in SLIPS]
    assert len(set(messages)) == len(SLIPS) > 40


ADVICE = {"no value", "a key twice", "a table twice", "single brackets, several times",
          "keys beside a header", "NaN as a word", "a comma in thousands"}  # fmt: skip
"""Slips whose message advises in words, because no one line can be proposed."""


@pytest.mark.parametrize("name", [name for name in SLIPS if name not in ADVICE])
def test_a_corrected_line_is_taken(name: str) -> None:
    """What a message proposes as the line to write is itself no slip any more."""
    old, new, marker, _, _ = SLIPS[name]
    text = changed((old, new))
    proposal = faults_of(text).faults[0].fix.removeprefix("write ")
    if "\n" in new and not new.endswith("[today]"):
        repaired = text.replace(new, proposal)
    else:
        lines = text.split("\n")
        lines[line_of(text, marker) - 1] = proposal
        repaired = "\n".join(lines)
    if "body" in proposal:
        assert "or say in [units] how long one is: body" in str(faults_of(repaired))
    else:
        parse_brief(repaired, "yard.toml")


def test_slips_and_faults_come_together() -> None:
    text = changed(
        ("gravity = 1500", "gravity: 1500"),
        ("run_speed = 500", "run_speed = 500;"),
        ("height = 112", "height = -112"),
        ('must = "cross"', 'must = "avoid"'),
    )
    error = faults_of(text)
    markers = ("gravity: 1500", "run_speed = 500;", "height = -112", '"avoid"')
    assert [fault.place for fault in error.faults] == [f"yard.toml, line {line_of(text, m)}" for m in markers]


def test_another_language_is_told_at_once() -> None:
    for text in ('{ "title": "x",\n "loop": {} }', "<brief>\n</brief>"):
        error = faults_of(text)
        assert len(error.faults) == 1
        assert "another language" in str(error)


def test_after_twenty_slips_the_rest_is_not_read() -> None:
    error = faults_of("gravity 5\n" * 1000)
    assert len(error.faults) == 21
    assert "the rest was not read" in str(error)


def test_a_line_without_end_is_no_brief() -> None:
    error = faults_of("{[(" * 100_000)
    assert len(str(error)) < 1000


@pytest.mark.parametrize("text", [BASE.replace("\n", "\r\n"), "\ufeff" + BASE, BASE + "\n\n# end"])
def test_what_editors_do_to_a_file_is_accepted(tmp_path: Path, text: str) -> None:
    path = tmp_path / "yard.toml"
    path.write_bytes(text.encode("utf-8"))
    assert read_brief(path) == parse_brief(BASE, "yard.toml")
