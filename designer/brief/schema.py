"""The tables of a brief as Pydantic models, and what Pydantic finds wrong in our own words."""

from __future__ import annotations

import re
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from difflib import get_close_matches
from fractions import Fraction
from typing import Annotated, Any, cast

from pydantic import BaseModel, ConfigDict, PlainValidator, ValidationError, ValidationInfo, create_model

from designer.brief.choices import LIMITS, Reader
from designer.brief.keys import LISTS, NOT_YET, as_target, one_of, unknown_key
from designer.brief.model import Choice, Loop, Rate
from designer.brief.rates import read_rate, read_rates
from designer.brief.units import Limits, Misread, Misreadings, Units, exact
from designer.motion.measures import MEASURES
from designer.motion.rule import SEARCHABLE, FrameTime, Integrator, LandingTest, Mode, Place

Path = tuple[str | int, ...]


@dataclass(frozen=True, slots=True)
class Context:
    """What validators must know beyond the value before them."""

    reader: Reader
    measure: str = ""
    """The measure whose target is read; empty elsewhere."""


def _with_context(read: Callable[[Any, Context], object]) -> PlainValidator:
    def validate(value: object, info: ValidationInfo) -> object:
        return read(value, cast(Context, info.context))

    return PlainValidator(validate)


def _quantity(limits: Limits) -> PlainValidator:
    return _with_context(lambda value, context: float(limits.read(value, context.reader.units)))


def _constant(name: str) -> PlainValidator:
    return _with_context(lambda value, context: context.reader.constant(name, value))


def _choice(name: str) -> PlainValidator:
    return _with_context(lambda value, context: context.reader.choice(name, value))


def _word(*words: str, later: tuple[str, ...] = ()) -> PlainValidator:
    return PlainValidator(lambda value: one_of(value, words, later))


def _text(value: object) -> str:
    """Return a name or title: text of at most 200 signs on one line."""
    allowed = "text in quotation marks, at most 200 signs on one line"
    if not isinstance(value, str):
        raise Misread(allowed, better=f'"{value}"' if isinstance(value, int | Fraction) else "", fix="")
    if not value.strip():
        raise Misread(allowed + ", not empty", fix="write a name")
    if len(value) > 200 or any(not sign.isprintable() for sign in value):
        raise Misread(allowed, fix="write a shorter text on one line, without control characters")
    return value.strip()


def _flag(value: object) -> bool:
    """Return true or false."""
    if isinstance(value, bool):
        return value
    spelled = str(value).strip().lower()
    better = {"yes": "true", "on": "true", "1": "true", "true": "true"}.get(spelled, "")
    better = better or {"no": "false", "off": "false", "0": "false", "false": "false"}.get(spelled, "")
    raise Misread(
        "true or false, without quotation marks", better=better, fix="" if better else "write one of them"
    )


def _measured(value: object, context: Context) -> float:
    """Return an aim or a bound in the unit of the target's measure."""
    return float(Limits(MEASURES[context.measure], 0).read(value, context.reader.units))


def _aim(value: object, context: Context) -> float:
    return float(Limits(MEASURES[context.measure], 0, beyond=True).read(value, context.reader.units))


def _frame_time(context: Context) -> FrameTime:
    return context.reader.frame_time


Text = Annotated[str, PlainValidator(_text)]
Flag = Annotated[bool, PlainValidator(_flag)]
Positive = Annotated[float, _quantity(Limits("number", 0, beyond=True))]
NotNegative = Annotated[float, _quantity(Limits("number", 0))]
Length = Annotated[float, _quantity(Limits("length"))]
LengthAbove = Annotated[float, _quantity(Limits("length", 0, beyond=True))]
Margin = Annotated[float, _quantity(Limits("length", 0))]
ModeName = Annotated[str, _word(*Mode, later=("random",))]
Within = Annotated[float, _with_context(_aim)]
Bound = Annotated[float | None, _with_context(_measured)]


class Table(BaseModel):
    """What all tables share: no key that they do not know, nothing converted silently."""

    model_config = ConfigDict(extra="forbid", frozen=True, strict=True)


class LoopTable(Table):
    """[loop]."""

    steps: Annotated[str, _word(*Loop)]
    aim_at: Annotated[Rate | None, _with_context(lambda v, c: read_rate(v, _frame_time(c)))] = None


