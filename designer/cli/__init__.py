"""The command `leapwright`: one small file a command, each loaded only when it is called."""

from __future__ import annotations

import importlib
import sys
from collections.abc import Sequence

import click

from designer import __version__
from designer.errors import LeapwrightError

COMMANDS = {
    "new": "Write a brief to start from.",
    "check": "Show constants at every rate, and the update rule read back.",
    "search": "Search constants for a brief and propose a few.",
}
"""Every command with its line in the overview. The text stands here so that the overview loads no command."""


class Commands(click.Group):
    """Commands that are imported when they are called."""

    def list_commands(self, ctx: click.Context) -> list[str]:
        """Return the names in the order in which a person meets them."""
        return list(COMMANDS)

    def get_command(self, ctx: click.Context, cmd_name: str) -> click.Command | None:
        """Import and return one command; None where there is none of that name."""
        if cmd_name not in COMMANDS:
            return None
        command: click.Command = importlib.import_module(f"designer.cli.{cmd_name}").command
        return command

    def format_commands(self, ctx: click.Context, formatter: click.HelpFormatter) -> None:
        """Write the overview from COMMANDS alone."""
        with formatter.section("Commands"):
            formatter.write_dl(list(COMMANDS.items()))


@click.group(cls=Commands, context_settings={"help_option_names": ["-h", "--help"], "max_content_width": 100})
@click.version_option(__version__, prog_name="leapwright")
def leapwright() -> None:
    """Jump constants that hold at every frame rate.

    Write what the game wants into a brief, then search:

    \b
      leapwright new my-game.toml
      leapwright search my-game.toml

    Exit status: 0 done; 1 done, and the answer is no (a ledge fails, nothing is feasible); 2 could not.
    """


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the command and return its exit status; every error becomes one message, never a traceback."""
    try:
        status = leapwright.main(args=arguments, prog_name="leapwright", standalone_mode=False)
    except click.ClickException as error:
        error.show()
        return 2
    except LeapwrightError as error:
        click.echo(str(error), err=True)
        return 2
    except (KeyboardInterrupt, click.Abort):
        click.echo("Stopped. Nothing was written.", err=True)
        return 2
    except BrokenPipeError:
        # The reader of a pipe went away, as `head` does: nothing to tell anybody.
        sys.stderr.close()
        return 0
    return int(status or 0)
