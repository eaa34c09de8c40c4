"""`search --from --hold --set`: from a set of a brief or of its results to another search."""

import json
from pathlib import Path

import pytest

from designer.brief.reading import read_brief
from designer.cli import main
from designer.cli.held import open_job

BRIEF = """
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
[search]
gravity = { from = 1400, to = 1700, every = 20 }
launch_speed = { from = 580, to = 660, every = 5 }
[targets]
apex = { aim = 120, within = 2 }    # over the awning
airtime = { aim = 0.76, within = 0.02 }
[rates]
supported = ["60 Hz", "120 Hz"]
[[sets]]
name = "brought"
gravity = 1500
"""


def brief_in(folder: Path, text: str = BRIEF) -> Path:
    path = folder / "small.toml"
    path.write_text(text, encoding="utf-8")
    return path


def run(*words: str | Path) -> int:
    return main(["search", *map(str, words), "--no-pictures"])


def test_from_the_results_of_a_brief(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path, out = brief_in(tmp_path), tmp_path / "results"
    assert run(path, "--out", out) == 0
    first = json.loads((out / "small" / "candidates.json").read_text(encoding="utf-8"))
    capsys.readouterr()
    assert run(path, "--out", out, "--from", "A", "--hold", "apex", "--set", "airtime=0.80") == 0
    said = capsys.readouterr().err
    best = first["best"]
    assert f"Held from A·{best['mark']} of small: apex." in said
    # The brief in the new folder says by itself what was searched.
    kept = read_brief(out / "small-2" / "brief.toml")
    apex, airtime = kept.jumps[0].targets
    assert (apex.aim, apex.within) == (best["jumps"][0]["nominal"]["apex"], 2.0)
    assert (airtime.aim, airtime.within) == (0.8, 0.02)
    assert "# over the awning" in (out / "small-2" / "brief.toml").read_text(encoding="utf-8")
    assert main(["check", str(out / "small-2")]) == 0


def test_from_a_folder_of_results_by_mark(tmp_path: Path) -> None:
    path, out = brief_in(tmp_path), tmp_path / "results"
    run(path, "--out", out)
    document = json.loads((out / "small" / "candidates.json").read_text(encoding="utf-8"))
    one = document["front"][-1]
    for start in (one["mark"], f"{one['label']}·{one['mark']}"):
        assert (
            run(out / "small", "--out", out, "--from", start, "--hold", "airtime", "--set", "apex=118") == 0
        )
    kept = read_brief(out / "small-3" / "brief.toml")
    assert kept.jumps[0].targets[1].aim == one["jumps"][0]["nominal"]["airtime"]
    # From small-3 on it goes to small-4, not to small-3-2.
    assert run(out / "small-3", "--out", out, "--set", "apex=119") == 0
    assert (out / "small-4").is_dir()


@pytest.mark.parametrize("start", ["today", "brought"])
def test_from_a_set_of_the_brief(tmp_path: Path, start: str) -> None:
    job = open_job(brief_in(tmp_path), tmp_path / "none", start, ["apex"], [])
    assert job.said[0].startswith(f"Held from {start}·")
    # Today's apex at 16 ms: v_n = 620 − 25.6 n, last positive at 24: 0.016·(24·620 − 25.6·300) = 115.2.
    # The brought one's: v_n = 620 − 24 n, 25 steps: 0.016·(25·620 − 24·325) = 123.2.
    assert job.brief.jumps[0].targets[0].aim == (115.2 if start == "today" else 123.2)


def test_without_options_the_brief_stays_as_it_is(tmp_path: Path) -> None:
    path = brief_in(tmp_path)
    job = open_job(path, tmp_path, None, (), ())
    assert job.files == {"brief.toml": path.read_bytes()}
    assert job.brief == read_brief(path)


def test_set_alone_changes_an_aim(tmp_path: Path) -> None:
    job = open_job(brief_in(tmp_path), tmp_path, None, (), ["apex=118"])
    assert job.said == ("apex: wanted 118 ± 2",)
    assert b"apex = { aim = 118, within = 2 }    # over" in job.files["brief.toml"]


def test_targets_of_a_shared_file_change_where_they_stand(tmp_path: Path) -> None:
    targets = BRIEF[BRIEF.index("[targets]") : BRIEF.index("[rates]")]
    (tmp_path / "team.toml").write_text(targets, encoding="utf-8")
    path = brief_in(tmp_path, 'with = "team.toml"\n' + BRIEF.replace(targets, ""))
    job = open_job(path, tmp_path, None, (), ["apex=118"])
    assert b"aim = 118" in job.files["studio.toml"]
    assert b"aim = 118" not in job.files["brief.toml"]
    assert (tmp_path / "team.toml").read_text(encoding="utf-8") == targets


@pytest.mark.parametrize(
    ("options", "words"),
    [
        (["--hold", "apex"], "a set to hold it from"),
        (["--from", "today", "--set", "apex=118"], "say what to hold"),
        (["--from", "Q", "--hold", "apex"], "one of brought, today; there are no results of this brief"),
        (["--from", "today", "--hold", "apex", "--set", "apex=118"], "either held or set"),
    ],
)
def test_what_makes_no_sense_writes_nothing(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], options: list[str], words: str
) -> None:
    out = tmp_path / "results"
    assert run(brief_in(tmp_path), "--out", out, *options) == 2
    assert words in capsys.readouterr().err
    assert not out.exists()


def test_aims_that_are_too_many_are_said_before_the_search_and_by_check(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    path = brief_in(tmp_path, BRIEF.replace("[rates]", "apex_time = { aim = 0.5, within = 0.02 }\n[rates]"))
    run(path, "--out", tmp_path / "results")
    captured = capsys.readouterr()
    words = "apex, airtime and apex_time are three aims for two constants"
    assert captured.err.index(words) < captured.err.index("Scanning")
    assert " ".join(words.split()) in " ".join(captured.out.split())
    main(["check", str(path)])
    assert words in capsys.readouterr().out
