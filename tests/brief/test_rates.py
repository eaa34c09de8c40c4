"""Rates and steps: what they become, what is the same, how it is named."""

import math
from fractions import Fraction

import pytest
from hypothesis import given
from hypothesis import strategies as st

from designer.brief.model import Rate
from designer.brief.rates import join_names, merge_rates, parse_rate, read_rate, read_rates
from designer.brief.units import Misread, Misreadings
from designer.errors import InputError
from designer.motion.rule import FrameTime

# SOURCES.md, section 10: whole milliseconds of a frame cap, ms = 1000 // cap (computed).
WHOLE_MS = {
    1: (501, 1000), 2: (334, 500), 3: (251, 333), 4: (201, 250), 5: (167, 200), 6: (143, 166), 7: (126, 142),
    8: (112, 125), 9: (101, 111), 10: (91, 100), 11: (84, 90), 12: (77, 83), 13: (72, 76), 14: (67, 71),
    15: (63, 66), 16: (59, 62), 17: (56, 58), 18: (53, 55), 20: (48, 50), 25: (39, 40), 33: (30, 30),
}  # fmt: skip


@pytest.mark.parametrize("ms", sorted(WHOLE_MS))
def test_frame_caps_in_whole_milliseconds(ms: int) -> None:
    """SOURCES.md, section 10, both ends of each band and everything between."""
    first, last = WHOLE_MS[ms]
    for rate in range(first, last + 1):
        assert parse_rate(f"{rate} Hz", FrameTime.WHOLE_MS_DOWN).step == ms / 1000.0
    if ms > 1:
        assert parse_rate(f"{last + 1} Hz", FrameTime.WHOLE_MS_DOWN).step < ms / 1000.0


@given(st.integers(1, 10_000))
def test_frame_times_are_those_of_the_design(rate: int) -> None:
    """The definition (DEVELOPERS.md, update rule) in exact integers."""
    text = f"{rate} Hz"
    assert parse_rate(text, FrameTime.EXACT).step == 1.0 / rate
    assert parse_rate(text, FrameTime.WHOLE_MS_DOWN).step == max(1, 1000 // rate) / 1000.0
    nearest = max(1, (2000 + rate) // (2 * rate))
    assert parse_rate(text, FrameTime.WHOLE_MS_NEAREST).step == nearest / 1000.0


@given(st.integers(1, 1000), st.sampled_from(FrameTime))
def test_a_step_in_ms_is_itself(ms: int, frame_time: FrameTime) -> None:
    assert parse_rate(f"{ms} ms", frame_time).step == ms / 1000.0


def test_where_1000_over_rate_is_a_tie_or_a_hair_off() -> None:
    assert parse_rate("80 Hz", FrameTime.WHOLE_MS_NEAREST).step == 0.013  # 12.5 goes up
    assert parse_rate("62.5 Hz", FrameTime.WHOLE_MS_DOWN).step == 0.016
    assert parse_rate("33.3 Hz", FrameTime.WHOLE_MS_DOWN).step == 0.03
    assert parse_rate("2000 Hz", FrameTime.WHOLE_MS_DOWN).step == 0.001  # at least 1 ms


def test_every_rate_is_echoed_with_what_it_became() -> None:
    """The example of DEVELOPERS.md, update rule."""
    assert parse_rate("128 Hz", FrameTime.WHOLE_MS_DOWN).echo == "128 Hz → 7 ms (142.9 Hz)"


@pytest.mark.parametrize(("text", "name"), [("60Hz", "60 Hz"), (" 60  Hz ", "60 Hz"), ("60.0 Hz", "60 Hz"),
                                            ("16.50 ms", "16.5 ms"), ("0.02 s", "20 ms")])  # fmt: skip
def test_spelling_of_a_rate(text: str, name: str) -> None:
    assert parse_rate(text).name == name


@pytest.mark.parametrize(("text", "better"), [("60", '"60 Hz"'), ("8", '"8 ms"'), ("60 hz", '"60 Hz"'),
                                              ("60 fps", '"60 Hz"'), ("16,5 ms", '"16.5 ms"')])  # fmt: skip
def test_a_rate_that_is_none_says_what_is_meant(text: str, better: str) -> None:
    with pytest.raises(InputError, match="125 Hz") as caught:
        parse_rate(text)
    assert better in str(caught.value)


@pytest.mark.parametrize(
    "text", ["", "Hz", "0 Hz", "-5 Hz", "10001 Hz", "0.05 ms", "1001 ms", "1e9 Hz", "60 Hz 70"]
)
def test_what_is_no_rate(text: str) -> None:
    with pytest.raises(InputError):
        parse_rate(text)


def test_equal_steps_are_measured_once_and_named_together() -> None:
    down = FrameTime.WHOLE_MS_DOWN
    supported = read_rates(["60 Hz", "16 ms", "144 Hz", "61 Hz"], down, supported=True)
    watched = read_rates(["62 Hz", "500 Hz", "2 ms"], down, supported=False)
    assert merge_rates(supported, watched) == (
        (Rate("60 Hz, 16 ms, 61 Hz, 62 Hz", 0.016), Rate("144 Hz", 0.006)),
        (Rate("500 Hz, 2 ms", 0.002, supported=False),),
    )


def test_a_range_takes_each_whole_rate_and_merges_them() -> None:
    rates = read_rates({"from": "30 Hz", "to": "360 Hz"}, FrameTime.WHOLE_MS_DOWN, supported=True)
    assert len(rates) == 331
    merged, _ = merge_rates(rates)
    assert len(merged) == len({1000 // rate for rate in range(30, 361)})
    assert {"59–62 Hz", "30 Hz", "334–360 Hz"} <= {rate.name for rate in merged}
    in_ms = read_rates({"from": "4 ms", "to": "7 ms"}, FrameTime.EXACT, supported=True)
    assert [rate.step for rate in in_ms] == [0.004, 0.005, 0.006, 0.007]


@given(st.lists(st.integers(1, 1000), min_size=1, max_size=30), st.sampled_from(FrameTime))
def test_merging_loses_no_rate_and_keeps_the_order(rates: list[int], frame_time: FrameTime) -> None:
    read = [read_rate(f"{rate} Hz", frame_time) for rate in rates]
    merged, _ = merge_rates(read)
    assert [rate.step for rate in merged] == list(dict.fromkeys(rate.step for rate in read))
    named = 0
    for rate in merged:
        for part in rate.name.removesuffix(" Hz").split(", "):
            first, _, last = part.removesuffix(" Hz").partition("–")
            named += int(last or first) - int(first) + 1
    assert named == len(set(rates))


def test_names_of_runs() -> None:
    assert join_names(["59 Hz", "60 Hz"]) == "59 Hz, 60 Hz"
    assert join_names(["59 Hz", "60 Hz", "61 Hz", "16 ms", "63 Hz"]) == "59–61 Hz, 16 ms, 63 Hz"


def test_all_faults_of_a_list_come_at_once() -> None:
    with pytest.raises(Misreadings) as caught:
        read_rates(["60", "60 Hz", 7, True], FrameTime.EXACT, supported=True)
    assert [path for path, _ in caught.value.items] == [(0,), (2,), (3,)]
    with pytest.raises(Misread):
        read_rates("60 Hz", FrameTime.EXACT, supported=True)


def test_1000_over_rate_is_formed_exactly() -> None:
    for rate in range(1, 1001):
        exact = Fraction(1000, rate)
        assert parse_rate(f"{rate} Hz", FrameTime.WHOLE_MS_DOWN).step == max(1, math.floor(exact)) / 1000.0
