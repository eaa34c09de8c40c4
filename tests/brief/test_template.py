"""Briefs to start from are read, checked and searched as they stand."""

import re
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from designer.brief.keys import KNOWN
from designer.brief.reading import parse_brief, read_brief
from designer.brief.template import new_brief, save_brief
from designer.errors import InputError
from designer.objective.judge import judge
from designer.search.run import search


def test_the_plain_form_is_about_a_dozen_lines() -> None:
    lines = [line for line in new_brief().split("\n") if line]
    assert 10 <= len(lines) <= 14
    assert all(len(line) <= 100 for line in lines)


@pytest.mark.parametrize(
    "options", [{}, {"full": True}, {"apex": 120.0, "airtime": 0.76}, {"apex": 1.4, "length_unit": "m"}]
)
def test_each_form_is_accepted_and_has_a_solution(options: dict[str, object]) -> None:
    brief = parse_brief(new_brief(**options), "new.toml")  # type: ignore[arg-type]
    assert brief.today is not None
    assert judge(brief, brief.today, bands=False).feasible
    result = search(brief, seed=0)
    assert result.best is not None
    assert result.best.verdict.on_target
    assert result.certificate is not None


def test_constants_follow_from_the_continuous_formulas() -> None:
    """gravity = 8·apex/airtime², launch speed = 4·apex/airtime: 1662 and 632, to two figures."""
    brief = parse_brief(new_brief(apex=120, airtime=0.76), "new.toml")
    assert brief.today is not None
    assert (brief.today.gravity, brief.today.launch_speed) == (1700.0, 630.0)
    assert brief.search is not None
    gravities = brief.search["gravity"].values
    assert gravities is not None
    assert gravities[0] <= 1000
    assert gravities[-1] >= 2600
    assert 1660.0 in gravities
    assert {target.measure: target.aim for target in brief.jumps[0].targets} == {
        "apex": 120.0,
        "airtime": 0.76,
    }


def test_the_full_form_names_everything() -> None:
    text = new_brief(full=True)
    for section, keys in KNOWN.items():
        if section in ("sets", "sets.*", "targets.*", "search"):
            continue
        for key in keys:
            assert re.search(rf"\b{key}\b", text), f"{section}.{key}"
    for word in ("aim", "at_least", "within", "weight", '"free"', "among", "every", "stay-out", "cross"):
        assert word in text


def test_the_jumps_of_the_full_form_are_in_order() -> None:
    text = new_brief(full=True)
    head, _, tail = text.partition("# [jumps.walk]")
    jumps = ("# [jumps.walk]" + tail).split("# A set then")[0]
    written = "\n".join(re.findall(r"(?m)^# (\[.*|\w+ += .*)$", jumps))
    before, _, rest = head.partition("[targets]")
    rest = "[rates]" + rest.partition("[rates]")[2]
    for must in ("reach", "cross", "clear"):
        rest = re.sub(rf'(must +?= "{must}")', r'\1\nby = ["walk"]', rest)
    brief = parse_brief(before + rest + written, "new.toml")
    assert [jump.name for jump in brief.jumps] == ["walk", "run", "armour", "double"]
    assert brief.jumps[3].second is not None
    assert brief.jumps[1].weight == 0.5


def test_the_level_list_of_the_full_form_is_in_order(tmp_path: Path) -> None:
    text = new_brief(full=True)
    rows = re.findall(r"(?m)^#   ([\w-]+,.*,.*,.*)$", text)
    assert len(rows) == 3
    (tmp_path / "roofs.csv").write_text("\n".join(rows).replace("walk;run", ""))
    (tmp_path / "new.toml").write_text('levels = "roofs.csv"\n' + text)
    brief = read_brief(tmp_path / "new.toml")
    assert [(one.name, dict(one.place)) for one in brief.features if one.source] == [
        ("crate", {"room": "yard"}),
        ("ditch", {"room": "yard"}),
    ]


@settings(max_examples=60, deadline=None)
@given(
    full=st.booleans(),
    apex=st.none() | st.floats(1e-3, 1e6),
    airtime=st.none() | st.floats(0.05, 20.0),
    unit=st.sampled_from(["cm", "m", "px", "tile", 'odd "unit"', "\\", "Fuß"]),
)
def test_any_jump_gives_a_brief_in_order(
    full: bool, apex: float | None, airtime: float | None, unit: str
) -> None:
    brief = parse_brief(new_brief(full=full, apex=apex, airtime=airtime, length_unit=unit), "new.toml")
    assert brief.length_unit == unit
    assert brief.search is not None
    for name in ("gravity", "launch_speed"):
        points = brief.search[name].values
        assert points is not None
        assert 50 <= len(points) <= 260
        assert brief.today is not None
        assert points[0] < getattr(brief.today, name) < points[-1]


@pytest.mark.parametrize(
    ("options", "place"),
    [
        ({"apex": 0.0}, "--apex"),
        ({"apex": -3.0}, "--apex"),
        ({"apex": float("nan")}, "--apex"),
        ({"apex": float("inf")}, "--apex"),
        ({"airtime": 0.0}, "--airtime"),
        ({"airtime": 1e9}, "--airtime"),
        ({"length_unit": " "}, "--length-unit"),
        ({"length_unit": "a\nb"}, "--length-unit"),
    ],
)
def test_what_is_no_jump(options: dict[str, object], place: str) -> None:
    with pytest.raises(InputError) as caught:
        new_brief(**options)  # type: ignore[arg-type]
    assert [fault.place for fault in caught.value.faults] == [place]


def test_a_file_that_is_there_stays(tmp_path: Path) -> None:
    path = tmp_path / "mine.toml"
    path.write_text("mine")
    with pytest.raises(InputError, match="it stays as it is"):
        save_brief(path, new_brief())
    assert path.read_text() == "mine"
    assert [p.name for p in tmp_path.iterdir()] == ["mine.toml"]


def test_where_nothing_can_be_written_nothing_is_left(tmp_path: Path) -> None:
    with pytest.raises(InputError, match="that can be written"):
        save_brief(tmp_path / "missing" / "new.toml", new_brief())
    assert list(tmp_path.iterdir()) == []
