"""`photonfate start`: a small project to begin from."""

from pathlib import Path

import click


@click.command(short_help="Make a small project to begin from.")
@click.argument("folder", type=click.Path(path_type=Path))
def start(folder: Path) -> None:
    """Make a small project with an invented film in FOLDER, ready to be solved.

    \b
    Example:
      photonfate start my-film
      photonfate solve my-film/stack.toml
    """
    from optics.output.starter import write_starter

    names = write_starter(folder)
    click.echo(f"Made {folder} with {', '.join(names)}. The film and its numbers are invented.")
    click.echo(f"Next: photonfate solve {_quoted(folder / 'stack.toml')}")


def _quoted(path: Path) -> str:
    return f'"{path}"' if " " in str(path) else str(path)
