"""From the tables of a brief to the brief itself, and what is wrong between them."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import replace
from difflib import get_close_matches
from typing import Any

from designer.brief.assemble import EXAMPLES, MISSING, as_rule, names_twice, with_jumps
from designer.brief.choices import Path, Reader
from designer.brief.features import Features, bound
from designer.brief.fields import Context, read_text
from designer.brief.keys import KNOWN, LISTS, TABLES, TOP_CONSTANTS, unknown_key
from designer.brief.levels import LevelReader
from designer.brief.model import Brief, Choice, Gap, JumpBrief, Ledge, Loop, NamedSet, Rates, Target
from designer.brief.rates import merge_rates
from designer.brief.schema import check_table, read_units, wrong_shape
from designer.brief.several import ReadJump, read_jumps, split_set
from designer.brief.targets import read_targets
from designer.brief.terms import DEFAULTS, Terms, Top, as_choice, as_constants
from designer.brief.units import Misread, Units
from designer.errors import Fault, InputError
from designer.motion.rule import (
    CONSTANT_NAMES,
    SHARED,
    Constants,
    FrameTime,
)


class Builder:
    """Reads every table of a brief, gathers all that is wrong, and builds the brief where nothing is."""

    def __init__(
        self, raw: Mapping[str, Any], name: str, levels: Callable[[str], tuple[str, str]] | None = None
    ) -> None:
        self.raw = raw
        self.name = name
        self.faults: list[Fault] = []
        """What is wrong in the level list, which has lines of its own."""
        self._open = levels
        self.wrong: list[tuple[Path, Misread]] = []
        self.tables: dict[str, Any] = {}
        """The model of each table that is there and in order."""
        self.several = "jumps" in raw
        self.jumps: list[ReadJump] = []
        self._jumps_whole = True
        self.in_sets: dict[int, Mapping[str, Mapping[str, float]]] = {}
        """What each of [[sets]] says of single jumps."""
        self.features = Features()
        self.terms: Terms | None = None
        """What the constants of several jumps are made of; None where that cannot be told, or of one jump."""

    def build(self) -> Brief | None:
        """Return the brief, or None where `wrong` says what is."""
        self._names()
        units, wrong = read_units(self.raw.get("units"))
        self.wrong += wrong
        context = Context(Reader(units, self._frame_time()))
        self._read_jumps(context)
        self._read_tables(context)
        self._bind()
        self._levels(units)
        self._loop()
        self._constants()
        targets = self._targets(context.reader)
        self._settle()
        self._twice()
        if self.wrong or self.faults:
            return None
        return self._brief(units, targets)

    def _names(self) -> None:
        for key in self.raw:
            if key not in KNOWN[""]:
                self.wrong.append(((key,), unknown_key("", key)))
        if "title" in self.raw:
            try:
                read_text(self.raw["title"])
            except Misread as misread:
                self.wrong.append((("title",), misread))

    def _read_jumps(self, context: Context) -> None:
        if self.several:
            self.jumps, wrong = read_jumps(self.raw["jumps"], context)
            self.wrong += wrong
            self._jumps_whole = not wrong

    def _read_tables(self, context: Context) -> None:
        for section in ("loop", "rule"):
            misspelled = get_close_matches(section, [key for key in self.raw if key not in KNOWN[""]], 1)
            if section not in self.raw and not misspelled:
                self.wrong.append(((section,), MISSING[section]))
        for section in (*TABLES, *LISTS):
            if section in self.raw and section not in ("units", "targets"):
                self._read_table(section, self.raw[section], context)
        if not self.several:
            for section in ("today", "search"):
                if "gravity_factor" in self._raw(section):
                    self.wrong.append(((section, "gravity_factor"), unknown_key(section, "gravity_factor")))

    def _bind(self) -> None:
        """Check which jumps each feature binds, and keep the features."""
        names = [jump.name for jump in self.jumps]
        for section in LISTS:
            for index, table in self.tables.get(section, ()) if section != "sets" else ():
                by, wrong = bound(table, names, several=self.several)
                self.wrong += [((section, index, *path), misread) for path, misread in wrong]
                self.features.add(section, table, by, {})

    def _frame_time(self) -> FrameTime:
        """Return the frame time as far as it can be told; [rule] itself reports what is wrong with it."""
        rule = self.raw.get("rule")
        said = rule.get("frame_time") if isinstance(rule, dict) else None
        return FrameTime(said) if said in tuple(FrameTime) else FrameTime.EXACT

    def _read_table(self, section: str, raw: object, context: Context) -> None:
        if section not in LISTS:
            self.tables[section], wrong = check_table(section, raw, (section,), context)
            self.wrong += wrong
            return
        if not isinstance(raw, list) or not raw:
            self.wrong.append(((section,), wrong_shape(section, raw)))
            return
        models = []
        for index, item in enumerate(raw):
            rest = self._split_set(item, index, context) if section == "sets" else item
            model, wrong = check_table(section, rest, (section, index), context)
            self.wrong += wrong
            models.append((index, model))
        self.tables[section] = [(index, model) for index, model in models if model is not None]

    def _levels(self, units: Units) -> None:
        """Read the level list, whose rows count as ledges and gaps."""
        if "levels" not in self.raw:
            return
        said = self.raw["levels"]
        if not isinstance(said, str) or not said.strip():
            words = 'the name of a level list in CSV, as in levels = "roofs.csv"'
            self.wrong.append((("levels",), Misread(words, fix="write the file's name in quotation marks")))
            return
        if self._open is None:
            words = "a level list only in a brief that is a file: its name starts from the brief's folder"
            self.wrong.append((("levels",), Misread(words, fix="save the brief, and read it from its file")))
            return
        try:
            name, text = self._open(said)
        except InputError as error:
            self.faults += error.faults
            return
        reader = LevelReader(name, units, [jump.name for jump in self.jumps], several=self.several)
        reader.read(text)
        self.faults += reader.faults
        self.features.ledges += [one for one in reader.features if isinstance(one, Ledge)]
        self.features.gaps += [one for one in reader.features if isinstance(one, Gap)]

    def _split_set(self, item: object, index: int, context: Context) -> object:
        """Return one of [[sets]] without what it says of single jumps, which is kept."""
        names = [jump.name for jump in self.jumps]
        rest, self.in_sets[index], wrong = split_set(item, names, ("sets", index), context)
        if not self.several and isinstance(item, dict) and "gravity_factor" in item:
            wrong.append((("sets", index, "gravity_factor"), unknown_key("sets", "gravity_factor")))
        self.wrong += wrong
        return rest

    def _raw(self, section: str) -> Mapping[str, Any]:
        table = self.raw.get(section)
        return table if isinstance(table, dict) else {}

    def _loop(self) -> None:
        """Check what the kind of loop allows and wants."""
        loop = self.tables.get("loop")
        if loop is None:
            return
        fixed = loop.steps == Loop.FIXED
        if fixed and loop.aim_at is not None:
            allowed = 'aim_at only where steps = "each-frame"; a fixed loop is judged at its own step'
            self.wrong.append((("loop", "aim_at"), Misread(allowed, fix="take aim_at out")))
        if not fixed and "aim_at" not in self._raw("loop"):
            words = "aim_at, the rate at which aims are judged, where the game steps each frame"
            self.wrong.append((("loop", "aim_at"), Misread(words, fix='add aim_at = "60 Hz"')))
        if not fixed:
            for path in self._paths_to("step"):
                allowed = (
                    'step only where [loop] has steps = "fixed"; each-frame games step by the drawn frame'
                )
                self.wrong.append(
                    (path, Misread(allowed, fix="take step out; rates stand in [rates] and aim_at"))
                )

    def _paths_to(self, key: str) -> list[Path]:
        paths: list[Path] = [(s, key) for s in ("today", "search") if key in self._raw(s)]
        sets = self.raw.get("sets")
        if isinstance(sets, list):
            paths += [
                ("sets", i, key) for i, table in enumerate(sets) if isinstance(table, dict) and key in table
            ]
        return paths

    def _needed(self) -> list[str]:
        """Return the constants that have no default in this loop."""
        loop = self.tables.get("loop")
        return ["gravity", "launch_speed"] + (
            ["step"] if loop is not None and loop.steps == Loop.FIXED else []
        )

    def _constants(self) -> None:
        """Check that every constant without a default is said where it is wanted."""
        said = [section for section in ("today", "search") if section in self.raw]
        if not said and not any(jump.has_search or jump.has_today for jump in self.jumps):
            words = "[today] with the constants of the build, or [search] with what may change, or both"
            fix = "add [today] with gravity = … and launch_speed = …"
            self.wrong.append(((), Misread(words, fix=fix)))
            return
        if any(not isinstance(self.raw[section], dict) for section in said):
            return
        for name in self._needed():
            if self.several and name not in SHARED:
                continue  # each jump may name it for itself
            if not any(name in self.raw[section] for section in said):
                words = f"{name} in [today] or [search]; it has no default"
                at: Path = (said[0], name) if said else ()
                self.wrong.append((at, Misread(words, fix=f"add {name} = {EXAMPLES[name]}")))

    def _searched(self) -> bool:
        return "search" in self.raw or any(jump.has_search for jump in self.jumps)

    def _targets(self, reader: Reader) -> tuple[Target, ...]:
        """Return the targets of [targets]; of several jumps each has its own."""
        if self.several:
            if "targets" in self.raw:
                words = "the targets of each jump in [jumps.NAME]; [targets] only in a brief without [jumps]"
                fix = "move them to the jump that is meant, as in [jumps.walk.targets]"
                self.wrong.append((("targets",), Misread(words, fix=fix)))
            elif self._searched() and self._jumps_whole and not any(jump.targets for jump in self.jumps):
                words = "targets for at least one jump: a search needs to know what is wanted"
                fix = "add targets = { apex = { aim = 120, within = 2 } } to a jump"
                self.wrong.append((("jumps",), Misread(words, fix=fix)))
            return ()
        if "targets" not in self.raw:
            if self._searched():
                words = "[targets]: a search needs to know what is wanted"
                fix = "add [targets] with, for example, apex = { aim = 120, within = 2 }"
                self.wrong.append((("targets",), Misread(words, fix=fix)))
            return ()
        targets, wrong = read_targets(self.raw["targets"], ("targets",), reader, wanted=self._searched())
        self.wrong += wrong
        return targets

    def _settle(self) -> None:
        """Settle what the constants of several jumps are made of, where all that says so is in order."""
        broken = any(s in self.raw and self.tables.get(s) is None for s in ("loop", "today", "search"))
        if not self.several or not self._jumps_whole or broken:
            return
        named = {
            section: {
                name: value
                for name in CONSTANT_NAMES
                if (value := getattr(self.tables.get(section), name, None)) is not None
            }
            for section in ("search", "today")
        }
        needed = tuple(self._needed())
        self.terms = Terms(self.jumps, Top(named["search"], named["today"], needed))
        self.wrong += self.terms.wrong

    def _twice(self) -> None:
        """Check that no name stands twice, and that no set takes a name which commands use."""
        for section in LISTS:
            raw = self.raw.get(section)
            tables = raw if isinstance(raw, list) else []
            names = [table.get("name") if isinstance(table, dict) else None for table in tables]
            self.wrong += names_twice(section, [name if isinstance(name, str) else "" for name in names])
        if any(section in self.raw and self.tables.get(section) is None for section in ("today", "search")):
            return  # what a set may fall back on is not known
        for index, table in self.tables.get("sets", ()):
            if self.several:
                self._said_in_set(index, table)
                continue
            for name in self._needed():
                if getattr(table, name) is None and self._base_value(name) is None:
                    words = f"{name}, which neither [today] nor a fixed value of [search] gives"
                    self.wrong.append((("sets", index, name), Misread(words, fix=f"add {name} = …")))

    def _said_in_set(self, index: int, table: Any) -> None:
        """Check that a set of several jumps says all that nothing else says."""
        if self.terms is None or self.terms.wrong:
            return
        for name in self._needed():
            lack = [
                one.name
                for one in self.jumps
                if self._in_set(self.terms, index, table, one.name)[name] is None
            ]
            if lack:
                who = "" if name in SHARED else f" for {', '.join(lack)}"
                words = f"{name}{who}, which neither today nor a fixed value of a search gives"
                fix = f"add {name} = …" if name in SHARED else f"add {lack[0]} = {{ {name} = … }}"
                self.wrong.append((("sets", index, name), Misread(words, fix=fix)))

    def _in_set(self, terms: Terms, index: int, table: Any, jump: str) -> dict[str, float | None]:
        """Return what a set makes of the constants of one of several jumps."""
        said = {name: getattr(table, name) for name in CONSTANT_NAMES}
        top = {name: value for name, value in said.items() if value is not None}
        return terms.in_set(jump, top, self.in_sets[index])

    def _base_value(self, name: str) -> float | None:
        """Return what a constant is where nothing else is said: today's, else search's only value."""
        today, search = self.tables.get("today"), self.tables.get("search")
        value = getattr(today, name, None)
        if value is None:
            chosen = getattr(search, name, None)
            if isinstance(chosen, Choice):
                value = chosen.values[0] if chosen.values is not None and chosen.is_fixed else None
            else:
                value = chosen
        return DEFAULTS.get(name) if value is None else value

    def _base(self) -> Constants | None:
        values = {name: self._base_value(name) for name in CONSTANT_NAMES}
        if values["gravity"] is None or values["launch_speed"] is None:
            return None
        return as_constants(values)

    def _today(self) -> Constants | None:
        """Return the build's constants; None where [today] does not give all that have no default."""
        today = self.tables.get("today")
        if today is None or any(getattr(today, name) is None for name in self._needed()):
            return None
        return as_constants({name: getattr(today, name) for name in CONSTANT_NAMES})

    def _search(self) -> dict[str, Choice] | None:
        """Return a choice for each constant that the loop has; step_up and edge_allowance are fixed ones."""
        search = self.tables.get("search")
        if search is None:
            return None
        fixed = self.tables["loop"].steps == Loop.FIXED
        choices: dict[str, Choice] = {}
        for name in TOP_CONSTANTS:
            if name == "step" and not fixed:
                continue
            chosen = getattr(search, name)
            if chosen is None:
                chosen = self._base_value(name)
                if chosen is None:
                    continue  # reported already: it is named nowhere
            choices[name] = as_choice(chosen)
        return choices

    def _sets(self) -> tuple[NamedSet, ...]:
        sets = []
        for index, table in self.tables.get("sets", ()):
            if self.terms is not None:
                each = [self._in_set(self.terms, index, table, jump.name) for jump in self.jumps]
                jumps = tuple(as_constants(values) for values in each)
                sets.append(NamedSet(table.name, jumps[0], jumps))
                continue
            own = {name: getattr(table, name) for name in CONSTANT_NAMES}
            values = {n: self._base_value(n) if value is None else value for n, value in own.items()}
            sets.append(NamedSet(table.name, as_constants(values)))
        return tuple(sets)

    def _rates(self) -> Rates:
        table = self.tables.get("rates")
        if table is None:
            return Rates(())
        supported, watched = merge_rates(table.supported, table.watched)
        return Rates(supported, watched, table.spread_weight)

    def _brief(self, units: Units, targets: tuple[Target, ...]) -> Brief:
        loop = self.tables["loop"]
        brief = Brief(
            name=self.name,
            title=str(self.raw.get("title", self.name)).strip(),
            length_unit=units.length,
            loop=Loop(loop.steps),
            rule=as_rule(self.tables["rule"]),
            rates=self._rates(),
            aim_at=loop.aim_at,
            jumps=(JumpBrief(targets=targets),),
            ledges=tuple(self.features.ledges),
            gaps=tuple(self.features.gaps),
            blocks=tuple(self.features.blocks),
            ceilings=tuple(self.features.ceilings),
            sets=self._sets(),
            lengths={name: float(length) for name, length in units.named.items()},
        )
        if self.terms is not None:
            said = "today" in self.raw or any(jump.has_today for jump in self.jumps)
            return with_jumps(brief, self.jumps, self.terms, today=said, searched=self._searched())
        return replace(brief, today=self._today(), search=self._search(), base=self._base())
