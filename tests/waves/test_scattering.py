"""Scattering at rough faces against closed forms of its sources."""

import numpy as np
import pytest
from scipy.integrate import quad
from scipy.optimize import brentq

from optics.waves.scattering import guided_loss, spectrum_over_angles, specular_loss


def test_specular_loss_of_a_face_of_10_nm_at_550_nm():
    """Bennett & Porteus 1961, eq. 3, computed from the formula."""
    assert specular_loss(rms_nm=10.0, wavelength_nm=np.array(550.0)) == pytest.approx(0.0508637004, abs=1e-10)
    assert specular_loss(rms_nm=0.0, wavelength_nm=np.array(550.0)) == 0.0


@pytest.mark.parametrize(("q", "index"), [(2.1, 1.5), (1.6, 1.5), (3.4, 1.0), (1.2, 1.5)])
@pytest.mark.parametrize("length", [0.05, 0.7, 20.0])
def test_the_spectrum_over_all_angles_is_its_integral(q, index, length):
    def spectrum(theta):
        return 2.0 * 0.01 * length / (1.0 + (length * (q - index * np.cos(theta))) ** 2)

    whole = quad(spectrum, 0.0, np.pi, limit=400, epsabs=0, epsrel=1e-11)[0]
    assert spectrum_over_angles(np.array(q), index, 0.1, length) == pytest.approx(whole, rel=1e-9)


@pytest.mark.parametrize("half_width_nm", [60.0, 100.0, 200.0])
@pytest.mark.parametrize("correlation_nm", [10.0, 50.0, 400.0])
def test_a_symmetric_guide_scatters_as_the_published_closed_form(half_width_nm, correlation_nm):
    """Payne & Lacey 1994: alpha = sigma^2 g(V) f_e(x, gamma)/(sqrt(2) k0 d^4 n1), formula from memory, s-polarised.

    The integral behind it, derived apart (a sheet of polarisation radiating into an even medium), is the same.
    """
    wavelength, core, clad, rms = 1550.0, 3.5, 1.5, 2.0
    k0, d = 2.0 * np.pi / wavelength, half_width_nm
    v = k0 * d * np.sqrt(core**2 - clad**2)
    u = brentq(lambda u: u * np.tan(u) - np.sqrt(v * v - u * u), 1e-9, min(v, np.pi / 2) - 1e-9)
    w = np.sqrt(v * v - u * u)
    index = np.sqrt(core**2 - (u / d / k0) ** 2)
    x = w * correlation_nm / d
    gamma = clad * v / (core * w * np.sqrt((core**2 - clad**2) / (2.0 * core**2)))
    root = np.sqrt((1.0 + x * x) ** 2 + 2.0 * x * x * gamma**2)
    f = x * np.sqrt(root + 1.0 - x * x) / root
    published = rms**2 / (np.sqrt(2.0) * k0 * d**4 * core) * u * u * v * v / (1.0 + w) * f
    found = guided_loss(
        q=np.array(index),
        film=np.array(core),
        phase=np.array(2.0 * d * k0),
        neighbours=(np.array(clad), np.array(clad)),
        rms=rms * k0,
        correlation=correlation_nm * k0,
    )
    assert k0 * found == pytest.approx(published, rel=1e-9)


def test_smooth_faces_and_equal_indices_scatter_nothing():
    same = {"film": np.array(2.0), "phase": np.array(3.0), "correlation": 1.0}
    q = np.array(1.8)
    assert guided_loss(q=q, neighbours=(np.array(1.0), np.array(1.5)), rms=0.0, **same) == 0.0
    assert guided_loss(q=q, neighbours=(np.array(2.0), np.array(2.0)), rms=0.1, **same) == 0.0