class RoundingTable(Table):
    """rounding = { … } of [rule]."""

    mode: ModeName = Mode.NEAREST_EVEN.value
    at: Annotated[str, _word(*Place)] = Place.END.value
    carry: Flag = False


class PositionTable(Table):
    """position = { … } of [rule]."""

    grain: Margin = 0.0
    mode: ModeName = Mode.NEAREST_EVEN.value


class RuleTable(Table):
    """[rule]."""

    integrator: Annotated[str, _word(*Integrator, later=("half-kick", "constant-acceleration"))]
    rounding: RoundingTable = RoundingTable()
    frame_time: Annotated[str, _word(*FrameTime)] = FrameTime.EXACT.value
    landing_test: Annotated[str, _word(*LandingTest)] = LandingTest.SWEPT.value
    launch_gravity: Flag = True
    contact_tolerance: Margin | None = None
    position: PositionTable = PositionTable()


class TargetTable(Table):
    """One target of [targets]."""

    aim: Annotated[float | None, _with_context(_aim)] = None
    at_least: Bound = None
    at_most: Bound = None
    within: Within
    weight: Positive = 1.0


class RatesTable(Table):
    """[rates]."""

    supported: Annotated[
        tuple[Rate, ...], _with_context(lambda v, c: read_rates(v, _frame_time(c), supported=True))
    ] = ()
    watched: Annotated[
        tuple[Rate, ...], _with_context(lambda v, c: read_rates(v, _frame_time(c), supported=False))
    ] = ()
    spread_weight: NotNegative = 1.0


class LedgeTable(Table):
    """One of [[ledges]]."""

    name: Text
    height: LengthAbove
    must: Annotated[str, _word("reach", "stay-out")]
    margin: Margin = 0.0


class GapTable(Table):
    """One of [[gaps]]."""

    name: Text
    width: LengthAbove
    must: Annotated[str, _word("cross", "stay-out")]
    far_level: Length = 0.0
    margin: Margin = 0.0


_CONSTANTS: dict[str, Any] = {
    name: (Annotated[float | None, _constant(name)], None) for name in ("step", *LIMITS)
}
_CHOICES: dict[str, Any] = {name: (Annotated[Choice | None, _choice(name)], None) for name in SEARCHABLE} | {
    name: _CONSTANTS[name] for name in ("step_up", "edge_allowance")
}
TodayTable = create_model("TodayTable", __base__=Table, **_CONSTANTS)
SetTable = create_model("SetTable", __base__=Table, name=(Text, ...), **_CONSTANTS)
SearchTable = create_model("SearchTable", __base__=Table, **_CHOICES)

MODELS: Mapping[str, type[Table]] = {
    "loop": LoopTable,
    "rule": RuleTable,
    "today": TodayTable,
    "search": SearchTable,
    "rates": RatesTable,
    "ledges": LedgeTable,
    "gaps": GapTable,
    "sets": SetTable,
}

REQUIRED = {
    ("loop", "steps"): ('how the game steps: "each-frame" or "fixed"', 'add steps = "each-frame" or "fixed"'),
    ("rule", "integrator"): (
        'the order of the update: "explicit", "semi-implicit" or "average"',
        'add integrator = "semi-implicit" (velocity first, then position), or what the build does',
    ),
    ("targets", "within"): ("a tolerance above 0 in the measure's own unit", "add within = …"),
    ("ledges", "must"): ('"reach" or "stay-out"', 'add must = "reach" or must = "stay-out"'),
    ("gaps", "must"): ('"cross" or "stay-out"', 'add must = "cross" or must = "stay-out"'),
    ("ledges", "height"): ("a length above 0", "add height = …"),
    ("gaps", "width"): ("a length above 0", "add width = …"),
}
"""What to say where a key is missing that has no default."""


def check_table(
    section: str, raw: object, at: Path, context: Context
) -> tuple[Any | None, list[tuple[Path, Misread]]]:
    """Return a table's model (None where something is wrong in it) and what is wrong, with paths."""
    if not isinstance(raw, dict):
        return None, [(at, wrong_shape(section, raw))]
    try:
        return (TargetTable if section == "targets" else MODELS[section]).model_validate(
            raw, context=context
        ), []
    except ValidationError as error:
        return None, _unwrap(section, error, at)


