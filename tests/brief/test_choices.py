"""What a search may do with a constant: the arithmetic of ranges, lists, units, steps."""

import math
from decimal import Decimal
from fractions import Fraction
from itertools import pairwise

import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from designer.brief.choices import MOST_POINTS, Reader, range_points
from designer.brief.model import Choice
from designer.brief.reading import parse_brief
from designer.brief.units import Misread, Units
from designer.motion.rule import FrameTime
from tests.reference.crate_yard import BASE, FIXED, changed

DECIMALS = st.decimals(min_value=Decimal("0.001"), max_value=5000, places=3)
READER = Reader(Units("cm", {"tile": Fraction(64)}), FrameTime.WHOLE_MS_DOWN)


@given(DECIMALS, st.decimals(min_value=Decimal("0.001"), max_value=50, places=3), st.integers(0, 300))
def test_points_are_the_nearest_to_the_decimals(low: Decimal, every: Decimal, count: int) -> None:
    """Each is the binary64 nearest to the decimal from + i·every (Decimal is the twin)."""
    high = low + every * count
    points = range_points(Fraction(low), Fraction(high), Fraction(every))
    assert points == tuple(float(low + i * every) for i in range(count + 1))
    assert points[-1] == float(high)


@given(DECIMALS, DECIMALS, DECIMALS)
def test_the_end_is_kept_only_where_it_is_a_whole_number_away(a: Decimal, b: Decimal, every: Decimal) -> None:
    low, high = Fraction(min(a, b)), Fraction(max(a, b))
    assume((high - low) / Fraction(every) < 2000)
    points = range_points(low, high, Fraction(every))
    assert points[0] == float(low)
    assert all(x < y for x, y in pairwise(points))
    assert points[-1] <= float(high) < float(low + len(points) * Fraction(every))
    assert ((high - low) % Fraction(every) == 0) == (low + (len(points) - 1) * Fraction(every) == high)


def test_tenths_do_not_drift() -> None:
    """0.1 added up thirty times is not 3 in binary64; the points are."""
    choice = READER.choice("fall_factor", {"from": Decimal("0.1"), "to": 3, "every": Decimal("0.1")})
    assert choice.values is not None
    assert choice.values[2] == 0.3
    assert choice.values[-1] == 3.0
    assert len(choice.values) == 30


def test_the_brief_s_own_decimals_reach_the_points() -> None:
    text = changed(("{ from = 900, to = 2900, every = 10 }", "{ from = 900.1, to = 900.75, every = 0.1 }"))
    search = parse_brief(text, "yard.toml").search
    assert search is not None
    assert search["gravity"].values == (900.1, 900.2, 900.3, 900.4, 900.5, 900.6, 900.7)


@pytest.mark.parametrize(
    ("name", "raw", "choice"),
    [
        ("gravity", "free", Choice(None, text="free")),
        ("gravity", 1600, Choice((1600.0,), text="1600")),
        ("gravity", {"from": 800, "to": 3200}, Choice(None, 800.0, 3200.0, "800 to 3200")),
        ("gravity", {"from": 5, "to": 5}, Choice((5.0,), text="5 to 5")),
        ("gravity", "2 tile/s^2", Choice((128.0,), text="2 tile/s^2")),
        ("gravity", {"from": "2 tile/s²", "to": 130, "every": 1},
         Choice((128.0, 129.0, 130.0), text="2 tile/s² to 130 by 1")),
        ("grain", {"among": [1, 0, Decimal("0.125"), 1]},
         Choice((0.0, 0.125, 1.0), text="1, 0 or 0.125")),
        ("terminal_speed", "none", Choice((math.inf,), text="none")),
        ("terminal_speed", {"among": ["none", 900]}, Choice((900.0, math.inf), text="none or 900")),
        ("step", "8 ms", Choice((0.008,), text="8 ms")),
        ("step", "128 Hz", Choice((0.007,), text="128 Hz")),
        ("step", Decimal("0.008"), Choice((0.008,), text="0.008")),
        ("step", {"from": "1 ms", "to": "3 ms", "every": "1 ms"},
         Choice((0.001, 0.002, 0.003), text="1 ms to 3 ms by 1 ms")),
        ("step", {"from": "1 ms", "to": "2 ms", "every": "0.5 ms"},
         Choice((0.001, 0.0015, 0.002), text="1 ms to 2 ms by 0.5 ms")),
        ("step", {"from": "60 Hz", "to": "64 Hz", "every": "1 Hz"},
         Choice((0.015, 0.016), text="60 Hz to 64 Hz by 1 Hz")),
        ("step", {"from": "50 Hz", "to": "100 Hz"}, Choice(None, 0.01, 0.02, "50 Hz to 100 Hz")),
        ("step", {"among": ["8 ms", "125 Hz", "4 ms"]}, Choice((0.004, 0.008), text="8 ms, 125 Hz or 4 ms")),
    ],
)  # fmt: skip
def test_choices_as_written(name: str, raw: object, choice: Choice) -> None:
    assert READER.choice(name, raw) == choice


