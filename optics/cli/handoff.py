"""`photonfate handoff`: a bundle for other models."""

from pathlib import Path

import click


@click.command(short_help="Write a bundle for recycling, diffusion and device models.")
@click.argument("stack", type=click.Path(path_type=Path))
@click.option("--to", "folder", type=click.Path(path_type=Path), help="Folder to write [default: <STACK>-handoff].")
@click.option(
    "--as",
    "kind",
    type=click.Choice(["csv", "xlsx", "mat", "json", "hdf5"]),
    default="csv",
    show_default=True,
    help="Format of the data.",
)
@click.option("--slices", type=click.IntRange(2, 400), default=20, show_default=True, help="Slices of the film.")
@click.option("--full", is_flag=True, help="Let it grow over 5 MB; adds the depth by wavelength.")
@click.option("--replace", is_flag=True, help="Write over a folder that is not an untouched result of this tool.")
def handoff(stack: Path, folder: Path | None, kind: str, slices: int, full: bool, replace: bool) -> None:
    """Write one folder with all that another model may take over from a stack file.

    STACK is a stack file, or a result folder or bundle whose stack is taken. `photonfate solve` on a bundle computes
    it again.

    \b
    Example:
      photonfate start my-film
      photonfate handoff my-film/stack.toml --to my-film/for-models --as csv
    """
    from optics.output.folder import check_target
    from optics.output.handoff import bundle_folder, report, write_handoff
    from optics.output.handoff_formats import check_format
    from optics.output.inputs import files_of
    from optics.stackfile import read_stack
    from optics.stackfile.reading import stack_file_in
    from optics.transport.handover import hand_over

    check_format(kind)
    folder = folder or bundle_folder(stack)
    stack = stack_file_in(stack)
    loaded = read_stack(stack)
    check_target(folder, replace=replace, needed=files_of(loaded, stack))
    handed = hand_over(loaded, slices=slices, full=full)
    write_handoff(handed, folder, kind=kind, stack_file=stack, full=full, replace=replace)
    click.echo(report(handed, folder, stack_file=stack))
