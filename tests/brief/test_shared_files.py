"""`with`: what a team shares is read first, this file's keys win; and a brief that can be kept by itself."""

from pathlib import Path

import pytest

from designer.brief.reading import parse_brief, read_brief, sources_of
from designer.errors import Fault, InputError
from tests.reference.crate_yard import BASE, line_of
from tests.reference.jump_briefs import FEATURES, HEAD, JUMPS, YARD

ROWS = "name,must,height,room\nshelf,stay-out,118,loft\n"


def write(folder: Path, **texts: str) -> Path:
    """Write files named by their stems, the brief's being `yard`; return the brief's path."""
    for stem, text in texts.items():
        (folder / f"{stem}.{'csv' if stem == 'roofs' else 'toml'}").write_text(text, encoding="utf-8")
    return folder / "yard.toml"


def faults_of(path: Path) -> tuple[Fault, ...]:
    with pytest.raises(InputError) as caught:
        read_brief(path)
    return caught.value.faults


def test_a_brief_in_two_files_is_the_brief_in_one(tmp_path: Path) -> None:
    path = write(tmp_path, studio=HEAD, yard='with = "studio.toml"\n' + JUMPS + FEATURES)
    assert read_brief(path) == parse_brief(YARD, "yard.toml")


def test_this_file_s_keys_win_one_by_one(tmp_path: Path) -> None:
    own = 'with = "studio.toml"\n[today]\ngravity = 1700\n[targets]\napex = { aim = 99, within = 3 }\n'
    brief = read_brief(write(tmp_path, studio=BASE, yard=own))
    assert brief.title == "Crate yard"
    assert brief.name == "yard"
    assert brief.today is not None
    assert (brief.today.gravity, brief.today.launch_speed) == (1700.0, 580.0)
    assert {target.measure: target.aim for target in brief.jumps[0].targets} == {
        "apex": 99.0, "airtime": 0.71, "max_gap": None,
    }  # fmt: skip


def test_a_value_in_braces_is_replaced_whole(tmp_path: Path) -> None:
    own = 'with = "studio.toml"\n[rule]\nrounding = { at = "before-move" }\n[search]\ngravity = 1500\n'
    brief = read_brief(write(tmp_path, studio=BASE.replace("nearest-even", "down"), yard=own))
    assert (brief.rule.rounding.mode, brief.rule.rounding.at) == ("nearest-even", "before-move")
    assert brief.search is not None
    assert brief.search["gravity"].values == (1500.0,)


def test_lists_of_tables_are_joined_the_studio_s_first(tmp_path: Path) -> None:
    own = 'with = "studio.toml"\n[[ledges]]\nname = "roof"\nheight = 90\nmust = "reach"\n'
    brief = read_brief(write(tmp_path, studio=BASE, yard=own))
    assert [ledge.name for ledge in brief.ledges] == ["crate", "crane", "roof"]


def test_jumps_are_joined_key_by_key(tmp_path: Path) -> None:
    own = 'with = "studio.toml"\n[jumps.sprint]\nsearch.run_speed = 560\nweight = 2\n'
    own += '[jumps.hop]\nlike = "walk"\n'
    brief = read_brief(write(tmp_path, studio=YARD, yard=own))
    assert [jump.name for jump in brief.jumps] == ["walk", "sprint", "armour", "double", "hop"]
    sprint = brief.jumps[1]
    assert (sprint.like, sprint.weight, len(sprint.targets)) == ("walk", 2.0, 1)
    assert brief.view("sprint").search is not None
    assert brief.variables[sprint.terms["run_speed"].variable].choice.values == (560.0,)


