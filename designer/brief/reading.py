"""Reading a brief from its file: everything that is wrong with it is said at once, each with its line."""

from __future__ import annotations

import tomllib
from collections.abc import Callable, Iterable
from decimal import Decimal
from pathlib import Path
from typing import Any

from designer.brief import lines
from designer.brief.build import Builder
from designer.brief.files import BRIEF, LEVELS, SHARED, START, read_text
from designer.brief.model import Brief
from designer.brief.shared import Source, Sources
from designer.brief.toml_help import help_with
from designer.brief.units import Misread
from designer.errors import Fault, InputError

LARGEST_FILE = BRIEF.largest
"""Bytes; a brief is a few kilobytes, so a larger file is something else."""

MOST_KEYS = 20_000
"""Keys and list entries; a list may be long, but a range says it better."""


def read_brief(path: Path | str) -> Brief:
    """Return the brief that a TOML file states (DEVELOPERS.md, brief).

    Lengths come out in the brief's unit, times in seconds. Raises InputError with a fault for everything
    that is wrong: in the file itself, in its TOML, in its keys, values and in what they say together; and in
    the files that it names in `with` and `levels`, whose names start from the brief's folder.
    """
    path = Path(path)
    return parse_brief(read_text(path, BRIEF), path.name, path.parent)


def parse_brief(text: str, file_name: str, folder: Path | None = None) -> Brief:
    """Return the brief that a text states; file_name stands in messages, its stem names the results.

    folder is where the names in `with` and `levels` start; without one a text cannot name files.
    """
    own, slips = _source(text, file_name, folder)
    shared = _shared(own) if "with" in own.raw else None
    sources = Sources(own, shared)
    with_levels = own if shared is None or "levels" in own.raw else shared
    builder = Builder(sources.raw, Path(file_name).stem, None if folder is None else _opener(with_levels))
    brief = builder.build()
    faults = _without_echoes(slips, _faults(builder.wrong, sources)) + builder.faults
    if brief is None or faults:
        raise InputError(*faults)
    return brief


def _source(text: str, file_name: str, folder: Path | None) -> tuple[Source, list[Fault]]:
    """Return a file's tables with their lines, and the slips in its TOML that could be put right."""
    text = text.removeprefix("\ufeff").replace("\r\n", "\n").replace("\r", "\n")
    if not any(line.strip() and not line.lstrip().startswith("#") for line in text.split("\n")):
        raise InputError(Fault(file_name, "", "", "a brief in TOML; this file is empty", START))
    try:
        raw, slips, text = _load(text, file_name)
        if raw is None:
            raise InputError(*slips)
        places = lines.Places(text)
    except RecursionError:
        words, fix = "tables and lists a few levels deep", "take out the brackets within brackets"
        raise InputError(Fault(file_name, "", "", words, fix)) from None
    if len(places.spots) > MOST_KEYS:
        words = f"a brief of at most {MOST_KEYS} keys and list entries; this file has {len(places.spots)}"
        raise InputError(Fault(file_name, "", "", words, "write ranges instead of long lists"))
    return Source(file_name, raw, places, folder), slips


def _shared(own: Source) -> Source:
    """Return the file that a brief names in `with`; InputError where it cannot be used."""
    said, spot = own.raw["with"], own.places.find(("with",))
    place = f"{own.name}, line {spot.line}" if spot else own.name
    written = " ".join(spot.text.split()) if spot else ""
    if not isinstance(said, str) or not said.strip():
        words, fix = 'the name of one file of TOML, as in with = "studio.toml"', "write it in quotation marks"
        raise InputError(Fault(place, "with", written, words, fix))
    if own.folder is None:
        words = "a shared file only in a brief that is a file: its name starts from the brief's folder"
        raise InputError(Fault(place, "with", written, words, "save the brief, and read it from its file"))
    path = own.folder / said
    shared, slips = _source(read_text(path, SHARED, (place, "with", written)), said, path.parent)
    faults = list(slips)
    if "with" in shared.raw:
        spot = shared.places.find(("with",))
        place = f"{said}, line {spot.line}" if spot else said
        words = (
            "no `with` in a file that a brief names in its own: one level deep, so that a reader finds all"
        )
        faults.append(
            Fault(place, "with", spot.text if spot else "", words, "move these tables into one file")
        )
    if faults:
        raise InputError(*faults)
    return shared


