"""Files that are no brief at all: each gets one clear message and no traceback."""

import os
from pathlib import Path

import pytest

from designer.brief.reading import LARGEST_FILE, parse_brief, read_brief
from designer.errors import Fault, InputError
from tests.reference.crate_yard import BASE, changed

JUNK = {
    "empty": (b"", "this file is empty"),
    "blank": (b" \n\t\r\n\n", "this file is empty"),
    "only comments": (b"# nothing yet\n", "this file is empty"),
    "only a mark of order": ("\ufeff".encode(), "this file is empty"),
    "binary": (b"\x7fELF\x02\x01\x01\0\0\0\xff\xfe", "binary data"),
    "zeros": (b"title = \"x\"\n\0\0\0\0", "binary data"),
    "a picture": (b"\x89PNG\r\n\x1a\n\0\0\0\rIHDR", "binary data"),
    "latin-1": ('title = "H\xf6fe"\n'.encode("latin-1"), "the byte 0xf6 on this line"),
    "utf-16": (BASE.encode("utf-16"), "this one is UTF-16"),
    "10 MB of noise": (bytes(range(256)) * 40_000, "at most 1 MB"),
    "10 MB of letters": (b"a = 1\n" * 1_700_000, "at most 1 MB"),
    "many keys": (b"".join(b"k%d = 1\n" % n for n in range(30_000)), "at most 20000 keys"),
    "deep brackets": (b"a = " + b"[" * 50_000, "brackets within brackets"),
    "quotation marks": (b'"' * 500_000, "lines of at most 2000 signs"),
}  # fmt: skip


def fault_of(path: Path) -> Fault:
    with pytest.raises(InputError) as caught:
        read_brief(path)
    (fault,) = caught.value.faults
    return fault


@pytest.mark.parametrize("name", JUNK)
def test_junk_gets_one_clear_message(tmp_path: Path, name: str) -> None:
    data, words = JUNK[name]
    path = tmp_path / "junk.toml"
    path.write_bytes(data)
    fault = fault_of(path)
    assert words in f"{fault.allowed} {fault.fix}"
    assert fault.place.startswith("junk.toml")
    assert len(str(fault)) < 600


def test_the_line_of_a_strange_byte(tmp_path: Path) -> None:
    path = tmp_path / "yard.toml"
    path.write_bytes(BASE.encode() + "# f\xfcr alle\n".encode("latin-1"))
    assert fault_of(path).place == f"yard.toml, line {BASE.count(chr(10)) + 1}"


def test_a_folder_is_no_brief(tmp_path: Path) -> None:
    assert "this is a folder" in fault_of(tmp_path).allowed


def test_a_missing_file(tmp_path: Path) -> None:
    fault = fault_of(tmp_path / "none.toml")
    assert "there is none of this name" in fault.allowed
    assert "leapwright new" in fault.fix


def test_a_name_that_no_system_takes(tmp_path: Path) -> None:
    assert "that can be read" in fault_of(tmp_path / "a\0b.toml").allowed
    assert "that can be read" in fault_of(tmp_path / ("x" * 5000)).allowed


@pytest.mark.skipif(
    not hasattr(os, "mkfifo"), reason="needs POSIX files; run on Linux or macOS to test what cannot be opened"
)
def test_a_file_behind_a_file(tmp_path: Path) -> None:
    (tmp_path / "plain").write_text("x")
    assert "that can be read" in fault_of(tmp_path / "plain" / "yard.toml").allowed


def test_the_largest_file_is_still_read(tmp_path: Path) -> None:
    path = tmp_path / "yard.toml"
    comment = "#" + "-" * 998 + "\n"
    text = BASE + comment * ((LARGEST_FILE - len(BASE)) // len(comment))
    path.write_text(text, encoding="utf-8", newline="\n")
    assert read_brief(path).title == "Crate yard"


def test_a_title_may_speak_any_language() -> None:
    brief = parse_brief(changed(('"Crate yard"', '"Dächer über Łódź 屋根"')), "yard.toml")
    assert brief.title == "Dächer über Łódź 屋根"