def test_faults_name_the_right_file_and_line(tmp_path: Path) -> None:
    studio = (
        HEAD.replace("gravity = 1600", "gravity = -1600")
        + '[[ledges]]\nname = "a"\nheight = -1\nmust = "stay-out"\n'
    )
    own = 'with = "studio.toml"\n' + JUMPS.replace('like = "walk"', 'like = "wolk"', 1)
    own += '[[ledges]]\nname = "b"\nheight = 0\nmust = "stay-out"\n'
    faults = faults_of(write(tmp_path, studio=studio, yard=own))
    assert [(fault.place, fault.field) for fault in faults] == [
        (f"yard.toml, line {line_of(own, 'wolk')}", "jumps.sprint.like"),
        (f"yard.toml, line {line_of(own, 'height = 0')}", "ledges[1].height"),
        (f"studio.toml, line {line_of(studio, '-1600')}", "today.gravity"),
        (f"studio.toml, line {line_of(studio, 'height = -1')}", "ledges[1].height"),
    ]
    assert faults[1].value == "0"


def test_a_slip_in_the_shared_file_is_told_there(tmp_path: Path) -> None:
    faults = faults_of(
        write(tmp_path, studio=HEAD.replace("= 1600", "= 1,600"), yard='with = "studio.toml"\n' + JUMPS)
    )
    assert {fault.place.split(",")[0] for fault in faults} == {"studio.toml"}


@pytest.mark.parametrize(
    ("said", "words"),
    [
        ("3", "the name of one file"),
        ('""', "the name of one file"),
        ('["studio.toml"]', "the name of one file"),
        ('"none.toml"', "there is none of this name"),
        ('"."', "this is a folder"),
    ],
)
def test_a_shared_file_that_cannot_be_had(tmp_path: Path, said: str, words: str) -> None:
    (fault,) = faults_of(write(tmp_path, yard=f"title = 'x'\nwith = {said}\n" + JUMPS))
    assert (fault.place, fault.field, fault.value) == ("yard.toml, line 2", "with", said)
    assert words in fault.allowed


def test_one_level_deep(tmp_path: Path) -> None:
    path = write(tmp_path, deep=HEAD, studio='with = "deep.toml"\n', yard='with = "studio.toml"\n' + JUMPS)
    (fault,) = faults_of(path)
    assert (fault.place, fault.field) == ("studio.toml, line 1", "with")
    assert "one level deep" in fault.allowed


def test_a_text_alone_names_no_files() -> None:
    for key, name in (("with", "studio.toml"), ("levels", "roofs.csv")):
        with pytest.raises(InputError, match="only in a brief that is a file"):
            parse_brief(f'{key} = "{name}"\n' + BASE, "yard.toml")


def test_a_brief_is_kept_as_it_stands(tmp_path: Path) -> None:
    path = write(tmp_path, yard=BASE)
    assert sources_of(path) == {"brief.toml": BASE.encode()}


@pytest.mark.parametrize("who", ["brief", "studio"])
def test_what_a_brief_names_is_kept_with_it(tmp_path: Path, who: str) -> None:
    folder, kept = tmp_path / "team", tmp_path / "kept"
    folder.mkdir()
    kept.mkdir()
    (folder / "studio.toml").write_text(('levels = "roofs.csv"\n' if who == "studio" else "") + HEAD)
    (folder / "roofs.csv").write_text(ROWS)
    own = "# levels = nothing here\n" + ('levels = "team/roofs.csv"   # rows\n' if who == "brief" else "")
    path = write(tmp_path, yard=own + 'with = "team/studio.toml" # shared\n' + JUMPS + FEATURES)
    files = sources_of(path)
    assert set(files) == {"brief.toml", "studio.toml", "levels.csv"}
    assert files["levels.csv"] == ROWS.encode()
    assert b'with = "studio.toml" # shared\n' in files["brief.toml"]
    for name, data in files.items():
        (kept / name).write_bytes(data)
    first, again = read_brief(path), read_brief(kept / "brief.toml")
    assert [one.place for one in again.features] == [one.place for one in first.features]
    assert again.jumps == first.jumps
    assert [one.name for one in again.ledges] == ["crate", "crane", "shelf"]
    # Kept files can be kept again, unchanged.
    assert sources_of(kept / "brief.toml") == files
