"""`leapwright search`: from a brief to a few proposed sets of constants."""

from __future__ import annotations

from pathlib import Path

import click


@click.command("search")
@click.argument("brief_path", metavar="BRIEF", type=click.Path(path_type=Path))
@click.option(
    "--seed", default=0, show_default=True, type=click.IntRange(min=0), help="Seed of all randomness."
)
@click.option(
    "--workers", type=click.IntRange(1, 256), help="Threads; never changes a result.  [default: cores]"
)
@click.option(
    "--trials", default=600, show_default=True, type=click.IntRange(min=1), help="Length of a study."
)
@click.option(
    "--budget",
    default=20_000_000,
    show_default=True,
    type=click.IntRange(min=1),
    help="Largest grid that is scanned point by point; beyond it a study searches.",
)
@click.option(
    "--objective",
    "objective_paths",
    metavar="FILE",
    multiple=True,
    type=click.Path(path_type=Path),
    help="Add the terms of a Python file. This runs the file.",
)
@click.option(
    "--out",
    default="results",
    show_default=True,
    type=click.Path(path_type=Path, file_okay=False),
    help="Where the folder of results goes.",
)
@click.option("--pictures/--no-pictures", default=True, show_default=True, help="Draw figures too.")
@click.option("--json", "as_json", is_flag=True, help="Print one JSON document and nothing else.")
def command(
    brief_path: Path,
    seed: int,
    workers: int | None,
    trials: int,
    budget: int,
    objective_paths: tuple[Path, ...],
    out: Path,
    pictures: bool,
    as_json: bool,
) -> int:  # fmt: skip
    """Search constants for a brief; print a few proposals and leave them in results/NAME/.

    Exit status 1 where nothing is feasible: then the demands that clash are named.
    """
    import os

    from designer.brief.reading import read_brief
    from designer.cli.progress import shown
    from designer.objective.modules import load_objective
    from designer.report.results import write_results
    from designer.search.run import search

    brief = read_brief(brief_path)
    source = brief_path.read_bytes()
    objectives = [load_objective(path) for path in objective_paths]
    with shown(not as_json) as progress:
        result = search(
            brief,
            seed=seed,
            workers=workers or os.cpu_count() or 1,
            trials=trials,
            budget=budget,
            objectives=objectives,
            progress=progress,
        )
        folder = write_results(brief, source, result, out, pictures=pictures, progress=progress)
    if as_json:
        from designer.report.document import search_document, to_json

        click.echo(to_json(search_document(result)), nl=False)
    else:
        from designer.report.tables import print_search

        print_search(brief, result, folder)
    return 0 if result.best is not None else 1
