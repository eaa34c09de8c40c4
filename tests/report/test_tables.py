"""Tables: their rows as data, and their looks as plain text at 80 and 120 columns."""

from __future__ import annotations

import io
from dataclasses import replace
from pathlib import Path

import pytest
from rich.cells import cell_len
from rich.console import Console

from designer.brief.model import Rate, Rates
from designer.objective.judge import judge
from designer.report.cells import decimals, deviation_text, figure
from designer.report.check_table import check_rows, rates_grid
from designer.report.tables import candidate_sections, check_table, print_check, print_search
from designer.search.result import Candidate
from tests.report.samples import (
    LONG,
    PROPOSED,
    TODAY,
    bring,
    clashing,
    courier,
    result,
    stuck,
    verdict,
)


def printed(width: int, show: object) -> list[str]:
    """What a console without a terminal prints."""
    out = io.StringIO()
    console = Console(file=out, width=width, highlight=False)
    show(console)  # type: ignore[operator]
    return out.getvalue().splitlines()


def search_lines(width: int, count: int = 3, **more: object) -> list[str]:
    brief = courier()
    found = replace(result(brief, count), **more)  # type: ignore[arg-type]
    return printed(width, lambda console: print_search(brief, found, Path("results/job"), console))


@pytest.mark.parametrize("width", [80, 120])
@pytest.mark.parametrize("count", [1, 3, 6])
def test_nothing_is_wider_than_the_terminal_and_nothing_is_cut(width: int, count: int) -> None:
    lines = search_lines(width, count)
    assert max(cell_len(line) for line in lines) <= width
    text = "\n".join(lines)
    assert "\x1b" not in text
    assert "…" not in text
    for label in "ABCDEF"[:count]:
        assert f"{label}·m" in text
    for number in ("1620", "635", "800 to 3200 by 10", "120 ± 2", "≥ 400 (by 10)"):
        assert number in text


def test_today_stands_beside_every_candidate_where_the_table_splits() -> None:
    heads = [line.split() for line in search_lines(80, 6) if "wanted" in line]
    assert [head[0] for head in heads] == ["today"] * len(heads)
    assert [label for head in heads for label in head if label in "ABCDEF"] == list("ABCDEF")
    assert len(heads) > 1
    one = [line.split() for line in search_lines(120, 6) if "wanted" in line]
    assert one == [["today", "A", "B", "C", "D", "E", "F", "wanted"]]


def test_out_of_tolerance_is_marked_and_failing_features_too() -> None:
    brief = courier()
    sections = candidate_sections(brief, result(brief, 1))
    rows = {row.label: row for section in sections for row in section}
    assert rows["apex (cm)"].cells == ("120.1", "124.5!")
    assert rows["billboard: spare"].cells == ("−3.7!", "+0.4")
    assert rows["awning: spare"].wanted == "reach 110, margin 2"
    assert rows["change"].cells == ("none", "code")
    assert rows["gravity"].cells == ("1600", "1620")
    assert rows["run_speed"].wanted == "fixed"
    assert "fall_factor" not in rows
    assert "step" not in rows


def test_constants_that_differ_get_a_row_though_nobody_searches_them() -> None:
    brief = bring(courier(), "heavier")
    heavy = replace(TODAY, fall_factor=1.5)
    found = replace(
        result(brief, 1), sets=(Candidate("heavier", "brought", "numbers", verdict(brief, heavy)),)
    )
    rows = {row.label: row for section in candidate_sections(brief, found) for row in section}
    assert rows["fall_factor"].cells == ("1", "1.5", "1")


@pytest.mark.parametrize("width", [80, 120])
def test_long_names_of_sets_and_features_fold_instead_of_squeezing(width: int) -> None:
    brief = bring(courier(), LONG)
    brief = replace(brief, ledges=tuple(replace(ledge, name=LONG + ledge.name) for ledge in brief.ledges))
    lines = printed(
        width, lambda c: print_search(brief, result(brief, 3, with_sets=True), Path("results/job"), c)
    )
    assert max(cell_len(line) for line in lines) <= width
    assert "1620" in "\n".join(lines)
    assert not any("…" in line for line in lines)


def test_nothing_feasible_says_which_demands_clash() -> None:
    brief = courier()
    text = " ".join(
        " ".join(printed(80, lambda c: print_search(brief, clashing(brief), Path("results/job"), c))).split()
    )
    assert "short by 1.0, about 4.8 over the rates" in text
    assert "reach awning: apex at least 120.0" in text
    assert "nearest" in text


