"""Objective modules: Python files that add terms of their own to the miss, named on the command line."""

from __future__ import annotations

import runpy
import sys
from collections.abc import Callable, Mapping, Sequence
from contextlib import redirect_stdout
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np

from designer.errors import Fault, InputError
from designer.motion.rule import OWN, SEARCHABLE, SHARED
from designer.objective.table import Designs, JumpTable

if TYPE_CHECKING:
    from numpy.typing import NDArray

Deviations = Callable[[Mapping[str, Any], Mapping[str, Any]], Mapping[str, Any]]


@dataclass(frozen=True, slots=True)
class ObjectiveModule:
    """A loaded objective module.

    The file defines `deviations(constants, jumps)`: constants maps each constant's name to an array
    (designs,) (of several jumps "walk.launch_speed", but gravity, step and grain plainly), jumps maps each
    jump's name to its measures, by name, each with the arrays nominal, low and high (designs,). It returns
    one array (designs,) a term, by name: how far off, in tolerances.
    """

    name: str
    deviations: Deviations

    def terms(
        self, designs: Designs | Mapping[str, Designs], tables: Sequence[JumpTable]
    ) -> dict[str, NDArray[np.float64]]:
        """Return the module's terms for these designs, named "module: term"; NaN where a jump never lands.

        Of several jumps, designs are those of each by its name, and the module sees gravity, step and grain
        once and the others as "walk.launch_speed".
        Raises InputError where the module fails or returns something else than one number a design.
        """
        constants = _constants(designs)
        jumps = {table.name: table.measures for table in tables}
        try:
            with redirect_stdout(sys.stderr):  # standard output may be a JSON document
                found = dict(self.deviations(constants, jumps))
            count = len(tables[0].lands)
            terms = {
                f"{self.name}: {term}": np.broadcast_to(np.asarray(values, dtype=np.float64), (count,))
                for term, values in found.items()
            }
        except (Exception, SystemExit) as error:  # whatever a person's own code raises
            raise self._fault(f"{type(error).__name__}: {error}") from error
        lands = np.logical_and.reduce([table.lands for table in tables])
        for term, values in terms.items():
            if not np.isfinite(values[lands]).all():
                raise self._fault(f"{term} is not a finite number for every design that lands")
        return terms

    def _fault(self, what: str) -> InputError:
        return InputError(
            Fault(
                place=f"objective module {self.name}",
                field="deviations",
                value=what,
                allowed="a mapping of names to one finite number a design, in tolerances",
                fix="correct the module; objectives/on_the_beat.py is one to start from",
            )
        )


def _constants(designs: Designs | Mapping[str, Designs]) -> dict[str, NDArray[np.float64]]:
    """Return the constants by the names under which a module sees them."""
    if isinstance(designs, Designs):
        return {name: getattr(designs, name) for name in SEARCHABLE}
    each = list(designs.items())
    if len(each) == 1:
        return _constants(each[0][1])
    shared = {name: getattr(each[0][1], name) for name in SHARED}
    return shared | {f"{jump}.{name}": getattr(one, name) for jump, one in each for name in OWN}


def load_objective(path: Path) -> ObjectiveModule:
    """Load a Python file as an objective module. This runs the file: only ever do so on a person's word.

    Raises InputError where there is no such file, it cannot run, or it defines no `deviations`.
    """

    def fault(value: str, fix: str) -> InputError:
        allowed = "a Python file that defines deviations(constants, jumps)"
        return InputError(Fault("--objective", str(path.name), value, allowed, fix))

    if not path.is_file():
        raise fault("no such file", "name a file; objectives/on_the_beat.py is one to start from")
    try:
        with redirect_stdout(sys.stderr):
            space = runpy.run_path(str(path))
    except (Exception, SystemExit) as error:
        raise fault(f"{type(error).__name__}: {error}", "make the file run by itself") from error
    function = space.get("deviations")
    if not callable(function):
        raise fault("defines no deviations", "add def deviations(constants, jumps): …")
    return ObjectiveModule(path.stem, function)
