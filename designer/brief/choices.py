"""What a search may do with one constant: a value, a range, a list, "free" or a link; ranges."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from difflib import get_close_matches
from fractions import Fraction

from designer.brief.model import Choice
from designer.brief.rates import split_rate, step_of
from designer.brief.units import Limits, Misread, Misreadings, Units, exact, plain
from designer.motion.rule import SEARCHABLE, FrameTime

MOST_POINTS = 100_000
"""More points than this in one range are taken for a slip of the increment."""

LIMITS: Mapping[str, Limits] = {
    "gravity": Limits("acceleration", 0, beyond=True),
    "launch_speed": Limits("speed", 0, beyond=True),
    "grain": Limits("speed", 0),
    "run_speed": Limits("speed", 0),
    "fall_factor": Limits("number", 0, beyond=True),
    "terminal_speed": Limits("speed", 0, beyond=True, none=True),
    "step_up": Limits("length", 0),
    "edge_allowance": Limits("length", 0),
    "gravity_factor": Limits("number", 0, beyond=True),
}
"""What each constant may be; the step, which is a time or a rate, is read by `Reader.step`."""

TIMES = Limits("number", 0, beyond=True)
"""What the factor of a link may be."""

FREE = SEARCHABLE
"""Constants whose bounds can be derived from the targets."""

STEP = 'a step with its unit: "8 ms" or "128 Hz" (0.1 to 1000 ms), or seconds as a number (0.008)'
_SHAPES = "{ from = …, to = …, every = … }, { among = [ … ] }"
_OR_FREE = ' or "free"'

Path = tuple[str | int, ...]


def range_points(low: Fraction, high: Fraction, every: Fraction) -> tuple[float, ...]:
    """Return the binary64 nearest to each of low + i·every up to high (DEVELOPERS.md, brief).

    high is one of them only where it is a whole number of increments away.
    """
    below = math.lcm(low.denominator, every.denominator)
    first, stride = int(low * below), int(every * below)
    count = (high - low) // every + 1
    return tuple((first + i * stride) / below for i in range(count))


@dataclass(frozen=True, slots=True)
class Link:
    """A constant that follows another jump's: { of = "walk", times = … }."""

    of: str
    """The name of the other jump."""
    times: Choice | None
    """What it is multiplied by; None where it is the same."""


