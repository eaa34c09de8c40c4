"""Where nothing is feasible: the demands that clash, by how much, and a nearest set that is no nonsense."""

import itertools
import math
from dataclasses import replace

import numpy as np
import pytest

from designer.brief.model import Brief, Choice, Gap, Ledge, Target
from designer.motion.rule import Rounding, Rule
from designer.objective.score import Scores
from designer.search.conflict import clashing_sets, failing_patterns
from designer.search.result import Clash, SearchResult
from designer.search.run import search
from tests.reference.make import small_brief
from tests.reference.score_twin import TwinScore, brute_force
from tests.reference.search_briefs import fixed_loop, ms, points

REACH = Ledge("awning", 118.0, "reach", 2.0)
STAY_OUT = Ledge("billboard", 120.0, "stay-out", 1.0)


def rough(**changes: object) -> Brief:
    """Return a brief whose apex spreads a few centimetres over the rates whatever one does."""
    search = {
        "gravity": points(1400.0, 1800.0, 20.0),
        "launch_speed": points(580.0, 680.0, 10.0),
        "step": Choice((0.016,)),
        "grain": Choice((0.0,)),
        "run_speed": Choice((500.0,)),
    }
    brief = fixed_loop(
        Rule("semi-implicit"),
        search,
        ms(4, 8, 16),
        Target("apex", within=2.0, aim=119.0),
        Target("airtime", within=0.02, aim=0.76),
    )
    return replace(brief, **changes)


def least_sum(scored: list[TwinScore], which: tuple[int, ...]) -> float:
    return min(sum(one.shortfalls[k] for k in which) for one in scored)


def only_clash(result: SearchResult) -> Clash:
    assert result.best is None
    assert len(result.clashes) == 1
    return result.clashes[0]


def test_two_demands_that_contradict_each_other() -> None:
    """The issue's own example: at least 120.0 and at most 119.0."""
    brief = rough(ledges=(REACH, STAY_OUT))
    result = search(brief)
    clash = only_clash(result)
    truth = brute_force(brief)
    short = least_sum(truth, (0, 1))
    assert short > 1.5  # the rates add to the contradiction
    assert clash.short_by == 1.0
    assert clash.short_over_rates == pytest.approx(short, rel=1e-8)
    assert clash.demands == ("reach awning: apex at least 120.0", "stay out of billboard: apex at most 119.0")
    assert (
        f"at least 120.0 and at most 119.0 cannot both hold: short by 1.0, about {short:.1f} over the rates"
        in clash.text
    )
    nearest = result.nearest
    assert nearest is not None
    assert nearest.verdict.cost == pytest.approx(truth[0].cost, rel=1e-8)
    assert nearest.verdict.violation == pytest.approx(truth[0].violation, rel=1e-8)
    assert nearest.verdict.constants.gravity == truth[0].constants[0]
    # It still respects the targets: no set that saves a centimetre by jumping somewhere else.
    assert nearest.verdict.worst is not None
    assert nearest.verdict.worst.value < 3.0
    assert result.shortlist == ()
    assert result.front


def test_demands_that_clash_over_the_rates_only() -> None:
    """As written the two leave a window of half a centimetre, but the apex spreads by more than that."""
    brief = rough(ledges=(replace(REACH, margin=0.5), replace(STAY_OUT, margin=1.0)))
    clash = only_clash(search(brief))
    assert clash.short_by == 0.0
    assert clash.short_over_rates == pytest.approx(least_sum(brute_force(brief), (0, 1)), rel=1e-8)
    assert clash.short_over_rates > 0.0
    assert "over the rates" in clash.text


def test_one_demand_that_nothing_meets() -> None:
    brief = rough(ledges=(Ledge("tower", 400.0, "reach"), STAY_OUT))
    clash = only_clash(search(brief))
    assert clash.demands == ("reach tower: apex at least 400.0",)
    assert clash.short_over_rates == pytest.approx(least_sum(brute_force(brief), (0,)), rel=1e-8)


def test_gaps_clash_too() -> None:
    brief = rough(gaps=(Gap("alley", 380.0, "cross"), Gap("canal", 370.0, "stay-out", far_level=-40.0)))
    clash = only_clash(search(brief))
    assert clash.short_by == 10.0  # a far side below is reached later still
    assert clash.demands[1] == "stay out of canal: gap at most 370.0 to a far side at -40"
    assert clash.short_over_rates == pytest.approx(least_sum(brute_force(brief), (0, 1)), rel=1e-8)
    # The other way round the two are no contradiction as written.
    other = rough(gaps=(Gap("alley", 380.0, "cross", far_level=-40.0), Gap("canal", 370.0, "stay-out")))
    assert all(clash.short_by == 0.0 for clash in search(other).clashes)


