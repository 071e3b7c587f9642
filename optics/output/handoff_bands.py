"""Tolerance bands for a bundle: those of a study that lies beside the stack file, when it is of this very stack."""

import json
from pathlib import Path
from typing import TYPE_CHECKING, NamedTuple

from optics.output.inputs import inputs_of
from optics.output.record import RECORD, touched

if TYPE_CHECKING:
    from pandas import DataFrame

    from optics.stack import Stack

FILES = {"bands": "bands.csv", "band_spectra": "bands_by_wavelength.csv"}


class Beside(NamedTuple):
    """Tables of bands by name, and why those that are there were left out, if they were."""

    tables: "dict[str, DataFrame]"
    warnings: tuple[str, ...]


def study_folder(stack_file: Path) -> Path:
    """Return where the study of a stack file lies when nothing else was said: ``<stack>-tolerance`` beside it."""
    return stack_file.with_name(f"{stack_file.stem}-tolerance")


def bands_beside(stack: "Stack", stack_file: Path | None) -> Beside:
    """Return the bands of the study beside a stack file, none where there is no such study or it is of other inputs."""
    if stack_file is None or not study_folder(stack_file).is_dir():
        return Beside({}, ())
    import pandas as pd

    folder = study_folder(stack_file)
    reason = touched(folder) or _other(folder, stack, stack_file)
    if reason:
        return Beside(
            {}, (f"{folder.name}: its bands were left out, because {reason}; run `photonfate tolerance` again",)
        )
    return Beside({name: pd.read_csv(folder / file) for name, file in FILES.items()}, ())


def _other(folder: Path, stack: "Stack", stack_file: Path) -> str:
    """Say what a study was made from that this stack is not made from; empty where there is nothing."""
    made_from = json.loads((folder / RECORD).read_text(encoding="utf-8"))["inputs"]
    now = json.loads(json.dumps(inputs_of(stack, stack_file)))
    if made_from.get("stack_file", {}).get("sha256") != now["stack_file"]["sha256"]:
        return "the stack file has changed since"
    if [each["sha256"] for each in made_from.get("media", [])] != [each["sha256"] for each in now["media"]]:
        return "a table or a material has changed since"
    return ""
