"""`photonfate receivers`: who takes the light of whom."""

from pathlib import Path

import click


@click.command(short_help="Compute which layers take the light of which.")
@click.argument("stack", type=click.Path(path_type=Path))
@click.option("--output", type=click.Path(path_type=Path), help="Folder for the results [default: <STACK>-receivers].")
@click.option("--replace", is_flag=True, help="Write over a folder that is not an untouched result of this tool.")
def receivers(stack: Path, output: Path | None, replace: bool) -> None:
    """Follow the light of every layer that emits to every layer that emits or receives.

    Several layers may say emits = true with a births_share each; receives = true asks for a layer by name.

    \b
    Example:
      photonfate start my-film
      photonfate receivers my-film/stack.toml --output my-film/who
    """
    from optics.output.folder import check_target
    from optics.output.inputs import files_of
    from optics.output.transport import receivers_report, write_receivers
    from optics.stackfile import read_stack
    from optics.transport.receivers import receivers as follow

    loaded = read_stack(stack)
    folder = output or stack.with_name(f"{stack.stem}-receivers")
    check_target(folder, replace=replace, needed=files_of(loaded, stack))
    found = follow(loaded)
    write_receivers(found, folder, stack_file=stack, replace=replace)
    click.echo(receivers_report(found, folder))
