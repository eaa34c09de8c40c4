"""Level lists: a CSV file whose rows count as ledges and gaps of a brief (DEVELOPERS.md, brief).

The first row names the columns. Known ones: name, must ("reach", "cross" or "stay-out"), height (of a ledge)
or width (of a gap), far_level, margin, and by (names of jumps with ; between). Columns of any other name are
kept as the feature's place and shown with it.
"""

from __future__ import annotations

import csv
import re
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace
from difflib import get_close_matches

from designer.brief.features import bound
from designer.brief.keys import one_of
from designer.brief.model import Feature, Gap, Ledge
from designer.brief.units import Limits, Misread, Units
from designer.errors import Fault

COLUMNS = ("name", "must", "height", "width", "far_level", "margin", "by")
MOST_FAULTS = 20
"""After so many the file is probably something else."""
LONGEST_CELL = 2000

_MUSTS = ("reach", "cross", "stay-out")
_PLAIN = re.compile(r"\d{1,9}(\.\d{1,9})?")
_HEIGHT, _WIDTH = Limits("length", 0, beyond=True), Limits("length", 0, beyond=True)
_LIMITS = {"height": _HEIGHT, "width": _WIDTH, "far_level": Limits("length"), "margin": Limits("length", 0)}
_FORM = f"CSV: the first row names the columns ({', '.join(COLUMNS)}, or any other name for a place)"


@dataclass(frozen=True, slots=True)
class _Row:
    """What `bound` wants to know of a row."""

    must: str
    by: tuple[str, ...]


class LevelReader:
    """Reads one level list; `features` and `faults` hold what came out."""

    def __init__(self, name: str, units: Units, jumps: Sequence[str], *, several: bool) -> None:
        self.name = name
        self.units = units
        self.jumps = jumps
        self.several = several
        self.features: list[Ledge | Gap] = []
        self.faults: list[Fault] = []
        self._columns: list[str] = []
        self._line = 1
        self._bound: dict[tuple[str, str], tuple[str, ...]] = {}

    def read(self, text: str) -> None:
        """Read the text of a level list."""
        if not text.strip():
            self._fault(
                "", "", f"{_FORM}; this file is empty", "write name,must,height,margin in the first row"
            )
            return
        head = text.lstrip().split("\n", 1)[0]
        delimiter = "," if "," in head else ";" if ";" in head else "\t" if "\t" in head else ","
        rows = csv.reader(text.split("\n"), delimiter=delimiter, strict=True)
        try:
            for cells in rows:
                self._line = rows.line_num
                if not any(cell.strip() for cell in cells):
                    continue
                if not self._columns:
                    if not self._header(cells):
                        return
                elif not self._row(cells):
                    return
        except csv.Error as error:
            self._line = rows.line_num
            fix = "close every quotation mark, and double one that is part of a text"
            self._fault("", "", f"{_FORM}; this line is none: {error}", fix)
            return
        if not self.features and not self.faults:
            self._fault("", "", f"{_FORM}, then a row a ledge or gap; there is none", "add a row")

    def _fault(self, field: str, value: str, allowed: str, fix: str) -> None:
        value = value if len(value) <= 80 else value[:77] + "…"
        self.faults.append(Fault(f"{self.name}, line {self._line}", field, value, allowed, fix))

    def _header(self, cells: list[str]) -> bool:
        spelled = [re.sub(r"[ -]+", "_", cell.strip()).lower() for cell in cells]
        self._columns = [
            known if known in COLUMNS else cell.strip() for known, cell in zip(spelled, cells, strict=True)
        ]
        for column in self._columns:
            if column and self._columns.count(column) > 1:
                self._fault(column, "", f"{_FORM}, each once", "rename one of the two columns")
                return False
        for column in self._columns:
            close = [] if column in COLUMNS or len(column) < 5 else get_close_matches(
                column.lower(), [k for k in COLUMNS if k[0] == column[0].lower()], 1, cutoff=0.8
            )  # fmt: skip
            if close and close[0] not in self._columns:
                self._fault(
                    column, "", _FORM, f"{close[0]} is probably meant; else call the column otherwise"
                )
        for needed in ("name", "must"):
            if needed not in self._columns:
                self._fault("", "", f"{_FORM}; {needed} is missing", f"add a column {needed}")
        if not {"height", "width"} & set(self._columns):
            words = f"{_FORM}; height (of ledges) or width (of gaps) is missing"
            self._fault("", "", words, "add a column height, or width, or both")
        return not self.faults

    def _row(self, cells: list[str]) -> bool:
        """Read a row; return whether to go on."""
        if len(cells) > len(self._columns):
            words = (
                f"at most {len(self._columns)} cells, as many as there are columns; this row has {len(cells)}"
            )
            self._fault("", "", words, "put a text with a comma in it into quotation marks")
        else:
            said = {column: cell.strip() for column, cell in zip(self._columns, cells, strict=False)}
            self._feature({column: cell for column, cell in said.items() if column and cell})
        if len(self.faults) < MOST_FAULTS:
            return True
        self._fault("", "", "a level list; after so many faults the rest was not read", "mend these first")
        return False

    def _feature(self, said: dict[str, str]) -> None:
        before = len(self.faults)
        must = self._must(said)
        numbers = {column: self._length(column, said[column]) for column in _LIMITS if column in said}
        name = said.get("name", "")
        if not name or len(name) > 200 or not name.isprintable():
            self._fault("name", name, "a name of at most 200 signs, not empty", "write a name")
        gap = must == "cross" or (must == "stay-out" and "width" in said)
        size, other = ("width", "height") if gap else ("height", "width")
        if must and (size not in said or other in said):
            words = f"{'a width and no height' if gap else 'a height and no width'} where it is to {must}"
            if must == "stay-out":
                words = "either a height, of a ledge, or a width, of a gap, to stay out of"
            self._fault(size, said.get(size, ""), words, f"fill in {size} and leave {other} empty")
        if must and not gap and "far_level" in said:
            words = "a far_level only for a gap: the height of its far side over the take-off"
            self._fault("far_level", said["far_level"], words, "leave it empty")
        by = self._by(must, said.get("by", "")) if must else ()
        if len(self.faults) > before:
            return
        place = {column: cell for column, cell in said.items() if column not in COLUMNS}
        margin, source = numbers.get("margin", 0.0), f"{self.name}, line {self._line}"
        if gap:
            far = numbers.get("far_level", 0.0)
            self.features.append(Gap(name, numbers["width"], must, far, margin, by, place, source))
        else:
            self.features.append(Ledge(name, numbers["height"], must, margin, by, place, source))

    def _must(self, said: dict[str, str]) -> str:
        """Return the row's verdict; empty where it has none that can be read."""
        try:
            return one_of(said.get("must", ""), _MUSTS)
        except Misread as misread:
            better = misread.better.strip('"')
            fix = f"write {better}" if better else "write one of these"
            self._fault("must", said.get("must", ""), misread.allowed.replace('"', ""), fix)
            return ""

    def _length(self, column: str, cell: str) -> float:
        if _PLAIN.fullmatch(cell) and (float(cell) > 0 or column not in ("height", "width")):
            return float(cell)
        try:
            number = Limits.read(_LIMITS[column], _as_value(cell), self.units)
        except Misread as misread:
            fix = misread.fix or f"write {misread.better.strip(chr(34))}"
            self._fault(column, cell, misread.allowed, fix)
            return 1.0
        return float(number)

    def _by(self, must: str, cell: str) -> tuple[str, ...]:
        if (must, cell) not in self._bound:
            names = tuple(dict.fromkeys(part.strip() for part in re.split("[;,]", cell) if part.strip()))
            by, wrong = bound(_Row(must, names), self.jumps, several=self.several)
            for _, misread in wrong:
                self._fault("by", cell, misread.allowed, misread.fix)
            if wrong:
                return ()
            self._bound[must, cell] = by
        return self._bound[must, cell]


