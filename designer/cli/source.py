"""What BRIEF or RESULT and --pick stand for: a brief, and one set of constants of it."""

from __future__ import annotations

import json
from collections.abc import Iterator, Sequence
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
) -> tuple[str, Constants]:
    """Return the name of the wanted set and its constants, with --set values in place of its own.

    Without a pick it is today's set, or of a result the best (the nearest where nothing is feasible). Raises
    InputError where there is no such set.
    """
    from designer.brief.settings import with_settings

    names = {one.name: one.constants for one in brief.sets}
    if brief.today is not None:
        names["today"] = brief.today
    marks: dict[str, Constants] = {}
    for label, mark, constants in _candidates(document):
        marks.setdefault(mark, constants)
        if label:
            names.setdefault(label, constants)
            marks.setdefault(f"{label}·{mark}", constants)
    if pick is None:
        usual = ("A", "nearest") if document is not None else ()
        pick = next((name for name in usual if name in names), "today")
        if pick not in names:
            return "set", with_settings(brief, brief.base, settings)
    alike = [name for name in (*names, *marks) if name.lower() == pick.lower()]
    if not alike:
        raise _unknown(path, brief, pick, list(names), document is None)
    name = alike[0]
    constants = names[name] if name in names else marks[name]
    shown = next((one for one, same in names.items() if same == constants), name)
    return f"{shown} with changes" if settings else shown, with_settings(brief, constants, settings)


def _unknown(path: Path, brief: Brief, pick: str, names: list[str], is_brief: bool) -> InputError:
    """Return what to say of a pick that is not there."""
    fix = "pick one of these, or give constants with --set gravity=… --set launch_speed=…"
    if is_brief and len(pick) == 1:
        fix = f"candidates are in the results: leapwright check results/{brief.name} --pick {pick}"
    allowed = ("one of " + ", ".join(names) if names else "a set; there is none here") + ", or a mark"
    return InputError(Fault(place=str(path), field="--pick", value=pick, allowed=allowed, fix=fix))


def _candidates(document: dict[str, Any] | None) -> Iterator[tuple[str | None, str, Constants]]:
    """Yield label (None where it has none), mark and constants of every candidate of a results file."""
    from designer.motion.rule import Constants

    if document is None:
        return
    known = {field.name for field in fields(Constants)}
    listed = [
        (one["label"], one) for part in ("shortlist", "sets", "front") for one in document.get(part) or []
    ]
    if document.get("nearest"):
        listed.append(("nearest", document["nearest"]))
    for label, one in listed:
        values = {key: value for key, value in one["constants"].items() if key in known}
        yield label, one["mark"], Constants(**values)


def terms_of(document: dict[str, Any] | None) -> bool:
    """Whether objective modules counted in a search's results."""
    return document is not None and bool((document.get("best") or {}).get("terms"))
