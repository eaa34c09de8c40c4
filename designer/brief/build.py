"""From the tables of a brief to the brief itself, and what is wrong between them."""

from __future__ import annotations

import math
from collections.abc import Mapping
from difflib import get_close_matches
from typing import Any

from designer.brief.choices import Path, Reader
from designer.brief.keys import KNOWN, LISTS, TABLES, unknown_key
from designer.brief.model import Brief, Choice, Gap, JumpBrief, Ledge, Loop, NamedSet, Rates, Target
from designer.brief.rates import merge_rates
from designer.brief.schema import Context, _text, check_table, read_units, wrong_shape
from designer.brief.units import Misread, Units, plain
from designer.motion.measures import MEASURES
from designer.motion.rule import (
    CONSTANT_NAMES,
    CONTACT_TOLERANCE,
    SEARCHABLE,
    Constants,
    FrameTime,
    PositionRounding,
    Rounding,
    Rule,
)

DEFAULTS = {
    "grain": 0.0,
    "run_speed": 0.0,
    "fall_factor": 1.0,
    "terminal_speed": math.inf,
    "step_up": 0.0,
    "edge_allowance": 0.0,
}
"""Constants that need not be said (DEVELOPERS.md, brief); infinity means no terminal speed."""


class Builder:
    """Reads every table of a brief, gathers all that is wrong, and builds the brief where nothing is."""

    def __init__(self, raw: Mapping[str, Any], name: str) -> None:
        self.raw = raw
        self.name = name
        self.wrong: list[tuple[Path, Misread]] = []
        self.tables: dict[str, Any] = {}
        """The model of each table that is there and in order."""

    def build(self) -> Brief | None:
        """Return the brief, or None where `wrong` says what is."""
        self._names()
        units, wrong = read_units(self.raw.get("units"))
        self.wrong += wrong
        self._read_tables(units)
        self._loop()
        self._constants()
        targets = self._targets(units)
        self._twice()
        if self.wrong:
            return None
        return self._brief(units, targets)

    def _names(self) -> None:
        for key in self.raw:
            if key not in KNOWN[""]:
                self.wrong.append(((key,), unknown_key("", key)))
        if "title" in self.raw:
            try:
                _text(self.raw["title"])
            except Misread as misread:
                self.wrong.append((("title",), misread))

    def _read_tables(self, units: Units) -> None:
        for section in ("loop", "rule"):
            misspelled = get_close_matches(section, [key for key in self.raw if key not in KNOWN[""]], 1)
            if section not in self.raw and not misspelled and "with" not in self.raw:
                self.wrong.append(((section,), _MISSING[section]))
        context = Context(Reader(units, self._frame_time()))
        for section in (*TABLES, *LISTS):
            if section in self.raw and section not in ("units", "targets"):
                self._read_table(section, self.raw[section], context)

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
            model, wrong = check_table(section, item, (section, index), context)
            self.wrong += wrong
            models.append((index, model))
        self.tables[section] = [(index, model) for index, model in models if model is not None]

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
        if "with" in self.raw or "jumps" in self.raw:
            return  # these may say what is missing here, and are refused as not yet known
        said = [section for section in ("today", "search") if section in self.raw]
        if not said:
            words = "[today] with the constants of the build, or [search] with what may change, or both"
            fix = "add [today] with gravity = … and launch_speed = …"
            self.wrong.append(((), Misread(words, fix=fix)))
            return
        if any(not isinstance(self.raw[section], dict) for section in said):
            return
        for name in self._needed():
            if not any(name in self.raw[section] for section in said):
                words = f"{name} in [today] or [search]; it has no default"
                self.wrong.append(((said[0], name), Misread(words, fix=f"add {name} = {_EXAMPLES[name]}")))
        if "search" in said and "targets" not in self.raw:
            words = "[targets]: a search needs to know what is wanted"
            fix = "add [targets] with, for example, apex = { aim = 120, within = 2 }"
            self.wrong.append((("targets",), Misread(words, fix=fix)))

    def _targets(self, units: Units) -> tuple[Target, ...]:
        raw = self.raw.get("targets", {})
        if not isinstance(raw, dict):
            words = (
                "[targets] alone on a line, then one line a measure, as in apex = { aim = 120, within = 2 }"
            )
            self.wrong.append((("targets",), Misread(words, fix="write [targets]")))
            return ()
        if not raw and "targets" in self.raw and "search" in self.raw:
            words = "at least one target where there is [search]"
            self.wrong.append((("targets",), Misread(words, fix="add apex = { aim = 120, within = 2 }")))
        targets: list[Target] = []
        for measure, item in raw.items():
            if measure not in MEASURES:
                self.wrong.append((("targets", measure), unknown_key("targets", measure)))
                continue
            context = Context(Reader(units, self._frame_time()), measure)
            model, wrong = check_table("targets", item, ("targets", measure), context)
            if isinstance(item, dict):
                wrong += _wishes(measure, item, model)
            self.wrong += wrong
            if model is not None:
                values = {
                    key: getattr(model, key) for key in ("within", "weight", "aim", "at_least", "at_most")
                }
                targets.append(Target(measure, **values))
        return tuple(targets)

    def _twice(self) -> None:
        """Check that no name stands twice, and that no set takes a name which commands use."""
        for section in LISTS:
            raw = self.raw.get(section)
            tables = raw if isinstance(raw, list) else []
            names = [table.get("name") if isinstance(table, dict) else None for table in tables]
            self._names_twice(section, [name if isinstance(name, str) else "" for name in names])
        if any(section in self.raw and self.tables.get(section) is None for section in ("today", "search")):
            return  # what a set may fall back on is not known
        for index, table in self.tables.get("sets", ()):
            for name in self._needed():
                if getattr(table, name) is None and self._base_value(name) is None:
                    words = f"{name}, which neither [today] nor a fixed value of [search] gives"
                    self.wrong.append((("sets", index, name), Misread(words, fix=f"add {name} = …")))

    def _names_twice(self, section: str, names: list[str]) -> None:
        seen: dict[str, int] = {}
        for index, name in enumerate(names):
            path = (section, index, "name")
            first = seen.setdefault(name.strip().casefold(), index)
            if name and first != index:
                words = f"a name of its own for each of [[{section}]]; number {first + 1} has it already"
                self.wrong.append((path, Misread(words, fix="give one of them another name")))
            if section == "sets" and name == "today":
                words = 'a name other than "today", which is the set of [today]'
                self.wrong.append((path, Misread(words, fix='name it differently, as in "yesterday"')))

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
        return _as_constants(values)

    def _today(self) -> Constants | None:
        """Return the build's constants; None where [today] does not give all that have no default."""
        today = self.tables.get("today")
        if today is None or any(getattr(today, name) is None for name in self._needed()):
            return None
        return _as_constants({name: getattr(today, name) for name in CONSTANT_NAMES})

    def _search(self) -> dict[str, Choice] | None:
        """Return a choice for each constant that the loop has; step_up and edge_allowance are fixed ones."""
        search = self.tables.get("search")
        if search is None:
            return None
        fixed = self.tables["loop"].steps == Loop.FIXED
        choices: dict[str, Choice] = {}
        for name in CONSTANT_NAMES:
            if name == "step" and not fixed:
                continue
            chosen = getattr(search, name)
            if name not in SEARCHABLE and chosen is not None:
                chosen = Choice((chosen,), text=plain(chosen))
            if chosen is None:
                value = self._base_value(name)
                if value is None:
                    continue  # reported already: it is named nowhere
                chosen = Choice((value,), text="none" if math.isinf(value) else plain(value))
            choices[name] = chosen
        return choices

    def _sets(self) -> tuple[NamedSet, ...]:
        sets = []
        for _, table in self.tables.get("sets", ()):
            own = {name: getattr(table, name) for name in CONSTANT_NAMES}
            values = {n: self._base_value(n) if value is None else value for n, value in own.items()}
            sets.append(NamedSet(table.name, _as_constants(values)))
        return tuple(sets)

    def _rates(self) -> Rates:
        table = self.tables.get("rates")
        if table is None:
            return Rates(())
        supported, watched = merge_rates(table.supported, table.watched)
        return Rates(supported, watched, table.spread_weight)

    def _brief(self, units: Units, targets: tuple[Target, ...]) -> Brief:
        loop = self.tables["loop"]
        ledges = [t for _, t in self.tables.get("ledges", ())]
        gaps = [t for _, t in self.tables.get("gaps", ())]
        return Brief(
            name=self.name,
            title=str(self.raw.get("title", self.name)).strip(),
            length_unit=units.length,
            loop=Loop(loop.steps),
            rule=_as_rule(self.tables["rule"]),
            rates=self._rates(),
            aim_at=loop.aim_at,
            today=self._today(),
            search=self._search(),
            base=self._base(),
            jumps=(JumpBrief(targets=targets),),
            ledges=tuple(Ledge(t.name, t.height, t.must, t.margin) for t in ledges),
            gaps=tuple(Gap(t.name, t.width, t.must, t.far_level, t.margin) for t in gaps),
            sets=self._sets(),
            lengths={name: float(length) for name, length in units.named.items()},
        )


