"""`photonfate material`: what layers can be made of."""

from pathlib import Path
from typing import TYPE_CHECKING

import click

from optics.cli.labfile import check, import_material

if TYPE_CHECKING:
    from optics.media.material import Material


@click.group(short_help="Look at materials.")
def material() -> None:
    """Look at materials: the bundled ones, tables of your own, the open index database.

    \b
    Example:
      photonfate material list
      photonfate material show float-glass --at 770
      photonfate material check silicon
    """


material.add_command(import_material)
material.add_command(check)


@material.command("list", short_help="List the bundled materials.")
def list_materials() -> None:
    """List the bundled materials, and those imported under names of your own, with their ranges.

    \b
    Example:
      photonfate material list
    """
    from optics.media import bundled_names, find, own_names
    from optics.output.materials import material_list

    click.echo(material_list([find(name) for name in (*bundled_names(), *sorted(own_names()))]))


@material.command(short_help="Show source, range, n and k of a material.")
@click.argument("name")
@click.option("--at", "wavelengths", type=float, multiple=True, help="Wavelength in nm at which to show n and k.")
@click.option("--figure", type=click.Path(path_type=Path), help="Draw n and k into this .png, .svg or .pdf file.")
@click.option("--published", is_flag=True, help="NAME is shelf/book/page of the open index database.")
def show(name: str, wavelengths: tuple[float, ...], figure: Path | None, published: bool) -> None:
    """Show a material: range, source, licence, n and k. NAME is a bundled name or a table of your own.

    \b
    Example:
      photonfate material show silver --at 500 --at 600
      photonfate material show ch3nh3pbi3 --figure ch3nh3pbi3.png
    """
    from optics.media import find
    from optics.output.materials import material_report, write_material_figure

    found: Material = find({"published": name} if published else name)
    text = material_report(found, wavelengths)
    if figure:
        write_material_figure(found, figure)
        text += f"\nFigure: {figure}"
    click.echo(text)
