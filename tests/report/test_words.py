"""The rule read back, the first ticks, and numbers as people type them."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest

from designer.motion.rule import (
    FrameTime,
    Integrator,
    LandingTest,
    Mode,
    Place,
    PositionRounding,
    Rounding,
    Rule,
)
from designer.report.words import first_ticks, number, pseudo_code
from tests.report.samples import PROPOSED, TODAY, courier


def code(rule: Rule, **constants: object) -> list[str]:
    return pseudo_code(courier(), rule, replace(TODAY, **constants))  # type: ignore[arg-type]


def test_the_couriers_rule() -> None:
    rule = courier().rule
    assert pseudo_code(courier(), rule, TODAY) == [
        "h = max(1, floor(1000 / rate)) / 1000   # 60 Hz: h = 0.016",
        "y = 0; v = 620",
        "each step:",
        "    a = 1600 * h",
        "    u = v - a",
        "    w = round_half_even(u)",
        "    y = y + u * h",
        "    v = w",
        "    landed when y <= 0.000001 and y is lower than a step ago",
        "    the landing counts where that step's segment crosses 0",
    ]


def test_only_parts_in_use_are_read_back() -> None:
    lines = "\n".join(code(Rule(Integrator.EXPLICIT), grain=0.0))
    assert "v = u" in lines
    assert "y = y + v * h" in lines
    for absent in ("round", "w =", "max(u", " g ", "first_step", "e ="):
        assert absent not in lines


def test_every_part_reads_back() -> None:
    rule = Rule(
        Integrator.AVERAGE,
        Rounding(Mode.TOWARD_ZERO, Place.BEFORE_MOVE, carry=True),
        frame_time=FrameTime.WHOLE_MS_NEAREST,
        landing_test=LandingTest.END_OF_STEP,
        launch_gravity=False,
        position=PositionRounding(0.5, Mode.DOWN),
    )
    lines = code(rule, grain=0.125, fall_factor=1.5, terminal_speed=900.0)
    assert lines[1:] == [
        "y = 0; v = 620; e = 0",
        "each step:",
        "    g = 1600 if v > 0 else 1600 * 1.5",
        "    a = 0 if first_step else g * h",
        "    u = v - a",
        "    u = max(u, -900)",
        "    t = u + e",
        "    w = truncate(t / 0.125) * 0.125",
        "    e = t - w",
        "    y = y + 0.5 * (v + w) * h",
        "    y = floor(y / 0.5) * 0.5",
        "    v = w",
        "    landed when y <= 0.000001 and y is lower than a step ago",
        "    the landing counts at the end of that step",
    ]
    assert "floor(1000 / rate + 0.5)" in lines[0]


NAMES = {
    "floor": math.floor,
    "ceiling": math.ceil,
    "truncate": math.trunc,
    "round_half_even": round,
    "round_half_away_from_zero": lambda x: math.copysign(math.floor(abs(x) + 0.5), x),
    "max": max,
}


@pytest.mark.parametrize("integrator", list(Integrator))
@pytest.mark.parametrize("mode", list(Mode))
@pytest.mark.parametrize("at", list(Place))
@pytest.mark.parametrize("carry", [False, True])
def test_the_pseudo_code_does_what_the_kernel_does(
    integrator: Integrator, mode: Mode, at: Place, carry: bool
) -> None:
    """Run the lines themselves (they read as Python) and compare with the simulated ticks."""
    rule = Rule(integrator, Rounding(mode, at, carry), FrameTime.WHOLE_MS_DOWN, launch_gravity=False)
    brief = courier(rule=rule)
    constants = replace(TODAY, grain=0.5, fall_factor=1.5, terminal_speed=500.0)
    lines = pseudo_code(brief, rule, constants)
    state: dict[str, object] = {**NAMES, "h": brief.nominal(constants).step}
    exec(lines[1], state)
    body = [line.strip() for line in lines[3:-2]]
    for tick in first_ticks(brief, constants, 60):
        state["first_step"] = tick.tick == 1
        assert state["v"] == tick.v_before
        for line in body:
            exec(line, state)
        assert state["u"] == tick.u
        assert state["v"] == tick.v_after
        assert state["y"] == tick.y_after


def test_four_ticks_unless_the_jump_is_over_sooner() -> None:
    ticks = first_ticks(courier(), TODAY)
    assert [tick.tick for tick in ticks] == [1, 2, 3, 4]
    # By hand, semi-implicit at 16 ms: u = 620 − 25.6, y = 594.4·0.016, v to the nearest whole number.
    assert (ticks[0].v_before, ticks[0].u, ticks[0].v_after) == (620.0, 594.4, 594.0)
    assert ticks[0].y_after == pytest.approx(9.5104)
    short = first_ticks(courier(), replace(PROPOSED[0], launch_speed=20.0))
    assert 1 <= len(short) < 4


@pytest.mark.parametrize(
    ("value", "text"),
    [
        (1600.0, "1600"),
        (1462.5, "1462.5"),
        (0.125, "0.125"),
        (-40.0, "−40"),
        (1e-6, "0.000001"),
        (1_234_567_890.0, "1234567890"),
        (0.00390625, "0.00390625"),
        (None, "–"),
        (math.nan, "–"),
        (math.inf, "none"),
        (0.0, "0"),
    ],
)
def test_numbers_are_short_and_plain(value: float | None, text: str) -> None:
    assert number(value) == text