def _as_value(cell: str) -> object:
    """Return what a cell would be in a brief: a number where it is one, else text."""
    from decimal import Decimal, InvalidOperation

    try:
        return Decimal(cell)
    except InvalidOperation:
        return cell


def tightest(features: Iterable[Feature]) -> tuple[Feature, ...]:
    """Return the features that decide: the brief's own, and of a level list the rows that bind.

    For each jump, verdict and far level one row binds: of heights that must be reached and widths that must
    be crossed the largest with its margin, of those to stay out of the smallest. A row is returned with only
    the jumps that it binds; the others would not change whether a set is feasible. Order as given.
    """
    given = tuple(features)
    best: dict[tuple[str, str, str, float], tuple[float, int]] = {}
    for index, one in enumerate(given):
        if not one.source or not isinstance(one, Ledge | Gap):
            continue
        size, far = (one.height, 0.0) if isinstance(one, Ledge) else (one.width, one.far_level)
        tight = size - one.margin if one.must == "stay-out" else -(size + one.margin)
        for jump in one.by:
            key = (jump, type(one).__name__, one.must, far)
            if key not in best or tight < best[key][0]:
                best[key] = (tight, index)
    binds: dict[int, set[str]] = {}
    for (jump, *_), (_, index) in best.items():
        binds.setdefault(index, set()).add(jump)
    kept: list[Feature] = []
    for index, one in enumerate(given):
        if not one.source or not isinstance(one, Ledge | Gap):
            kept.append(one)
        elif index in binds:
            by = tuple(name for name in one.by if name in binds[index])
            kept.append(one if by == one.by else replace(one, by=by))
    return tuple(kept)
