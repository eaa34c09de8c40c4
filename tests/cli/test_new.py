"""`leapwright new`, as a person types it."""

from pathlib import Path

import pytest

from designer.brief.reading import parse_brief, read_brief
from designer.cli import main


def test_without_a_file_the_brief_is_printed(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["new"]) == 0
    captured = capsys.readouterr()
    assert parse_brief(captured.out, "new.toml").title == "A jump"
    assert captured.err == ""


@pytest.mark.parametrize("options", [[], ["--full"], ["--apex", "120", "--airtime", "0.76"],
                                     ["--full", "--apex", "2.5", "--length-unit", "m"]])  # fmt: skip
def test_a_file_is_written_and_accepted(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], options: list[str]
) -> None:
    path = tmp_path / "hop.toml"
    assert main(["new", str(path), *options]) == 0
    assert "leapwright check" in capsys.readouterr().out
    assert read_brief(path).name == "hop"
    assert [p.name for p in tmp_path.iterdir()] == ["hop.toml"]
    assert main(["check", str(path), "--json"]) == 0


def test_a_file_that_is_there_is_refused(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path = tmp_path / "hop.toml"
    path.write_text("mine")
    assert main(["new", str(path)]) == 2
    captured = capsys.readouterr()
    assert captured.out == ""
    assert "there is one of this name" in captured.err
    assert path.read_text() == "mine"


@pytest.mark.parametrize(
    ("options", "words"),
    [
        (["--apex", "-1"], "--apex"),
        (["--airtime", "nan"], "--airtime"),
        (["--apex", "high"], "--apex"),
        (["--length-unit", ""], "--length-unit"),
        (["--everything"], "--everything"),
    ],
)
def test_a_bad_option_writes_nothing(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], options: list[str], words: str
) -> None:
    assert main(["new", str(tmp_path / "hop.toml"), *options]) == 2
    captured = capsys.readouterr()
    assert words in captured.err
    assert captured.out == ""
    assert list(tmp_path.iterdir()) == []
