"""The whole of a search: routes, candidates beside today, notes, progress and interruption."""

import math
from dataclasses import replace

import pytest

import designer.search.scan as scanning
from designer.brief.model import Brief, Choice, NamedSet
from designer.errors import InputError
from designer.motion.rule import Constants, Rounding, Rule
from designer.search.propose import change_of
from designer.search.run import reason_to_study, search
from designer.search.shortlist import LOOKS, NOTICED
from designer.search.space import build_space
from tests.reference.make import small_brief
from tests.reference.score_twin import brute_force
from tests.reference.search_briefs import alignment, millions


class Listener:
    """Remembers what it was told."""

    def __init__(self) -> None:
        self.told: list[tuple[str, int, int]] = []

    def update(self, stage: str, done: int, total: int) -> None:
        self.told.append((stage, done, total))


def grained() -> Brief:
    brief = small_brief()
    today = replace(brief.today or Constants(1.0, 1.0), grain=1.0)
    return replace(brief, today=today, search=dict(brief.search or {}) | {"grain": Choice((0.0, 0.125, 1.0))})


def test_shortlist_of_a_small_brief() -> None:
    brief = replace(grained(), sets=(NamedSet("Ines", Constants(1500.0, 600.0, run_speed=540.0)),))
    result = search(brief)
    truth = brute_force(brief)
    assert result.best == result.shortlist[0]
    assert result.best is not None
    assert result.best.label == "A"
    assert result.best.why.startswith("lowest cost")
    assert result.best.verdict.cost == pytest.approx(truth[0].cost, rel=1e-8)
    assert [candidate.label for candidate in result.shortlist] == list("ABCDEF")[: len(result.shortlist)]
    whys = " / ".join(candidate.why for candidate in result.shortlist)
    assert "steadiest" in whys
    assert "changes numbers only" in whys
    numbers = [one for one in truth if one.feasible and one.constants[3] == 1.0]
    named = next(c for c in result.shortlist if "numbers only" in c.why)
    assert named.change == "numbers"
    assert named.verdict.cost == pytest.approx(numbers[0].cost, rel=1e-8)
    on_target = [one for one in truth if one.feasible and one.worst <= 1]
    steady = next(c for c in result.shortlist if "steadiest" in c.why)
    assert steady.verdict.rate_spread == pytest.approx(min(one.spread for one in on_target), rel=1e-8)
    assert [(one.label, one.verdict.constants) for one in result.sets] == [("Ines", brief.sets[0].constants)]
    assert result.today is not None
    assert result.today.change == "none"
    assert result.today.label is None


def looks(candidate_brief: Brief, constants: Constants, measures: dict[str, float | None]) -> list[float]:
    return [float(measures.get(name) or getattr(constants, name, 0.0) or 0.0) for name in LOOKS]


@pytest.mark.parametrize("make", [small_brief, grained, alignment])
def test_fillers_differ_from_everything_else(make: object) -> None:
    brief = make()  # type: ignore[operator]
    result = search(brief)
    shown = [(c, looks(brief, c.verdict.constants, dict(c.verdict.jumps[0].nominal.measures)))
             for c in result.shortlist]  # fmt: skip
    for candidate, mine in shown:
        if any(word in candidate.why for word in ("lowest cost", "steadiest", "numbers only")):
            continue
        for other, theirs in shown:
            if other is not candidate:
                apart = max(
                    abs(a - b) / max(abs(a), abs(b)) for a, b in zip(mine, theirs, strict=True) if a or b
                )
                assert apart > NOTICED
    kept: list[list[float]] = []
    for _, mine in shown:
        pairs = [[(a, b) for a, b in zip(mine, other, strict=True) if a or b] for other in kept]
        if all(max(abs(a - b) / max(abs(a), abs(b)) for a, b in one) > NOTICED for one in pairs):
            kept.append(mine)
    told = any(note.startswith("Fewer than 3 candidates differ") for note in result.notes)
    assert told == (len(kept) < 3)


def test_front_is_sound_and_labels_agree() -> None:
    result = search(grained())
    pairs = [(c.verdict.miss, c.verdict.rate_spread) for c in result.front]
    assert pairs == sorted(pairs)
    spreads = [pair[1] for pair in pairs]
    assert spreads == sorted(spreads, reverse=True)
    by_constants = {c.verdict.constants: c.label for c in result.shortlist}
    for candidate in result.front:
        assert candidate.label == by_constants.get(candidate.verdict.constants)


