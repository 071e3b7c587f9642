"""Whether the parts of a stack agree: births that the film can have, a pump and apertures that its media allow."""

from collections.abc import Sequence

import numpy as np

from optics.collection import PLACE as COLLECTION
from optics.collection import Collection
from optics.depth import PLACE as DEPTH
from optics.depth import Depth, Pump
from optics.errors import InputError
from optics.faults import Faults
from optics.light import Light
from optics.media.domain import RANGE_SLACK
from optics.media.material import Material
from optics.radiation import PLACE as SPECTRUM
from optics.radiation import FromAbsorption
from optics.spectrum import given_per_nm

Media = Sequence[tuple[str, Material, bool]]
NA_SLACK = 1e-3
"""An aperture may exceed the outer index by that much: gases are not exactly 1, and apertures have two digits."""


def check_pump(faults: Faults, *, media: Media, depth: Depth) -> None:
    """Note media that do not cover the pump, and a film that does not absorb it."""
    if not isinstance(depth, Pump):
        return
    for place, material, emits in media:
        low, high = material.range_nm
        if not low * (1 - RANGE_SLACK) <= depth.pump_nm <= high * (1 + RANGE_SLACK):
            said = f'"{material.name}" ({place}) covers {low:.6g} to {high:.6g} nm'
            faults.add(
                DEPTH, f"pump_nm: found {depth.pump_nm:.12g}, but {said}; give a table that reaches, or another profile"
            )
            continue
        with faults.collecting(f"{DEPTH}: pump_nm: {place}"):
            index = material.index(np.array([depth.pump_nm]))[0]
            if emits and (index.imag <= 0.0 or index.real <= 0.0):
                said = f"the film ({place}) has n = {index.real:.6g} and k = {index.imag:.6g}"
                faults.add(DEPTH, f"pump_nm: found {depth.pump_nm:.12g}, where {said}, so that it takes no pump")


def check_spectrum(faults: Faults, *, light: Light, film: Material) -> None:
    """Note a film whose absorption gives no birth spectrum, where births follow from it."""
    if isinstance(light.spectrum, FromAbsorption):
        with faults.taking_over():
            given_per_nm(light.spectrum, light.wavelengths_nm, film_index=film.index(light.wavelengths_nm))


def check_apertures(faults: Faults, *, media: Media, light: Light, collection: Collection | None) -> None:
    """Note apertures that the outer medium on their side cannot fill."""
    spectrum = light.spectrum
    asked: list[tuple[str, str, str, float]] = []
    if collection is not None:
        asked.append((COLLECTION, "side", collection.side, collection.na))
    if not isinstance(spectrum, FromAbsorption) and spectrum.seen != "inside" and spectrum.na is not None:
        asked.append((SPECTRUM, "seen", spectrum.seen, spectrum.na))
    for place, key, side, na in asked:
        material = media[0 if side == "above" else -1][1]
        try:
            index = material.index(light.wavelengths_nm)
        except InputError:
            continue  # said where materials are looked at
        if (index * index).real.max() < 0.0:
            faults.add(
                place, f'{key}: found "{side}", where {material.name} lets no light out; expected the other side'
            )
            continue
        largest = float(index.real.max())
        if na > largest + NA_SLACK:
            said = f"at most {largest:.4g}, the index of {material.name}"
            faults.add(place, f"na: found {na:.12g}, expected {said}; with an immersion medium, {side} = that medium")
