"""Reading a brief from its file: everything that is wrong with it is said at once, each with its line."""

from __future__ import annotations

import tomllib
from collections.abc import Iterable
from decimal import Decimal
from pathlib import Path
from typing import Any

from designer.brief import lines
from designer.brief.build import Builder
from designer.brief.model import Brief
from designer.brief.toml_help import help_with
from designer.brief.units import Misread
from designer.errors import Fault, InputError

LARGEST_FILE = 1_000_000
"""Bytes; a brief is a few kilobytes, so a larger file is something else."""

MOST_KEYS = 20_000
"""Keys and list entries; a list may be long, but a range says it better."""

_START = "leapwright new FILE writes a brief to start from"


def read_brief(path: Path | str) -> Brief:
    """Return the brief that a TOML file states (DEVELOPERS.md, brief).

    Lengths come out in the brief's unit, times in seconds. Raises InputError with a fault for everything
    that is wrong: in the file itself, in its TOML, in its keys, values and in what they say together.
    """
    path = Path(path)
    return parse_brief(_text_of(path), path.name)


def parse_brief(text: str, file_name: str) -> Brief:
    """Return the brief that a text states; file_name stands in messages, its stem names the results."""
    text = text.removeprefix("\ufeff").replace("\r\n", "\n").replace("\r", "\n")
    if not any(line.strip() and not line.lstrip().startswith("#") for line in text.split("\n")):
        raise InputError(Fault(file_name, "", "", "a brief in TOML; this file is empty", _START))
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
    builder = Builder(raw, Path(file_name).stem)
    brief = builder.build()
    faults = _without_echoes(slips, _faults(builder.wrong, places, file_name))
    if brief is None or faults:
        raise InputError(*faults)
    return brief


def _without_echoes(slips: list[Fault], faults: list[Fault]) -> list[Fault]:
    """Return all faults; on a line whose TOML was put right the same advice stands only once."""
    corrected = {slip.place for slip in slips}
    kept: dict[tuple[str, ...], Fault] = {}
    for fault in (*slips, *faults):
        on = (fault.fix,) if fault.place in corrected else (fault.field, fault.value, fault.fix)
        kept.setdefault((fault.place, fault.allowed, *on), fault)
    return list(kept.values())


def _text_of(path: Path) -> str:
    """Return the file's text; InputError where there is none to be had."""
    name = path.name or str(path)
    try:
        with path.open("rb") as file:
            data = file.read(LARGEST_FILE + 1)
    except FileNotFoundError:
        words, fix = "a brief's file; there is none of this name", f"check the name and the folder; {_START}"
        raise InputError(Fault(str(path), "", "", words, fix)) from None
    except IsADirectoryError:
        words, fix = "a brief's file; this is a folder", "name the .toml file in it"
        raise InputError(Fault(str(path), "", "", words, fix)) from None
    except (OSError, ValueError) as error:
        reason = error.strerror if isinstance(error, OSError) and error.strerror else str(error)
        words = f"a brief's file that can be read; the system says: {reason}"
        raise InputError(
            Fault(str(path), "", "", words, "check the file's permissions and its name")
        ) from None
    if len(data) > LARGEST_FILE:
        words = "a brief of at most 1 MB; this file is larger, so it is something else"
        raise InputError(Fault(name, "", "", words, f"name the .toml file of the brief; {_START}"))
    return _decode(data, name)


def _decode(data: bytes, name: str) -> str:
    if data.startswith((b"\xff\xfe", b"\xfe\xff")):
        words, fix = "a text file in UTF-8; this one is UTF-16", 'save it again with the encoding "UTF-8"'
        raise InputError(Fault(name, "", "", words, fix))
    try:
        text = data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = data.count(b"\n", 0, error.start) + 1
        place = f"{name}, line {line}"
        if b"\0" in data:
            raise InputError(_binary(place)) from None
        words = f"text in UTF-8; the byte 0x{data[error.start]:02x} on this line is not"
        fix = 'save the file again with the encoding "UTF-8"'
        raise InputError(Fault(place, "", "", words, fix)) from None
    if "\0" in text:
        raise InputError(_binary(f"{name}, line {text.count(chr(10), 0, text.index(chr(0))) + 1}"))
    return text


def _binary(place: str) -> Fault:
    return Fault(place, "", "", "a text file; this holds binary data", f"name the .toml file; {_START}")


def _load(text: str, name: str) -> tuple[dict[str, Any] | None, list[Fault], str]:
    """Return the tables, the slips in the TOML, and the text that could be read in the end."""
    try:
        return tomllib.loads(text, parse_float=Decimal), [], text
    except ValueError:
        slips, repaired = help_with(text, name)
    if repaired is None:
        return None, slips, text
    return tomllib.loads(repaired, parse_float=Decimal), slips, repaired


def _faults(wrong: Iterable[tuple[lines.Path, Misread]], places: lines.Places, name: str) -> list[Fault]:
    """Return what is wrong as faults, in the order of the file; what has no line comes last."""
    numbered: list[tuple[float, Fault]] = []
    for path, misread in wrong:
        own, near = places.find(path), places.nearest(path)
        place = f"{name}, line {near.line}" if near else name
        key = next((str(part) for part in reversed(path) if isinstance(part, str)), "")
        lead = f"{key} = " if path and isinstance(path[-1], str) else ""
        fix = misread.fix or f"write {lead}{misread.better}"
        value = own.text if own else ""
        value = value if len(value) <= 80 else value[:77] + "…"
        fault = Fault(place, dotted(path), " ".join(value.split()), misread.allowed, fix)
        numbered.append((near.line if near else float("inf"), fault))
    numbered.sort(key=lambda pair: pair[0])
    return [fault for _, fault in numbered]


def dotted(path: lines.Path) -> str:
    """Return a path as people say it: search.gravity.every, ledges[2].height (counted from 1)."""
    text = ""
    for part in path:
        text += f"[{part + 1}]" if isinstance(part, int) else (f".{part}" if text else part)
    return text
