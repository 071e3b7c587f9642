"""`photonfate tolerance`: shares with the spread of the inputs."""

from pathlib import Path

import click


@click.command(short_help="Say how far shares spread within what is known of the inputs.")
@click.argument("stack", type=click.Path(path_type=Path))
@click.option(
    "--samples", type=int, default=512, show_default=True, help="A power of two; times (inputs + 2) are solved."
)
@click.option("--seed", type=click.IntRange(0), default=0, show_default=True, help="Of the scrambled draws.")
@click.option("--workers", type=click.IntRange(1), default=1, show_default=True, help="Processes on this machine.")
@click.option("--cluster", default="", metavar="ADDRESS", help="A Dask scheduler that runs already.")
@click.option("--output", type=click.Path(path_type=Path), help="Folder for the results [default: <STACK>-tolerance].")
@click.option("--replace", is_flag=True, help="Write over a folder that is not an untouched result of this tool.")
@click.option("--restart", is_flag=True, help="Drop an unfinished run instead of going on with it.")
def tolerance(
    stack: Path,
    samples: int,
    seed: int,
    workers: int,
    cluster: str,
    output: Path | None,
    replace: bool,
    restart: bool,
) -> None:
    """Draw the inputs of a stack from their tolerances; where it gives none, defaults stand in and are said.

    A run that was stopped goes on when the same command is given again.

    \b
    Example:
      photonfate start my-film
      photonfate tolerance my-film/stack.toml --samples 16
    """
    from optics.cli.progress import progress
    from optics.cli.study import go_on
    from optics.output.folder import check_target
    from optics.output.inputs import files_of
    from optics.output.spreads import report, write_spread
    from optics.stackfile import read_stack
    from optics.study.basis import basis
    from optics.study.engine import Place
    from optics.study.spread import drawn_points, spread
    from optics.study.sweep import work

    loaded = read_stack(stack)
    draws = drawn_points(loaded, samples=samples, seed=seed)
    folder = output or stack.with_name(f"{stack.stem}-tolerance")
    check_target(folder, replace=replace, needed=files_of(loaded, stack))
    rests_on = basis(loaded, stack_file=stack, samples=samples, seed=seed)
    with go_on(folder, rests_on, len(draws.plan.points), restart=restart) as journal:
        journal.fill(work, draws.plan.pack, Place(workers, cluster), progress(journal.done), units=draws.plan.units)
        found = spread(draws, journal.answers())
        write_spread(found, loaded, folder, stack_file=stack, seed=seed, replace=replace)
        journal.remove()
    click.echo(report(found, loaded, folder=folder))
