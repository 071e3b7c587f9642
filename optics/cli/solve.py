"""`photonfate solve`: the main job."""

from pathlib import Path

import click


@click.command(short_help="Compute where the photons of a stack end.")
@click.argument("stack", type=click.Path(path_type=Path))
@click.option("--output", type=click.Path(path_type=Path), help="Folder for the results [default: <STACK>-result].")
@click.option("--replace", is_flag=True, help="Write over a folder that is not an untouched result of this tool.")
def solve(stack: Path, output: Path | None, replace: bool) -> None:
    """Compute where the photons of a stack file end, and write a result folder.

    \b
    Example:
      photonfate start my-film
      photonfate solve my-film/stack.toml --output my-film/first
    """
    from optics.fate.solve import solve as solve_stack
    from optics.output.folder import check_target
    from optics.output.report import report
    from optics.output.result import result_folder, write_result
    from optics.stackfile import read_stack

    loaded = read_stack(stack)
    folder = output or result_folder(stack)
    check_target(folder, replace=replace)
    result = solve_stack(loaded)
    write_result(result, folder, stack_file=stack, replace=replace)
    click.echo(report(result, folder=folder))
