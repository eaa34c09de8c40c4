"""Quantities as people write them: 120, "1.75 tile", "5 tile/s", "760 ms"; exact until they become floats."""

from __future__ import annotations

import math
import re
from collections.abc import Mapping
from dataclasses import dataclass, field
from decimal import Decimal
from difflib import get_close_matches
from fractions import Fraction

from designer.motion.jumps import LONGEST_FLIGHT

LARGEST = 10**12
"""No length, speed or time in a brief is larger, nor (unless it is 0) smaller than one over this."""

_NUMBER = re.compile(r"([+-]?\d+(?:_\d+)*(?:\.\d+)?(?:[eE][+-]?\d+)?)\s*(.*)", re.DOTALL)
_PER = {"length": "", "speed": "/s", "acceleration": "/s^2"}
_EXAMPLE = {"length": "1.75", "speed": "5", "acceleration": "20"}
_MILLIMETRES = {"mm": 1, "cm": 10, "dm": 100, "m": 1000, "km": 1_000_000}
_KIND_WORDS = {
    "length": "a length",
    "speed": "a speed",
    "acceleration": "an acceleration",
    "time": "a time",
    "count": "a count",
    "number": "a number",
}


class Misread(ValueError):  # noqa: N818 (what the value is)
    """One value that cannot be used: what is allowed there, and a way out."""

    def __init__(self, allowed: str, *, fix: str = "", better: str = "") -> None:
        super().__init__(allowed)
        self.allowed = allowed
        self.fix = fix
        """What to do, in words; where empty, the key with `better` after it is the corrected line."""
        self.better = better


class Misreadings(ValueError):  # noqa: N818
    """Several values inside one, each with the path from there to it."""

    def __init__(self, *items: tuple[tuple[str | int, ...], Misread]) -> None:
        super().__init__("; ".join(str(misread) for _, misread in items))
        self.items = items


def exact(value: object) -> Fraction | None:
    """Return a TOML number as an exact fraction; None where it is none, not finite or out of all bounds."""
    if isinstance(value, bool) or not isinstance(value, int | float | Decimal):
        return None
    if isinstance(value, float):
        if not math.isfinite(value):
            return None
    elif isinstance(value, Decimal) and (
        not value.is_finite() or (value != 0 and abs(value.adjusted()) > 12)
    ):
        return None
    number = Fraction(value)
    if number != 0 and not Fraction(1, LARGEST) <= abs(number) <= LARGEST:
        return None
    return number


def plain(number: Fraction | float) -> str:
    """Return a number as a person would write it: 120, 0.76, 1600."""
    value = float(number)
    return str(int(value)) if value == int(value) and abs(value) < 1e15 else f"{value:.12g}"


