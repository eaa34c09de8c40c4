"""Leapwright: jump constants that hold at every frame rate. The library behind the command.

    brief = designer.read_brief("objectives/night-market-courier.toml")
    verdict = designer.check(brief, brief.today)
    result = designer.search(brief, seed=1)

Each name is imported when it is first used, so that importing the package stays light.
"""

from __future__ import annotations

import importlib
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from designer.analysis.sensitivity import one_increment
    from designer.brief.model import Brief
    from designer.brief.reading import read_brief
    from designer.brief.settings import with_settings
    from designer.brief.template import new_brief
    from designer.errors import Fault, InputError, LeapwrightError
    from designer.motion.rule import Constants, Rule
    from designer.motion.simulate import simulate, trace
    from designer.objective.judge import judge as check
    from designer.objective.modules import load_objective
    from designer.objective.verdict import Verdict
    from designer.report.document import search_document, to_json, verdict_document
    from designer.report.results import write_results
    from designer.search.result import SearchResult
    from designer.search.run import search

__version__ = "0.1.0"

_HOMES = {
    "Brief": "designer.brief.model",
    "Constants": "designer.motion.rule",
    "Fault": "designer.errors",
    "InputError": "designer.errors",
    "LeapwrightError": "designer.errors",
    "Rule": "designer.motion.rule",
    "SearchResult": "designer.search.result",
    "Verdict": "designer.objective.verdict",
    "check": "designer.objective.judge:judge",
    "load_objective": "designer.objective.modules",
    "new_brief": "designer.brief.template",
    "one_increment": "designer.analysis.sensitivity",
    "read_brief": "designer.brief.reading",
    "search": "designer.search:itself",
    "search_document": "designer.report.document",
    "simulate": "designer.motion.simulate",
    "to_json": "designer.report.document",
    "trace": "designer.motion.simulate",
    "verdict_document": "designer.report.document",
    "with_settings": "designer.brief.settings",
    "write_results": "designer.report.results",
}
"""Where each public name lives: module, or module:name where it has another name there, or is the module."""

__all__ = [
    "Brief",
    "Constants",
    "Fault",
    "InputError",
    "LeapwrightError",
    "Rule",
    "SearchResult",
    "Verdict",
    "check",
    "load_objective",
    "new_brief",
    "one_increment",
    "read_brief",
    "search",
    "search_document",
    "simulate",
    "to_json",
    "trace",
    "verdict_document",
    "with_settings",
    "write_results",
]


def __getattr__(name: str) -> Any:
    """Import a public name when it is first used."""
    if name not in _HOMES:
        raise AttributeError(f"module 'designer' has no attribute {name!r}")
    module, _, inside = _HOMES[name].partition(":")
    home = importlib.import_module(module)
    value = home if inside == "itself" else getattr(home, inside or name)
    globals()[name] = value
    return value
