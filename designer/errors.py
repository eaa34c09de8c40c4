"""Every error that a user can meet: one base class, one way of saying what is wrong."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Fault:
    """One thing wrong in what a person gave: where, what stands there, what may stand there, a way out."""

    place: str
    """File and line, or the command's option: "rooftop.toml, line 12"."""
    field: str
    """The dotted name of what is wrong: "search.gravity.every"; empty where no one key is to blame."""
    value: str
    """What was found there, as written; empty where the field is missing."""
    allowed: str
    """What may stand there, with its range and unit."""
    fix: str
    """A corrected line, or what to do next."""

    def __str__(self) -> str:
        what = " = ".join(part for part in (self.field, self.value) if part)
        if self.field and not self.value and self.fix.startswith("add "):
            what = f"{self.field} is missing"
        head = f"{self.place}: {what}" if what else self.place
        return f"{head}\n    allowed: {self.allowed}\n    fix: {self.fix}"


class LeapwrightError(Exception):
    """Raised where a command cannot do what it was asked; the message is for the person who asked."""


class InputError(LeapwrightError, ValueError):
    """Raised where something that a person gave cannot be used; holds every fault that was found."""

    def __init__(self, *faults: Fault) -> None:
        self.faults = faults
        super().__init__("\n".join(str(fault) for fault in faults))
