"""Which keys a brief knows, which come later, where a misplaced one belongs, what a misspelt one meant."""

from __future__ import annotations

from collections.abc import Iterable
from decimal import Decimal
from difflib import get_close_matches

from designer.brief.units import Misread, exact
from designer.motion.measures import MEASURES
from designer.motion.rule import CONSTANT_NAMES, OWN, SHARED

TABLES = ("units", "loop", "rule", "today", "search", "targets", "rates")
LISTS = ("ledges", "gaps", "blocks", "ceilings", "sets")

TOP_CONSTANTS = tuple(name for name in CONSTANT_NAMES if name != "gravity_factor")
"""Constants of [today] and [search]; gravity_factor has a meaning only where there are several jumps."""
JUMP_CONSTANTS = (*OWN, "step_up", "edge_allowance")
"""Constants that a jump may name for itself."""

KNOWN: dict[str, tuple[str, ...]] = {
    "": ("title", "with", "levels", *TABLES, "jumps", *LISTS),
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
    "today": TOP_CONSTANTS,
    "search": TOP_CONSTANTS,
    "targets": tuple(MEASURES),
    "targets.*": ("aim", "at_least", "at_most", "within", "weight"),
    "rates": ("supported", "watched", "spread_weight"),
    "jumps.*": ("search", "today", "targets", "weight", "like", "second"),
    "jumps.*.search": JUMP_CONSTANTS,
    "jumps.*.today": JUMP_CONSTANTS,
    "jumps.*.second": ("launch_speed", "when", "how"),
    "ledges": ("name", "height", "must", "margin", "by"),
    "gaps": ("name", "width", "far_level", "must", "margin", "by"),
    "blocks": ("name", "height", "length", "must", "margin", "by"),
    "ceilings": ("name", "height", "body_height", "must", "margin", "by"),
    "sets": ("name", *TOP_CONSTANTS),
    "sets.*": JUMP_CONSTANTS,
}
"""The keys of each table; "" is the top of the file."""

_LATER_CONSTANTS = ("hold_factor", "hold_time", "release_factor", "cut", "drag", "number")

LATER: dict[str, tuple[str, ...]] = {
    "": ("keep", "windows", "human"),
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
        "seed",
    ),
    "rule.rounding": ("seed", "product"),
    "today": _LATER_CONSTANTS,
    "search": _LATER_CONSTANTS,
    "sets": _LATER_CONSTANTS,
    "sets.*": _LATER_CONSTANTS,
    "jumps.*.today": _LATER_CONSTANTS,
    "jumps.*.search": _LATER_CONSTANTS,
    "targets": ("clearance", "ceiling"),
    "rates": ("patterns", "jitter"),
}
"""Names that a later version will know; refused as such, not as slips."""

NOT_YET = "not yet known in this version"


def home(section: str) -> str:
    """Return where a table is in a brief: "in [rule]", "in [[ledges]]", "at the top of the file …"."""
    special = {
        "": "at the top of the file, before the first table",
        "targets.*": "in a target of [targets], as in apex = { aim = …, within = … }",
        "sets.*": "in a jump's part of one of [[sets]], as in walk = { launch_speed = … }",
        "jumps.*": "in [jumps.NAME]",
    }
    if section in special:
        return special[section]
    for outer, name in (("jumps.*.", "[jumps.NAME]"), ("rule.", "[rule]")):
        if section.startswith(outer):
            inner = section.removeprefix(outer)
            inside = f"in {inner} = {{ … }} of {name}", f"in {name}, inside {inner} = {{ … }}"
            return inside[outer == "rule."]
    return f"in [[{section}]]" if section in LISTS else f"in [{section}]"


def owners(key: str) -> str:
    """Return where a key belongs, "in [today] or [search]"; empty where no table knows it."""
    found = [section for section, keys in KNOWN.items() if key in keys and not section.startswith("sets")]
    found = [section for section in found if "." not in section] or found
    return " or ".join([home(section) for section in found]).replace(" or in ", " or ")


def unknown_key(section: str, key: str) -> Misread:
    """Return what to say of a key that its table does not know."""
    if key in LATER.get(section, ()):
        name = f"[{key}]" if not section and key not in ("with", "levels") else key
        return Misread(f"{name} is {NOT_YET}", fix=f"leave {name} out; this version answers without it")
    known = KNOWN[section]
    allowed = f"{home(section)}: {', '.join(known)}"
    if section.startswith(("jumps.*", "sets.*")):
        special = _of_a_jump(section, key)
        if special is not None:
            return special
    if owners(key):
        return Misread(allowed, fix=f"{key} belongs {owners(key)}")
    return _slip(section, key, allowed)


def _slip(section: str, key: str, allowed: str) -> Misread:
    """Return what to say of a key that no table knows: what it probably means."""
    known = KNOWN[section]
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


ONE_GAME = {
    "gravity": "one game has one gravity; use gravity_factor for a jump of a gravity of its own",
    "step": "one game has one step, whatever the jump",
    "grain": "one game has one grain, whatever the jump",
}
"""Why a jump cannot name what the game has one of."""


def _of_a_jump(section: str, key: str) -> Misread | None:
    """Return what to say of a constant in a place of a jump where it cannot stand; None of any other key."""
    if key in SHARED:
        fix = f"name {key} in [today] or [search], at the top level of the brief"
        if section == "sets.*":
            fix = f"name {key} in the set itself, beside its name"
        if key == "gravity":
            fix += "; or write gravity_factor = 0.9 here"
        return Misread(ONE_GAME[key], fix=fix)
    if section == "jumps.*" and key in JUMP_CONSTANTS:
        words = f"{home(section)}: {', '.join(KNOWN[section])}"
        return Misread(words, fix=f"write search = {{ {key} = … }}, or today = {{ {key} = … }}")
    return None


def _written(section: str, key: str) -> str:
    """Return a key as it is written in its table, a table's name with its brackets."""
    return home(key).removeprefix("in ") if not section and key in (*TABLES, *LISTS, "jumps") else key


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
