"""`photonfate inplane`: how far in the plane photons travel."""

from pathlib import Path

import click


@click.command(short_help="Compute how far in the plane photons travel.")
@click.argument("stack", type=click.Path(path_type=Path))
@click.option("--output", type=click.Path(path_type=Path), help="Folder for the results [default: <STACK>-inplane].")
@click.option("--replace", is_flag=True, help="Write over a folder that is not an untouched result of this tool.")
def inplane(stack: Path, output: Path | None, replace: bool) -> None:
    """Compute how far from their birth photons are taken back by the film: kernel, guided modes, compact forms.

    \b
    Example:
      photonfate start my-film
      photonfate inplane my-film/stack.toml --output my-film/plane
    """
    from optics.output.folder import check_target
    from optics.output.inputs import files_of
    from optics.output.transport import inplane_report, write_inplane
    from optics.stackfile import read_stack
    from optics.transport.inplane import inplane as travel

    loaded = read_stack(stack)
    folder = output or stack.with_name(f"{stack.stem}-inplane")
    check_target(folder, replace=replace, needed=files_of(loaded, stack))
    found = travel(loaded)
    write_inplane(found, folder, stack_file=stack, replace=replace)
    click.echo(inplane_report(found, folder))
