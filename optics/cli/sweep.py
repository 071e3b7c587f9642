"""`photonfate sweep`: a stack at many points."""

from pathlib import Path

import click


@click.command(short_help="Solve a stack at many thicknesses, materials or cases.")
@click.argument("file", metavar="STACK", type=click.Path(path_type=Path))
@click.option("--vary", multiple=True, metavar='"KEY = VALUES"', help="An axis: A to B step C, or values with commas.")
@click.option(
    "--cases", type=click.Path(path_type=Path), help="A CSV table instead: a row a case, columns are key paths."
)
@click.option("--spectra", is_flag=True, help="Keep every wavelength too.")
@click.option("--best", multiple=True, metavar="max:SHARE", help="Report the best point with its neighbourhood.")
@click.option("--workers", type=click.IntRange(1), default=1, show_default=True, help="Processes on this machine.")
@click.option("--cluster", default="", metavar="ADDRESS", help="A Dask scheduler that runs already.")
@click.option("--output", type=click.Path(path_type=Path), help="Folder for the results [default: <STACK>-sweep].")
@click.option("--replace", is_flag=True, help="Write over a folder that is not an untouched result of this tool.")
@click.option("--restart", is_flag=True, help="Drop an unfinished run instead of going on with it.")
def sweep(
    file: Path,
    vary: tuple[str, ...],
    cases: Path | None,
    spectra: bool,
    best: tuple[str, ...],
    workers: int,
    cluster: str,
    output: Path | None,
    replace: bool,
    restart: bool,
) -> None:
    """Solve a stack at every point of a grid or a table of cases; STACK is a stack file, or a study file naming one.

    A run that was stopped goes on when the same command is given again.

    \b
    Example:
      photonfate start my-film
      photonfate sweep my-film/stack.toml --vary "film.thickness_nm = 100 to 500 step 100" --best max:free_above
    """
    from optics.cli.progress import progress
    from optics.cli.study import go_on
    from optics.output.folder import check_target
    from optics.output.inputs import files_of
    from optics.output.sweeps import report, write_sweep
    from optics.stackfile import read_stack
    from optics.study.basis import basis
    from optics.study.best import goal
    from optics.study.engine import Place
    from optics.study.studyfile import asked
    from optics.study.sweep import Plan, work

    study = asked(file, vary=vary, cases=cases, spectra=spectra, best=best)
    goals = [goal(text) for text in study.best]
    stack = read_stack(study.stack_file)
    plan = Plan(stack, study.points(stack), study.spectra)
    folder = output or file.with_name(f"{file.stem}-sweep")
    check_target(folder, replace=replace, needed=files_of(stack, study.stack_file, file))
    rests_on = basis(stack, stack_file=study.stack_file, points=plan.points, spectra=plan.spectra)
    with go_on(folder, rests_on, len(plan.points), restart=restart) as journal:
        journal.fill(work, plan.pack, Place(workers, cluster), progress(journal.done), units=plan.units)
        table, found = write_sweep(
            plan, journal.answers(), folder, stack_file=study.stack_file, goals=goals, replace=replace
        )
        journal.remove()
    click.echo(report(plan, table, found, folder=folder))
