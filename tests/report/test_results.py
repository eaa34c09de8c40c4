"""The folder of results: whole or not at all, the same bytes everywhere."""

import csv
import io
import json
import math
from pathlib import Path

import pytest

from designer.errors import InputError
from designer.report.document import to_json, trimmed
from designer.report.results import candidates_csv, free_name, named, new_folder, write_results, write_whole
from designer.search.run import search
from tests.reference.make import small_brief


def test_numbers_keep_twelve_digits() -> None:
    assert trimmed(1 / 3) == 0.333333333333
    assert trimmed(120.0) == 120
    assert isinstance(trimmed(120.0), int)
    assert trimmed(None) is None


def test_json_refuses_what_json_does_not_know() -> None:
    with pytest.raises(ValueError, match="not JSON compliant"):
        to_json({"cost": math.nan})


def test_a_file_is_whole_or_the_old_one(tmp_path: Path) -> None:
    path = tmp_path / "a.json"
    write_whole(path, b"first")
    write_whole(path, b"second")
    assert path.read_bytes() == b"second"
    assert list(tmp_path.iterdir()) == [path]


def test_a_folder_appears_only_when_it_is_complete(tmp_path: Path) -> None:
    def stopped() -> None:
        with new_folder(tmp_path, "job") as (folder, _):
            (folder / "half").write_text("half")
            raise KeyboardInterrupt

    with pytest.raises(KeyboardInterrupt):
        stopped()
    assert list(tmp_path.iterdir()) == []


def test_names_count_up(tmp_path: Path) -> None:
    assert free_name(tmp_path, "job").name == "job"
    (tmp_path / "job").mkdir()
    (tmp_path / "job-2").mkdir()
    assert free_name(tmp_path, "job").name == "job-3"


def test_two_runs_at_once_get_two_names(tmp_path: Path) -> None:
    with new_folder(tmp_path, "job") as (first, _):
        (first / "a").write_text("1")
        with new_folder(tmp_path, "job") as (second, _):
            (second / "a").write_text("2")
    texts = {path.name: (path / "a").read_text() for path in tmp_path.iterdir()}
    assert texts == {"job": "2", "job-2": "1"}


def test_a_folder_that_cannot_be_written_is_refused(tmp_path: Path) -> None:
    (tmp_path / "file").write_text("")
    with pytest.raises(InputError, match="--out"), new_folder(tmp_path / "file", "job"):
        pass


def test_csv_and_json_say_the_same(tmp_path: Path) -> None:
    brief = small_brief()
    result = search(brief, seed=3)
    folder = write_results(brief, b"title = 'x'\n", result, tmp_path, pictures=False)
    document = json.loads((folder / "candidates.json").read_text(encoding="utf-8"))
    rows = list(csv.DictReader(io.StringIO((folder / "candidates.csv").read_text(encoding="utf-8"))))
    labels = ["today", *(one["label"] for one in document["shortlist"])]
    assert [row["label"] for row in rows] == labels
    for row, one in zip(rows[1:], document["shortlist"], strict=True):
        for name in one["constants"]:
            value = one["constants"][name]
            assert row[name] == ("" if value is None else f"{value:.12g}")
        assert float(row["cost"]) == pytest.approx(one["cost"], rel=1e-11)
        assert float(row["jump.nominal.apex"]) == pytest.approx(one["jumps"][0]["nominal"]["apex"], rel=1e-11)
    assert (folder / "brief.toml").read_bytes() == b"title = 'x'\n"


def test_nothing_in_the_results_names_the_machine(tmp_path: Path) -> None:
    folder = write_results(small_brief(), b"", search(small_brief()), tmp_path, pictures=False)
    text = (folder / "candidates.json").read_text() + (folder / "candidates.csv").read_text()
    assert str(tmp_path) not in text
    assert "/" not in text.replace("s/s", "")


def test_a_table_without_candidates_has_a_header() -> None:
    assert candidates_csv([]) == "label\n"


def test_today_comes_first() -> None:
    assert next(iter(named(search(small_brief()))))[0] == "today"
