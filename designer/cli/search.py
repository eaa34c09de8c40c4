"""`leapwright search`: from a brief to a few proposed sets of constants."""

from __future__ import annotations

from pathlib import Path

import click

from designer.cli.options import objective_option


@click.command("search")
@click.argument("brief_path", metavar="BRIEF|RESULT", type=click.Path(path_type=Path))
@click.option(
    "--from", "start", metavar="SET", help="Hold from this set: today, a label such as B, a mark, a name."
)
@click.option(
    "--hold", metavar="MEASURE", multiple=True, help="Aim at what this measure is for the set of --from."
)
@click.option(
    "--set", "settings", metavar="MEASURE=VALUE", multiple=True, help="Aim a measure at this value instead."
)
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
@objective_option
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
    start: str | None,
    hold: tuple[str, ...],
    settings: tuple[str, ...],
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

    from designer.cli.held import open_job
    from designer.cli.progress import shown
    from designer.objective.modules import load_objective
    from designer.report.results import write_results
    from designer.search.overdetermined import overdetermined
    from designer.search.run import search

    job = open_job(brief_path, out, start, hold, settings)
    brief = job.brief
    for words in (*job.said, *overdetermined(brief)):
        click.echo(words, err=True)
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
        folder = write_results(brief, job.files, result, out, pictures=pictures, progress=progress)
    if as_json:
        from designer.report.document import search_document, to_json

        click.echo(to_json(search_document(result)), nl=False)
    else:
        from designer.report.tables import print_search

        print_search(brief, result, folder)
    return 0 if result.best is not None else 1
