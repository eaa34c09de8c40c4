"""Text files that people write: a brief, what a team shares, a level list; and what can be wrong with one."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

from designer.errors import Fault, InputError

START = "leapwright new FILE writes a brief to start from"


@dataclass(frozen=True, slots=True)
class Kind:
    """What sort of file is read, in the words of its faults."""

    word: str
    """ "a brief"."""
    ending: str
    """ ".toml"."""
    largest: int
    """Bytes; a larger file is something else."""
    start: str
    """What to do where the file is something else."""

    @property
    def size(self) -> str:
        """The largest size in words: "1 MB"."""
        return f"{self.largest // 1_000_000} MB"


BRIEF = Kind("a brief", ".toml", 1_000_000, START)
SHARED = Kind("a file that briefs share", ".toml", 1_000_000, "it is TOML, like the brief")
LEVELS = Kind(
    "a level list", ".csv", 20_000_000, "it is CSV, a row a ledge or gap, its first row the columns"
)


def read_text(path: Path, kind: Kind, at: tuple[str, str, str] | None = None) -> str:
    """Return the file's text; InputError where there is none to be had.

    at: the place, the key and the value that name the file, where it is not the command's own.
    """
    name = path.name or str(path)
    start = f"; {kind.start}" if at is None else ""
    at = at or (str(path), "", "")
    try:
        with path.open("rb") as file:
            data = file.read(kind.largest + 1)
    except FileNotFoundError:
        fix = f"check the name and the folder{start}"
        raise InputError(Fault(*at, f"{kind.word}; there is none of this name", fix)) from None
    except IsADirectoryError:
        fix = f"name the {kind.ending} file in it"
        raise InputError(Fault(*at, f"{kind.word}; this is a folder", fix)) from None
    except (OSError, ValueError) as error:
        reason = error.strerror if isinstance(error, OSError) and error.strerror else str(error)
        words = f"{kind.word} that can be read; the system says: {reason}"
        raise InputError(Fault(*at, words, "check the file's permissions and its name")) from None
    if len(data) > kind.largest:
        words = f"{kind.word} of at most {kind.size}; this file is larger, so it is something else"
        raise InputError(Fault(name, "", "", words, f"name the {kind.ending} file of it; {kind.start}"))
    return decode(data, name, kind)


def decode(data: bytes, name: str, kind: Kind) -> str:
    """Return what bytes say in UTF-8; InputError names the line that is something else."""
    if data.startswith((b"\xff\xfe", b"\xfe\xff")):
        words, fix = "a text file in UTF-8; this one is UTF-16", 'save it again with the encoding "UTF-8"'
        raise InputError(Fault(name, "", "", words, fix))
    try:
        text = data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = data.count(b"\n", 0, error.start) + 1
        place = f"{name}, line {line}"
        if b"\0" in data:
            raise InputError(_binary(place, kind)) from None
        words = f"text in UTF-8; the byte 0x{data[error.start]:02x} on this line is not"
        fix = 'save the file again with the encoding "UTF-8"'
        raise InputError(Fault(place, "", "", words, fix)) from None
    if "\0" in text:
        raise InputError(_binary(f"{name}, line {text.count(chr(10), 0, text.index(chr(0))) + 1}", kind))
    return text


def _binary(place: str, kind: Kind) -> Fault:
    words = "a text file; this holds binary data"
    return Fault(place, "", "", words, f"name the {kind.ending} file; {kind.start}")
