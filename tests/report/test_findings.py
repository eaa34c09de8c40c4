"""Titles are made from verdicts: what fails today, where, and what becomes of it."""

from __future__ import annotations

from dataclasses import replace

import pytest

from designer.brief.model import Rate
from designer.report import findings
from designer.search.result import Candidate
from tests.report.samples import PROPOSED, TODAY, courier, result, verdict


def best(failing: tuple[tuple[str, ...], ...] = ((), ())) -> Candidate:
    return Candidate("B", "", "code", verdict(courier(), PROPOSED[0], failing=failing))


def today(failing: tuple[tuple[str, ...], ...], spares: tuple[float, float] = (1.6, -3.7)) -> object:
    return verdict(courier(), TODAY, ledge_spares=spares, failing=failing)


def title(was: tuple[tuple[str, ...], ...], now: tuple[tuple[str, ...], ...]) -> str:
    return findings.reach_title(today(was), best(now), courier())  # type: ignore[arg-type]


def test_the_title_says_where_today_fails_and_that_the_best_never_does() -> None:
    assert title(((), ("201–250 Hz",)), ((), ())) == "Today billboard opens at 201–250 Hz; with B never"


def test_what_fails_beyond_the_supported_rates_is_said_without_claiming_more() -> None:
    said = title(((), ("201–250 Hz", "334–360 Hz")), ((), ("700–1000 Hz",)))
    assert said == "Today billboard opens at 201–250 Hz; with B at no rate from 60 to 240 Hz"


def test_a_best_that_fails_too_is_not_whitewashed() -> None:
    said = title(((), ("100–250 Hz",)), ((), ("101–110 Hz",)))
    assert said == "Today billboard opens at 100–250 Hz; with B at 101–110 Hz"


def test_where_all_is_well_it_says_how_far() -> None:
    good = verdict(courier(), TODAY)
    assert (
        findings.reach_title(good, best(), courier())
        == "Every ledge holds from 20 to 1000 Hz, today and with B"
    )
    some = best(((), ("700–1000 Hz",)))
    assert (
        findings.reach_title(good, some, courier()) == "Every ledge holds from 60 to 240 Hz, today and with B"
    )
    assert findings.reach_title(None, best(), courier()) == "Every ledge holds from 20 to 1000 Hz, with B"


def test_without_ledges_it_is_about_the_apex() -> None:
    brief = courier(ledges=())
    bare = Candidate("A", "", "code", verdict(brief, PROPOSED[0], ledge_spares=(), failing=()))
    was = verdict(brief, TODAY, ledge_spares=(), failing=())
    assert findings.reach_title(was, bare, brief) == (
        "Over the supported rates the apex moves by 0.5 today; with A it moves by 0.5"
    )


@pytest.mark.parametrize(
    ("bands", "text"),
    [
        ((), "no rate"),
        (("90 Hz",), "90 Hz"),
        (("77–83 Hz", "201–250 Hz"), "77–83 and 201–250 Hz"),
        (("1–2 Hz", "4 Hz", "6 Hz", "8 Hz"), "1–2, 4, 6 Hz and one more band"),
        (("1–2 Hz", "4 Hz", "6 Hz", "8 Hz", "9 Hz"), "1–2, 4, 6 Hz and 2 more bands"),
    ],
)
def test_bands_in_a_sentence(bands: tuple[str, ...], text: str) -> None:
    assert findings.bands_text(bands) == text


@pytest.mark.parametrize(
    ("rate", "hz"),
    [
        (Rate("60 Hz", 0.016), [60.0]),
        (Rate("59–62 Hz", 0.016), [59, 60, 61, 62]),
        (Rate("60 Hz, 16 ms", 0.016), [60.0]),
        (Rate("59.94 Hz", 1 / 59.94), [59.94]),
        (Rate("8 ms", 0.008), [125.0]),
    ],
)
def test_merged_rates_name_their_hz(rate: Rate, hz: list[float]) -> None:
    assert findings.hz_of(rate) == pytest.approx(hz)


def test_the_arcs_title_names_what_fails_and_where() -> None:
    brief = courier()
    assert findings.arc_title("A", verdict(brief, PROPOSED[0]), brief).endswith("at the supported rates")
    bad = verdict(brief, TODAY, ledge_spares=(1.0, -3.7))
    assert findings.arc_title("today", bad, brief) == "today: billboard opens at 144 Hz"
    worse = verdict(brief, TODAY, ledge_spares=(-1.0, -3.7))
    assert (
        findings.arc_title("today", worse, brief)
        == "today: awning is out of reach at 144 Hz, and 1 more fails"
    )


def test_the_front_names_the_nearest_and_the_steadiest() -> None:
    found = result(courier(), 3)
    assert "nearest to what was wanted" in findings.front_title(found)
    nothing = replace(found, shortlist=(), best=None)
    assert findings.front_title(nothing).startswith("No set")
