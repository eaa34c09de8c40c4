"""What BRIEF or RESULT and --pick stand for: a brief, and one set of constants of it."""

from __future__ import annotations

import json
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import fields, replace
from pathlib import Path
from typing import TYPE_CHECKING, Any

from designer.errors import Fault, InputError

if TYPE_CHECKING:
    from designer.brief.model import Brief
    from designer.motion.rule import Constants


def open_source(path: Path) -> tuple[Brief, dict[str, Any] | None]:
    """Read a brief; or a results folder (or its candidates.json), whose brief and candidates come back.

    Raises InputError where neither can be read.
    """
    from designer.brief.reading import read_brief
    from designer.report.results import BRIEF, CANDIDATES

    folder = path.parent if path.name == CANDIDATES else path
    if not (folder.is_dir() and (folder / CANDIDATES).is_file()):
        return read_brief(path), None
    try:
        document = json.loads((folder / CANDIDATES).read_text(encoding="utf-8"))
        if not isinstance(document, dict):
            raise ValueError("not a table")
    except (OSError, ValueError) as error:
        raise InputError(
            Fault(
                place=str(folder / CANDIDATES),
                field="",
                value="",
                allowed=f"a file that a search wrote ({error})",
                fix="search again, or name the brief instead of the folder",
            )
        ) from error
    brief = read_brief(folder / BRIEF)
    return replace(brief, name=folder.name), document


def pick_set(
    path: Path, brief: Brief, document: dict[str, Any] | None, pick: str | None, settings: Sequence[str]
) -> tuple[str, tuple[Constants, ...]]:
    """Return the name of the wanted set and its constants, one a jump, with --set values in place of its own.

    Without a pick it is today's set, or of a result the best (the nearest where nothing is feasible). Raises
    InputError where there is no such set.
    """
    from designer.brief.settings import set_with_settings

    names = {one.name: one.jumps or (one.constants,) for one in brief.sets}
    today = today_of(brief)
    if today is not None:
        names["today"] = today
    marks: dict[str, tuple[Constants, ...]] = {}
    for label, mark, constants in _candidates(document):
        marks.setdefault(mark, constants)
        if label:
            names.setdefault(label, constants)
            marks.setdefault(f"{label}·{mark}", constants)
    if pick is None:
        usual = ("A", "nearest") if document is not None else ()
        pick = next((name for name in usual if name in names), "today")
        if pick not in names:
            base = [jump.base for jump in brief.jumps] if brief.several else [brief.base]
            return "set", set_with_settings(brief, base, settings)
    alike = [name for name in (*names, *marks) if name.lower() == pick.lower()]
    if not alike:
        raise _unknown(path, brief, pick, list(names), document is None)
    name = alike[0]
    constants = names[name] if name in names else marks[name]
    shown = next((one for one, same in names.items() if same == constants), name)
    return f"{shown} with changes" if settings else shown, set_with_settings(brief, constants, settings)


def today_of(brief: Brief) -> tuple[Constants, ...] | None:
    """Return today's set, one Constants a jump; None where a jump has none."""
    if not brief.several:
        return None if brief.today is None else (brief.today,)
    today = tuple(jump.today for jump in brief.jumps if jump.today is not None)
    return today if len(today) == len(brief.jumps) else None


def set_of(candidate: Mapping[str, Any]) -> tuple[Constants, ...]:
    """Return the constants, one a jump, of a candidate of candidates.json."""
    from designer.motion.rule import Constants

    known = {field.name for field in fields(Constants)}
    return tuple(
        Constants(**{key: value for key, value in jump["constants"].items() if key in known})
        for jump in candidate["jumps"]
    )


def _unknown(path: Path, brief: Brief, pick: str, names: list[str], is_brief: bool) -> InputError:
    """Return what to say of a pick that is not there."""
    fix = "pick one of these, or give constants with --set gravity=… --set launch_speed=…"
    if is_brief and len(pick) == 1:
        fix = f"candidates are in the results: leapwright check results/{brief.name} --pick {pick}"
    allowed = ("one of " + ", ".join(names) if names else "a set; there is none here") + ", or a mark"
    return InputError(Fault(place=str(path), field="--pick", value=pick, allowed=allowed, fix=fix))


def _candidates(
    document: dict[str, Any] | None,
) -> Iterator[tuple[str | None, str, tuple[Constants, ...]]]:
    """Yield label (None where it has none), mark and set of every candidate of a results file."""
    if document is None:
        return
    parts = ("shortlist", "sets", "front")
    listed = [(one["label"], one) for part in parts for one in document.get(part) or []]
    if document.get("nearest"):
        listed.append(("nearest", document["nearest"]))
    for label, one in listed:
        yield label, one["mark"], set_of(one)


def terms_of(document: dict[str, Any] | None) -> bool:
    """Whether objective modules counted in a search's results."""
    return document is not None and bool((document.get("best") or {}).get("terms"))
