"""The sample in results/ is what a search of its brief gives today, byte for byte."""

from pathlib import Path

import pytest

from designer.cli import main

ROOT = Path(__file__).resolve().parents[1]
SAMPLE = ROOT / "results" / "sample-night-market-courier"


@pytest.mark.parametrize("workers", ["1", "2"])
def test_the_sample_comes_out_again(tmp_path: Path, workers: str) -> None:
    brief = ROOT / "objectives" / "night-market-courier.toml"
    assert main(["search", str(brief), "--out", str(tmp_path), "--workers", workers, "--no-pictures"]) == 0
    for name in ("candidates.json", "candidates.csv", "brief.toml"):
        assert (tmp_path / "night-market-courier" / name).read_bytes() == (SAMPLE / name).read_bytes(), name


def test_the_sample_has_its_pictures() -> None:
    for kind in ("png", "svg"):
        assert len(list((SAMPLE / "figures").glob(f"*.{kind}"))) >= 4


RUNS = [
    ("rhythm-hopper", []),
    ("low-gravity-salvage", ["--trials", "80"]),
    ("heavy-knight", ["--seed", "5"]),
    ("rhythm-hopper", ["--objective", str(ROOT / "objectives" / "on_the_beat.py"), "--trials", "60"]),
]


@pytest.mark.parametrize(("name", "options"), RUNS)
def test_one_worker_and_two_give_the_same_bytes(tmp_path: Path, name: str, options: list[str]) -> None:
    brief = ROOT / "objectives" / f"{name}.toml"
    written = []
    for workers in ("1", "2"):
        out = tmp_path / workers
        main(["search", str(brief), "--out", str(out), "--workers", workers, "--no-pictures", *options])
        written.append((out / name / "candidates.json").read_bytes())
    assert written[0] == written[1]
