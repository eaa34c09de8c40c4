"""The folder that a search leaves behind: written whole, under a name of its own, or not at all."""

from __future__ import annotations

import csv
import io
import shutil
import tempfile
from collections.abc import Iterable, Iterator, Mapping
from contextlib import contextmanager
from pathlib import Path

from designer.brief.model import Brief
from designer.errors import Fault, InputError
from designer.motion.measures import MEASURES
from designer.motion.rule import CONSTANT_NAMES, SHARED
from designer.objective.verdict import Verdict
from designer.report.document import DIGITS, search_document, to_json
from designer.search.progress import Progress
from designer.search.result import Candidate, SearchResult

CANDIDATES = "candidates.json"
TABLE = "candidates.csv"
BRIEF = "brief.toml"
FIGURES = "figures"


def write_whole(path: Path, data: bytes) -> None:
    """Write a file so that it is there whole or not at all; an old one stays until the new one is done."""
    with tempfile.NamedTemporaryFile(dir=path.parent, prefix=f".{path.name}.", delete=False) as part:
        temporary = Path(part.name)
        try:
            part.write(data)
            part.flush()
        except BaseException:
            temporary.unlink(missing_ok=True)
            raise
    temporary.chmod(0o644)
    temporary.replace(path)


def _csv_number(value: object) -> str:
    if value is None:
        return ""
    if isinstance(value, bool):
        return "true" if value else "false"
    return f"{value:.{DIGITS}g}" if isinstance(value, int | float) else str(value)


def _csv_row(name: str, candidate: Candidate) -> dict[str, object]:
    verdict = candidate.verdict
    row: dict[str, object] = {"label": name, "mark": verdict.mark, "change": candidate.change}
    row |= _csv_constants(verdict)
    row |= {
        "miss": verdict.miss,
        "rate_spread": verdict.rate_spread,
        "cost": verdict.cost,
        "violation": verdict.violation,
        "feasible": verdict.feasible,
    }
    for jump in verdict.jumps:
        row |= {f"{jump.name}.nominal.{measure}": jump.nominal.measures[measure] for measure in MEASURES}
        row |= {f"{jump.name}.spread.{measure}": value for measure, value in jump.spreads.items()}
        row |= {f"{jump.name}.cost": jump.cost} if verdict.several else {}
    for feature in verdict.features:
        name = feature.name
        if feature.source and f"{name}.spare" in row:  # rows of a level list need not differ in their names
            name = f"{name}, {feature.source}"
        row[f"{name}.spare"] = feature.spare
        row[f"{name}.worst_rate"] = feature.worst_rate
    row["why"] = candidate.why
    return row


def _csv_constants(verdict: Verdict) -> dict[str, object]:
    """Return a set's constants by column; of several jumps what is everybody's, then each one's own."""
    if not verdict.several:
        names = (name for name in CONSTANT_NAMES if name != "gravity_factor")
        return {name: getattr(verdict.constants, name) for name in names}
    row: dict[str, object] = {name: getattr(verdict.constants, name) for name in SHARED}
    for jump in verdict.jumps:
        own = (name for name in CONSTANT_NAMES if name not in SHARED)
        row |= {f"{jump.name}.{name}": getattr(jump.constants, name) for name in own}
    return row


def named(result: SearchResult) -> Iterator[tuple[str, Candidate]]:
    """Yield today, the sets that people brought, and the shortlist or the nearest, each with its name."""
    if result.today is not None:
        yield "today", result.today
    for one in (*result.sets, *result.shortlist):
        yield one.label or "", one
    if result.nearest is not None:
        yield "nearest", result.nearest


def candidates_csv(candidates: Iterable[tuple[str, Candidate]]) -> str:
    """Return named candidates as CSV: a line each, numbers to 12 significant digits, empty for none."""
    rows = [_csv_row(name, candidate) for name, candidate in candidates]
    out = io.StringIO()
    header = list(rows[0]) if rows else ["label"]
    writer = csv.DictWriter(out, header, lineterminator="\n")
    writer.writeheader()
    for row in rows:
        writer.writerow({key: _csv_number(value) for key, value in row.items()})
    return out.getvalue()


def free_name(root: Path, name: str) -> Path:
    """Return root/NAME, or the first of root/NAME-2, NAME-3 … that does not exist."""
    number, path = 1, root / name
    while path.exists():
        number += 1
        path = root / f"{name}-{number}"
    return path


@contextmanager
def new_folder(root: Path, name: str) -> Iterator[tuple[Path, Path]]:
    """Hand out (a hidden folder to fill, the path that it gets); moved there on success, else removed.

    Raises InputError where the folder cannot be made.
    """
    try:
        root.mkdir(parents=True, exist_ok=True)
        hidden = Path(tempfile.mkdtemp(dir=root, prefix=f".{name}."))
    except OSError as error:
        raise InputError(
            Fault("--out", str(root), error.strerror or "cannot be written", "a folder that can be written",
                  "name another with --out FOLDER")
        ) from error  # fmt: skip
    hidden.chmod(0o755)
    final = free_name(root, name)
    try:
        yield hidden, final
        # Another run may have taken the name in the meantime: then take the next.
        while True:
            try:
                hidden.rename(final)
                return
            except OSError:
                if not final.exists():
                    raise
                final = free_name(root, name)
    except BaseException:
        shutil.rmtree(hidden, ignore_errors=True)
        raise


def write_results(
    brief: Brief,
    source: bytes | Mapping[str, bytes],
    result: SearchResult,
    root: Path,
    *,
    pictures: bool = True,
    progress: Progress | None = None,
) -> Path:
    """Write root/NAME/ with candidates.json, candidates.csv, the brief and figures/; return the folder.

    A second run gets NAME-2. source is the brief's own text, or all its files by name (see
    `designer.brief.reading.sources_of`), kept so that `check` can read the results; progress hears how far
    the pictures are.
    """
    with new_folder(root, brief.name) as (folder, final):
        (folder / CANDIDATES).write_bytes(to_json(search_document(result)).encode())
        (folder / TABLE).write_bytes(candidates_csv(named(result)).encode())
        for name, data in ({BRIEF: source} if isinstance(source, bytes) else source).items():
            (folder / name).write_bytes(data)
        if pictures:
            from designer.report.pictures import make_pictures

            (folder / FIGURES).mkdir()
            make_pictures(brief, result, folder / FIGURES, progress)
    return final


def find_pick(document: object, pick: str) -> object:
    """Return the candidate of a read candidates.json that has this label, name or mark; None without one."""
    if not isinstance(document, dict):
        return None
    if pick == "today":
        return document.get("today")
    for part in ("shortlist", "sets", "front"):
        for one in document.get(part, []):
            if pick in (one["label"], one["mark"], f"{one['label']}·{one['mark']}"):
                return one
    return None
