"""Which model to trust, and what a result should warn of."""

import math

import numpy as np

from optics.arrays import Complex, Real
from optics.fate.nearfield import FURTHER, Transfer
from optics.waves.scattering import specular_loss

NEAR_METAL_NM = 50.0
"""Within this distance of a metal, energy goes over to plasmons beyond the film's light line (Drexhage; Chance, Prock
& Silbey 1978 show rates rising below about a tenth of a wavelength)."""

ERROR_WORTH_A_WORD = 1e-6
CUT_OFF_WORTH_A_WORD = 1e-4
SPECULAR_WORTH_A_WORD = 0.01

STRONG_NEAR_FIELD = 0.3
"""k/(k0 d) from which the film's near field reaches past its faces by more than a few percent of the births."""


def coherence_length_nm(*, wavelength_nm: float, index: float, fwhm_nm: float) -> float:
    """Return lambda^2/(2 n fwhm) [nm]: the film thickness over which fringes average out in the emitted line."""
    return wavelength_nm**2 / (2.0 * index * fwhm_nm)


def linewidth(wavelength_nm: Real, weight: Real) -> tuple[float, float]:
    """Return mean wavelength and full width at half maximum [nm] of births with these weights.

    The width is that of the Gaussian of the same standard deviation, so that structure does not upset it.
    """
    mean = float(weight @ wavelength_nm)
    spread = math.sqrt(max(float(weight @ (wavelength_nm - mean) ** 2), 0.0))
    return mean, 2.0 * math.sqrt(2.0 * math.log(2.0)) * spread


def advise(wavelength_nm: Real, weight: Real, film_index: Complex, thickness_nm: float) -> tuple[str, str]:
    """Return the advised model, ``"wave"`` or ``"ray"``, and why in a sentence."""
    mean, width = linewidth(wavelength_nm, weight)
    index = float(weight @ film_index.real)
    if width == 0.0:
        return "wave", "One wavelength alone has no linewidth over which fringes could average out."
    length = coherence_length_nm(wavelength_nm=mean, index=index, fwhm_nm=width)
    model, word = ("wave", "keeps") if thickness_nm <= length else ("ray", "loses")
    return model, (
        f"A line {width:.0f} nm wide around {mean:.0f} nm is coherent over {length:.0f} nm of film, "
        f"so light in a film of {thickness_nm:.0f} nm {word} its phase."
    )


def metal_warning(names: list[str], index: Complex, thickness_nm: Real, film: int) -> str | None:
    """Return a warning where a metal lies within ``NEAR_METAL_NM`` of the film's births, else None."""
    metal = [bool(row.any()) for row in (index * index).real < 0.0]
    close = []
    for step in (-1, 1):
        distance, medium = 0.0, film + step
        while 0 <= medium < len(names) and distance <= NEAR_METAL_NM:
            if metal[medium]:
                close.append(names[medium])
                break
            distance += float(thickness_nm[medium])
            medium += step
    if not close:
        return None
    return (
        f"{' and '.join(close)}: a metal within {NEAR_METAL_NM:.0f} nm of the births takes energy through its near "
        "field (plasmons among it) beyond the film's light line; that part is left out"
    )


def cut_off_warning(found: Transfer, *, to_index: float) -> str | None:
    """Return a warning where the near field has not ended at its cut-off, else None."""
    worst = float(np.abs(found.further).max())
    if worst <= CUT_OFF_WORTH_A_WORD:
        return None
    return (
        f"the near field has not ended at to_index = {to_index:g}: a cut-off {FURTHER - 1:.0%} further adds up to "
        f"{worst:.1e} per photon that the same births send into the bulk"
    )


def roughness_warning(layer: str, roughness_nm: float, wavelength_nm: Real, index: Real) -> str | None:
    """Return what a rough face scatters out of its direction, which a graded layer leaves out, if worth a word."""
    worst = float(specular_loss(rms_nm=roughness_nm, wavelength_nm=wavelength_nm, index=index).max())
    if worst <= SPECULAR_WORTH_A_WORD:
        return None
    return (
        f'layer "{layer}": its rough face throws up to {worst:.1%} of light reflected in the denser medium out of its '
        "direction (Bennett & Porteus 1961, normal incidence); the graded layer leaves that out"
    )


def error_warning(error: Real) -> str | None:
    """Return a warning where the estimated error is worth a word, else None."""
    worst = float(error.max())
    if worst <= ERROR_WORTH_A_WORD:
        return None
    count = int((error > ERROR_WORTH_A_WORD).sum())
    return f"numerical error up to {worst:.0e} in a share at {count} wavelength{'s' if count > 1 else ''}"


def near_field_warning(
    wavelength_nm: Real, film_index: Complex, thickness_nm: float, rate_factor: Real, trapped: Real
) -> str | None:
    """Return a warning where radiated light and near field cannot be told apart in the film, else None.

    The film's near field reaches its neighbours in proportion to k/(k0 d); what of it counts as radiated is a
    convention, and next to denser neighbours it can leave the film less than nothing.
    """
    lost = rate_factor <= 0.0
    if lost.any():
        return (
            f"the rate factor is not positive at {int(lost.sum())} of {len(lost)} wavelengths: the film absorbs too "
            "much within too little thickness for its shares to mean anything there"
        )
    measure = float((film_index.imag * wavelength_nm).max() / (2.0 * np.pi * thickness_nm))
    lowest = float(trapped.min())
    if measure <= STRONG_NEAR_FIELD and lowest > -ERROR_WORTH_A_WORD:
        return None
    below = f"; the trapped share comes out as low as {lowest:.1e}" if lowest < -ERROR_WORTH_A_WORD else ""
    return (
        f"radiated light and near field cannot be told apart sharply in an absorbing film of {thickness_nm:.3g} nm "
        f"(k/(k0 d) up to {measure:.1g}): rate factor and reabsorbed share are a convention there{below}"
    )
