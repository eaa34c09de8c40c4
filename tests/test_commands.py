"""The commands from end to end: what a person types, what comes back, what is left on disk."""

import json
import os
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest

from designer.cli import main

ROOT = Path(__file__).resolve().parents[1]
COURIER = ROOT / "objectives" / "night-market-courier.toml"

CHECK_KEYS = {"constants", "mark", "jumps", "miss", "rate_spread", "cost", "worst", "violation", "feasible",
              "ledges", "gaps", "flags"}  # fmt: skip
ROW_KEYS = {"rate", "step", "supported", "status", "apex", "apex_time", "airtime", "landing_speed", "max_gap",
            "sure_gap", "steps", "effective_gravity", "flip_margin"}  # fmt: skip

SMALL = """
title = "Small"
[units]
length = "cm"
[loop]
steps = "each-frame"
aim_at = "60 Hz"
[rule]
integrator = "semi-implicit"
frame_time = "whole-ms-down"
[today]
gravity = 1600
launch_speed = 620
run_speed = 540
[search]
gravity = { from = 1400, to = 1700, every = 20 }
launch_speed = { from = 580, to = 660, every = 5 }
grain = { among = [0, 1] }
[targets]
apex = { aim = 120, within = 2 }
airtime = { aim = 0.76, within = 0.02 }
[rates]
supported = ["60 Hz", "120 Hz"]
"""

CLASH = SMALL + """
[[ledges]]
name = "high"
height = 118
must = "reach"
margin = 2
[[ledges]]
name = "low"
height = 120
must = "stay-out"
margin = 1
"""  # fmt: skip


def small(folder: Path, text: str = SMALL, name: str = "small.toml") -> Path:
    path = folder / name
    path.write_text(text, encoding="utf-8")
    return path


def test_check_prints_the_normative_document(capsys: pytest.CaptureFixture[str]) -> None:
    status = main(["check", str(COURIER), "--json"])
    document = json.loads(capsys.readouterr().out)
    assert set(document) == CHECK_KEYS
    assert status == (0 if document["feasible"] else 1)
    (jump,) = document["jumps"]
    assert set(jump) == {"name", "constants", "rates", "nominal", "spreads"}
    assert set(jump["nominal"]) == ROW_KEYS
    assert all(set(row) == ROW_KEYS for row in jump["rates"])
    assert set(jump["spreads"]) == {"apex", "airtime", "max_gap"}
    assert set(document["worst"]) == {"value", "jump", "measure"}
    for feature in (*document["ledges"], *document["gaps"]):
        assert set(feature) == {"name", "by", "must", "holds", "spare", "worst_rate", "failing"}


def test_check_takes_settings(capsys: pytest.CaptureFixture[str]) -> None:
    settings = ("gravity=1580", "launch_speed = 625", "grain=0.125")
    main(["check", str(COURIER), *(word for one in settings for word in ("--set", one)), "--json"])
    document = json.loads(capsys.readouterr().out)
    assert document["constants"]["gravity"] == 1580.0
    apexes = [row["apex"] for row in document["jumps"][0]["rates"] if row["supported"]]
    # The design's known case: 1580, 625 at grain 1/8 lies within 118.8 to 121.5.
    assert min(apexes) == pytest.approx(118.8, abs=0.05)
    assert max(apexes) == pytest.approx(121.5, abs=0.05)


@pytest.mark.parametrize(
    ("setting", "words"),
    [
        ("gravty=1580", "gravity=1580"),
        ("gravity", "name=value"),
        ("gravity=much", "gravity"),
        ("gravity=-5", "drop the minus sign"),
        ("gravity=nan", "ordinary number"),
        ("step=8 ms", "no constant"),
    ],
)
def test_a_bad_setting_is_one_clear_message(
    capsys: pytest.CaptureFixture[str], setting: str, words: str
) -> None:
    assert main(["check", str(COURIER), "--set", setting]) == 2
    captured = capsys.readouterr()
    assert words in captured.err
    assert captured.out == ""


