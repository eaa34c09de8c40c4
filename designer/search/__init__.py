"""From a brief to a few proposed sets of constants.

The package itself can be called: `designer.search(brief)` is `designer.search.run.search(brief)`. Otherwise
importing any module in here would hide the library's function `search` behind the package of the same name.
"""

from __future__ import annotations

import sys
from types import ModuleType
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from designer.search.result import SearchResult


class _Search(ModuleType):
    """A package that is also its main function."""

    def __call__(self, *arguments: Any, **options: Any) -> SearchResult:
        """Search for constants; see `designer.search.run.search`."""
        from designer.search.run import search

        return search(*arguments, **options)


sys.modules[__name__].__class__ = _Search
