"""The command `photonfate`. A module a command; each is imported when it is asked for."""

import os
import sys
from importlib import import_module
from typing import Any

import click

from optics.errors import InputError

COMMANDS = (  # in the order in which people meet them
    "start",
    "solve",
    "yields",
    "sweep",
    "compare",
    "tolerance",
    "audit",
    "inplane",
    "indepth",
    "receivers",
    "handoff",
    "material",
)
BAD_INPUT = 2
STOPPED = 130


class Commands(click.Group):
    """A group whose commands live in modules of their own, and which turns faults into lines and exit codes."""

    def list_commands(self, ctx: click.Context) -> list[str]:  # noqa: ARG002  # click hands it in
        """Return the names of the commands."""
        return list(COMMANDS)

    def get_command(self, ctx: click.Context, cmd_name: str) -> click.Command | None:  # noqa: ARG002
        """Return the command of this name, None when there is none."""
        if cmd_name not in COMMANDS:
            return None
        command: click.Command = getattr(import_module(f"optics.cli.{cmd_name}"), cmd_name)
        return command

    def invoke(self, ctx: click.Context) -> Any:
        """Run the command: 2 for bad input, 130 when stopped by the user, silence when nobody reads on."""
        for stream in (sys.stdout, sys.stderr):
            if hasattr(stream, "reconfigure"):
                stream.reconfigure(errors="replace")  # a title may hold a sign that the terminal cannot show
        try:
            value = super().invoke(ctx)
            sys.stdout.flush()
        except InputError as error:
            for fault in error.faults:
                click.echo(fault, err=True)
            ctx.exit(BAD_INPUT)
        except KeyboardInterrupt:
            click.echo("stopped", err=True)
            ctx.exit(STOPPED)
        except BrokenPipeError:
            # Whoever read the screen has gone; the files are written. Python must not try to flush at exit.
            os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
            ctx.exit(0)
        return value


@click.group(cls=Commands, context_settings={"help_option_names": ["-h", "--help"], "max_content_width": 100})
@click.version_option(package_name="photonfate")
def main() -> None:
    """Compute where light born in a thin film goes.

    \b
    Begin with:
      photonfate start my-film
      photonfate solve my-film/stack.toml
    """
