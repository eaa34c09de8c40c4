"""Rates and steps as people write them, what they become in the build, and which of them are the same."""

from __future__ import annotations

import math
import re
from collections.abc import Iterable, Sequence
from decimal import Decimal
from fractions import Fraction

from designer.brief.model import Rate
from designer.brief.units import Misread, Misreadings, exact, plain
from designer.errors import Fault, InputError
from designer.motion.rule import FrameTime

FASTEST, SLOWEST = 10_000, 1
"""The rates that a brief may name, Hz; steps lie between 0.1 and 1000 ms."""

ALLOWED = 'a rate with its unit: "125 Hz" or "8 ms", from 1 to 10000 Hz (0.1 to 1000 ms)'
_RATE = re.compile(r"([+-]?\d+(?:\.\d+)?)\s*([A-Za-z]*)")
_SPELLINGS = {"hz": "Hz", "fps": "Hz", "ms": "ms", "msec": "ms", "millis": "ms", "msecs": "ms"}


def split_rate(value: object, allowed: str = ALLOWED) -> tuple[Fraction, str]:
    """Return the number and the unit, "Hz" or "ms", of what a person wrote; Misread says what is wrong."""
    number = exact(value)
    if number is not None:
        guess = "Hz" if number >= 20 else "ms"
        raise Misread(allowed, better=f'"{plain(number)} {guess}"')
    if not isinstance(value, str):
        raise Misread(allowed, fix='write text in quotation marks, as in "60 Hz"')
    match = _RATE.fullmatch(value.strip())
    if match is None:
        comma = re.fullmatch(r"(\d+),(\d+)\s*(Hz|ms)", value.strip())
        if comma:
            raise Misread(f"{allowed}; decimals have a point", better=f'"{comma[1]}.{comma[2]} {comma[3]}"')
        raise Misread(allowed, fix='write a number and Hz or ms, as in "60 Hz"')
    figures, unit = match[1], match[2]
    number = Fraction(Decimal(figures))
    if unit == "s":
        number, unit = number * 1000, "ms"
    if unit not in ("Hz", "ms"):
        right = _SPELLINGS.get(unit.lower(), "Hz" if number >= 20 else "ms")
        raise Misread(allowed, better=f'"{figures} {right}"')
    in_hz = number if unit == "Hz" or number <= 0 else 1000 / number
    if not SLOWEST <= in_hz <= FASTEST:
        raise Misread(allowed, fix="write a rate between 1 and 10000 Hz, or a step between 0.1 and 1000 ms")
    return number, unit


def step_of(number: Fraction, unit: str, frame_time: FrameTime) -> float:
    """Return the step in seconds that a rate in Hz or a step in ms becomes (DEVELOPERS.md, update rule).

    1000/rate is formed exactly, so that 1000/125 is never a hair under 8.
    """
    if unit == "ms":
        return float(number) / 1000.0
    if frame_time is FrameTime.EXACT:
        return 1.0 / float(number)
    half = Fraction(1, 2) if frame_time is FrameTime.WHOLE_MS_NEAREST else 0
    return max(1, math.floor(1000 / number + half)) / 1000.0


def rate_name(number: Fraction, unit: str) -> str:
    """Return "60 Hz" or "16.5 ms"."""
    return f"{plain(number)} {unit}"


def read_rate(value: object, frame_time: FrameTime, *, supported: bool = True) -> Rate:
    """Return one rate; Misread says what is wrong with it."""
    number, unit = split_rate(value)
    return Rate(rate_name(number, unit), step_of(number, unit, frame_time), supported)


def parse_rate(text: str, frame_time: FrameTime = FrameTime.EXACT) -> Rate:
    """Return the rate that "125 Hz" or "8 ms" means under this frame_time; InputError if none."""
    try:
        return read_rate(text, FrameTime(frame_time))
    except Misread as misread:
        fix = misread.fix or f"write {misread.better}"
        raise InputError(Fault("rate", "", repr(text), misread.allowed, fix)) from None