def test_three_demands() -> None:
    """Height, width and a limit on width: any two can be had, the three cannot."""
    brief = rough(
        ledges=(Ledge("roof", 130.0, "reach"),),
        gaps=(Gap("alley", 350.0, "cross"), Gap("canal", 364.0, "stay-out")),
    )
    truth = brute_force(brief)
    patterns = {tuple(k for k in range(3) if one.shortfalls[k] > 0) for one in truth}
    assert () not in patterns
    smallest = next(
        size
        for size in (1, 2, 3)
        if any(
            all(set(pattern) & set(which) for pattern in patterns)
            for which in itertools.combinations(range(3), size)
        )
    )
    clashes = search(brief).clashes
    assert {len(clash.demands) for clash in clashes} == {smallest}
    for clash in clashes:
        which = tuple(
            k for k, name in enumerate(("roof", "alley", "canal")) if any(name in d for d in clash.demands)
        )
        assert clash.short_over_rates == pytest.approx(least_sum(truth, which), rel=1e-8)


@pytest.mark.parametrize(
    ("patterns", "sets"),
    [
        ({0b01, 0b10}, [(0, 1)]),
        ({0b011, 0b101, 0b110}, [(0, 1), (0, 2), (1, 2)]),
        ({0b001, 0b010, 0b100}, [(0, 1, 2)]),
        ({0b0001, 0b0010, 0b0100, 0b1000}, [(0, 1, 2, 3)]),
        ({0b11, 0b01}, [(0,)]),
    ],
)
def test_smallest_sets(patterns: set[int], sets: list[tuple[int, ...]]) -> None:
    assert clashing_sets(patterns, max(patterns).bit_length()) == sets


def test_patterns_of_many_features() -> None:
    """One bit a feature, whether or not they fit into one of NumPy's numbers."""
    for features in (3, 70):
        short = np.zeros((4, features))
        short[1, [0, features - 1]] = 2.0
        short[2, 1] = 1.0
        short[3] = np.inf
        nothing = np.zeros(4)
        scores = Scores(nothing, nothing, nothing, np.array([0.0, 1.0, 1.0, np.inf]), nothing, short)
        assert failing_patterns(scores) == {0, 1 | 1 << features - 1, 2}


def test_nothing_lands() -> None:
    """A grain so coarse that no step takes anything off the velocity (SOURCES.md, section 3, stalls)."""
    brief = fixed_loop(
        Rule("semi-implicit", Rounding(at="before-move")),
        {
            "gravity": points(1400.0, 1800.0, 100.0),
            "launch_speed": Choice((640.0,)),
            "step": Choice((0.001,)),
            "grain": Choice((8.0,)),
        },
        ms(1, 2),
        Target("apex", within=2.0, aim=119.0),
        ledges=(REACH,),
    )
    result = search(brief)
    clash = only_clash(result)
    assert "lands" in clash.text
    assert result.nearest is None
    assert result.shortlist == result.front == ()
    assert result.certificate is not None
    assert result.certificate.complete
    assert result.certificate.runner_up is None
    assert all(math.isinf(one.violation) for one in brute_force(brief))


def test_a_study_says_that_it_only_tried() -> None:
    brief = rough(ledges=(REACH, STAY_OUT))
    ranged = dict(brief.search or {}) | {"gravity": Choice(None, 1400.0, 1800.0)}
    result = search(replace(brief, search=ranged), trials=48)
    clash = only_clash(result)
    assert clash.short_by == 1.0
    assert clash.text.endswith("(of those tried)")
    assert result.certificate is None
    assert result.nearest is not None


def test_feasible_briefs_have_no_clashes() -> None:
    result = search(small_brief())
    assert result.clashes == ()
    assert result.nearest is None
    assert result.best is not None


def test_a_pair_is_told_beside_a_demand_that_nothing_meets() -> None:
    """Patterns as bits: demand 2 fails always; 0 and 1 never hold together; 0, 1 and 2 is not told again."""
    assert clashing_sets({0b101, 0b110}, 3) == [(2,), (0, 1)]
    far = Gap("hallway", 900.0, "cross")
    result = search(rough(ledges=(REACH, STAY_OUT), gaps=(far,)))
    texts = [clash.text for clash in result.clashes]
    assert len(texts) == 2
    assert any(text.startswith("hallway: gap at least 900.0 cannot hold") for text in texts)
    assert any("at least 120.0 and at most 119.0 cannot both hold: short by 1.0" in text for text in texts)
