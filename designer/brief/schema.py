"""The tables of a brief as Pydantic models, and what Pydantic finds wrong in our own words."""

from __future__ import annotations

import re
from collections.abc import Mapping
from difflib import get_close_matches
from fractions import Fraction
from typing import Annotated, Any

from pydantic import BaseModel, ConfigDict, ValidationError, create_model

from designer.brief.choices import LIMITS, Link
from designer.brief.fields import (
    Aim,
    Bound,
    Context,
    Flag,
    Length,
    LengthAbove,
    Margin,
    ModeName,
    Names,
    NotNegative,
    Positive,
    Text,
    When,
    Within,
    choice,
    constant,
    frame_time_of,
    own_choice,
    read_text,
    with_context,
    word,
)
from designer.brief.keys import JUMP_CONSTANTS, LISTS, NOT_YET, as_target, home, owners, unknown_key
from designer.brief.model import Choice, Loop, Rate
from designer.brief.rates import read_rate, read_rates
from designer.brief.units import Misread, Misreadings, Units, exact
from designer.motion.rule import OWN, SEARCHABLE, FrameTime, How, Integrator, LandingTest, Mode, Place

Path = tuple[str | int, ...]


class Table(BaseModel):
    """What all tables share: no key that they do not know, nothing converted silently."""

    model_config = ConfigDict(extra="forbid", frozen=True, strict=True)


class LoopTable(Table):
    """[loop]."""

    steps: Annotated[str, word(*Loop)]
    aim_at: Annotated[Rate | None, with_context(lambda v, c: read_rate(v, frame_time_of(c)))] = None


class RoundingTable(Table):
    """rounding = { … } of [rule]."""

    mode: ModeName = Mode.NEAREST_EVEN.value
    at: Annotated[str, word(*Place)] = Place.END.value
    carry: Flag = False


class PositionTable(Table):
    """position = { … } of [rule]."""

    grain: Margin = 0.0
    mode: ModeName = Mode.NEAREST_EVEN.value


class RuleTable(Table):
    """[rule]."""

    integrator: Annotated[str, word(*Integrator, later=("half-kick", "constant-acceleration"))]
    rounding: RoundingTable = RoundingTable()
    frame_time: Annotated[str, word(*FrameTime)] = FrameTime.EXACT.value
    landing_test: Annotated[str, word(*LandingTest)] = LandingTest.SWEPT.value
    launch_gravity: Flag = True
    contact_tolerance: Margin | None = None
    position: PositionTable = PositionTable()


class TargetTable(Table):
    """One target of [targets]."""

    aim: Aim = None
    at_least: Bound = None
    at_most: Bound = None
    within: Within
    weight: Positive = 1.0


class RatesTable(Table):
    """[rates]."""

    supported: Annotated[
        tuple[Rate, ...], with_context(lambda v, c: read_rates(v, frame_time_of(c), supported=True))
    ] = ()
    watched: Annotated[
        tuple[Rate, ...], with_context(lambda v, c: read_rates(v, frame_time_of(c), supported=False))
    ] = ()
    spread_weight: NotNegative = 1.0


class FeatureTable(Table):
    """What all features of a level share."""

    name: Text
    margin: Margin = 0.0
    by: Names = ()


class LedgeTable(FeatureTable):
    """One of [[ledges]]."""

    height: LengthAbove
    must: Annotated[str, word("reach", "stay-out")]


class GapTable(FeatureTable):
    """One of [[gaps]]."""

    width: LengthAbove
    must: Annotated[str, word("cross", "stay-out")]
    far_level: Length = 0.0


class BlockTable(FeatureTable):
    """One of [[blocks]]."""

    height: LengthAbove
    length: LengthAbove
    must: Annotated[str, word("clear", "stay-out")]


class CeilingTable(FeatureTable):
    """One of [[ceilings]]."""

    height: LengthAbove
    body_height: Margin
    must: Annotated[str, word("stay-under")] = "stay-under"


