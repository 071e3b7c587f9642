"""Energy that the births hand to their neighbours beyond the light lines: plasmons and transfer, on request.

Beyond the light lines of the film and all its neighbours no medium carries photons; what the dipoles lose there
goes into surface plasmons of a metal and, through the bare near field, into whatever absorbs (Chance, Prock & Silbey
1978; Barnes, J. Mod. Opt. 45, 661 (1998)). The transfer grows as the inverse cube of the distance and has no bound for
births at a face: those within a stand-off are left out, and the integral ends at a cut-off that is always named.
"""

from dataclasses import dataclass, replace

import numpy as np

from optics.arrays import Complex, Index, Real
from optics.errors import InputError
from optics.fate import wave
from optics.fate.scenes import Drawing, scenes
from optics.fate.wave import Settings
from optics.sample import NearField
from optics.waves import curves
from optics.waves.curves import Points
from optics.waves.depth import SheetProfile
from optics.waves.elementary import upper_root
from optics.waves.paths import Density, Integral, Rows, integrate
from optics.waves.scene import Scene, View
from optics.waves.source import Moments, Wave, uniform

FURTHER = 1.25
"""The integral is taken this much further once more, to say whether the cut-off matters."""


@dataclass(frozen=True)
class StandOff:
    """Births spread evenly through the film but for a part ``off`` of its depth at either face."""

    off: float

    def __call__(self, z: Wave) -> tuple[Wave, Wave]:
        """Return the means of exp(z a/d) and exp(z b/d)."""
        mean: Wave = np.exp(z * self.off) * uniform(z * (1.0 - 2.0 * self.off))[0]
        return mean, mean


@dataclass(frozen=True)
class Transfer:
    """Near-field power in units of the bulk's, (wavelength,).

    Up to the cut-off, what a cut-off a quarter further adds, and the estimated numerical error. Where the film absorbs,
    the power may be negative: its images change what it takes of its own near field.
    """

    power: Real
    further: Real
    error: Real


def transfer(drawing: Drawing, asked: NearField, settings: Settings) -> Transfer:
    """Return the power that goes over in the near field.

    Births in one plane are taken where they are, all others spread evenly outside the stand-off.

    Raises
    ------
    InputError
        When the stand-off leaves no births, or the cut-off lies below a light line.
    """
    moments = _moments(drawing, asked)
    out = np.zeros((3, len(drawing.wavelength_nm)))
    for chosen, scene in scenes(drawing):
        lit = replace(scene, moments=moments)
        top = float(scene.far_end.max())
        if asked.to_index <= top:
            raise InputError(
                f"emission: near_field: to_index: found {asked.to_index:g}, expected above {top:.4g}, the largest "
                "index of the film and its neighbours; nothing is near field below it"
            )
        whole = beyond(lit, np.full(scene.wavelengths, asked.to_index), settings)
        further = beyond(lit, np.full(scene.wavelengths, FURTHER * asked.to_index), settings)
        out[:, chosen] = whole.values[0], further.values[0] - whole.values[0], whole.error
    return Transfer(*out)


def _moments(drawing: Drawing, asked: NearField) -> Moments:
    thickness = float(drawing.thickness_nm[drawing.film])
    off = asked.stand_off_nm / thickness
    sheet = drawing.moments
    at = sheet.at if isinstance(sheet, SheetProfile) else 0.5
    if off >= 0.5 or min(at, 1.0 - at) < off:
        raise InputError(
            f"emission: near_field: stand_off_nm: found {asked.stand_off_nm:g}, expected less, so that births are left "
            f"in the film of {thickness:g} nm"
        )
    return sheet if isinstance(sheet, SheetProfile) else StandOff(off)


def beyond(scene: Scene, end: Real, settings: Settings) -> Integral:
    """Return the power beyond the far end of photons up to ``end``, less the film's exchange with its own bulk.

    From the complex point at which the photons' integral ends, down to the real axis, then below it.
    """
    start = scene.far_end
    order = wave.path_order(scene, settings)

    def below(rows: Rows, u: Real) -> Real:
        view = scene.view(rows.owner)
        return _excess(view, curves.on_dip(rows, u, view.film.index, start[rows.owner, None])).real[None]

    def down(rows: Rows, u: Real) -> Real:
        view = scene.view(rows.owner)
        return -_excess(view, curves.on_riser(rows, u, view.film.index)).real[None]

    everything = np.arange(scene.wavelengths)
    axis = _integrated(below, everything, end, scene, order, settings)
    lossy = np.flatnonzero(scene.film_index.imag > 0.0)
    if not len(lossy):
        return axis
    drop = _integrated(down, lossy, start[lossy], scene, order, settings)
    return Integral(axis.values + drop.values, axis.error + drop.error)


def _integrated(density: Density, owner: Index, end: Real, scene: Scene, order: int, settings: Settings) -> Integral:
    rows = Rows(owner, np.zeros(len(owner)), np.ones(len(owner)), end[None])
    return integrate(density, rows, wavelengths=scene.wavelengths, order=order, tolerance=settings.tolerance)


def _excess(view: View, points: Points) -> Complex:
    """Return the power density less that of the bulk, Jacobian included."""
    film, q = view.film, points.q
    kz = upper_root(points.short_of_film * (film.index + q))
    h = film.in_plane
    bulk = (0.75 * h + 1.5 * (1.0 - h) * q * q / film.eps) / kz + 0.75 * h * kz / film.eps
    out: Complex = wave.power_on_path(view, points, flights=False)[0] - bulk * q / film.real_index * points.slope
    return out


def plasmon_index(metal: Complex, medium: Complex) -> Complex:
    """Return the index of the surface plasmon between two half-spaces of these indices (Raether 1988, eq. 2.4)."""
    one, two = np.asarray(metal, complex) ** 2, np.asarray(medium, complex) ** 2
    out: Complex = np.sqrt(one * two / (one + two))
    return out
