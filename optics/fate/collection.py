"""What an aperture outside gathers, and how the escaping light is spread over angles.

Both come from the power per in-plane wave number that reaches the outer medium, plates and all orders included: an
aperture cuts its integral at q = NA (in units of k0), and q = N sin(theta) turns it into power per steradian.
"""

from collections.abc import Callable

import numpy as np

from optics.arrays import Index, Real
from optics.fate import ray, wave
from optics.fate.exits import COVER, FREE_ABOVE, FREE_BELOW, SUBSTRATE, Layout, light_lines, split_panels
from optics.fate.scenes import Drawing, scenes
from optics.fate.wave import Settings
from optics.waves import curves
from optics.waves.curves import Points
from optics.waves.paths import Integral, Rows, integrate
from optics.waves.scene import Scene

ORDER = 32
"""Order of the rule on panels; rows that need more are halved."""

ROWS = 4_000
"""Angles times wavelengths looked at together: few enough for their arrays to stay in cache."""

STEEPEST = 1e-6
"""Sine of the angle that stands for the normal itself, where power per q and solid angle both vanish."""

OpenDensity = Callable[[Scene, Rows, Real], Real]

MODELS: dict[str, OpenDensity] = {"wave": wave.open_density, "ray": ray.open_density}


def gathered_power(
    drawing: Drawing, *, side: int, na: float | None, model: str, settings: Settings | None = None
) -> tuple[Real, Real]:
    """Return the power that an aperture gathers, in units of the bulk power, and its estimated error; (wavelength,).

    Parameters
    ----------
    drawing
        The stack.
    side
        0 above, 1 below. Light in the outer medium there counts, free or held.
    na
        Numerical aperture; None, or more than the stack lets out: all that leaves on this side.
    model
        ``"wave"`` or ``"ray"``.
    settings
        How finely to integrate.

    Notes
    -----
    A bare face passes 1/2 (1 - cos(asin(NA/n))) of isotropic rays, before reflection.
    """
    power, error = np.zeros((2, len(drawing.wavelength_nm)))
    for chosen, scene in scenes(drawing):
        if not scene.sides[side].absorbs:
            seen = scene if model == "wave" else ray.real_film(scene)
            part = _integrated(seen, _largest(seen, side, na, model), MODELS[model], settings or Settings())
            power[chosen], error[chosen] = part.values[_end(scene, side)], part.error
    return power, error


def pattern(drawing: Drawing, angles_deg: Real, *, side: int, model: str) -> Real:
    """Return the power per steradian in the outer medium, in units of the bulk power, (angle, wavelength).

    Parameters
    ----------
    drawing
        The stack.
    angles_deg
        Angles from the normal, in the outer medium, 0 to 90 [deg].
    side, model
        As for `gathered_power`.

    Notes
    -----
    Over the half-space it integrates, 2 pi sin(theta) d(theta), to the power that leaves on this side.
    """
    angles = np.deg2rad(np.asarray(angles_deg, dtype=float))
    sine = np.maximum(np.sin(angles), STEEPEST)
    out = np.zeros((len(angles), len(drawing.wavelength_nm)))
    for chosen, scene in scenes(drawing):
        if not scene.sides[side].absorbs:
            outer = scene.index[scene.sides[side].outer].real
            q = outer * sine[:, None]
            per_q = _per_q(scene if model == "wave" else ray.real_film(scene), q, side, model)
            per_steradian: Real = per_q * outer * np.cos(angles)[:, None] / (2.0 * np.pi * sine[:, None])
            out[:, chosen] = per_steradian
    return out


def _largest(scene: Scene, side: int, na: float | None, model: str) -> Real:
    """Return the largest q that both the aperture and everything on the way to it let pass."""
    ends = scene.index[list(scene.sides[side].clear)].real.min(axis=0)
    if model == "ray":
        ends = np.minimum(ends, scene.film_index.real)
    return np.asarray(np.minimum(ends, np.inf if na is None else na))


def _end(scene: Scene, side: int) -> int:
    free = scene.sides[side].free
    return Layout(scene.media).end(((COVER, FREE_ABOVE), (SUBSTRATE, FREE_BELOW))[side][free])


def _integrated(scene: Scene, end: Real, density: OpenDensity, settings: Settings) -> Integral:
    owner, low, high = split_panels(np.zeros_like(end), end, light_lines(scene))
    return integrate(
        lambda rows, u: density(scene, rows, u),
        curves.panels(owner, low, high),
        wavelengths=scene.wavelengths,
        order=ORDER * settings.finer,
        tolerance=settings.tolerance,
    )


def _per_q(scene: Scene, q: Real, side: int, model: str) -> Real:
    """Return the power per q that leaves at chosen q, (angle, wavelength).

    A row a point: each is to find its own side of every light line.
    """
    owner = np.broadcast_to(np.arange(scene.wavelengths), q.shape).ravel()
    flat = q.ravel()
    leaves = flat < _largest(scene, side, None, model)[owner]
    out = np.zeros(flat.shape)
    places = np.flatnonzero(leaves)
    for first in range(0, len(places), ROWS):
        part = places[first : first + ROWS]
        out[part] = _values(scene, owner[part], flat[part, None], model)[_end(scene, side), :, 0]
    return out.reshape(q.shape)


def _values(scene: Scene, owner: Index, q: Real, model: str) -> Real:
    points = Points(q, np.ones_like(q), scene.film_index[owner, None] - q)
    if model == "wave":
        return wave.open_values(scene, owner, points)
    return ray.open_values(scene, owner, points)