@dataclass(frozen=True, slots=True)
class Reader:
    """Reads constants in the brief's own units and frame time."""

    units: Units
    frame_time: FrameTime

    def constant(self, name: str, value: object) -> float:
        """Return one constant in the brief's units (the step in seconds; infinity for no terminal speed)."""
        if name == "step":
            return self.step(value)
        limits = _limits(name)
        if limits.none and value == "none":
            return math.inf
        return float(limits.read(value, self.units))

    def step(self, value: object) -> float:
        """Return a step in seconds."""
        return step_of(*self._split_step(value), self.frame_time)

    def _split_step(self, value: object) -> tuple[Fraction, str]:
        seconds = exact(value)
        if seconds is not None and Fraction(1, 10_000) <= seconds <= Fraction(1, 10):
            return seconds * 1000, "ms"
        return split_rate(value, STEP)

    def choice(self, name: str, value: object) -> Choice:
        """Return what the search may do with a constant; Misread or Misreadings say what is wrong."""
        if value == "free" and name in FREE:
            return Choice(None, text="free")
        if isinstance(value, list):
            inside = ", ".join(_as_written(item) for item in value)
            raise Misread(self._allowed(name), better=f"{{ among = [{inside}] }}")
        if isinstance(value, str) and value[:1].isalpha() and value != "none":
            raise Misread(self._allowed(name), fix="write one of these")
        if not isinstance(value, dict):
            return Choice((self.constant(name, value),), text=_bare(value))
        if "among" in value:
            return self._among(name, value)
        if "of" in value and "from" not in value and "to" not in value:
            raise Misreadings((("of",), _NO_LINK))
        return self._range(name, value)

    def own_choice(self, name: str, value: object) -> Choice | Link:
        """Return what the search may do with a jump's own constant, or the link that it follows."""
        if isinstance(value, dict) and ("of" in value or "times" in value):
            return self._link(name, value)
        return self.choice(name, value)

    def _link(self, name: str, table: Mapping[str, object]) -> Link:
        allowed = f'a link: {{ of = "walk", times = 0.85 }}, {name} of another jump, times a factor'
        wrong: list[tuple[Path, Misread]] = [
            ((key,), Misread(allowed, fix=f"take {key} out of the link"))
            for key in table
            if key not in ("of", "times")
        ]
        of, times = table.get("of"), None
        if "of" not in table:
            wrong.append(((), Misread(f"{allowed}; of is missing", fix='add of = "…" with the jump\'s name')))
        elif not isinstance(of, str):
            wrong.append((("of",), Misread(allowed, better=f'"{of}"')))
        if "times" in table:
            try:
                times = self.choice("times", table["times"])
            except Misread as misread:
                wrong.append((("times",), misread))
            except Misreadings as several:
                wrong += [(("times", *path), misread) for path, misread in several.items]
        if wrong or not isinstance(of, str):
            raise Misreadings(*wrong)
        return Link(of.strip(), times)

    def _allowed(self, name: str) -> str:
        limits = STEP if name == "step" else _limits(name).describe(self.units)
        return f"{limits}; or {_SHAPES}{_OR_FREE if name in FREE else ''}"

    def _among(self, name: str, table: Mapping[str, object]) -> Choice:
        wrong = _unknown(table, ("among",), self._allowed(name))
        items = table["among"]
        if not isinstance(items, list):
            raise Misreadings(
                *wrong, (("among",), Misread("a list in square brackets", better=f"[{_as_written(items)}]"))
            )
        if not items:
            wrong.append((("among",), Misread("a list of at least one value", fix="name the values to try")))
        points: set[float] = set()
        for index, item in enumerate(items):
            try:
                points.add(self.constant(name, item))
            except Misread as misread:
                wrong.append((("among", index), misread))
        if wrong:
            raise Misreadings(*wrong)
        words = list(dict.fromkeys(_bare(item) for item in items))
        text = words[0] if len(words) == 1 else ", ".join(words[:-1]) + " or " + words[-1]
        return Choice(tuple(sorted(points)), text=text)

    def _range(self, name: str, table: Mapping[str, object]) -> Choice:
        wrong = _unknown(table, ("from", "to", "every"), self._allowed(name))
        ends: dict[str, tuple[Fraction, str]] = {}
        for key in ("from", "to", "every"):
            if key in table:
                try:
                    ends[key] = self._end(name, key, table[key])
                except Misread as misread:
                    wrong.append(((key,), misread))
            elif key != "every":
                wrong.append(((), Misread(f"{self._allowed(name)}; {key} is missing", fix=f"add {key} = …")))
        if wrong:
            raise Misreadings(*wrong)
        (low, unit), (high, other) = ends["from"], ends["to"]
        every, third = ends.get("every", (None, unit))
        if {unit, other, third} != {unit}:
            raise Misread("a range with its ends and its increment in one unit", fix=f"write all in {unit}")
        if low > high:
            turned = dict(table) | {"from": table["to"], "to": table["from"]}
            inside = ", ".join(f"{key} = {_as_written(item)}" for key, item in turned.items())
            raise Misread("a range whose from is not above its to", better=f"{{ {inside} }}")
        text = f"{_bare(table['from'])} to {_bare(table['to'])}"
        if every is None:
            return self._without_increments(low, high, unit, text)
        points = self._points(low, high, every, unit)
        return Choice(points, text=f"{text} by {_bare(table['every'])}")

    def _end(self, name: str, key: str, value: object) -> tuple[Fraction, str]:
        """Return an end or the increment of a range: the number and, for a step, its unit."""
        if key == "every":
            return self._increment(name, value)
        if name == "step":
            return self._split_step(value)
        limits = _limits(name)
        if limits.none and value == "none":
            raise Misread(
                f'{limits.describe(self.units)}; "none" is no end of a range', fix="use { among = [ … ] }"
            )
        return limits.read(value, self.units), ""

    def _increment(self, name: str, value: object) -> tuple[Fraction, str]:
        kind = "number" if name == "step" else _limits(name).kind
        words = "an increment above 0" + ('; "0.5 ms", "1 Hz"' if name == "step" else "")
        if isinstance(value, str) and name == "step":
            figures, _, unit = value.strip().partition(" ")
            number = exact(_decimal(figures))
            if number is None or unit not in ("ms", "Hz") or number <= 0:
                raise Misread(words, fix='write it in the unit of the ends, as in "1 ms"')
            return number, unit
        number = self.units.read(value, kind)
        if number <= 0:
            raise Misread(words, fix="write how far apart the points lie, or leave every out: no increments")
        return (number * 1000, "ms") if name == "step" else (number, "")

    def _points(self, low: Fraction, high: Fraction, every: Fraction, unit: str) -> tuple[float, ...]:
        count = (high - low) // every + 1
        if count > MOST_POINTS:
            coarse = plain((high - low) / MOST_POINTS * 10)
            raise Misread(
                f"a range of at most {MOST_POINTS} points; this one has {count}",
                fix=f"a larger increment, say every = {coarse}, or leave every out: no increments",
            )
        if not unit:
            return range_points(low, high, every)
        steps = {step_of(low + i * every, unit, self.frame_time) for i in range(count)}
        return tuple(sorted(steps))

    def _without_increments(self, low: Fraction, high: Fraction, unit: str, text: str) -> Choice:
        """Return everything between two ends; a step in Hz turns the ends round."""
        ends = sorted(step_of(n, unit, self.frame_time) if unit else float(n) for n in (low, high))
        if ends[0] == ends[1]:
            return Choice((ends[0],), text=text)
        return Choice(None, ends[0], ends[1], text)


_NO_LINK = Misread(
    "a link to another jump only in the search of a jump, [jumps.NAME]",
    fix='write a value, a range, a list or "free"',
)


def _limits(name: str) -> Limits:
    return TIMES if name == "times" else LIMITS[name]


def _unknown(table: Mapping[str, object], known: tuple[str, ...], allowed: str) -> list[tuple[Path, Misread]]:
    wrong: list[tuple[Path, Misread]] = []
    for key in table:
        if key in ("of", "times"):
            wrong.append(((key,), _NO_LINK))
        elif key not in known:
            close = get_close_matches(key.lower(), known, 1)
            fix = f"{close[0]} is probably meant" if close else f"take {key} out"
            wrong.append(((key,), Misread(allowed, fix=fix)))
    return wrong


def _decimal(figures: str) -> object:
    try:
        return int(figures) if figures.isdigit() else float(figures)
    except ValueError:
        return None


def _bare(value: object) -> str:
    """Return a value as written, without quotation marks."""
    return value if isinstance(value, str) else str(value)


def _as_written(value: object) -> str:
    return f'"{value}"' if isinstance(value, str) else str(value)
