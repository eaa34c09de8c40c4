"""Several jumps in tables, documents, the rule read back and pictures."""

from __future__ import annotations

import csv
import io
import json
from dataclasses import replace
from pathlib import Path

import matplotlib
import pytest
from rich.console import Console

from designer.analysis.arcs import course
from designer.analysis.sensitivity import moved_sets, one_increment, variable_value
from designer.motion.rule import Constants, How, Rule, Second
from designer.objective.judge import judge
from designer.report import style
from designer.report.build_several import paying, reach_of_each
from designer.report.document import search_document, verdict_document
from designer.report.pictures import make_pictures, plan
from designer.report.results import candidates_csv, named
from designer.report.tables import candidate_sections, print_check, print_search
from designer.report.words import first_ticks, pseudo_code
from designer.search.result import Certificate, RunnerUp
from tests.reference.several_briefs import ARMOUR, SETS, WALK, three_jumps
from tests.report.several_samples import five_jumps, five_result, sets_of
from tests.report.test_pictures import overlaps

FIVE = ["walk", "sprint", "armour", "double jump of the courier", "hop"]


def printed(width: int, brief: object = None) -> list[str]:
    console = Console(file=io.StringIO(), width=width, highlight=False)
    print_search(five_jumps(), five_result(), Path("results/five"), console)
    return console.file.getvalue().splitlines()  # type: ignore[attr-defined]


@pytest.mark.parametrize("width", [70, 80, 120, 200])
def test_no_line_is_wider_than_the_terminal(width: int) -> None:
    assert max(len(line) for line in printed(width)) <= width


def test_the_first_screen_says_what_is_shared_once_and_then_each_jumps_own() -> None:
    rows = [row for section in candidate_sections(five_jumps(), five_result()) for row in section]
    labels = [row.label for row in rows]
    assert labels[:2] == ["gravity", "grain"]
    assert labels.count("gravity") == 1
    assert {"walk: launch_speed", "sprint: run_speed", "armour: gravity_factor"} <= set(labels)
    # sprint has walk's launch speed, and armour's is a factor of it.
    assert "sprint: launch_speed" not in labels
    by_label = {row.label: row for row in rows}
    assert by_label["armour: launch_speed"].wanted == "0.8 to 0.9 by 0.05 × walk's"
    assert by_label["hop: launch_speed"].wanted == "fixed"
    assert by_label["walk: apex (cm)"].cells[0].endswith("!")
    worst = five_result().shortlist[0].verdict.worst
    assert worst is not None
    assert by_label["worst"].cells[1] == f"{worst.value:.2f}!"
    assert by_label["  of"].cells[1] == f"{worst.jump}: {worst.measure}"


def test_who_pays_is_the_jumps_cost_less_the_best_alone() -> None:
    result = five_result()
    rows = {row.label: row for part in candidate_sections(five_jumps(), result) for row in part}
    for index, jump in enumerate(FIVE):
        row = rows[f"{jump} pays"]
        cost = result.shortlist[0].verdict.jumps[index].cost
        assert cost is not None
        assert row.cells[1] == f"{cost - result.alone[jump]:+.2f}"
        assert row.wanted == f"alone {result.alone[jump]:.2f}"
    assert not any("pays" in row.label for part in candidate_sections(five_jumps(), replace(result, alone={}))
                   for row in part)  # fmt: skip


def test_features_name_their_jumps_and_the_tightest() -> None:
    rows = [row for part in candidate_sections(five_jumps(), five_result()) for row in part]
    at = [row.label for row in rows].index("billboard: spare")
    assert rows[at].wanted == "stay out of 124, margin 1"
    assert rows[at + 1].wanted == "by walk, sprint, armour"
    assert rows[at + 1].cells[0] == "walk 240 Hz"
    every = [row.label for row in rows].index("lock: spare")
    assert rows[every + 1].wanted == "by every jump"


def check_lines(width: int) -> list[str]:
    console = Console(file=io.StringIO(), width=width, highlight=False)
    brief = five_jumps()
    verdict = judge(brief, sets_of(1600.0, 620.0, 1.0, 0.85))
    print_check(brief, "today", verdict, console)
    return console.file.getvalue().splitlines()  # type: ignore[attr-defined]


@pytest.mark.parametrize("width", [80, 160])
def test_check_shows_each_jump_and_the_rule_where_it_differs(width: int) -> None:
    lines = check_lines(width)
    assert max(len(line) for line in lines) <= width
    assert [line for line in lines if line in FIVE] == FIVE
    assert "gravity 1600, grain 1" in lines
    assert "armour: launch_speed 527, run_speed 300, gravity_factor 0.9" in lines
    text = "\n".join(line.strip() for line in lines)
    assert "sprint: the same\n" in text
    assert "own_gravity = 1600 * 0.9" in text
    assert "Worst: walk, apex" in text
    assert "crate stack" in text
    assert "“arcade” holds throughout" in text


