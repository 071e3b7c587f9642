"""A small project to begin from, shipped as files. Film and numbers are invented."""

from importlib.resources import files
from pathlib import Path

from optics.errors import InputError
from optics.output.folder import writing

FILES = ("stack.toml", "tables/invented-red-film.csv")


def write_starter(folder: Path) -> tuple[str, ...]:
    """Write the project into a new or empty folder, whole or not at all, and return the names of its files.

    Raises
    ------
    InputError
        When something stands there already, or the folder cannot be written.
    """
    if folder.exists() and not (folder.is_dir() and not any(folder.iterdir())):
        raise InputError(f"{folder}: exists and is kept; name a new folder")
    with writing(folder) as part:
        for name in FILES:
            target = part / name
            target.parent.mkdir(exist_ok=True)
            target.write_bytes(files(__name__).joinpath(name).read_bytes())
    return FILES
