"""Options that several commands share."""

from __future__ import annotations

from pathlib import Path

import click

objective_option = click.option(
    "--objective",
    "objective_paths",
    metavar="FILE",
    multiple=True,
    type=click.Path(path_type=Path),
    help="Count the terms of a Python file too. This runs the file.",
)
