"""What the level wants: ledges, gaps, blocks and ceilings, each with the jumps that it binds."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

from designer.brief.choices import Path
from designer.brief.model import ONLY_JUMP, Block, Ceiling, Gap, Ledge
from designer.brief.several import unknown_jump
from designer.brief.units import Misread

MUSTS = ("reach", "cross", "clear")
"""What a jump must be able to do; all else it must not, which binds every jump where nothing else is said."""


@dataclass(slots=True)
class Features:
    """The features of a brief, kind by kind."""

    ledges: list[Ledge] = field(default_factory=list)
    gaps: list[Gap] = field(default_factory=list)
    blocks: list[Block] = field(default_factory=list)
    ceilings: list[Ceiling] = field(default_factory=list)

    def add(self, section: str, table: Any, by: tuple[str, ...], place: Mapping[str, str]) -> None:
        """Add one feature that its table describes, bound to the jumps in `by`."""
        match section:
            case "ledges":
                self.ledges.append(Ledge(table.name, table.height, table.must, table.margin, by, place))
            case "gaps":
                gap = Gap(table.name, table.width, table.must, table.far_level, table.margin, by, place)
                self.gaps.append(gap)
            case "blocks":
                block = Block(table.name, table.height, table.length, table.must, table.margin, by, place)
                self.blocks.append(block)
            case "ceilings":
                high, body = table.height, table.body_height
                self.ceilings.append(Ceiling(table.name, high, body, table.must, table.margin, by, place))


def bound(
    table: Any, jumps: Sequence[str], *, several: bool
) -> tuple[tuple[str, ...], list[tuple[Path, Misread]]]:
    """Return the jumps that a feature binds, in file order, and what is wrong with its `by`, with paths.

    several: whether the brief has [jumps]; without, its one jump is named "jump".
    """
    if not several:
        if table.by in ((), (ONLY_JUMP,)):
            return (ONLY_JUMP,), []
        words = f'names of jumps of [jumps]; a brief without [jumps] has one, named "{ONLY_JUMP}"'
        return (), [(("by",), Misread(words, fix="take by out, or describe the jumps in [jumps.NAME]"))]
    wrong: list[tuple[Path, Misread]] = []
    for name in table.by:
        if name not in jumps:
            wrong.append((("by",), unknown_jump(name, jumps)))
    if not table.by:
        if table.must in MUSTS and len(jumps) > 1:
            words = (
                f'by = [ … ], the jumps that must {table.must} it; only "stay-out" binds every jump by itself'
            )
            wrong.append((("by",), Misread(words, fix=f'add by = ["{jumps[0]}"], or the jump that is meant')))
        return tuple(jumps), wrong
    return tuple(name for name in jumps if name in table.by), wrong
