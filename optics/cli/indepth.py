"""`photonfate indepth`: where over the film's depth photons are taken back."""

from pathlib import Path

import click


@click.command(short_help="Compute where over the film's depth photons are taken back.")
@click.argument("stack", type=click.Path(path_type=Path))
@click.option("--mesh", type=click.Path(path_type=Path), help="CSV file of slice edges, one column edge_nm.")
@click.option(
    "--slices", type=click.IntRange(2, 400), default=50, show_default=True, help="Even slices, without --mesh."
)
@click.option("--by-wavelength", is_flag=True, help="Write the matrix of every wavelength too.")
@click.option("--output", type=click.Path(path_type=Path), help="Folder for the results [default: <STACK>-indepth].")
@click.option("--replace", is_flag=True, help="Write over a folder that is not an untouched result of this tool.")
def indepth(
    stack: Path, mesh: Path | None, slices: int, by_wavelength: bool, output: Path | None, replace: bool
) -> None:
    """Compute in which slice of the film photons born in another are taken back, and what leaves each slice.

    \b
    Example:
      photonfate start my-film
      photonfate indepth my-film/stack.toml --slices 20 --output my-film/depth
    """
    from optics.output.folder import check_target
    from optics.output.inputs import files_of
    from optics.output.transport import indepth_report, read_mesh, write_indepth
    from optics.stackfile import read_stack
    from optics.transport.depth import checked_edges
    from optics.transport.depth import indepth as travel

    loaded = read_stack(stack)
    edges = None if mesh is None else checked_edges(read_mesh(mesh), loaded, place=str(mesh))
    folder = output or stack.with_name(f"{stack.stem}-indepth")
    check_target(folder, replace=replace, needed=files_of(loaded, stack))
    found = travel(loaded, edges_nm=edges, slices=slices)
    write_indepth(found, folder, by_wavelength=by_wavelength, stack_file=stack, replace=replace)
    click.echo(indepth_report(found, folder))
