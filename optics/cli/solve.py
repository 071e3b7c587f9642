"""`photonfate solve`: the main job."""

from pathlib import Path

import click


@click.command(short_help="Compute where the photons of a stack end.")
@click.argument("stack", type=click.Path(path_type=Path))
@click.option("--output", type=click.Path(path_type=Path), help="Folder for the results [default: <STACK>-result].")
@click.option(
    "--measured", type=click.Path(path_type=Path), help="CSV of light measured outside, laid over a spectrum."
)
@click.option(
    "--laid-over",
    type=click.Choice(["collected", "above", "below"]),
    help="The spectrum that --measured is laid over [default: the first of these with light].",
)
@click.option("--replace", is_flag=True, help="Write over a folder that is not an untouched result of this tool.")
def solve(stack: Path, output: Path | None, measured: Path | None, laid_over: str | None, replace: bool) -> None:
    """Compute where the photons of a stack file end, and write a result folder.

    STACK is a stack file, or a result folder or bundle whose stack is computed again.

    \b
    Example:
      photonfate start my-film
      photonfate solve my-film/stack.toml --output my-film/first
    A file of --measured has the columns wavelength_nm and light_per_nm (or energy_eV, light_per_eV).
    """
    from optics.fate.overlay import lay_over
    from optics.fate.solve import solve as solve_stack
    from optics.output.folder import check_target
    from optics.output.inputs import files_of
    from optics.output.report import report
    from optics.output.result import result_folder, write_result
    from optics.stackfile import read_stack
    from optics.stackfile.births import read_births
    from optics.stackfile.reading import stack_file_in
    from optics.study.inputs import input_uncertainty

    folder = output or result_folder(stack)
    stack = stack_file_in(stack)
    loaded = read_stack(stack)
    check_target(folder, replace=replace, needed=files_of(loaded, stack))
    seen = None if measured is None else read_births(measured, place=str(measured))
    result = solve_stack(loaded)
    if seen is not None:
        result = lay_over(result, seen[0], seen[1], curve=laid_over, path=str(measured), sha256=seen[2])
    inputs = input_uncertainty(result)
    write_result(result, folder, stack_file=stack, replace=replace, inputs=inputs)
    click.echo(report(result, folder=folder, uncertainty=inputs.by_share, known=inputs.lines()))