CODE = {"true": True, "false": False, "round_half_even": round, "max": max}


@pytest.mark.parametrize(
    "second",
    [Second(350.0), Second(200.0, None, How.ADD), Second(300.0, 0.3), Second(150.0, 0.1, How.ADD)],
)
@pytest.mark.parametrize("launch_gravity", [True, False])
def test_the_rule_with_a_second_jump_reads_back_as_it_is_flown(second: Second, launch_gravity: bool) -> None:
    """Run the lines themselves (they read as Python) and compare with the simulated ticks."""
    brief = three_jumps(rule=replace(three_jumps().rule, launch_gravity=launch_gravity))
    view = replace(brief.view("armour"), jumps=(replace(brief.jumps[2], second=second),))
    constants = replace(ARMOUR, fall_factor=1.3)
    lines = pseudo_code(view, view.rule, constants)
    state: dict[str, object] = {**CODE, "h": view.nominal(constants).step}
    exec(lines[1], state)
    exec(lines[2], state)
    body = [line.strip() for line in lines[4:-2]]
    ticks = first_ticks(view, constants, 200)
    assert len(ticks) > 40
    for tick in ticks:
        state["first_step"], state["n"] = tick.tick == 1, tick.tick - 1
        assert state["v"] == tick.v_before
        for line in body:
            exec(line, state)
        assert (state["u"], state["v"], state["y"]) == (tick.u, tick.v_after, tick.y_after)
    assert state["second_jump"] is False


def test_ticks_go_on_to_where_the_second_jump_acts() -> None:
    view = five_jumps().view(FIVE[3])
    ticks = first_ticks(view, WALK)
    assert [tick.tick for tick in ticks][:4] == [1, 2, 3, 4]
    # At 16 ms 620 is gone, less 26 a step (25.6 rounded), after 24 steps: the 25th starts with v ≤ 0.
    assert [tick.tick for tick in ticks][4:] == [25, 26]
    assert ticks[4].v_before == -4.0
    assert ticks[4].v_after == 494.0


def test_documents_keep_shared_constants_on_top_and_each_jumps_own_in_it() -> None:
    brief = three_jumps()
    document = verdict_document(judge(brief, SETS))
    assert document["constants"] == {"gravity": 1600.0, "step": None, "grain": 1.0}
    assert [jump["name"] for jump in document["jumps"]] == ["walk", "sprint", "armour"]
    assert document["jumps"][2]["constants"]["gravity_factor"] == 0.9
    assert set(document["jumps"][0]["constants"]) == set(Constants.__dataclass_fields__)
    assert document["worst"]["jump"] == "walk"
    assert document["ledges"][0]["by"] == ["walk", "sprint"]
    assert document["ledges"][0]["worst_jump"] == "walk"
    result = replace(
        five_result(),
        certificate=Certificate("grid", "separated", 9, 9, True, "x", RunnerUp(SETS, 1.0, 0.0)),
    )
    result = replace(result, best=replace(result.shortlist[0], verdict=judge(brief, SETS, bands=False)))
    found = search_document(result)
    runner = found["certificate"]["runner_up"]["constants"]
    assert (runner["gravity"], [one["name"] for one in runner["jumps"]]) == (
        1600.0,
        ["walk", "sprint", "armour"],
    )
    assert found["alone"].keys() == set(FIVE)
    assert json.loads(json.dumps(found)) == found


def test_one_jump_has_none_of_it() -> None:
    document = verdict_document(judge(three_jumps().view("walk"), WALK))
    assert "gravity_factor" not in document["constants"]
    assert not {"blocks", "ceilings", "levels"} & set(document)
    assert not {"cost"} & set(document["jumps"][0])
    assert not {"worst_jump", "place", "source"} & set(document["ledges"][0])


def test_csv_has_each_jumps_constants_by_name() -> None:
    rows = list(csv.DictReader(io.StringIO(candidates_csv(named(five_result())))))
    assert [row["label"] for row in rows] == ["today", "A", "B", "C", "D", "E", "F"]
    assert rows[1]["armour.launch_speed"] == "500"
    assert rows[1]["gravity"] == "1620"
    assert "launch_speed" not in rows[1]
    assert "walk.gravity" not in rows[1]
    cost = five_result().shortlist[0].verdict.jumps[4].cost
    assert float(rows[1]["hop.cost"]) == cost