def test_certificate() -> None:
    result = search(grained())
    certificate = result.certificate
    assert certificate is not None
    assert certificate.kind == "grid"
    assert certificate.method == "enumerated"
    assert certificate.complete
    assert certificate.grid_points == certificate.evaluated == result.evaluations == 272 * 3
    assert certificate.runner_up is not None
    assert result.best is not None
    assert certificate.runner_up.cost >= (result.best.verdict.cost or math.inf)


def test_changes() -> None:
    brief = grained()
    today = brief.today
    assert today is not None
    assert change_of(brief, today) == "none"
    assert change_of(brief, replace(today, gravity=1500.0)) == "numbers"
    assert change_of(brief, replace(today, grain=0.0)) == "code"
    assert change_of(replace(brief, today=None), today) == "new"
    fixed = replace(alignment(), today=replace(today, step=0.008))
    assert change_of(fixed, replace(today, step=0.008, gravity=1.0)) == "numbers"
    assert change_of(fixed, replace(today, step=0.004)) == "code"


def test_no_candidate_changes_numbers_only_where_search_leaves_out_todays_grain() -> None:
    brief = small_brief()
    brief = replace(brief, today=replace(brief.today or Constants(1.0, 1.0), grain=0.25))
    result = search(brief)
    assert any("today's step and grain" in note for note in result.notes)
    assert all("numbers only" not in candidate.why for candidate in result.shortlist)


def test_routes() -> None:
    brief = small_brief()
    space = build_space(brief)
    assert reason_to_study(brief, space, 272, ()) is None
    assert "271" in (reason_to_study(brief, space, 271, ()) or "")
    assert "no increments" in (_reason(brief, gravity=Choice(None, 1400.0, 1700.0)) or "")
    large = millions(every=5.0)
    assert reason_to_study(large, build_space(large), 20_000_000, ()) is None
    assert reason_to_study(large, build_space(large), 200_000, ()) is not None
    stepped = replace(millions(every=1.0), rule=Rule("average", Rounding(carry=True)))
    assert "no closed form" in (reason_to_study(stepped, build_space(stepped), 100_000_000, ()) or "")
    small = replace(millions(every=50.0), rule=Rule("average", Rounding(carry=True)))
    assert reason_to_study(small, build_space(small), 20_000_000, ()) is None


def _reason(brief: Brief, **search_for: Choice) -> str | None:
    changed = replace(brief, search=dict(brief.search or {}) | search_for)
    return reason_to_study(changed, build_space(changed), 20_000_000, ())


def test_notes_say_what_ran_and_why() -> None:
    assert any("Scanned all 272 designs" in note for note in search(small_brief()).notes)
    study = search(small_brief(), budget=200, trials=16)
    assert study.method == "study"
    assert "budget" in study.notes[0]
    assert any("Optuna" in note for note in study.notes)
    assert any("SciPy" in note for note in study.notes)


def test_progress_is_told(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(scanning, "BLOCK_JUMPS", 100)
    for workers in (1, 2):
        listener = Listener()
        search(small_brief(), workers=workers, progress=listener)
        scans = [(done, total) for stage, done, total in listener.told if stage == "Scanning the grid"]
        assert len(scans) > 2
        assert [done for done, _ in scans] == list(range(1, scans[-1][1] + 1))
    listener = Listener()
    search(small_brief(), budget=200, trials=32, progress=listener)
    assert ("Running the study", 32, 32) in listener.told
    assert any(stage == "Refining the best" for stage, _, _ in listener.told)


@pytest.mark.parametrize("workers", [1, 2])
def test_ctrl_c_passes_through(workers: int, monkeypatch: pytest.MonkeyPatch) -> None:
    class Interrupts:
        def update(self, stage: str, done: int, total: int) -> None:
            raise KeyboardInterrupt

    monkeypatch.setattr(scanning, "BLOCK_JUMPS", 100)
    with pytest.raises(KeyboardInterrupt):
        search(small_brief(), workers=workers, progress=Interrupts())


@pytest.mark.parametrize("option", ["workers", "trials", "budget"])
def test_options_out_of_range(option: str) -> None:
    with pytest.raises(InputError, match=option):
        search(small_brief(), **{option: 0})  # type: ignore[arg-type]


def test_lucky_rounding_is_mentioned() -> None:
    """Semi-implicit at a long step jumps low; a coarse grain happens to make up for it."""
    result = search(grained())
    for candidate in result.shortlist:
        if "rounding happens to help" in candidate.why:
            bare = replace(candidate.verdict.constants, grain=0.0)
            from designer.objective.judge import judge

            without = judge(grained(), bare, bands=False)
            assert (without.cost or 0.0) > (candidate.verdict.cost or 0.0)
            break
    else:
        pytest.fail("no candidate of this brief owes anything to rounding")
