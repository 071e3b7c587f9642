"""Result folders: written whole or not at all, and never over anything that this tool did not write."""

import os
import shutil
from collections.abc import Iterable, Iterator
from contextlib import contextmanager
from pathlib import Path

from optics.errors import InputError
from optics.output.record import touched


def check_target(folder: Path, *, replace: bool, needed: Iterable[str | Path] = ()) -> Path:
    """Return the full path of a folder that may be written, before any work is done.

    Parameters
    ----------
    folder
        Where results shall go; the folder around it must exist.
    replace
        Whether to write over a folder that this tool did not write, or that was touched since.
    needed
        Files that the work rests on: a folder that holds one is never written over.

    Raises
    ------
    InputError
        When it is no folder, or one that is to be kept.
    """
    full = folder.resolve()
    if not full.parent.is_dir():
        raise InputError(f"{folder}: there is no folder {full.parent} to put it in; make that first")
    if full.exists() and not full.is_dir():
        raise InputError(f"{folder}: found a file, expected the name of a folder for the results")
    if full == full.parent or Path.cwd().is_relative_to(full):
        raise InputError(f"{folder}: the working directory lies in it; name another folder for the results")
    for file in needed:
        if Path(file).resolve().is_relative_to(full):
            raise InputError(f"{folder}: {file} lies in it, which is needed; name another folder for the results")
    if full.is_dir() and any(full.iterdir()) and not replace:
        reason = touched(full)
        if reason:
            raise InputError(
                f"{folder}: kept, because {reason}; name another folder with --output, "
                "or say --replace to lose what is in it (in Python: replace=True)"
            )
    return full


@contextmanager
def writing(folder: Path, *, replace: bool = False) -> Iterator[Path]:
    """Give an empty folder to write into, and put it in place of `folder` when all went well.

    Parameters
    ----------
    folder
        Where the results shall be; see `check_target`.
    replace
        See `check_target`.

    Yields
    ------
    Path
        A folder beside it, gone when the block is left: renamed, or removed when anything was raised,
        Ctrl-C included.
    """
    full = check_target(folder, replace=replace)
    part = full.with_name(f".{full.name}.{os.getpid()}.part")
    try:
        part.mkdir()
        yield part
        check_target(folder, replace=replace)
        _swap(part, full)
    except OSError as error:
        raise InputError(
            f"{folder}: cannot be written ({error.strerror or error}), expected a writable place"
        ) from None
    finally:
        shutil.rmtree(part, ignore_errors=True)


def _swap(part: Path, full: Path) -> None:
    """Rename the new folder into place; a folder that was there is removed last, or put back."""
    if not full.exists():
        part.rename(full)
        return
    old = full.with_name(f".{full.name}.{os.getpid()}.old")
    try:
        full.rename(old)
        part.rename(full)
    except BaseException:
        if old.exists() and not full.exists():
            old.rename(full)
        raise
    shutil.rmtree(old, ignore_errors=True)