def test_a_jump_that_never_lands_shows_dashes_and_no_crash() -> None:
    brief = courier()
    found = replace(result(brief, 1), today=Candidate("today", "", "none", stuck(brief, TODAY)))
    rows = {row.label: row for section in candidate_sections(brief, found) for row in section}
    assert rows["apex (cm)"].cells[0] == "–!"
    assert rows["miss"].cells[0] == "–"
    assert rows["awning: spare"].cells[0] == "–!"
    text = "\n".join(printed(80, lambda c: c.print(check_table(brief, stuck(brief, TODAY)))))
    assert "never-slows!" in text
    assert "never lands" in text


@pytest.mark.parametrize("width", [80, 120])
def test_check_shows_every_rate_the_bands_the_rule_and_the_ticks(width: int) -> None:
    brief = courier()
    lines = printed(width, lambda c: print_check(brief, "today", judge(brief, TODAY), c))
    text = "\n".join(lines)
    assert max(cell_len(line) for line in lines) <= width
    for part in ("60 Hz", "500 Hz", "watched", "nominal", "16 ms", "round_half_even", "594.4"):
        assert part in text
    assert "“billboard” opens or is short of its margin at 201–250 and 334–500 Hz" in " ".join(text.split())
    # The printed figures of the project's search notes §14.
    for apex in ("113.5", "115.1", "114.2", "115.9", "113.6", "126.7"):
        assert apex in text


def test_each_rate_stands_once_with_what_it_counts_as() -> None:
    brief = courier()
    kinds = [(kind, row.rate) for kind, row in check_rows(brief, judge(brief, TODAY, bands=False))]
    assert kinds[0] == ("nominal", "60 Hz")
    assert kinds[-1] == ("watched", "500 Hz")
    assert len(kinds) == 7
    apart = courier(aim_at=Rate("50 Hz", 0.02))
    kinds = [(kind, row.rate) for kind, row in check_rows(apart, judge(apart, TODAY, bands=False))]
    assert kinds[:2] == [("nominal", "50 Hz"), ("supported", "60 Hz")]


def test_many_rates_are_cut_to_the_telling_ones() -> None:
    rates = Rates(tuple(Rate(f"{hz} Hz", 1 / hz) for hz in range(30, 361)))
    brief = courier(rates=rates, aim_at=rates.supported[0])
    judged = judge(brief, TODAY, bands=False)
    shown = rates_grid(brief, judged).left[0].cells
    assert len(shown) < 20
    apexes = {row.rate: row.measures["apex"] or 0.0 for row in judged.jumps[0].rates}
    assert max(apexes, key=lambda rate: apexes[rate]) in shown
    assert min(apexes, key=lambda rate: apexes[rate]) in shown
    assert "331 rates" in "\n".join(printed(80, lambda c: c.print(check_table(brief, judged))))


def test_deviations_are_signed_and_marked_beyond_one_tolerance() -> None:
    assert deviation_text(0.44) == "+0.4"
    assert deviation_text(-3.25) == "−3.2!"
    assert deviation_text(1.0) == "+1.0"
    assert deviation_text(1.012) == "+1.01!"
    assert deviation_text(None) == "–!"
    assert deviation_text(-0.01) == "+0.0"


@pytest.mark.parametrize(
    ("within", "places"), [(2.0, 1), (10.0, 0), (0.02, 3), (1.0, 1), (0.5, 2), (100.0, 0), (0.1, 2)]
)
def test_decimals_follow_the_tolerance(within: float, places: int) -> None:
    assert decimals(within) == places


@pytest.mark.parametrize(
    ("value", "text"),
    [
        (1625.0, "1625"),
        (0.123456, "0.1235"),
        (None, "–"),
        (float("nan"), "–"),
        (-12.345, "−12.35"),
        (0.0, "0"),
    ],
)
def test_figures_without_a_tolerance_have_four(value: float | None, text: str) -> None:
    assert figure(value) == text


def test_a_fixed_loop_shows_steps_in_ms() -> None:
    brief = courier()
    stepped = replace(PROPOSED[0], step=1 / 60)
    found = replace(
        result(brief, 1), shortlist=(Candidate("A", "", "numbers", verdict(brief, stepped)),), today=None
    )
    rows = {row.label: row for section in candidate_sections(brief, found) for row in section}
    assert rows["step"].cells == ("16.6667 ms",)
