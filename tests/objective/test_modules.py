"""Objective modules: loaded on a person's word, checked, and counted in the miss."""

from pathlib import Path

import numpy as np
import pytest

from designer.errors import InputError
from designer.motion.rule import Constants
from designer.objective.modules import load_objective
from designer.objective.table import Designs, design_tables
from tests.reference.make import brief_of

ROOT = Path(__file__).resolve().parents[2]


def test_the_shipped_module_finds_the_beat() -> None:
    module = load_objective(ROOT / "objectives" / "on_the_beat.py")
    brief = brief_of()
    # Airtimes by the swept landing of the semi-implicit rule at 10 ms; half a beat is 60/120/2 s.
    sets = [Constants(1000.0, speed) for speed in (340.0, 345.9, 400.0)]
    designs = Designs.of(sets)
    tables = design_tables(brief, designs)
    airtime = tables[0].measures["airtime"].nominal
    (terms,) = module.terms(designs, tables).values()
    half = 60 / 120 / 2
    expected = [(t - round(t / half) * half) / 0.008 for t in airtime]
    assert terms == pytest.approx(expected)


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("x = 1", "defines no deviations"),
        ("def deviations(", "SyntaxError"),
        ("raise ValueError('no')", "ValueError: no"),
        ("import sys; sys.exit(0)", "SystemExit: 0"),
    ],
)
def test_what_is_no_module_is_refused(tmp_path: Path, text: str, words: str) -> None:
    path = tmp_path / "module.py"
    path.write_text(text)
    with pytest.raises(InputError, match=words):
        load_objective(path)


def test_a_missing_file_is_refused(tmp_path: Path) -> None:
    with pytest.raises(InputError, match="no such file"):
        load_objective(tmp_path / "none.py")


@pytest.mark.parametrize("body", ["return {'a': constants['nothing']}", "return {'a': [float('nan')]}",
                                  "return {'a': [1.0, 2.0, 3.0]}", "raise SystemExit"])  # fmt: skip
def test_a_module_that_fails_is_named(tmp_path: Path, body: str) -> None:
    path = tmp_path / "broken.py"
    path.write_text(f"def deviations(constants, jumps):\n    {body}\n")
    module = load_objective(path)
    designs = Designs.of([Constants(1000.0, 340.0), Constants(1000.0, 350.0)])
    with pytest.raises(InputError, match="objective module broken"):
        module.terms(designs, design_tables(brief_of(), designs))


def test_what_a_module_prints_stays_out_of_standard_output(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    path = tmp_path / "chatty.py"
    path.write_text(
        "print('loading')\ndef deviations(constants, jumps):\n    print('here')\n    return {'a': 0}\n"
    )
    designs = Designs.of([Constants(1000.0, 340.0)])
    load_objective(path).terms(designs, design_tables(brief_of(), designs))
    assert capsys.readouterr().out == ""


def test_a_scalar_term_counts_for_every_design(tmp_path: Path) -> None:
    path = tmp_path / "flat.py"
    path.write_text("def deviations(constants, jumps):\n    return {'a': 0.5}\n")
    designs = Designs.of([Constants(1000.0, 340.0), Constants(1000.0, 350.0)])
    terms = load_objective(path).terms(designs, design_tables(brief_of(), designs))
    assert np.array_equal(terms["flat: a"], [0.5, 0.5])