def _opener(source: Source) -> Callable[[str], tuple[str, str]]:
    """Return what opens a file that a source names in `levels`: its name for messages, and its text."""
    spot = source.places.find(("levels",))
    place = f"{source.name}, line {spot.line}" if spot else source.name

    def opened(said: str) -> tuple[str, str]:
        path = (source.folder or Path()) / said
        text = read_text(path, LEVELS, (place, "levels", f'"{said}"'))
        return said, text.replace("\r\n", "\n").replace("\r", "\n")

    return opened


def _without_echoes(slips: list[Fault], faults: list[Fault]) -> list[Fault]:
    """Return all faults; on a line whose TOML was put right the same advice stands only once."""
    corrected = {slip.place for slip in slips}
    kept: dict[tuple[str, ...], Fault] = {}
    for fault in (*slips, *faults):
        on = (fault.fix,) if fault.place in corrected else (fault.field, fault.value, fault.fix)
        kept.setdefault((fault.place, fault.allowed, *on), fault)
    return list(kept.values())


def _load(text: str, name: str) -> tuple[dict[str, Any] | None, list[Fault], str]:
    """Return the tables, the slips in the TOML, and the text that could be read in the end."""
    try:
        return tomllib.loads(text, parse_float=Decimal), [], text
    except ValueError:
        slips, repaired = help_with(text, name)
    if repaired is None:
        return None, slips, text
    return tomllib.loads(repaired, parse_float=Decimal), slips, repaired


def _faults(wrong: Iterable[tuple[lines.Path, Misread]], sources: Sources) -> list[Fault]:
    """Return what is wrong as faults, file by file in the order of its lines; what has no line comes last."""
    numbered: list[tuple[tuple[float, float], Fault]] = []
    for path, misread in wrong:
        own, near = sources.find(path), sources.nearest(path)
        place = f"{near.source.name}, line {near.spot.line}" if near else sources.own.name
        if near:
            inside = (*near.path, *path[len(near.path) :])
            order = (float(sources.order(near.source)), float(near.spot.line))
        else:
            inside, order = path, (0.0 if sources.shared is None else 2.0, float("inf"))
        key = next((str(part) for part in reversed(path) if isinstance(part, str)), "")
        lead = f"{key} = " if path and isinstance(path[-1], str) else ""
        fix = misread.fix or f"write {lead}{misread.better}"
        value = own.spot.text if own else ""
        value = value if len(value) <= 80 else value[:77] + "…"
        fault = Fault(place, dotted(inside), " ".join(value.split()), misread.allowed, fix)
        numbered.append((order, fault))
    numbered.sort(key=lambda pair: pair[0])
    return [fault for _, fault in numbered]


def sources_of(path: Path | str) -> dict[str, bytes]:
    """Return a brief that can be read again by itself: the bytes of each file, by name.

    brief.toml is the brief as it stands. Where it names other files they come along as studio.toml and
    levels.csv, and only the names in `with` and `levels` are changed to these. Raises InputError.
    """
    path = Path(path)
    own, _ = _source(read_text(path, BRIEF), path.name, path.parent)
    files = {"brief.toml": path.read_bytes()}
    shared = _shared(own) if "with" in own.raw else None
    if shared is not None:
        files["studio.toml"] = (path.parent / own.raw["with"]).read_bytes()
        files["brief.toml"] = _renamed(own, files["brief.toml"], "with", "studio.toml")
    source, name = (shared, "studio.toml") if shared and "levels" not in own.raw else (own, "brief.toml")
    if source.folder is not None and isinstance(source.raw.get("levels"), str):
        files["levels.csv"] = (source.folder / source.raw["levels"]).read_bytes()
        files[name] = _renamed(source, files[name], "levels", "levels.csv")
    return files


def _renamed(source: Source, data: bytes, key: str, name: str) -> bytes:
    """Return a file's bytes with another file's name in the value of a key at the top of it."""
    spot = source.places.find((key,))
    if source.raw[key] == name or spot is None:
        return data
    text = data.decode("utf-8-sig").replace("\r\n", "\n").replace("\r", "\n").split("\n")
    before, after = text[: spot.line - 1], "\n".join(text[spot.line - 1 :])
    written, equals, value = after.partition("=")
    value = value.replace(spot.text, f'"{name}"', 1)
    return "\n".join([*before, written + equals + value]).encode()


def dotted(path: lines.Path) -> str:
    """Return a path as people say it: search.gravity.every, ledges[2].height (counted from 1)."""
    text = ""
    for part in path:
        text += f"[{part + 1}]" if isinstance(part, int) else (f".{part}" if text else part)
    return text
