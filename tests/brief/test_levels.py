"""Level lists: rows that count as ledges and gaps, and which of them bind."""

from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from designer.brief.levels import LevelReader, tightest
from designer.brief.model import Feature, Gap, Ledge
from designer.brief.reading import read_brief
from designer.brief.units import Units, exact
from designer.errors import Fault, InputError
from tests.reference.crate_yard import BASE
from tests.reference.jump_briefs import YARD

UNITS = Units("cm", {"tile": exact(64) or 0})  # type: ignore[dict-item]
JUMPS = ("walk", "sprint", "bosun hop")


def read(text: str, *, several: bool = True) -> LevelReader:
    reader = LevelReader("roofs.csv", UNITS, JUMPS, several=several)
    reader.read(text)
    return reader


def features(text: str) -> list[Feature]:
    reader = read(text)
    assert not reader.faults
    return list(reader.features)


def fault(text: str) -> Fault:
    (one,) = read(text).faults
    return one


def test_rows_are_ledges_and_gaps_with_their_place() -> None:
    rows = (
        "room,name,must,height,width,far_level,margin,by,x\n"
        "loft,shelf,reach,1.5 tile,,,2,walk;bosun hop,12.5\n"
        "\n"
        'loft,"lamp, oil",stay-out,118,,,,,\n'
        "quay,canal,cross,,305,-30,4,sprint,7\n"
        "quay,weir,stay-out,,470,,,sprint,\n"
    )
    assert features(rows) == [
        Ledge(
            "shelf",
            96.0,
            "reach",
            2.0,
            ("walk", "bosun hop"),
            {"room": "loft", "x": "12.5"},
            "roofs.csv, line 2",
        ),
        Ledge("lamp, oil", 118.0, "stay-out", 0.0, JUMPS, {"room": "loft"}, "roofs.csv, line 4"),
        Gap(
            "canal", 305.0, "cross", -30.0, 4.0, ("sprint",), {"room": "quay", "x": "7"}, "roofs.csv, line 5"
        ),
        Gap("weir", 470.0, "stay-out", 0.0, 0.0, ("sprint",), {"room": "quay"}, "roofs.csv, line 6"),
    ]


@pytest.mark.parametrize("sign", [",", ";", "\t"])
def test_what_spreadsheets_put_between(sign: str) -> None:
    rows = [("Name", "MUST", "Height", "Far Level", "by"), ("a", "stay-out", "90", "", '"walk;sprint"')]
    (one,) = features("\n".join(sign.join(row) for row in rows))
    assert (one.by, one.place) == (("walk", "sprint"), {})


def test_the_same_name_in_two_rooms() -> None:
    assert [one.name for one in features("name,must,height\na,stay-out,1\na,stay-out,2\n")] == ["a", "a"]


REFUSED = {
    "empty": (" \n", 1, "", "this file is empty"),
    "no rows": ("name,must,height\n\n", 3, "", "there is none"),
    "no name": ("must,height\n", 1, "", "name is missing"),
    "no must": ("name,height\n", 1, "", "must is missing"),
    "no size": ("name,must\n", 1, "", "height (of ledges) or width (of gaps) is missing"),
    "a misspelt column": ("name,must,height,margn\n", 1, "margn", "margin is probably meant"),
    "a column twice": ("name,must,height,height\n", 1, "height", "each once"),
    "too many cells": ("name,must,height\na,reach,1,2\n", 2, "", "at most 3 cells"),
    "an open quotation mark": ('name,must,height\n"a,stay-out,1\n', 3, "", "close every quotation mark"),
    "no name in a row": ("name,must,height\n,stay-out,1\n", 2, "name", "not empty"),
    "no must in a row": ("name,must,height\na,,1\n", 2, "must", "one of reach, cross, stay-out"),
    "an unknown must": ("name,must,height\na,stay out,1\n", 2, "must", "write stay-out"),
    "a block": ("name,must,height\na,clear,1\n", 2, "must", "one of reach"),
    "a negative height": ("name,must,height\na,stay-out,-1\n", 2, "height", "above 0"),
    "no height at all": ("name,must,height\na,stay-out,0\n", 2, "height", "above 0"),
    "a height in words": ("name,must,height\na,stay-out,high\n", 2, "height", "write the number itself"),
    "a comma for a point": ('name,must,height\na,stay-out,"1,5"\n', 2, "height", "write 1.5"),
    "an unknown unit": ("name,must,height\na,stay-out,1 tyle\n", 2, "height", "write 1 tile"),
    "a negative margin": ("name,must,height,margin\na,stay-out,5,-1\n", 2, "margin", "0 or more"),
    "a ledge to cross": ("name,must,height,width\na,cross,5,\n", 2, "width", "a width and no height"),
    "a gap to reach": ("name,must,height,width\na,reach,,5\n", 2, "height", "a height and no width"),
    "a height and a width": ("name,must,height,width\na,stay-out,4,5\n", 2, "width", "either a height"),
    "neither": ("name,must,height,width\na,stay-out,,\n", 2, "height", "either a height"),
    "a ledge's far side": ("name,must,height,far_level\na,stay-out,4,5\n", 2, "far_level", "only for a gap"),
    "a must by nobody": ("name,must,height\na,reach,4\n", 2, "by", "the jumps that must reach it"),
    "by a strange jump": ("name,must,height,by\na,reach,4,walc\n", 2, "by", "walk is probably meant"),
}  # fmt: skip


