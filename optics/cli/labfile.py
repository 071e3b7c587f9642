"""`photonfate material import` and `material check`: a laboratory's own tables."""

from collections.abc import Callable
from pathlib import Path
from typing import TYPE_CHECKING, Any, TypeVar

import click

if TYPE_CHECKING:
    from optics.media.labfile import Hints

Command = TypeVar("Command", bound=Callable[..., Any])
BESIDE = "-check.png"

_READING = (
    click.option("--columns", help='What the columns are, as "wavelength_nm,n,k"; "-" for one that is not used.'),
    click.option("--unit", help="Unit of the wavelengths or energies: nm, um, angstrom, eV, 1/cm, THz, ..."),
    click.option("--separator", help="Between columns: comma, semicolon, tab or space."),
    click.option("--decimal", help="Mark of decimals: point or comma."),
    click.option("--sheet", help="Sheet of an Excel workbook."),
    click.option("--n-from", help="Material or number that gives n where the table holds absorption alone."),
    click.option("--conjugate", is_flag=True, help="The table writes n - i k: change the sign of k or eps2."),
)


def reading(command: Command) -> Command:
    """Add the options that say what a table leaves open."""
    for option in reversed(_READING):
        command = option(command)
    return command


def hints_from(said: dict[str, Any], *, zero_negative: bool = False) -> "Hints":
    """Return what the options say."""
    from optics.media import find
    from optics.media.labfile import Hints

    columns, n_from = said.pop("columns"), said.pop("n_from")
    words = {key: value or "" for key, value in said.items() if key != "conjugate"}
    return Hints(
        columns=None if columns is None else tuple(columns.split(",")),
        n_from=None if n_from is None else find(_number(n_from)),
        conjugate=said["conjugate"],
        zero_negative=zero_negative,
        **words,
    )


def _number(word: str) -> str | float:
    try:
        return float(word)
    except ValueError:
        return word


@click.command("import", short_help="Take a laboratory's table into a cabinet of your own.")
@click.argument("file", type=click.Path(path_type=Path))
@click.option("--name", required=True, help="What stack files shall call it, as red-film.")
@click.option(
    "--folder",
    type=click.Path(path_type=Path),
    help="Where stack files lie: the card goes into materials/ there [default: a folder of your own for all of them].",
)
@reading
@click.option("--zero-negative-k", is_flag=True, help="Set negative k (noise) to zero.")
@click.option("--title", help="A line that says what it is.")
@click.option("--source", help="Where the numbers come from [default: the file's name].")
@click.option("--licence", help="Licence of the numbers.")
@click.option("--replace", is_flag=True, help="Write over a card of this name that holds something else.")
def import_material(
    file: Path,
    name: str,
    folder: Path | None,
    zero_negative_k: bool,
    title: str | None,
    source: str | None,
    licence: str | None,
    replace: bool,
    **said: Any,
) -> None:
    """Read a table of n and k in any usual form and keep it as a card under a name for stack files.

    Separators, decimal marks, units and headings are told by the file, or by you where it leaves them open.

    \b
    Example:
      photonfate start my-film
      photonfate material import my-film/tables/invented-red-film.csv --name red-film --folder my-film
      photonfate material check my-film/materials/red-film.toml
    """
    from optics.media.cabinet import cabinet_beside, users_cabinet
    from optics.media.importing import About, import_table
    from optics.output.materials import import_report

    cabinet = users_cabinet() if folder is None else cabinet_beside(folder)
    about = About(title=title or "", source=source or "", licence=licence or "")
    hints = hints_from(said, zero_negative=zero_negative_k)
    click.echo(import_report(import_table(file, name=name, cabinet=cabinet, hints=hints, about=about, replace=replace)))


@click.command(short_help="Look for what makes a table unfit.")
@click.argument("name", metavar="FILE_OR_NAME")
@click.option("--from-nm", type=float, help="First wavelength in nm that it shall cover.")
@click.option("--to-nm", type=float, help="Last wavelength in nm that it shall cover.")
@click.option(
    "--figure",
    is_flag=False,
    flag_value=BESIDE,
    help="Draw n, k and the absorption with what was found into this .png, .svg or .pdf file; --figure with no file "
    f"after it draws <name>{BESIDE} [default: no figure].",
)
@click.option("--published", is_flag=True, help="FILE_OR_NAME is shelf/book/page of the open index database.")
@reading
@click.pass_context
def check(
    ctx: click.Context,
    /,
    name: str,
    from_nm: float | None,
    to_nm: float | None,
    figure: str | None,
    published: bool,
    **said: Any,
) -> None:
    """Look for gaps, outliers, noise, wrong signs, missing range, n and k that do not belong together, and floors.

    Ends with status 1 when something makes the table unfit.

    \b
    Example:
      photonfate material check silicon --from-nm 400 --to-nm 1200
      photonfate material check cspbbr3 --figure cspbbr3-check.png
    """
    from optics.media.fitness import fitness_of
    from optics.output.materials import check_figure_path, fitness_report, write_fitness_figure

    spec = {"published": name} if published else name
    found = fitness_of(spec, hints=hints_from(said), from_nm=from_nm, to_nm=to_nm)
    path = check_figure_path(found, figure, beside=BESIDE)
    text = fitness_report(found)
    if path:
        write_fitness_figure(found, path)
        text += f"\nFigure: {path}"
    click.echo(text)
    ctx.exit(0 if found.fit else 1)
