"""Guided light scattered by rough faces of the film, and light that a rough face throws out of its direction."""

import numpy as np

from optics.arrays import Real


def guided_loss(
    *, q: Real, film: Real, phase: Real, neighbours: tuple[Real, Real], rms: Real | float, correlation: Real | float
) -> Real:
    """Return the power that rough faces scatter out of guided light per unit length, in units of k0.

    Payne & Lacey, Opt. Quantum Electron. 26, 977 (1994): every face of roughness sigma(z) radiates as a sheet of
    polarisation; per face alpha = phi^2 (n1^2 - n2^2)^2 k0^3/(4 pi n1) times the integral over theta, 0 to pi, of the
    spectrum of the roughness at beta - n2 k0 cos(theta). phi^2 is the intensity of the normalised s-polarised mode at
    the face (Marcuse, Theory of Dielectric Optical Waveguides, ch. 1); p-polarised light is taken to scatter alike.
    Both faces count, as rough as each other and independent.

    Parameters
    ----------
    q
        In-plane wave number, the effective index of the light.
    film, phase
        The film's index and its thickness times k0.
    neighbours
        Indices of the media above and below it; a face at which light is not totally reflected has no tail.
    rms, correlation
        Root mean square height times k0 and correlation length times k0 (exponential correlation).

    Returns
    -------
    Real
        Loss per length over k0.
    """
    inside = np.maximum(film * film - q * q, 0.0)
    tails = [np.sqrt(np.maximum(q * q - n * n, 0.0)) for n in neighbours]
    width = phase + sum(np.where(tail > 0.0, 1.0 / np.where(tail > 0.0, tail, 1.0), 0.0) for tail in tails)
    total = np.zeros_like(q)
    for index in neighbours:
        step = film * film - index * index
        at_face = 2.0 * inside / width * np.abs(step)  # phi^2 |n1^2 - n2^2|^2 with phi^2 = 2 kx^2/(n1^2 - n2^2)/width
        total += at_face / (4.0 * np.pi * film) * spectrum_over_angles(q, index, rms, correlation)
    return total


def spectrum_over_angles(q: Real, index: Real, rms: Real | float, correlation: Real | float) -> Real:
    """Return the spectrum of exponentially correlated roughness at q - n cos(theta), integrated over 0 to pi.

    2 sigma^2 L/(1 + L^2 (q - n cos)^2) over theta: the imaginary part of a standard integral, in closed form.
    """
    root = np.sqrt((correlation * q - 1j) ** 2 - (correlation * index) ** 2)
    out: Real = 2.0 * rms * rms * correlation * np.pi * (1.0 / root).imag
    return out


def specular_loss(*, rms_nm: float, wavelength_nm: Real, cosine: float = 1.0, index: Real | float = 1.0) -> Real:
    """Return the share of reflected light that a rough face throws out of the specular direction.

    1 - exp(-(4 pi n sigma cos/lambda)^2), Bennett & Porteus, J. Opt. Soc. Am. 51, 123 (1961), for a correlation
    length beyond the wavelength and sigma well below it. ``index`` is that of the medium the light comes from.
    """
    out: Real = -np.expm1(-((4.0 * np.pi * index * rms_nm * cosine / wavelength_nm) ** 2))
    return out
