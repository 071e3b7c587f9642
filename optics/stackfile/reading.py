"""Reading a stack file: what the file system, the text and the TOML can have wrong, before its content is looked at."""

import re
import stat
import tomllib
from pathlib import Path
from typing import Any

from optics.errors import InputError
from optics.faults import Faults
from optics.stack import Stack
from optics.stackfile.tables import build_stack

COPY = "stack.toml"  # what folders of results call their copy of the stack file
LIMIT_BYTES = 5_000_000  # a list of 100 000 wavelengths has 1 MB


def read_stack(path: str | Path) -> Stack:
    """Read a stack file.

    Parameters
    ----------
    path
        A TOML file; tables that it names are looked for beside it.

    Raises
    ------
    InputError
        With every fault: a line each, naming file, layer and key.
    """
    file = Path(path)
    faults = Faults(str(path))
    with faults.collecting():
        content = _content(file)
    faults.settle()
    return parse_stack(content, folder=file.parent, filename=str(path))


def stack_file_in(path: Path) -> Path:
    """Return the stack file meant: a folder of results stands for the copy that lies in it."""
    inside = path / COPY
    return inside if inside.is_file() else path


def parse_stack(text: str, *, folder: str | Path, filename: str = "stack.toml") -> Stack:
    """Return the stack that the TOML `text` describes.

    Parameters
    ----------
    text
        The content of a stack file.
    folder
        Where the tables that it names are looked for.
    filename
        What messages call it.
    """
    faults = Faults(filename)
    with faults.collecting():
        return build_stack(_toml(text), folder=folder)
    raise InputError(faults.lines)


def _content(file: Path) -> str:
    try:
        state = file.stat()
        if stat.S_ISDIR(state.st_mode):
            raise InputError("found a directory, expected a stack file; name the file inside it")
        if not stat.S_ISREG(state.st_mode):
            raise InputError("found a device or pipe, expected a stack file")
        if state.st_size > LIMIT_BYTES:
            size = f"{state.st_size / 1e6:.1f} MB"
            raise InputError(
                f"found {size}, expected at most {LIMIT_BYTES / 1e6:g} MB; keep tables in files of their own"
            )
        content = file.read_bytes()
    except InputError:
        raise  # it is a ValueError too
    except (FileNotFoundError, NotADirectoryError):
        raise InputError("no such file, expected a stack file; `photonfate start FOLDER` makes one") from None
    except (OSError, ValueError) as error:  # ValueError: a path with a null character
        reason = getattr(error, "strerror", None) or str(error)
        raise InputError(f"cannot be read ({reason}), expected a readable stack file") from None
    return _text(content)


def _text(content: bytes) -> str:
    if b"\0" in content:
        raise InputError("found binary data or UTF-16 text, expected TOML in UTF-8 text")
    try:
        text = content.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = content.count(b"\n", 0, error.start) + 1
        byte = content[error.start]
        raise InputError(f"line {line}: found byte 0x{byte:02x}, expected UTF-8 text; save it as UTF-8") from None
    if not text.strip():
        raise InputError("found an empty file, expected a stack file; `photonfate start FOLDER` makes one")
    return text


def _toml(text: str) -> dict[str, Any]:
    try:
        return tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        said = str(error)
        place = re.search(r" \(at (?:line (\d+), column (\d+)|end of document)\)$", said)
        reason = said[: place.start()] if place else said
        line = place.group(1) if place and place.group(1) else str(text.count("\n") + 1)
        column = f", column {place.group(2)}" if place and place.group(2) else ""
        raise InputError(f"line {line}{column}: not TOML: {reason}; {_cure(reason, text, int(line))}") from None
    except RecursionError:
        raise InputError("not TOML that can be read: nested too deeply") from None
    except ValueError:  # Python refuses to read whole numbers of more than 4300 digits
        raise InputError("not TOML that can be read: a number has too many digits") from None


def _cure(reason: str, text: str, line: int) -> str:
    """Guess the slip from the reason and the line at which reading stopped."""
    lines = text.splitlines()
    here = lines[line - 1] if line <= len(lines) else ""
    if re.search(r"=\s*[-+]?\d+,\d", here):
        return "write decimals with a point, 0.5"
    if re.search(r"=\s*[-+\d.]+\s*[a-zA-Zµ]", here):
        return "write the number alone; its unit is in the key"
    if re.search(r"=\s*[A-Za-z]", here):
        return 'write text in quotes, "air", and true or false in small letters'
    if "Cannot" in reason:  # overwrite, declare or expand what stands there already
        return "the same key or table stands twice"
    return 'expected lines like key = value, tables like [light] and text in "quotes"'
