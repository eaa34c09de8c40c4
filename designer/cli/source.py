"""What BRIEF or RESULT and --pick stand for: a brief, and one set of constants of it."""

from __future__ import annotations

import json
from collections.abc import Sequence
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

    Without a pick it is today's set, or of a result the best. Raises InputError where there is no such set.
    """
    from designer.brief.settings import with_settings
    from designer.motion.rule import Constants

    names = {one.name: one.constants for one in brief.sets}
    if brief.today is not None:
        names["today"] = brief.today
    for one in _candidates(document):
        known = {field.name for field in fields(Constants)}
        constants = Constants(**{key: value for key, value in one["constants"].items() if key in known})
        for name in (one["label"], one["mark"]):
            if name:
                names.setdefault(name, constants)
    if pick is None:
        pick = "A" if document is not None and "A" in names else "today"
        if pick not in names:
            return "set", with_settings(brief, brief.base, settings)
    if pick not in names:
        raise InputError(
            Fault(
                place=str(path),
                field="--pick",
                value=pick,
                allowed="one of " + ", ".join(names) if names else "nothing: there are no sets here",
                fix="pick one of these, or give constants with --set gravity=… --set launch_speed=…",
            )
        )
    name = f"{pick} with changes" if settings else pick
    return name, with_settings(brief, names[pick], settings)


def _candidates(document: dict[str, Any] | None) -> list[dict[str, Any]]:
    """Return every candidate of a results file, the shortlist first."""
    if document is None:
        return []
    return [one for part in ("shortlist", "sets", "front") for one in document.get(part) or []]
