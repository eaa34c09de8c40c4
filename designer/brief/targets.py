"""Targets: from [targets], or the targets of one of several jumps, to what a measure should be."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from designer.brief.choices import Path, Reader
from designer.brief.fields import Context
from designer.brief.keys import unknown_key
from designer.brief.model import Target
from designer.brief.schema import check_table
from designer.brief.units import Misread, plain
from designer.motion.measures import MEASURES


def read_targets(
    raw: object, at: Path, reader: Reader, *, wanted: bool
) -> tuple[tuple[Target, ...], list[tuple[Path, Misread]]]:
    """Return the targets of a table and what is wrong, with paths; wanted: whether there must be one."""
    wrong: list[tuple[Path, Misread]] = []
    if not isinstance(raw, dict):
        if at == ("targets",):
            words = (
                "[targets] alone on a line, then one line a measure, as in apex = { aim = 120, within = 2 }"
            )
            return (), [(at, Misread(words, fix="write [targets]"))]
        words = "a table of measures, as in targets = { apex = { aim = 120, within = 2 } }"
        return (), [(at, Misread(words, better="{ apex = { aim = 120, within = 2 } }"))]
    if not raw and wanted:
        words = "at least one target where there is [search]"
        wrong.append((at, Misread(words, fix="add apex = { aim = 120, within = 2 }")))
    targets: list[Target] = []
    for measure, item in raw.items():
        if measure not in MEASURES:
            wrong.append(((*at, measure), unknown_key("targets", measure)))
            continue
        model, found = check_table("targets", item, (*at, measure), Context(reader, measure))
        if isinstance(item, dict):
            found += _wishes((*at, measure), item, model)
        wrong += found
        if model is not None:
            values = {key: getattr(model, key) for key in ("within", "weight", "aim", "at_least", "at_most")}
            targets.append(Target(measure, **values))
    return tuple(targets), wrong


def _wishes(path: Path, raw: Mapping[str, Any], model: Any | None) -> list[tuple[Path, Misread]]:
    """Return what is wrong between the keys of one target."""
    if "aim" in raw and ("at_least" in raw or "at_most" in raw):
        words = "either aim, or at_least and at_most, not aim together with a bound"
        return [(path, Misread(words, fix="keep the aim, or keep the bounds"))]
    if not any(key in raw for key in ("aim", "at_least", "at_most")):
        words = "aim, at_least or at_most beside within"
        return [(path, Misread(words, fix="add aim = …, at_least = … or at_most = …"))]
    if model is not None and model.at_least is not None and model.at_most is not None:
        low, high = model.at_least, model.at_most
        if low > high:
            words = "at_least that is not above at_most"
            bounds = f"at_least = {plain(high)}, at_most = {plain(low)}"
            return [(path, Misread(words, better=f"{{ {bounds}, within = {plain(model.within)} }}"))]
    return []
