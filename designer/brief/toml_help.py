"""What is wrong with a text that is no TOML, line by line, in words for people who don't know TOML."""

from __future__ import annotations

import re
import tomllib
from collections.abc import Iterator
from dataclasses import dataclass

from designer.brief.keys import LISTS
from designer.brief.toml_repair import Hopeless, Repair, is_toml, split_comment
from designer.errors import Fault

MOST_FAULTS = 20
"""After so many the file is probably no brief at all."""
LONGEST_LINE = 2000
"""Nobody writes a longer line in a brief; a file with slips and such lines is something else."""

_HEADER = re.compile(r"\s*(\[\[?)\s*([\w.\-\"' ]+?)\s*(\]\]?)\s*(#.*)?")
_PAIR = re.compile(r"""\s*("[^"]*"|'[^']*'|[\w.-]+)\s*=(?!=)\s*(.*)""", re.DOTALL)
_LENGTH = re.compile(r"""^\s*length\s*=\s*["']([^"'\n]+)["']""", re.MULTILINE)
_LONGEST_STATEMENT = 200


@dataclass(slots=True)
class _Statement:
    """Some consecutive lines that belong together."""

    first: int
    """Index of the first line."""
    last: int
    text: str


class Helper:
    """Puts right what it can in a text that tomllib refuses, and keeps a fault for each thing."""

    def __init__(self, text: str, name: str) -> None:
        self.lines = text.split("\n")
        self.name = name
        self.faults: list[Fault] = []
        self.hopeless = False
        found = _LENGTH.search(text)
        self._unit = found[1] if found else ""

    def run(self) -> str | None:
        """Return a text that tomllib accepts, line for line; None where something stayed unclear."""
        for index, line in enumerate(self.lines):
            if len(line) > LONGEST_LINE:
                self._add(index, "", line, f"lines of at most {LONGEST_LINE} signs", "write a key a line")
                return None
        first = next(statements(self.lines))
        if self.lines[first.first].lstrip().startswith(("{", "<")):
            allowed = "TOML: [table] alone on a line, then key = value; this is written in another language"
            self._add(
                first.first,
                "",
                self.lines[first.first],
                allowed,
                "leapwright new FILE writes a brief to start from",
            )
            return None
        table = ""
        for statement in statements(self.lines):
            if len(self.faults) >= MOST_FAULTS:
                self._add(
                    statement.first,
                    "",
                    "",
                    "a brief; after so many slips the rest was not read",
                    "mend these first",
                )
                self.hopeless = True
                return None
            header = _HEADER.fullmatch(statement.text)
            if header:
                table = header[2]
            if not is_toml(statement.text):
                self._mend(statement, table)
        self._lists()
        self._twice()
        text = "\n".join(self.lines)
        if not is_toml(text):
            self._last_resort(text)
        return None if self.hopeless else text

    def _add(self, index: int, field: str, value: str, allowed: str, fix: str) -> None:
        value = " ".join(value.split())
        value = value if len(value) <= 80 else value[:77] + "…"
        self.faults.append(Fault(f"{self.name}, line {index + 1}", field, value, allowed, fix))

    def _mend(self, statement: _Statement, table: str) -> None:
        pair = _PAIR.fullmatch(statement.text)
        whole = [split_comment(line)[0].strip() for line in statement.text.split("\n")]
        field, value = "", " ".join(whole)
        if pair:
            field = f"{table}.{pair[1]}" if table else pair[1]
            value = split_comment(pair[2])[0] if "\n" not in pair[2] else value.partition("=")[2]
        try:
            repair = Repair(statement.text, self._unit, table)
            self._add(statement.first, field, value, "; ".join(repair.words), f"write {repair.corrected}")
            line = repair.line
        except Hopeless as hopeless:
            self.hopeless = True
            self._add(statement.first, field, value, hopeless.allowed, hopeless.fix)
            line = ""
        self._replace(statement, line)

    def _replace(self, statement: _Statement, line: str) -> None:
        """Put one line in the place of a statement; the lines after it keep their numbers."""
        blank = [""] * (statement.last - statement.first)
        self.lines[statement.first : statement.last + 1] = [line, *blank]

    def _lists(self) -> None:
        """Turn [ledges] into [[ledges]] where it stands more than once."""
        for name in LISTS:
            found = [
                (i, m) for i, line in enumerate(self.lines) if (m := _HEADER.fullmatch(line)) and m[2] == name
            ]
            single = [i for i, match in found if match[1] == "["]
            if single and len(found) > 1:
                allowed = f"each of several {name} under its own header in double square brackets"
                self._add(single[0], name, f"[{name}]", allowed, f"write [[{name}]] at each of them")
                for index in single:
                    self.lines[index] = f"[[{name}]]"

    def _twice(self) -> None:
        """Take out tables and keys that stand a second time."""
        seen: dict[str, int] = {}
        table, count, skipping = "", 0, False
        for statement in list(statements(self.lines)):
            header, pair = _HEADER.fullmatch(statement.text), _PAIR.fullmatch(statement.text)
            if header:
                table, skipping = header[2], False
                if header[1] == "[[":
                    count += 1
                    table = f"{table}[{count}]"
                elif table in seen:
                    allowed = f"each table once; [{table}] begins on line {seen[table] + 1} already"
                    self._add(
                        statement.first,
                        table,
                        f"[{table}]",
                        allowed,
                        f"move these keys up to line {seen[table] + 1}",
                    )
                    skipping = True
                else:
                    seen[table] = statement.first
            elif pair:
                key = f"{table}.{pair[1]}".lstrip(".")
                if not skipping and key in seen:
                    allowed = f"each key once; it stands on line {seen[key] + 1} already"
                    self._add(
                        statement.first,
                        re.sub(r"\[\d+\]", "", key),
                        pair[2],
                        allowed,
                        "keep one of the two lines",
                    )
                    self._replace(statement, "")
                seen.setdefault(key, statement.first)
            if skipping:
                self._replace(statement, "")

    def _last_resort(self, text: str) -> None:
        """Report what tomllib says where nothing better is known."""
        self.hopeless = True
        try:
            tomllib.loads(text)
        except (ValueError, RecursionError) as error:
            at = re.search(r"at line (\d+)", str(error))
            index = int(at[1]) - 1 if at else max(0, len(self.lines) - 1)
            line = self.lines[index] if index < len(self.lines) else ""
            allowed = "TOML: [table] alone on a line, then key = value, each key and table once"
            self._add(index, "", line, allowed, "write the line so, or put # before it")


