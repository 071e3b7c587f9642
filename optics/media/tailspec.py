"""The tail of a layer as a stack file or a call states it."""

from collections.abc import Mapping
from pathlib import Path

from optics.errors import InputError
from optics.faults import Faults, found
from optics.media.dispersion import extinction_table
from optics.media.labfile import Hints, read_lab
from optics.media.tail import MeasuredTail, Tail

__all__ = ["TAIL_KEYS", "measured_tail", "tail_from"]

TAIL_KEYS = ("urbach_meV", "red_of_nm", "table", "scaled")
EXPECTED = '"fit", { urbach_meV = 15, red_of_nm = 785 } or { table = "alpha.csv" }'


def tail_from(spec: object, *, folder: str | Path | None = None) -> Tail:
    """Return the tail that a specification means.

    Parameters
    ----------
    spec
        A `Tail`; ``"fit"``; a mapping with ``urbach_meV`` and maybe ``red_of_nm``, or with ``table`` (a file of
        wavelength and alpha or k) and maybe ``red_of_nm`` and ``scaled``.
    folder
        Where the table is looked for.

    Raises
    ------
    InputError
        With every fault.
    """
    if isinstance(spec, Tail):
        return spec
    if spec == "fit":
        return Tail(fit=True)
    if not isinstance(spec, Mapping):
        raise InputError(f"tail: found {found(spec)}, expected {EXPECTED}")
    faults = Faults("tail")
    meant = faults.known_keys(spec, TAIL_KEYS)
    given = {key: value for key, value in spec.items() if key in TAIL_KEYS}
    if not {"urbach_meV", "table"} & ({*given} | meant):
        faults.add("", f"found neither urbach_meV nor table, expected {EXPECTED}")
    elif {"urbach_meV", "table"} <= {*given}:
        faults.add("table", "found together with urbach_meV, expected one of them")
    measured = None
    if "table" in given and not isinstance(given["table"], str):
        faults.add("table", f"found {found(given['table'])}, expected the name of a file")
    elif "table" in given:
        with faults.collecting("table"):
            measured = measured_tail(given["table"], folder=folder)
    faults.settle()
    given.pop("table", None)
    return Tail(measured=measured, **given)


def measured_tail(name: str, *, folder: str | Path | None = None) -> MeasuredTail:
    """Read absorption measured by another method: a file with a wavelength or energy, and alpha or k."""
    path = Path(folder or ".") / name
    table = read_lab(path, place=name, hints=Hints(), wanted="k")
    return MeasuredTail(
        table=extinction_table(table.wavelength_nm, table.k),
        path=str(path.resolve()),
        sha256=table.sha256,
        understood=(*table.understood, *table.converted),
    )