@dataclass(frozen=True, slots=True)
class Units:
    """What [units] says; enough to read any length, speed, acceleration or time of the brief."""

    length: str = "unit"
    """The name of the length unit; a label, nothing is converted by it."""
    named: Mapping[str, Fraction] = field(default_factory=dict)
    """Named lengths in that unit: tile → 64."""

    def unit_of(self, kind: str) -> str:
        """Return the unit that a plain number of this kind is in; empty for counts and factors."""
        if kind == "time":
            return "s"
        return self.length + _PER[kind].replace("^2", "²") if kind in _PER else ""

    def describe(self, kind: str) -> str:
        """Say what may stand where a quantity of this kind is wanted."""
        words = _KIND_WORDS[kind]
        if kind == "time":
            return words + ' in seconds (0.76) or as text with its unit ("760 ms")'
        if kind not in _PER:
            return words if kind == "number" else words + ", a plain number"
        names = " or ".join(f'"{_EXAMPLE[kind]} {name}{_PER[kind]}"' for name in list(self.named)[:2])
        return f"{words} in {self.unit_of(kind)}, as a number" + (
            f" or as text like {names}" if names else ""
        )

    def read(self, value: object, kind: str) -> Fraction:
        """Return a quantity in the brief's length unit and seconds, exactly; Misread says what is wrong."""
        if isinstance(value, str):
            return self._read_text(value, kind)
        number = exact(value)
        if number is not None:
            return self._flown(number, kind)
        allowed = self.describe(kind)
        if isinstance(value, bool):
            raise Misread(allowed, fix="write a number here, not true or false")
        if isinstance(value, int | float | Decimal):
            raise Misread(
                f"{allowed}; finite, and between 1e-12 and 1e12 in size (or 0)",
                fix="write an ordinary number; inf, nan and numbers of astronomical size have no use here",
            )
        raise Misread(allowed, fix="write one number here, not a list, a table or a date")

    def _read_text(self, text: str, kind: str) -> Fraction:
        allowed = self.describe(kind)
        match = _NUMBER.fullmatch(text.strip())
        if match is None:
            raise Misread(allowed, fix="write the number itself")
        figures, unit = match[1], match[2].strip()
        if unit.startswith(","):
            raise Misread(
                f"{allowed}; decimals are written with a point",
                better='"' + text.strip().replace(",", ".", 1) + '"',
            )
        number = exact(Decimal(figures))
        if number is None:
            raise Misread(f"{allowed}; between 1e-12 and 1e12 in size (or 0)", fix="write an ordinary number")
        if not unit:
            better = f'"{figures} ms"' if kind == "time" and number > LONGEST_FLIGHT else figures
            raise Misread(f"{allowed}; a number without a unit stands without quotation marks", better=better)
        return self._flown(number * self._factor(unit, kind, figures, allowed), kind)

    def _flown(self, number: Fraction, kind: str) -> Fraction:
        """Return the number; a time in which no jump is followed any more is a slip of its unit."""
        if kind == "time" and number > LONGEST_FLIGHT:
            words = f"{self.describe(kind)}, at most {LONGEST_FLIGHT:g} s: no jump is followed for longer"
            raise Misread(words, better=f'"{plain(number)} ms"')
        return number

    def _factor(self, unit: str, kind: str, figures: str, allowed: str) -> Fraction:
        """Return what one `unit` is in the brief's own unit."""
        known = self._known(kind)
        spelled = re.sub(r"\s+", "", unit).replace("²", "^2").replace("/s/s", "/s^2").replace("^-", "")
        if spelled in known:
            return known[spelled]
        if not known:
            raise Misread(f"{allowed}; it has no unit", better=figures)
        if spelled + _PER.get(kind, "") in known:
            raise Misread(
                f"{allowed}; the unit is {self.unit_of(kind)}", better=f'"{figures} {spelled}{_PER[kind]}"'
            )
        names = ", ".join(name.replace("^2", "²") for name in known)
        words = f"{allowed}; units known here: {names}"
        converted = self._converted(spelled, kind, figures)
        if converted is not None:
            raise Misread(f"{words}; {figures} {unit} is {converted} {self.unit_of(kind)}", better=converted)
        base, _, per = spelled.partition("/")
        close = get_close_matches(spelled, known, 1)
        if close and len(base) > 2 and base not in _MILLIMETRES:
            raise Misread(words, better=f'"{figures} {close[0]}"')
        if kind in _PER and base.isidentifier() and f"/{per}".rstrip("/") == _PER[kind]:
            ways = f"write the number in {self.unit_of(kind)}, or say in [units] how long one is"
            raise Misread(words, fix=f"{ways}: {base} = …")
        raise Misread(words, fix="write the number in one of these units")

    def _converted(self, spelled: str, kind: str, figures: str) -> str | None:
        """Return the number in the brief's own unit, where both units are metric; None where they are not."""
        base, _, per = spelled.partition("/")
        seconds = {"": 1, "s": 1, "s^2": 1, "h": 3600, "min": 60}
        ends = {"length": ("",), "speed": ("s", "min", "h"), "acceleration": ("s^2",)}.get(kind, ())
        if base not in _MILLIMETRES or self.length not in _MILLIMETRES or per not in ends:
            return None
        size = Fraction(_MILLIMETRES[base]) / Fraction(_MILLIMETRES[self.length]) / seconds[per]
        return plain(Fraction(Decimal(figures)) * size)

    def _known(self, kind: str) -> dict[str, Fraction]:
        """Return the units that may follow a number of this kind, as people type them."""
        if kind == "time":
            return {"s": Fraction(1), "ms": Fraction(1, 1000)}
        if kind not in _PER:
            return {}
        lengths = {self.length.replace(" ", ""): Fraction(1), **self.named}
        return {name + _PER[kind]: factor for name, factor in lengths.items()}


@dataclass(frozen=True, slots=True)
class Limits:
    """What kind of quantity a key wants, and its lower bound."""

    kind: str
    low: int | None = None
    beyond: bool = False
    """Whether the bound itself is excluded."""
    none: bool = False
    """Whether "none" may stand there, for no limit."""

    def describe(self, units: Units) -> str:
        """Say what may stand there, with its bound and unit."""
        bound = (
            "" if self.low is None else (f", above {self.low}" if self.beyond else f", {self.low} or more")
        )
        return units.describe(self.kind) + bound + (', or "none"' if self.none else "")

    def read(self, value: object, units: Units) -> Fraction:
        """Return the quantity, exactly; Misread where it is none or beyond the bound."""
        try:
            number = units.read(value, self.kind)
        except Misread as misread:
            raise Misread(
                misread.allowed.replace(units.describe(self.kind), self.describe(units)),
                fix=misread.fix,
                better=misread.better,
            ) from None
        if self.low is not None and (number < self.low or (self.beyond and number == self.low)):
            raise Misread(self.describe(units), **self._way_out(number))
        return number

    def _way_out(self, number: Fraction) -> dict[str, str]:
        if number < 0:
            return {"fix": f"drop the minus sign: {plain(-number)}" if number != 0 else ""}
        return {"fix": "write a number above 0"}
