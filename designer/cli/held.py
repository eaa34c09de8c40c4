"""What BRIEF or RESULT, --from, --hold and --set stand for before a search: a brief, and its text."""

from __future__ import annotations

import re
import tempfile
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from pathlib import Path
from typing import TYPE_CHECKING, Any

from designer.errors import Fault, InputError

if TYPE_CHECKING:
    from designer.brief.lines import Path as Key
    from designer.brief.model import Brief, Target
    from designer.objective.verdict import Verdict


@dataclass(frozen=True, slots=True)
class Job:
    """What is to be searched."""

    brief: Brief
    files: dict[str, bytes]
    """The brief with the aims that are searched for, and what it reads; the folder of results keeps them."""
    said: tuple[str, ...]
    """What became of --from, --hold and --set, in sentences."""


def open_job(path: Path, out: Path, start: str | None, hold: Sequence[str], settings: Sequence[str]) -> Job:
    """Read a brief, or the brief of a results folder, and change its aims as the options say.

    `start` is what --from names: today, one of [[sets]], or a label or mark of a folder of results; with a
    brief the newest folder of its name under `out` is asked first. Raises InputError.
    """
    from designer.brief.reading import sources_of
    from designer.cli.source import open_source
    from designer.report.results import BRIEF, CANDIDATES

    brief, document = open_source(path)
    folder = path.parent if path.name == CANDIDATES else path
    file = path if document is None else folder / BRIEF
    if document is not None:
        brief = replace(brief, name=_first_name(folder))
    job = Job(brief, sources_of(file), ())
    if start is None and not hold and not settings:
        return job
    if start is not None and not hold:
        words = "--from together with --hold: nothing of the set would be used"
        raise InputError(Fault("--from", start, "", words, "say what to hold, as in --hold apex"))
    return _changed(job, path, out, start, hold, settings)


def _changed(
    job: Job, path: Path, out: Path, start: str | None, hold: Sequence[str], settings: Sequence[str]
) -> Job:
    from designer.brief.retarget import target_path
    from designer.search.hold import changed, held

    brief, said = job.brief, []
    verdict = None
    if start is not None:
        name, verdict = _judged(path, brief, out, start)
        said.append(f"Held from {name}: {', '.join(hold)}.")
    other = held(brief, verdict, hold, settings)
    targets = changed(brief, other)
    several = brief.several
    said += [
        f"{f'{jump} ' if several else ''}{measure}: wanted {target.text}"
        for (jump, measure), target in targets.items()
    ]
    options = [f"--from {start}"] if start is not None else []
    options += [f"--hold {one}" for one in hold] + [f"--set {one}" for one in settings]
    # One line, whatever line breaks a name may have.
    head = f"# Aims changed by: leapwright search {' '.join(' '.join(options).split())}"
    wanted = {target_path(brief, jump, measure): target for (jump, measure), target in targets.items()}
    files = _with_aims(job.files, wanted, head)
    _read_again(path, other, files)
    return Job(other, files, tuple(said))


def _with_aims(files: Mapping[str, bytes], wanted: Mapping[Key, Target], head: str) -> dict[str, bytes]:
    """Return a brief's files with other targets, each changed where it stands."""
    from designer.brief.retarget import stands, with_aims
    from designer.report.results import BRIEF

    found = dict(files)
    left = dict(wanted)
    for name in sorted(files, key=lambda name: name != BRIEF):  # what the brief itself says wins
        if not name.endswith(".toml"):
            continue
        text = files[name].decode("utf-8-sig").replace("\r\n", "\n").replace("\r", "\n")
        here = {key: target for key, target in left.items() if stands(text, key)}
        left = {key: target for key, target in left.items() if key not in here}
        text = with_aims(text, here)
        found[name] = (f"{head}\n{text}" if name == BRIEF else text).encode()
    return found


def _read_again(path: Path, brief: Brief, files: Mapping[str, bytes]) -> None:
    """Check that the files say what is searched; raise InputError where they could not be changed so."""
    from designer.brief.reading import read_brief
    from designer.report.results import BRIEF

    with tempfile.TemporaryDirectory() as folder:
        for name, data in files.items():
            (Path(folder) / name).write_bytes(data)
        again = read_brief(Path(folder) / BRIEF)
    if [jump.targets for jump in again.jumps] != [jump.targets for jump in brief.jumps]:
        words = "targets that can be changed in the text: a line each, apex = { aim = 120, within = 2 }"
        raise InputError(Fault(str(path), "targets", "", words, "write them so, or change the aims yourself"))


def _judged(path: Path, brief: Brief, out: Path, start: str) -> tuple[str, Verdict]:
    """Return what a set is called, with its place, and its verdict."""
    from designer.cli.source import open_source, pick_set, set_of
    from designer.objective.judge import judge
    from designer.report.results import find_pick

    own = [one.name for one in brief.sets] + (["today"] if brief.today is not None else [])
    if start in own:
        _, sets = pick_set(path, brief, None, start, ())
        verdict = judge(brief, sets, bands=False)
        return f"{start}·{verdict.mark}", verdict
    _, document = open_source(path)
    folders = _results_of(out, brief.name) if document is None else [path]
    labels: list[str] = []
    for folder in folders:
        _, document = open_source(folder)
        candidate = find_pick(document, start) if start != "today" else None
        if isinstance(candidate, dict) and _fits(brief, candidate):
            verdict = judge(brief, set_of(candidate), bands=False)
            return f"{candidate['label'] or 'a set'}·{verdict.mark} of {folder.name}", verdict
        labels += [one["label"] for one in (document or {}).get("shortlist", [])]
    words = (
        "one of " + ", ".join(dict.fromkeys([*own, *labels])) if own or labels else "nothing: no sets here"
    )
    if not folders:
        words += f"; there are no results of this brief in {out} yet"
    raise InputError(Fault("--from", start, "", words, "name one of these, or search first without --from"))


def _fits(brief: Brief, candidate: dict[str, Any]) -> bool:
    """Return whether a candidate's jumps and step are those of the brief as it is now."""
    from designer.brief.model import Loop

    names = [jump["name"] for jump in candidate["jumps"]]
    stepped = candidate["constants"].get("step") is not None
    return names == [jump.name for jump in brief.jumps] and stepped == (brief.loop is Loop.FIXED)


def _results_of(out: Path, name: str) -> list[Path]:
    """Return the folders of results of a brief, the newest first."""
    from designer.report.results import CANDIDATES

    found = []
    for folder in out.glob("*") if out.is_dir() else ():
        match = re.fullmatch(re.escape(name) + r"(?:-(\d+))?", folder.name)
        if match and (folder / CANDIDATES).is_file():
            found.append((int(match[1] or 1), folder))
    return [folder for _, folder in sorted(found, reverse=True)]


def _first_name(folder: Path) -> str:
    """Return NAME of a folder NAME-2 that stands beside NAME, so that the next one is NAME-3."""
    match = re.fullmatch(r"(.+)-\d+", folder.name)
    return match[1] if match and (folder.parent / match[1]).is_dir() else folder.name
