"""`photonfate compare`: stacks side by side."""

from pathlib import Path

import click


@click.command(short_help="Set stacks side by side and say why they differ.")
@click.argument("stacks", nargs=-1, required=True, type=click.Path(path_type=Path))
@click.option("--workers", type=click.IntRange(1), default=1, show_default=True, help="Processes on this machine.")
@click.option("--output", type=click.Path(path_type=Path), help="Folder for the results [default: <FIRST>-compared].")
@click.option("--replace", is_flag=True, help="Write over a folder that is not an untouched result of this tool.")
def compare(stacks: tuple[Path, ...], workers: int, output: Path | None, replace: bool) -> None:
    """Solve two or more stack files and set them side by side; differences are against the first.

    \b
    Example:
      photonfate start my-film
      photonfate start my-other-film
      photonfate compare my-film/stack.toml my-other-film/stack.toml
    """
    from optics.errors import InputError
    from optics.output.comparison import report, write_comparison
    from optics.output.folder import check_target
    from optics.output.inputs import files_of
    from optics.stackfile import read_stack
    from optics.study.compare import check_comparable
    from optics.study.compare import compare as compare_stacks

    names = [file.stem for file in stacks]
    if len(set(names)) < len(names):
        names = [str(file) for file in stacks]
    if len(set(names)) < len(names):
        raise InputError("compare: found the same file twice, expected stacks that differ")
    loaded = {name: read_stack(file) for name, file in zip(names, stacks, strict=True)}
    check_comparable(loaded)
    folder = output or stacks[0].with_name(f"{stacks[0].stem}-compared")
    needed = [file for name, path in zip(names, stacks, strict=True) for file in files_of(loaded[name], path)]
    check_target(folder, replace=replace, needed=needed)
    found = compare_stacks(loaded, workers=workers)
    write_comparison(found, folder, stack_files=stacks, title=", ".join(names), replace=replace)
    click.echo(report(found, folder=folder))
