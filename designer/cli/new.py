"""`leapwright new`: a brief to start from."""

from __future__ import annotations

from pathlib import Path

import click


def number(text: str) -> float:
    """Return a number as people type it; what is none gets a message that knows decimal commas."""
    try:
        return float(text)
    except ValueError:
        hint = "write a number, as 120 or 0.76"
        if "," in text:
            hint = f"decimals have a point: write {text.replace(',', '.', 1)}"
        raise click.BadParameter(f"{text!r} is no number; {hint}.") from None


@click.command("new")
@click.argument("file", metavar="[FILE]", required=False, type=click.Path(path_type=Path))
@click.option("--full", is_flag=True, help="Write everything that a brief can say, with comments.")
@click.option(
    "--apex",
    type=number,
    metavar="HEIGHT",
    help="The height that the jump should reach, in the length unit.",
)
@click.option("--airtime", type=number, metavar="SECONDS", help="How long the jump should last.")
@click.option("--length-unit", default="cm", show_default=True, metavar="NAME", help="The unit of lengths.")
def command(
    file: Path | None, full: bool, apex: float | None, airtime: float | None, length_unit: str
) -> int:
    """Write a brief to start from to FILE, or to standard output without one.

    `check` and `search` accept it as it stands. A file that is there already stays as it is.
    """
    from designer.brief.template import new_brief, save_brief

    text = new_brief(full=full, apex=apex, airtime=airtime, length_unit=length_unit)
    if file is None:
        click.echo(text, nl=False)
    else:
        save_brief(file, text)
        click.echo(f"Wrote {file}. Next: leapwright check {file}")
    return 0
