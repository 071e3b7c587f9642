"""`photonfate yields`: external from internal luminescence yield and back, in every reading."""

from pathlib import Path

import click


@click.command(short_help="Turn an internal yield into an external one, or back.")
@click.argument("stack", type=click.Path(path_type=Path))
@click.option("--internal", type=float, help="Internal yield in this stack, 0 to 1.")
@click.option("--internal-sd", type=float, default=0.0, help="Its standard deviation.")
@click.option("--external", type=float, help="Measured external yield, 0 to 1.")
@click.option("--external-sd", type=float, default=0.0, help="Its standard deviation.")
@click.option("--reading", help='faces, wide or sphere: what was measured [default: sphere; "lost edges" if lost].')
@click.option("--temperature-K", "kelvin", type=float, default=300.0, show_default=True, help="For the voltage.")
@click.option("--output", type=click.Path(path_type=Path), help="Folder for the results [default: <STACK>-yields].")
@click.option("--replace", is_flag=True, help="Write over a folder that is not an untouched result of this tool.")
def yields(
    stack: Path,
    internal: float | None,
    internal_sd: float,
    external: float | None,
    external_sd: float,
    reading: str | None,
    kelvin: float,
    output: Path | None,
    replace: bool,
) -> None:
    """Print the three readings of a stack file, and what a luminescence yield means in each.

    \b
    Example:
      photonfate start my-film
      photonfate yields my-film/stack.toml --internal 0.9
      photonfate yields my-film/stack.toml --external 0.15 --external-sd 0.02 --replace
    """
    from optics.fate.implied import default_reading, given, implied
    from optics.fate.sampled import sampled
    from optics.output.folder import check_target
    from optics.output.inputs import files_of
    from optics.output.samples import sample_report, write_yields
    from optics.stackfile import read_stack

    known = given(internal=internal, external=external, sd=internal_sd or external_sd)
    loaded = read_stack(stack)
    folder = output or stack.with_name(f"{stack.stem}-yields")
    check_target(folder, replace=replace, needed=files_of(loaded, stack))
    found = sampled(loaded)
    reading = reading or default_reading(found)
    rows = () if known is None else implied(found, known, reading=reading, temperature_K=kelvin)
    write_yields(found, rows, known, folder, stack_file=stack, reading=reading, temperature_K=kelvin, replace=replace)
    click.echo(sample_report(found, rows, known, temperature_K=kelvin, folder=folder))