@pytest.mark.parametrize(
    ("raw", "words"),
    [
        ({"from": "1 ms", "to": "100 Hz", "every": "1 ms"}, "in one unit"),
        ({"from": "1 ms", "to": "8 ms", "every": "1 Hz"}, "in one unit"),
        ({"from": "8 ms", "to": "1 ms"}, "not above its to"),
    ],
)
def test_steps_in_two_units_or_reversed(raw: object, words: str) -> None:
    with pytest.raises(Misread, match=words):
        READER.choice("step", raw)


def test_the_number_of_points_has_a_limit() -> None:
    most = READER.choice("gravity", {"from": 1, "to": MOST_POINTS, "every": 1})
    assert most.values is not None
    assert len(most.values) == MOST_POINTS
    with pytest.raises(Misread, match="at most 100000 points"):
        READER.choice("gravity", {"from": 1, "to": MOST_POINTS + 1, "every": 1})


@given(st.decimals(min_value=Decimal("0.01"), max_value=100, places=2))
def test_named_lengths_are_exact(number: Decimal) -> None:
    units = Units("cm", {"tile": Fraction(Decimal("0.1"))})
    assert units.read(f"{number} tile", "length") == Fraction(number) / 10
    assert units.read(f"{number} cm", "length") == units.read(number, "length") == Fraction(number)
    assert units.read(f"{number} tile/s", "speed") == units.read(f"{number} tile/s/s", "acceleration")


def test_times_in_seconds_and_milliseconds() -> None:
    assert float(Units().read("760 ms", "time")) == 0.76
    assert float(Units().read(Decimal("0.76"), "time")) == float(Units().read("0.76 s", "time")) == 0.76


def test_what_search_leaves_alone_is_fixed_at_today_or_at_the_default() -> None:
    text = changed(("grain = { among = [0, 0.125, 1] }\nrun_speed = 500", "step_up = 3"))
    brief = parse_brief(text, "yard.toml")
    assert brief.search is not None
    left_alone = {
        "grain": 1.0,
        "run_speed": 500.0,
        "fall_factor": 1.0,
        "terminal_speed": math.inf,
        "step_up": 3.0,
        "edge_allowance": 0.0,
    }
    assert {name: brief.search[name].values for name in left_alone} == {
        n: (v,) for n, v in left_alone.items()
    }
    assert "step" not in brief.search


def test_a_fixed_loop_has_a_step_among_its_constants() -> None:
    brief = parse_brief(FIXED, "yard.toml")
    assert brief.search is not None
    assert brief.search["step"].values == (0.008,)
    assert brief.today is not None
    assert brief.today.step == 0.008


def test_base_is_today_else_what_search_fixes() -> None:
    today = parse_brief(BASE, "yard.toml")
    assert today.base == today.today
    fixed = changed(
        ("[today]\ngravity = 1500\nlaunch_speed = 580\ngrain = 1\nrun_speed = 500\n", ""),
        ("{ from = 900, to = 2900, every = 10 }", "1500"),
        ("{ from = 310, to = 950, every = 5 }", "580"),
    )
    brief = parse_brief(fixed + '[[sets]]\nname = "slow"\nrun_speed = 90\n', "yard.toml")
    assert brief.today is None
    assert brief.base is not None
    assert (brief.base.gravity, brief.base.launch_speed, brief.base.grain) == (1500.0, 580.0, 0.0)
    assert (brief.sets[0].constants.gravity, brief.sets[0].constants.run_speed) == (1500.0, 90.0)