class SecondTable(Table):
    """second = { … } of a jump."""

    launch_speed: Annotated[float, constant("launch_speed")]
    when: When = None
    how: Annotated[str, word(*How)] = How.SET.value


class JumpTable(Table):
    """One of [jumps.NAME], but for its search, its today, its targets and its second."""

    weight: Positive = 1.0
    like: Text | None = None


_CONSTANTS: dict[str, Any] = {
    name: (Annotated[float | None, constant(name)], None) for name in ("step", *LIMITS)
}
_CHOICES: dict[str, Any] = {name: (Annotated[Choice | None, choice(name)], None) for name in SEARCHABLE} | {
    "gravity_factor": (Annotated[Choice | None, choice("gravity_factor")], None),
    "step_up": _CONSTANTS["step_up"],
    "edge_allowance": _CONSTANTS["edge_allowance"],
}
TodayTable = create_model("TodayTable", __base__=Table, **_CONSTANTS)
SetTable = create_model("SetTable", __base__=Table, name=(Text, ...), **_CONSTANTS)
SearchTable = create_model("SearchTable", __base__=Table, **_CHOICES)

_OWN: dict[str, Any] = {name: _CONSTANTS[name] for name in JUMP_CONSTANTS}
_OWN_CHOICES: dict[str, Any] = {
    name: (Annotated[Choice | Link | None, own_choice(name)], None) for name in OWN
} | {name: _CONSTANTS[name] for name in ("step_up", "edge_allowance")}
JumpTodayTable = create_model("JumpTodayTable", __base__=Table, **_OWN)
JumpSearchTable = create_model("JumpSearchTable", __base__=Table, **_OWN_CHOICES)

MODELS: Mapping[str, type[Table]] = {
    "loop": LoopTable,
    "rule": RuleTable,
    "today": TodayTable,
    "search": SearchTable,
    "rates": RatesTable,
    "ledges": LedgeTable,
    "gaps": GapTable,
    "blocks": BlockTable,
    "ceilings": CeilingTable,
    "sets": SetTable,
    "sets.*": JumpTodayTable,
    "jumps.*": JumpTable,
    "jumps.*.today": JumpTodayTable,
    "jumps.*.search": JumpSearchTable,
    "jumps.*.second": SecondTable,
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
    ("blocks", "must"): ('"clear" or "stay-out"', 'add must = "clear" or must = "stay-out"'),
    ("blocks", "height"): ("a length above 0", "add height = …"),
    ("blocks", "length"): ("a length above 0", "add length = …"),
    ("ceilings", "height"): ("a length above 0", "add height = …"),
    ("ceilings", "body_height"): (
        "how far the top of the body is above what the apex measures, 0 or more",
        "add body_height = …",
    ),
    ("jumps.*.second", "launch_speed"): (
        "the launch speed of the second jump, above 0; it has no default",
        'add it, as in second = { launch_speed = 520, when = "apex" }',
    ),
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
    if section == "jumps.*":
        words = "a table: [jumps.NAME] alone on a line, the jump's search, targets … below it"
        return Misread(words, fix="give each jump a header of its own, as in [jumps.walk]")
    if "*" in section:
        key = section.rpartition(".")[2].replace("*", "walk")
        return Misread(f"a table in braces, {home(section)}", fix=f"write {key} = {{ launch_speed = … }}")
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
                length = read_text(value)
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
    if owners(key):
        words = "in [units]: length, time and names of lengths"
        raise Misread(words, fix=f"{key} belongs {owners(key)}")
    allowed = "a named length: a number above 0 in the length unit, as in tile = 64"
    if re.fullmatch(r"[^\W\d][\w-]*", key) is None or key in ("s", "ms", "Hz", "none"):
        raise Misread(f"{allowed}; its name is a word that is no unit of time", fix="choose another name")
    number = exact(value)
    if isinstance(value, str) and get_close_matches(key.lower(), ["length"]):
        raise Misread(allowed, fix=f'length is probably meant: length = "{value}"')
    if number is None or number <= 0:
        raise Misread(allowed, fix=f"write a number, as in {key} = 64")
    return number
