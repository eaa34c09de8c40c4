"""Level lists: only the rows that decide are scored, and every row that fails is named."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from designer.brief.model import Gap, Ledge
from designer.objective.judge import judge
from designer.objective.rows import binding
from designer.objective.verdict import Verdict
from designer.report.document import verdict_document
from tests.reference.several_briefs import SETS, three_jumps

JUMPS = ("walk", "sprint", "armour")


def listed(count: int = 300) -> tuple[tuple[Ledge, ...], tuple[Gap, ...]]:
    """Rows of a list: heights and widths all over the place, some that hold and some that do not."""
    rng = np.random.default_rng(7)
    ledges, gaps = [], []
    for line in range(2, count + 2):
        name, source, place = f"row {line}", f"roofs.csv, line {line}", {"room": f"r{line % 5}"}
        by = tuple(jump for jump in JUMPS if rng.random() < 0.6) or ("walk",)
        margin = float(rng.integers(0, 3))
        if line % 2:
            must = "reach" if line % 4 == 1 else "stay-out"
            height = float(rng.integers(60, 112) if must == "reach" else rng.integers(112, 140))
            ledges.append(Ledge(name, height, must, margin, by, place, source))
        else:
            must = "cross" if line % 4 == 0 else "stay-out"
            width = float(rng.integers(150, 240) if must == "cross" else rng.integers(300, 600))
            far = float(rng.choice([0.0, -40.0]))
            gaps.append(Gap(name, width, must, far, margin, by, place, source))
    return tuple(ledges), tuple(gaps)


LEDGES, GAPS = listed()
OWN = three_jumps()
FULL = replace(OWN, ledges=(*OWN.ledges, *LEDGES), gaps=(*OWN.gaps, *GAPS))
# The same rows written into the brief itself: each is then judged.
WRITTEN = replace(
    FULL,
    ledges=tuple(replace(one, source="", place={}) for one in FULL.ledges),
    gaps=tuple(replace(one, source="", place={}) for one in FULL.gaps),
)


def test_few_rows_bind_and_the_briefs_own_features_all_stay() -> None:
    bound = binding(FULL)
    assert bound.ledges[: len(OWN.ledges)] == OWN.ledges
    assert bound.gaps[: len(OWN.gaps)] == OWN.gaps
    # At most one a jump, verdict and far level: 3 · 2 ledges and 3 · 2 · 2 gaps.
    assert len(bound.ledges) - len(OWN.ledges) <= 6
    assert len(bound.gaps) - len(OWN.gaps) <= 12
    assert binding(bound) == bound
    assert binding(OWN) is OWN


@pytest.fixture(scope="module")
def verdicts() -> tuple[Verdict, Verdict]:
    return judge(FULL, SETS), judge(WRITTEN, SETS)


def test_failing_rows_are_those_that_fail_when_each_is_judged(verdicts: tuple[Verdict, Verdict]) -> None:
    found, every = verdicts
    assert found.rows == len(LEDGES) + len(GAPS)
    names = {one.name for one in (*OWN.ledges, *OWN.gaps)}
    failing = [one for one in every.features if not one.holds and one.name not in names]
    assert len(failing) > 10
    assert [one.name for one in found.failing_rows] == [one.name for one in failing]
    for one, other in zip(found.failing_rows, failing, strict=True):
        assert one.spare == pytest.approx(other.spare, abs=1e-9)
        assert (one.worst_jump, one.worst_rate) == (other.worst_jump, other.worst_rate)
        assert one.source.startswith("roofs.csv, line ")
        assert one.place["room"] in {"r0", "r1", "r2", "r3", "r4"}


def test_whether_a_set_is_feasible_is_the_same(verdicts: tuple[Verdict, Verdict]) -> None:
    assert [one.feasible for one in verdicts] == [False, False]
    low = tuple(replace(one, height=60.0 if one.must == "reach" else 200.0) for one in (*FULL.ledges,))
    wide = tuple(replace(one, width=9.0 if one.must == "cross" else 900.0) for one in FULL.gaps)
    easy = replace(FULL, ledges=low, gaps=wide)
    verdict = judge(easy, SETS)
    assert verdict.feasible
    assert verdict.failing_rows == ()
    assert verdict.rows == found_rows(easy.ledges, easy.gaps)


def found_rows(ledges: tuple[Ledge, ...], gaps: tuple[Gap, ...]) -> int:
    return sum(bool(one.source) for one in ledges) + sum(bool(one.source) for one in gaps)


def test_the_document_names_them_and_a_candidate_does_not(verdicts: tuple[Verdict, Verdict]) -> None:
    document = verdict_document(verdicts[0])
    assert document["levels"]["rows"] == verdicts[0].rows
    first = document["levels"]["failing"][0]
    assert set(first) == {
        "name", "by", "must", "holds", "spare", "worst_rate", "failing", "worst_jump", "place", "source"
    }  # fmt: skip
    assert "levels" not in verdict_document(verdicts[0], with_rates=False)


def test_one_jump_may_have_a_list_too() -> None:
    view = replace(OWN.view("walk"), ledges=(), gaps=())
    view = replace(view, jumps=(replace(view.jumps[0], name="jump"),))
    rows = tuple(replace(one, by=("jump",)) for one in LEDGES)
    found = judge(replace(view, ledges=rows), SETS[0])
    every = judge(replace(view, ledges=tuple(replace(one, source="") for one in rows)), SETS[0])
    assert [one.name for one in found.failing_rows] == [one.name for one in every.ledges if not one.holds]
    assert len(found.ledges) == 2