def test_no_text_lies_over_another_with_five_jumps_and_six_candidates() -> None:
    with matplotlib.rc_context(style.RC):
        pictures = [draw() for draw in plan(five_jumps(), five_result())]
        names = ["reach-by-rate", "gaps-by-rate", "arcs", "who-pays", "front", "sensitivity"]
        assert [one.name for one in pictures] == names
        for picture in pictures:
            assert overlaps(picture) == [], picture.name
            assert len(picture.alt) > 60


def test_pictures_are_the_same_every_time(tmp_path: Path) -> None:
    brief = three_jumps()
    result = replace(five_result(), alone={})
    sets = (SETS, tuple(replace(one, gravity=1550.0) for one in SETS))
    found = [
        replace(one, verdict=judge(brief, two)) for one, two in zip(result.shortlist, sets, strict=False)
    ]
    result = replace(result, best=found[0], today=None, shortlist=tuple(found), front=tuple(found))
    first = make_pictures(brief, result, tmp_path / "one")
    second = make_pictures(brief, result, tmp_path / "two")
    assert [path.read_bytes() for path in first] == [path.read_bytes() for path in second]


def test_the_picture_of_who_pays_names_who_pays_most() -> None:
    data = paying(five_jumps(), five_result())
    assert data is not None
    verdict = five_result().shortlist[0].verdict
    most = max(verdict.jumps, key=lambda jump: (jump.cost or 0.0) - five_result().alone[jump.name])
    assert most.name in data.title
    assert [panel.title.split(":")[0] for panel in data.panels] == ["today", "A", "B", "C", "D", "E", "F"]
    bare = paying(five_jumps(), replace(five_result(), alone={}))
    assert bare is not None
    assert all(share.more is None for panel in bare.panels for share in panel.shares)


def test_reach_is_judged_jump_by_jump() -> None:
    panels, words = reach_of_each(five_jumps(), five_result(), five_result().shortlist[0])
    assert [one.title.split(":")[0] for one in panels] == FIVE
    double = panels[3]
    # The apex at 240 Hz of the double jump, read off the picture, is the verdict's.
    rate = list(double.threads[-1].rate).index(240)
    row = next(one for one in five_result().shortlist[0].verdict.jumps[3].rates if one.rate == "240 Hz")
    assert double.threads[-1].reach[rate] == pytest.approx(row.measures["apex"])
    assert len(words) == 5


def test_all_arcs_rise_to_their_apexes() -> None:
    verdict = five_result().shortlist[0].verdict
    found = course(five_jumps(), verdict.sets)
    for jump, arcs in zip(verdict.jumps, found.paths, strict=True):
        assert arcs[0].nominal
        assert arcs[0].y.max() == pytest.approx(jump.nominal.measures["apex"])
    assert found.scene.by_distance
    assert [one.name for one in found.scene.blocks] == ["crate stack"]
    assert found.scene.ceilings[0].feet == 45.0
    still = tuple(replace(one, run_speed=0.0) for one in verdict.sets)
    assert not course(five_jumps(), still).scene.by_distance


def test_a_variable_moves_every_constant_that_is_made_of_it() -> None:
    brief = three_jumps()
    moved = moved_sets(brief, SETS, 2, 630.0)
    assert [one.launch_speed for one in moved] == [630.0, 630.0, 630.0 * 0.85]
    assert variable_value(brief, SETS, 5) == 0.85
    factor = moved_sets(brief, SETS, 5, 0.9)
    assert [one.launch_speed for one in factor] == [620.0, 620.0, 620.0 * 0.9]
    assert [one.gravity for one in moved_sets(brief, SETS, 0, 1650.0)] == [1650.0] * 3


def test_sensitivity_goes_over_the_variables() -> None:
    brief = three_jumps()
    found = one_increment(brief, SETS)
    assert [(one.constant, one.direction) for one in found.nudges] == [
        ("gravity", 1), ("gravity", -1), ("walk.launch_speed", 1), ("walk.launch_speed", -1),
        ("armour.launch_speed times", 1), ("armour.launch_speed times", -1), ("armour.gravity_factor", 1),
    ]  # fmt: skip
    up = next(one for one in found.nudges if one.constant == "walk.launch_speed")
    moved = judge(brief, moved_sets(brief, SETS, 2, 630.0), bands=False)
    assert up.miss == pytest.approx((moved.miss or 0.0) - (found.base.miss or 0.0))
    assert {change.jump for change in up.changes} == {"walk", "sprint", "armour"}
    factor = found.nudges[-1]
    assert all(change.change == 0.0 for change in factor.changes if change.jump != "armour")
    assert factor.flips


def test_a_rule_for_all_is_read_once() -> None:
    view = three_jumps().view("walk")
    assert pseudo_code(view, Rule("explicit"), WALK)[1] == "y = 0; v = 620"
    assert "own_gravity" not in "".join(pseudo_code(view, view.rule, WALK))
