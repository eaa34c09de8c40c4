"""Where demands break: the same bands as a verdict, split into margin and outright."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from designer.analysis.breaks import bound_of, breaks, size_of
from designer.analysis.sweep import reach_by_rate
from designer.brief.model import Gap, Ledge
from designer.motion.rule import Constants
from designer.objective.bands import band_names
from designer.objective.judge import judge
from tests.report.samples import PROPOSED, TODAY, courier

LEDGES = (
    Ledge("awning", 113.0, "reach", 2.0),
    Ledge("bare", 113.5, "reach"),
    Ledge("billboard", 124.0, "stay-out", 3.0),
    Ledge("pane", 124.0, "stay-out"),
)
GAPS = (
    Gap("alley", 380.0, "cross", -40.0, 15.0),
    Gap("high", 330.0, "cross", 100.0, 5.0),
    Gap("river", 430.0, "stay-out", 0.0, 20.0),
)


@pytest.mark.parametrize("constants", [TODAY, *PROPOSED[:3], replace(TODAY, gravity=500.0)])
def test_they_break_where_the_verdict_says(constants: Constants) -> None:
    brief = courier(ledges=LEDGES, gaps=GAPS)
    verdict = judge(brief, constants)
    found = breaks(brief, reach_by_rate(brief, constants))
    for one, judged in zip(found, (*verdict.ledges, *verdict.gaps), strict=True):
        assert band_names(one.fails) == judged.failing, judged.name


@pytest.mark.parametrize("constants", [TODAY, *PROPOSED[:3], replace(TODAY, gravity=500.0)])
def test_every_failure_is_one_of_stuck_outright_or_margin(constants: Constants) -> None:
    brief = courier(ledges=LEDGES, gaps=GAPS)
    for one in breaks(brief, reach_by_rate(brief, constants)):
        stuck = np.isnan(one.reach)
        parts = np.stack([stuck, one.outright, one.margin_only])
        assert (parts.sum(axis=0) == one.fails).all()
        reach = np.where(stuck, 0.0, one.reach)
        made = reach >= size_of(one.feature) - 1e-9
        wanted = made if one.feature.must == "stay-out" else ~made
        # Without a margin, to touch a height exactly is not yet to be over it.
        if one.feature.margin:
            assert (one.outright == (wanted & ~stuck)).all()
        else:
            assert not one.margin_only.any()
            assert bound_of(one.feature) == size_of(one.feature)
        if one.margin_only.any():
            at = reach[one.margin_only]
            low, high = sorted((size_of(one.feature), bound_of(one.feature)))
            assert ((at >= low - 1e-9) & (at <= high + 1e-9)).all()


def test_both_ways_of_failing_occur_in_these_cases() -> None:
    brief = courier(ledges=LEDGES, gaps=GAPS)
    found = breaks(brief, reach_by_rate(brief, TODAY))
    assert any(one.margin_only.any() for one in found)
    assert any(one.outright.any() for one in found)