_EXAMPLES = {"gravity": "1600", "launch_speed": "620", "step": '"8 ms"'}

_MISSING = {
    "loop": Misread(
        '[loop] with steps = "each-frame" or "fixed": who decides how long a step is',
        fix='add [loop], and below it steps = "each-frame" and aim_at = "60 Hz", or steps = "fixed"',
    ),
    "rule": Misread(
        "[rule] with the integrator that the build uses: explicit, semi-implicit or average",
        fix='add [rule], and below it integrator = "semi-implicit"',
    ),
}


def _wishes(measure: str, raw: Mapping[str, Any], model: Any | None) -> list[tuple[Path, Misread]]:
    """Return what is wrong between the keys of one target."""
    path: Path = ("targets", measure)
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


def _as_constants(values: Mapping[str, float | None]) -> Constants:
    """Return constants with the defaults filled in; infinity becomes no terminal speed."""
    said = {name: value for name, value in values.items() if value is not None}
    if math.isinf(said.get("terminal_speed", math.inf)):
        said.pop("terminal_speed", None)
    return Constants(**said)


def _as_rule(table: Any) -> Rule:
    tolerance = CONTACT_TOLERANCE if table.contact_tolerance is None else table.contact_tolerance
    return Rule(
        integrator=table.integrator,
        rounding=Rounding(table.rounding.mode, table.rounding.at, table.rounding.carry),
        frame_time=table.frame_time,
        landing_test=table.landing_test,
        launch_gravity=table.launch_gravity,
        contact_tolerance=tolerance,
        position=PositionRounding(table.position.grain, table.position.mode),
    )