def read_rates(value: object, frame_time: FrameTime, *, supported: bool) -> tuple[Rate, ...]:
    """Return the rates of a list or of a range { from, to }, one each, not yet merged."""
    if isinstance(value, dict):
        return _read_range(value, frame_time, supported)
    allowed = 'a list, ["60 Hz", "120 Hz"], or a range, { from = "30 Hz", to = "360 Hz" }'
    if isinstance(value, str):
        raise Misread(allowed, better=f'["{value}"]')
    if not isinstance(value, list):
        number = exact(value)
        better = f'["{plain(number)} {"Hz" if number >= 20 else "ms"}"]' if number else ""
        raise Misread(
            allowed, better=better, fix="" if better else "write a list of rates in square brackets"
        )
    if not value:
        raise Misread(f"{allowed}; not an empty list", fix="name at least one rate, or leave the key out")
    rates: list[Rate] = []
    wrong: list[tuple[tuple[str | int, ...], Misread]] = []
    for index, item in enumerate(value):
        try:
            rates.append(read_rate(item, frame_time, supported=supported))
        except Misread as misread:
            wrong.append(((index,), misread))
    if wrong:
        raise Misreadings(*wrong)
    return tuple(rates)


def _read_range(table: dict[str, object], frame_time: FrameTime, supported: bool) -> tuple[Rate, ...]:
    allowed = 'a range of rates { from = "30 Hz", to = "360 Hz" }: each whole Hz (or ms) between counts'
    wrong: list[tuple[tuple[str | int, ...], Misread]] = []
    ends: dict[str, tuple[Fraction, str]] = {}
    for key in table:
        if key not in ("from", "to"):
            words = "; there is no increment" if key == "every" else ""
            wrong.append(((key,), Misread(allowed + words, fix=f"take {key} out of the range")))
    for key in ("from", "to"):
        if key not in table:
            wrong.append(((), Misread(f"{allowed}; {key} is missing", fix=f"add {key}")))
            continue
        try:
            ends[key] = split_rate(table[key])
            if ends[key][0].denominator != 1:
                wrong.append(((key,), Misread(f"{allowed}; both ends are whole", fix="write a whole number")))
        except Misread as misread:
            wrong.append(((key,), misread))
    if wrong:
        raise Misreadings(*wrong)
    (low, unit), (high, other) = ends["from"], ends["to"]
    if unit != other:
        raise Misread(
            f"{allowed}; both ends in one unit", fix=f"write both ends in {unit}, or both in {other}"
        )
    if low > high:
        swapped = f'{{ from = "{rate_name(high, unit)}", to = "{rate_name(low, unit)}" }}'
        raise Misread(f"{allowed}; from is not above to", better=swapped)
    numbers = (Fraction(n) for n in range(int(low), int(high) + 1))
    return tuple(Rate(rate_name(n, unit), step_of(n, unit, frame_time), supported) for n in numbers)


def merge_rates(
    supported: Iterable[Rate], watched: Iterable[Rate] = ()
) -> tuple[tuple[Rate, ...], tuple[Rate, ...]]:
    """Return supported and watched rates with equal steps joined, in the order of their first mention.

    A watched rate that comes to a supported step is joined to that one: it is scored anyway.
    """
    groups: dict[float, list[Rate]] = {}
    for rate in (*supported, *watched):
        groups.setdefault(rate.step, []).append(rate)
    merged = [
        Rate(join_names([rate.name for rate in group]), step, any(rate.supported for rate in group))
        for step, group in groups.items()
    ]
    return tuple(r for r in merged if r.supported), tuple(r for r in merged if not r.supported)


def join_names(names: Sequence[str]) -> str:
    """Return several rates' names as one: "60 Hz, 16 ms"; three or more in a row as "59–62 Hz"."""
    runs: list[tuple[Fraction, Fraction, str]] = []
    for name in dict.fromkeys(names):
        number, unit = Fraction(Decimal(name.split()[0])), name.split()[1]
        if runs and runs[-1][2] == unit and number == runs[-1][1] + 1:
            runs[-1] = (runs[-1][0], number, unit)
        else:
            runs.append((number, number, unit))
    parts: list[str] = []
    for first, last, unit in runs:
        if last - first >= 2:
            parts.append(f"{plain(first)}–{plain(last)} {unit}")
        else:
            parts += [rate_name(Fraction(n), unit) for n in dict.fromkeys((first, last))]
    return ", ".join(parts)


def step_of_hz(hz: int, frame_time: FrameTime) -> float:
    """Return the step in seconds that a whole rate in Hz becomes."""
    return step_of(Fraction(hz), "Hz", frame_time)
