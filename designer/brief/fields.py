"""How single values of a brief are read: Pydantic validators in our own words, and the types made of them."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from fractions import Fraction
from typing import Annotated, Any, cast

from pydantic import PlainValidator, ValidationInfo

from designer.brief.choices import Reader
from designer.brief.keys import one_of
from designer.brief.units import Limits, Misread, Misreadings
from designer.motion.measures import MEASURES
from designer.motion.rule import FrameTime, Mode


@dataclass(frozen=True, slots=True)
class Context:
    """What validators must know beyond the value before them."""

    reader: Reader
    measure: str = ""
    """The measure whose target is read; empty elsewhere."""


def with_context(read: Callable[[Any, Context], object]) -> PlainValidator:
    """Return a validator that also sees the context."""

    def validate(value: object, info: ValidationInfo) -> object:
        return read(value, cast(Context, info.context))

    return PlainValidator(validate)


def quantity(limits: Limits) -> PlainValidator:
    """Return a validator of a number within limits, which may have a unit."""
    return with_context(lambda value, context: float(limits.read(value, context.reader.units)))


def constant(name: str) -> PlainValidator:
    """Return a validator of the value of one constant."""
    return with_context(lambda value, context: context.reader.constant(name, value))


def choice(name: str) -> PlainValidator:
    """Return a validator of what a search may do with one constant."""
    return with_context(lambda value, context: context.reader.choice(name, value))


def own_choice(name: str) -> PlainValidator:
    """Return a validator of what a search may do with a jump's own constant."""
    return with_context(lambda value, context: context.reader.own_choice(name, value))


def read_when(value: object, context: Context) -> float | None:
    """Return when a second jump comes, seconds after the launch; None for the apex."""
    if value == "apex":
        return None
    allowed = '"apex", or a time after the launch: "0.30 s", "300 ms"'
    try:
        seconds = float(context.reader.units.read(value, "time"))
    except Misread as misread:
        raise Misread(
            allowed, fix=misread.fix if misread.better else 'write "apex" or "0.30 s"', better=misread.better
        ) from None
    if seconds <= 0:
        words = f"{allowed}; above 0: a second jump comes in the air, after the take-off"
        raise Misread(words, fix='write a time after the take-off, or "apex"')
    return seconds


def read_names(value: object) -> tuple[str, ...]:
    """Return names of jumps, each once."""
    allowed = 'a list of names of jumps: ["walk", "sprint"]'
    if isinstance(value, str):
        raise Misread(allowed, better=f'["{value}"]')
    if not isinstance(value, list):
        raise Misread(allowed, fix="write the names in quotation marks, in square brackets")
    if not value:
        raise Misread(f"{allowed}; not an empty list", fix="name at least one jump")
    wrong = [
        ((i,), Misread(allowed, better=f'"{one}"')) for i, one in enumerate(value) if type(one) is not str
    ]
    if wrong:
        raise Misreadings(*wrong)
    return tuple(dict.fromkeys(name.strip() for name in value))


def word(*words: str, later: tuple[str, ...] = ()) -> PlainValidator:
    """Return a validator of one of some words."""
    return PlainValidator(lambda value: one_of(value, words, later))


def read_text(value: object) -> str:
    """Return a name or title: text of at most 200 signs on one line."""
    allowed = "text in quotation marks, at most 200 signs on one line"
    if not isinstance(value, str):
        raise Misread(allowed, better=f'"{value}"' if isinstance(value, int | Fraction) else "", fix="")
    if not value.strip():
        raise Misread(allowed + ", not empty", fix="write a name")
    if len(value) > 200 or any(not sign.isprintable() for sign in value):
        raise Misread(allowed, fix="write a shorter text on one line, without control characters")
    return value.strip()


def read_flag(value: object) -> bool:
    """Return true or false."""
    if isinstance(value, bool):
        return value
    spelled = str(value).strip().lower()
    better = {"yes": "true", "on": "true", "1": "true", "true": "true"}.get(spelled, "")
    better = better or {"no": "false", "off": "false", "0": "false", "false": "false"}.get(spelled, "")
    raise Misread(
        "true or false, without quotation marks", better=better, fix="" if better else "write one of them"
    )


def read_measured(value: object, context: Context) -> float:
    """Return an aim or a bound in the unit of the target's measure."""
    return float(Limits(MEASURES[context.measure], 0).read(value, context.reader.units))


def read_aim(value: object, context: Context) -> float:
    """Return an aim or a tolerance in the unit of the target's measure."""
    return float(Limits(MEASURES[context.measure], 0, beyond=True).read(value, context.reader.units))


def frame_time_of(context: Context) -> FrameTime:
    """Return how rates become steps in this brief."""
    return context.reader.frame_time


Text = Annotated[str, PlainValidator(read_text)]
Flag = Annotated[bool, PlainValidator(read_flag)]
Positive = Annotated[float, quantity(Limits("number", 0, beyond=True))]
NotNegative = Annotated[float, quantity(Limits("number", 0))]
Length = Annotated[float, quantity(Limits("length"))]
LengthAbove = Annotated[float, quantity(Limits("length", 0, beyond=True))]
Margin = Annotated[float, quantity(Limits("length", 0))]
ModeName = Annotated[str, word(*Mode, later=("random",))]
Within = Annotated[float, with_context(read_aim)]
Aim = Annotated[float | None, with_context(read_aim)]
Bound = Annotated[float | None, with_context(read_measured)]
Names = Annotated[tuple[str, ...], PlainValidator(read_names)]
When = Annotated[float | None, with_context(read_when)]
