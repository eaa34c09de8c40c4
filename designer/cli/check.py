"""`leapwright check`: constants at every rate, and the rule read back."""

from __future__ import annotations

from pathlib import Path

import click

from designer.cli.options import objective_option


@click.command("check")
@click.argument("source", metavar="BRIEF|RESULT", type=click.Path(path_type=Path))
@click.option(
    "--set", "settings", metavar="NAME=VALUE", multiple=True, help="Change one constant; repeat at will."
)
@click.option(
    "--pick", metavar="SET", help="Which set: today, a label such as B, a mark, or a name of [[sets]]."
)
@objective_option
@click.option("--json", "as_json", is_flag=True, help="Print one JSON document and nothing else.")
def command(
    source: Path,
    settings: tuple[str, ...],
    pick: str | None,
    objective_paths: tuple[Path, ...],
    as_json: bool,
) -> int:
    """Show constants at every rate of a brief, which ledges and gaps hold, and the update rule read back.

    Exit status 1 where a ledge or gap fails or the jump never lands.
    """
    from designer.cli.source import open_source, pick_set, terms_of
    from designer.objective.judge import judge
    from designer.objective.modules import load_objective

    brief, document = open_source(source)
    name, sets = pick_set(source, brief, document, pick, settings)
    objectives = [load_objective(path) for path in objective_paths]
    if terms_of(document) and not objectives:
        note = "The search counted terms of an objective module; name it with --objective to count them here."
        click.echo(note, err=True)
    # Plain Python throughout: most checks are done before a compiler would be loaded.
    verdict = judge(brief, sets, compiled=False, objectives=objectives)
    if as_json:
        from designer.report.document import to_json, verdict_document

        click.echo(to_json(verdict_document(verdict)), nl=False)
    else:
        from designer.report.tables import print_check
        from designer.search.overdetermined import overdetermined

        print_check(brief, name, verdict)
        for words in overdetermined(brief):
            click.echo(words)
    return 0 if verdict.feasible else 1
