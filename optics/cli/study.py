"""What the commands with long work share: an unfinished run beside the results, and how a stop is told."""

from collections.abc import Iterator, Mapping
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

if TYPE_CHECKING:
    from optics.study.journal import Journal


@contextmanager
def go_on(folder: Path, basis: Mapping[str, Any], points: int, *, restart: bool) -> Iterator["Journal"]:
    """Give the journal of an unfinished run, new or found beside the result folder; say what a stop has kept."""
    from optics.study.engine import UnfinishedError
    from optics.study.journal import Journal

    place = folder.with_name(f"{folder.name}.unfinished")
    with Journal(place, basis=basis, points=points, restart=restart) as journal:
        if journal.done:
            click.echo(f"{place}: going on, {journal.done} of {points} points are there", err=True)
        try:
            yield journal
        except KeyboardInterrupt:
            click.echo(f"{place}: {journal.done} of {points} points are kept; the same command goes on", err=True)
            raise
        except UnfinishedError as error:
            click.echo(
                f"{place}: {error}; {journal.done} of {points} points are kept, the same command tries again", err=True
            )
            raise click.exceptions.Exit(1) from None