def statements(lines: list[str]) -> Iterator[_Statement]:
    """Yield what belongs together: a header, or a key with its value, over several lines where it is open."""
    index = 0
    while index < len(lines):
        if not split_comment(lines[index])[0].strip():
            index += 1
            continue
        last = _end_of(lines, index)
        yield _Statement(index, last, "\n".join(lines[index : last + 1]))
        index = last + 1


def _end_of(lines: list[str], first: int) -> int:
    """Return the index of a statement's last line."""
    if lines[first].count('"""') % 2 or lines[first].count("'''") % 2:
        fence = '"""' if lines[first].count('"""') % 2 else "'''"
        for index in range(first + 1, min(len(lines), first + _LONGEST_STATEMENT)):
            if fence in lines[index]:
                return index
        return first
    if _HEADER.fullmatch(lines[first]) or ("=" not in lines[first] and lines[first].lstrip().startswith("[")):
        return first
    open_marks = _open_marks(lines[first], "")
    first_body = split_comment(lines[first])[0].rstrip()
    last = first
    while open_marks and last + 1 < len(lines) and last - first < _LONGEST_STATEMENT:
        if not _goes_on(lines, last, open_marks, first_body.endswith(("{", "[", "("))):
            break
        last += 1
        open_marks = _open_marks(lines[last], open_marks)
    return last


def _goes_on(lines: list[str], last: int, open_marks: str, hangs: bool) -> bool:
    """Return whether the next line still belongs to a statement with open brackets."""
    following = split_comment(lines[last + 1])[0].strip()
    if not following:
        return (
            hangs
            or bool(split_comment(lines[last])[0].rstrip().endswith((",", "{", "[")))
            or _closes(lines, last)
        )
    if _HEADER.fullmatch(lines[last + 1]) and re.match(r"\s*\[\[?[A-Za-z]", lines[last + 1]):
        return False
    if open_marks[-1] != "{":
        return _PAIR.fullmatch(following) is None
    before = split_comment(lines[last])[0].rstrip()
    return hangs or before.endswith((",", "{")) or following[0] in ",}" or not _open_marks(following, "{")


def _closes(lines: list[str], last: int) -> bool:
    """Return whether the next line with something on it begins with a closing bracket."""
    for line in lines[last + 1 : last + 6]:
        body = split_comment(line)[0].strip()
        if body:
            return body[0] in ",}])"
    return False


def _open_marks(line: str, open_marks: str) -> str:
    """Return which brackets are open after a line, those open before it included."""
    body = re.sub(r'"(?:[^"\\]|\\.)*"|\'[^\']*\'', "", split_comment(line)[0])
    for sign in body:
        if sign in "[{(":
            open_marks += sign
        elif sign in "]})" and open_marks:
            open_marks = open_marks[:-1]
    return open_marks


def help_with(text: str, name: str) -> tuple[list[Fault], str | None]:
    """Return the faults of a text that tomllib refuses, and the text put right (None where that failed)."""
    helper = Helper(text, name)
    repaired = helper.run()
    return helper.faults, repaired