def test_a_step_that_nothing_says_is_asked_for(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    text = SMALL.replace('steps = "each-frame"\naim_at = "60 Hz"', 'steps = "fixed"')
    text = text.replace("[search]", '[search]\nstep = { from = "8 ms", to = "16 ms", every = "4 ms" }')
    brief = small(tmp_path, text, "fixed.toml")
    assert main(["check", str(brief)]) == 2
    assert "step is missing" in capsys.readouterr().err
    for step in ("step=0.008", "step=8 ms", "step=125 Hz"):
        main(["check", str(brief), "--set", step, "--json"])
        assert json.loads(capsys.readouterr().out)["constants"]["step"] == 0.008


def test_the_nearest_set_can_be_picked(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    main(["search", str(small(tmp_path, CLASH)), "--out", str(tmp_path), "--no-pictures", "--json"])
    nearest = json.loads(capsys.readouterr().out)["nearest"]
    for options in ([], ["--pick", "nearest"]):
        assert main(["check", str(tmp_path / "small"), *options, "--json"]) == 1
        assert json.loads(capsys.readouterr().out)["constants"] == nearest["constants"]
    assert "nearest," in (tmp_path / "small" / "candidates.csv").read_text(encoding="utf-8")


def test_a_pick_is_found_in_any_case(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    brief = small(tmp_path)
    main(["search", str(brief), "--out", str(tmp_path), "--no-pictures", "--json"])
    capsys.readouterr()
    assert main(["check", str(tmp_path / "small"), "--pick", "a"]) == 0
    capsys.readouterr()
    assert main(["check", str(brief), "--pick", "A"]) == 2
    assert "leapwright check results/small --pick A" in capsys.readouterr().err


def test_an_unknown_pick_names_what_there_is(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["check", str(COURIER), "--pick", "nobody"]) == 2
    assert "today" in capsys.readouterr().err


def test_search_leaves_a_folder_and_a_second_run_another(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    brief = small(tmp_path)
    assert main(["search", str(brief), "--out", str(tmp_path / "out")]) == 0
    folder = tmp_path / "out" / "small"
    assert {path.name for path in folder.iterdir()} == {"candidates.json", "candidates.csv", "brief.toml",
                                                        "figures"}  # fmt: skip
    shown = capsys.readouterr().out
    assert "today" in shown
    assert "leapwright check" in shown
    assert main(["search", str(brief), "--out", str(tmp_path / "out"), "--no-pictures"]) == 0
    again = tmp_path / "out" / "small-2"
    assert (again / "candidates.json").read_bytes() == (folder / "candidates.json").read_bytes()
    assert not (again / "figures").exists()
    assert sorted(path.name for path in (tmp_path / "out").iterdir()) == ["small", "small-2"]


def test_search_prints_the_normative_document(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    brief = small(tmp_path)
    assert main(["search", str(brief), "--out", str(tmp_path), "--no-pictures", "--json", "--seed", "7"]) == 0
    text = capsys.readouterr().out
    document = json.loads(text)
    assert set(document) == {"best", "today", "shortlist", "front", "certificate", "evaluations", "seed"}
    assert document["seed"] == 7
    assert set(document["certificate"]) == {"kind", "method", "grid_points", "evaluated", "complete",
                                            "grid_hash", "runner_up"}  # fmt: skip
    assert document["certificate"]["grid_points"] == 16 * 17 * 2
    assert document["best"]["label"] == "A"
    candidate_keys = CHECK_KEYS | {"label", "why", "change"}
    assert set(document["best"]) == candidate_keys
    assert "rates" not in document["best"]["jumps"][0]
    assert text == (tmp_path / "small" / "candidates.json").read_text(encoding="utf-8")


def test_two_and_a_half_million_designs_are_certified_with_pictures(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    brief = ROOT / "tests" / "reference" / "two-million.toml"
    assert main(["search", str(brief), "--out", str(tmp_path), "--json"]) == 0
    document = json.loads(capsys.readouterr().out)
    certificate = document["certificate"]
    assert certificate["complete"]
    assert certificate["grid_points"] == certificate["evaluated"] == 361 * 101 * 14 * 5
    assert certificate["runner_up"]["cost"] >= document["best"]["cost"]
    assert list((tmp_path / "two-million" / "figures").glob("*.png"))


def test_a_result_can_be_checked_by_label(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    main(["search", str(small(tmp_path)), "--out", str(tmp_path), "--no-pictures", "--json"])
    best = json.loads(capsys.readouterr().out)["best"]
    for pick in ("A", best["mark"]):
        main(["check", str(tmp_path / "small"), "--pick", pick, "--json"])
        document = json.loads(capsys.readouterr().out)
        assert document["constants"] == best["constants"]
        assert document["cost"] == best["cost"]


def test_nothing_feasible_is_an_answer_with_reasons(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    brief = small(tmp_path, CLASH, "clash.toml")
    assert main(["search", str(brief), "--out", str(tmp_path), "--no-pictures"]) == 1
    shown = capsys.readouterr().out
    assert "at least 120.0 and at most 119.0 cannot both hold: short by 1.0" in " ".join(shown.split())
    document = json.loads((tmp_path / "clash" / "candidates.json").read_text(encoding="utf-8"))
    assert document["best"] is None
    # The nearest set still keeps to the targets rather than saving a centimetre.
    assert document["nearest"]["miss"] < 1.5


@pytest.mark.parametrize("command", ["check", "search"])
def test_a_bad_brief_writes_nothing(tmp_path: Path, capsys: pytest.CaptureFixture[str], command: str) -> None:
    brief = small(tmp_path, SMALL.replace("1600", "-1600"), "bad.toml")
    options = ["--out", str(tmp_path / "out")] if command == "search" else []
    assert main([command, str(brief), *options]) == 2
    captured = capsys.readouterr()
    assert captured.out == ""
    assert "bad.toml" in captured.err
    assert not (tmp_path / "out").exists()


def test_an_output_folder_that_is_a_file_is_refused(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    (tmp_path / "taken").write_text("mine")
    assert main(["search", str(small(tmp_path)), "--out", str(tmp_path / "taken"), "--no-pictures"]) == 2
    assert "--out" in capsys.readouterr().err
    assert (tmp_path / "taken").read_text() == "mine"


@pytest.mark.parametrize(
    "arguments", [["serch"], ["search"], ["check", "--nonsense", "x"], ["search", "x", "--seed", "-1"]]
)
def test_what_the_command_line_does_not_know(
    capsys: pytest.CaptureFixture[str], arguments: list[str]
) -> None:
    assert main(arguments) == 2
    assert "Error" in capsys.readouterr().err


def test_stopping_a_search_leaves_nothing_behind(tmp_path: Path) -> None:
    text = SMALL.replace("every = 20", "every = 0.02").replace("every = 5", "every = 0.1")
    brief = small(tmp_path, text, "long.toml")
    run = subprocess.Popen(
        [sys.executable, "-m", "designer", "search", str(brief), "--out", str(tmp_path / "out"),
         "--budget", "2000000000"],
        cwd=ROOT, stderr=subprocess.PIPE, stdout=subprocess.PIPE, text=True, start_new_session=True,
        env={**os.environ, "PYTHONUNBUFFERED": "1"},
    )  # fmt: skip
    assert run.stderr is not None
    assert run.stderr.readline()  # it has begun to search
    time.sleep(0.5)
    os.killpg(run.pid, signal.SIGINT)
    out, err = run.communicate(timeout=60)
    assert run.returncode == 2
    assert "Stopped" in err
    assert "Traceback" not in err
    assert out == ""
    assert not (tmp_path / "out").exists() or not list((tmp_path / "out").iterdir())
