"""Which keys a brief knows, which come later, where a misplaced one belongs, what a misspelt one meant."""

from __future__ import annotations

from collections.abc import Iterable
from decimal import Decimal
from difflib import get_close_matches

from designer.brief.units import Misread, exact
from designer.motion.measures import MEASURES
from designer.motion.rule import CONSTANT_NAMES

TABLES = ("units", "loop", "rule", "today", "search", "targets", "rates")
LISTS = ("ledges", "gaps", "sets")

KNOWN: dict[str, tuple[str, ...]] = {
    "": ("title", *TABLES, *LISTS),
    "units": ("length", "time"),
    "loop": ("steps", "aim_at"),
    "rule": (
        "integrator",
        "rounding",
        "frame_time",
        "landing_test",
        "launch_gravity",
        "contact_tolerance",
        "position",
    ),
    "rule.rounding": ("mode", "at", "carry"),
    "rule.position": ("grain", "mode"),
    "today": CONSTANT_NAMES,
    "search": CONSTANT_NAMES,
    "targets": tuple(MEASURES),
    "targets.*": ("aim", "at_least", "at_most", "within", "weight"),
    "rates": ("supported", "watched", "spread_weight"),
    "ledges": ("name", "height", "must", "margin"),
    "gaps": ("name", "width", "far_level", "must", "margin"),
    "sets": ("name", *CONSTANT_NAMES),
}
"""The keys of each table; "" is the top of the file."""

_LATER_CONSTANTS = ("gravity_factor", "hold_factor", "hold_time", "release_factor", "cut", "drag", "number")

LATER: dict[str, tuple[str, ...]] = {
    "": ("with", "levels", "jumps", "keep", "windows", "human"),
    "rule": (
        "drag",
        "hold_factor",
        "hold_time",
        "jump_cut",
        "cut",
        "release_factor",
        "apex_float",
        "float_speed",
        "number",
        "product",
        "fixed_point",
        "second",
        "seed",
        "body_height",
    ),
    "rule.rounding": ("seed", "product"),
    "today": _LATER_CONSTANTS,
    "search": _LATER_CONSTANTS,
    "sets": _LATER_CONSTANTS,
    "targets": ("clearance", "ceiling"),
    "ledges": ("by",),
    "gaps": ("by",),
    "rates": ("patterns", "jitter"),
}
"""Names that a later version will know; refused as such, not as slips."""

NOT_YET = "not yet known in this version"


def home(section: str) -> str:
    """Return where a table is in a brief: "in [rule]", "in [[ledges]]", "at the top of the file …"."""
    if not section:
        return "at the top of the file, before the first table"
    if section == "targets.*":
        return "in a target of [targets], as in apex = { aim = …, within = … }"
    if section.startswith("rule."):
        return f"in [rule], inside {section.removeprefix('rule.')} = {{ … }}"
    return f"in [[{section}]]" if section in LISTS else f"in [{section}]"


def owners(key: str) -> str:
    """Return where a key belongs, "in [today] or [search]"; empty where no table knows it."""
    found = [section for section, keys in KNOWN.items() if key in keys and section != "sets"]
    found = [section for section in found if "." not in section] or found
    return " or ".join([home(section) for section in found]).replace(" or in ", " or ")


def unknown_key(section: str, key: str) -> Misread:
    """Return what to say of a key that its table does not know."""
    if key in LATER.get(section, ()):
        name = f"[{key}]" if not section and key not in ("with", "levels") else key
        return Misread(f"{name} is {NOT_YET}", fix=f"leave {name} out; this version answers without it")
    known = KNOWN[section]
    allowed = f"{home(section)}: {', '.join(known)}"
    if owners(key):
        return Misread(allowed, fix=f"{key} belongs {owners(key)}")
    spelled = key.lower().replace("-", "_")
    close = get_close_matches(spelled, known, 1, cutoff=0.6)
    if close:
        return Misread(allowed, fix=f"{_written(section, close[0])} is probably meant")
    everywhere = {name for keys in KNOWN.values() for name in keys}
    close = get_close_matches(spelled, sorted(everywhere), 1, cutoff=0.75)
    if close:
        return Misread(allowed, fix=f"{close[0]} is probably meant; it belongs {owners(close[0])}")
    if any(key in keys for keys in LATER.values()):
        return Misread(f"{key} is {NOT_YET}; {allowed}", fix=f"leave {key} out")
    return Misread(allowed, fix=f"take {key} out, or write # before it to keep it as a comment")


def _written(section: str, key: str) -> str:
    """Return a key as it is written in its table, a table's name with its brackets."""
    return home(key).removeprefix("in ") if not section and key in TABLES + LISTS else key


def as_target(raw: object) -> str:
    """Return the target that a bare value probably means, with a tolerance of 2 %."""
    figures, _, unit = str(raw).strip().partition(" ")
    try:
        number = exact(Decimal(figures))
    except ArithmeticError:
        number = None
    if isinstance(raw, bool) or number is None:
        return "{ aim = 120, within = 2 }"
    within = f"{abs(float(number)) / 50:.1g}" if number else "1"
    within = format(Decimal(within), "f")
    if unit:
        return f'{{ aim = "{figures} {unit}", within = "{within} {unit}" }}'
    return f"{{ aim = {figures}, within = {within} }}"


def one_of(value: object, words: Iterable[str], later: Iterable[str] = ()) -> str:
    """Return value where it is one of the words; Misread names the nearest."""
    words = tuple(words)
    allowed = "one of " + ", ".join(f'"{word}"' for word in words)
    if not isinstance(value, str):
        raise Misread(allowed, fix="write one of these, in quotation marks")
    if value in words:
        return value
    if value in later:
        raise Misread(f'"{value}" is {NOT_YET}; {allowed}', fix="choose one of these for now")
    spelled = value.strip().lower().replace("_", "-").replace(" ", "-")
    close = [spelled] if spelled in words else get_close_matches(spelled, words, 1, cutoff=0.5)
    alike = [word for word in words if word.startswith(f"{spelled}-")]
    if len(alike) > 1:
        # "nearest" names several: to choose one for somebody would decide what their build does.
        raise Misread(
            allowed, fix="which of " + ", ".join(f'"{word}"' for word in alike) + " does the build do?"
        )
    if close:
        raise Misread(allowed, better=f'"{close[0]}"')
    raise Misread(allowed, fix="write one of these")