def wrong_shape(section: str, raw: object) -> Misread:
    """Return what to say where a table is wanted and something else stands."""
    if section == "targets":
        allowed = "a table { aim = …, within = … } or { at_least = …, at_most = …, within = … }"
        return Misread(allowed, better=as_target(raw))
    if section in LISTS:
        allowed = f"one or more tables, each under its own header [[{section}]] in double square brackets"
        names = [key for key, item in raw.items() if isinstance(item, dict)] if isinstance(raw, dict) else []
        below = f', and below it name = "{names[0]}"' if names else ""
        return Misread(
            allowed, fix=f"write [[{section}]] instead of [{section}{'.' + names[0] if names else ''}]{below}"
        )
    single = "; in single square brackets" if isinstance(raw, list) else ""
    allowed = f"a table: [{section}] alone on a line, its keys below it{single}"
    return Misread(allowed, fix=f"write [{section}]")


def _unwrap(section: str, error: ValidationError, at: Path) -> list[tuple[Path, Misread]]:
    """Return Pydantic's findings as ours."""
    found: list[tuple[Path, Misread]] = []
    for item in error.errors(include_url=False):
        path = at + item["loc"]
        inside = item["loc"][:-1]
        cause = item.get("ctx", {}).get("error")
        key = str(item["loc"][-1]) if item["loc"] else ""
        if isinstance(cause, Misread):
            found.append((path, cause))
        elif isinstance(cause, Misreadings):
            found += [(path + below, misread) for below, misread in cause.items]
        elif item["type"] == "extra_forbidden":
            where = f"{section}.{inside[0]}" if inside else ("targets.*" if section == "targets" else section)
            found.append((path, unknown_key(where, key)))
        elif item["type"] == "missing":
            allowed, fix = REQUIRED.get((section, key), ("", f"add {key} = …"))
            found.append((path, Misread(allowed or f"{key}, which has no default", fix=fix)))
        else:
            found.append((path, _not_a_table(key, item["input"])))
    return found


def _not_a_table(key: str, value: object) -> Misread:
    example = {
        "rounding": '{ mode = "nearest-even", at = "end" }',
        "position": '{ grain = 0, mode = "nearest-even" }',
    }[key]
    if key == "rounding" and isinstance(value, str) and value in tuple(Mode):
        return Misread(f"a table, as in {example}", better=f'{{ mode = "{value}" }}')
    if key == "position" and exact(value) is not None:
        return Misread(f"a table, as in {example}", better=f"{{ grain = {value} }}")
    return Misread(f"a table, as in {example}", better=example)


def read_units(raw: object) -> tuple[Units, list[tuple[Path, Misread]]]:
    """Return what [units] says, as far as it can be read, and what is wrong in it, with paths."""
    if raw is None:
        return Units(), []
    if not isinstance(raw, dict):
        return Units(), [(("units",), wrong_shape("units", raw))]
    wrong: list[tuple[Path, Misread]] = []
    length, named = "unit", {}
    for key, value in raw.items():
        try:
            if key == "length":
                length = _text(value)
            elif key == "time":
                _time_unit(value)
            else:
                named[key] = _named_length(key, value)
        except Misread as misread:
            wrong.append((("units", key), misread))
    if length in named:
        allowed = f"a name for a length other than {length}, which is the unit itself"
        wrong.append((("units", length), Misread(allowed, fix=f"take the line with {length} out")))
    return Units(length, named), wrong


def _time_unit(value: object) -> None:
    if value == "step":
        raise Misread(f'"s"; constants per step ("step") are {NOT_YET}', better='"s"')
    if value != "s":
        raise Misread('"s": times are in seconds', better='"s"')


def _named_length(key: str, value: object) -> Fraction:
    belongs = unknown_key("units", key)
    if " belongs " in belongs.fix:
        raise Misread("in [units]: length, time and names of lengths", fix=belongs.fix)
    allowed = "a named length: a number above 0 in the length unit, as in tile = 64"
    if re.fullmatch(r"[^\W\d][\w-]*", key) is None or key in ("s", "ms", "Hz", "none"):
        raise Misread(f"{allowed}; its name is a word that is no unit of time", fix="choose another name")
    number = exact(value)
    if isinstance(value, str) and get_close_matches(key.lower(), ["length"]):
        raise Misread(allowed, fix=f'length is probably meant: length = "{value}"')
    if number is None or number <= 0:
        raise Misread(allowed, fix=f"write a number, as in {key} = 64")
    return number