@pytest.mark.parametrize("name", REFUSED)
def test_what_is_wrong_in_a_row_has_its_line(name: str) -> None:
    text, line, field, words = REFUSED[name]
    if field in ("width", "height") and "reach" in text:
        text = (
            text.replace("must", "must,by", 1).replace("reach", "reach,walk").replace("cross", "cross,walk")
        )
    if "cross" in text:
        text = text.replace("must", "must,by", 1).replace("cross", "cross,walk")
    one = fault(text)
    assert (one.place, one.field) == (f"roofs.csv, line {line}", field), str(one)
    assert words in f"{one.allowed}\n{one.fix}"


def test_after_many_faults_the_rest_is_left() -> None:
    reader = read("name,must,height\n" + "a,stay-out,-1\n" * 500)
    assert len(reader.faults) == 21
    assert "the rest was not read" in reader.faults[-1].allowed


def test_without_jumps_a_row_has_no_by() -> None:
    assert not read("name,must,height,by\na,reach,4,\n", several=False).faults
    (one,) = read("name,must,height,by\na,reach,4,walk\n", several=False).faults
    assert "without [jumps]" in one.allowed


def test_a_brief_with_a_level_list(tmp_path: Path) -> None:
    (tmp_path / "roofs.csv").write_bytes("\ufeffname,must,height\r\nTür,reach,90\r\n".encode())
    path = tmp_path / "yard.toml"
    path.write_text('levels = "roofs.csv"\n' + BASE)
    brief = read_brief(path)
    assert [one.name for one in brief.ledges] == ["crate", "crane", "Tür"]
    assert (brief.ledges[2].by, brief.ledges[2].source) == (("jump",), "roofs.csv, line 2")
    assert brief.ledges[0].source == ""


def test_its_faults_come_with_the_brief_s(tmp_path: Path) -> None:
    (tmp_path / "roofs.csv").write_text("name,must,height,by\na,reach,90,walk\nb,reach,90,hop\n")
    path = tmp_path / "yard.toml"
    path.write_text('levels = "roofs.csv"\n' + YARD.replace("weight = 0.5", "weight = 0"))
    with pytest.raises(InputError) as caught:
        read_brief(path)
    assert [(fault.place.split(",")[0], fault.field) for fault in caught.value.faults] == [
        ("yard.toml", "jumps.armour.weight"),
        ("roofs.csv", "by"),
    ]


@pytest.mark.parametrize(
    ("said", "words"),
    [
        ("3", "the name of a level list"),
        ('"none.csv"', "there is none of this name"),
        ('"."', "this is a folder"),
    ],
)
def test_a_level_list_that_cannot_be_had(tmp_path: Path, said: str, words: str) -> None:
    path = tmp_path / "yard.toml"
    path.write_text(f"levels = {said}\n" + BASE)
    with pytest.raises(InputError) as caught:
        read_brief(path)
    (one,) = caught.value.faults
    assert (one.place, one.field) == ("yard.toml, line 1", "levels")
    assert words in one.allowed


CELLS = ["name", "must", "height", "width", "by", "reach", "stay-out", "walk", "1.5", "-2", "1 tile", "", "é"]
CELLS += [",", ",", ",", "\n", "\n", ";", "\t", '"', "'", "1e999", "nan", "\\", "\u2028", "²"]


@settings(max_examples=150, deadline=None)
@given(st.text(max_size=80) | st.lists(st.sampled_from(CELLS), max_size=40).map("".join), st.booleans())
def test_any_text_is_read_or_refused_in_words(text: str, several: bool) -> None:
    head = "name,must,height,by\n" if several else ""
    reader = read(head + text, several=several)
    assert reader.features or reader.faults
    assert all(one.place and one.allowed and one.fix for one in reader.faults)


def test_only_the_rows_that_bind_are_kept() -> None:
    rows = features(
        "name,must,height,width,far_level,margin,by\n"
        "low,reach,80,,,,walk;sprint\n"
        "high,reach,90,,,,walk\n"
        "margin,reach,89,,,3,walk\n"
        "lamp,stay-out,120,,,1,\n"
        "beam,stay-out,118,,,,walk\n"
        "ditch,cross,,200,,,sprint\n"
        "canal,cross,,210,,,sprint\n"
        "drop,cross,,200,-30,,sprint\n"
        "weir,stay-out,,400,,,sprint\n"
        "river,stay-out,,500,,,sprint\n"
    )
    assert [(one.name, one.by) for one in tightest(rows)] == [
        ("low", ("sprint",)), ("margin", ("walk",)), ("lamp", ("sprint", "bosun hop")), ("beam", ("walk",)),
        ("canal", ("sprint",)), ("drop", ("sprint",)), ("weir", ("sprint",)),
    ]  # fmt: skip


def test_the_brief_s_own_features_are_all_kept() -> None:
    own = (Ledge("a", 80.0, "reach"), Ledge("b", 90.0, "reach"))
    row = Ledge("c", 70.0, "reach", source="roofs.csv, line 2")
    assert tightest((*own, row)) == (*own, row)


def test_thousands_of_rows_leave_a_handful(tmp_path: Path) -> None:
    rows = [f"r{n},{('reach', 'stay-out')[n % 2]},{50 + n % 40 + 60 * (n % 2)},{n}" for n in range(10_000)]
    (tmp_path / "roofs.csv").write_text("name,must,height,room\n" + "\n".join(rows))
    path = tmp_path / "yard.toml"
    path.write_text('levels = "roofs.csv"\n' + BASE)
    brief = read_brief(path)
    assert len(brief.ledges) == 10_002
    assert [one.name for one in tightest(brief.features)] == ["crate", "crane", "r1", "r38", "rails"]
