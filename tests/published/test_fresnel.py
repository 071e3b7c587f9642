"""Reflection and transmission of faces and films against textbook values and values of the `tmm` library."""

import numpy as np
import pytest
from piles import meeting, panel

TEN_DIGITS = 1e-10
PRINTED = 1e-9  # digits of the derived values
S, P = 0, 1


def at_angle(media, degrees):
    return media[0][0] * np.sin(np.radians(degrees))


def test_glass_reflects_4_percent_at_normal_incidence():
    """((n - 1)/(n + 1))^2: Hecht, Optics, ch. 4."""
    met = meeting(600, [(1, 0), (1.5, 0)], 0.0)
    assert met.back.ravel() == pytest.approx([0.04, 0.04], abs=TEN_DIGITS)
    assert met.on.ravel() == pytest.approx([0.96, 0.96], abs=TEN_DIGITS)


def test_at_45_degrees_p_reflects_the_square_of_s():
    """An identity of Fresnel's formulas (Born & Wolf, Principles of Optics, 1.5); value derived."""
    media = [(1, 0), (1.5, 0)]
    s, p = meeting(600, media, at_angle(media, 45.0)).back.ravel()
    assert s == pytest.approx(0.0920133630, abs=PRINTED)
    assert p == pytest.approx(s * s, abs=TEN_DIGITS)


def test_at_brewsters_angle_p_is_not_reflected():
    media = [(1, 0), (1.5, 0)]
    met = meeting(600, media, at_angle(media, np.degrees(np.arctan(1.5))))
    assert met.back[P].item() == pytest.approx(0.0, abs=1e-30)


def test_a_quarter_wave_of_magnesium_fluoride_on_crown_glass_reflects_1_point_3_percent():
    """Textbooks: about 1.3 % (Hecht, Optics, ch. 9, from memory); derived ((n0 ns - n1^2)/(n0 ns + n1^2))^2."""
    met = meeting(550, [(1, 0), (1.38, 550 / 1.38 / 4), (1.52, 0)], 0.0)
    assert met.back.ravel() == pytest.approx([0.0126007902] * 2, abs=PRINTED)


def test_frustrated_total_reflection_through_a_gap_of_a_quarter_wavelength():
    """Closed form of a slab with evanescent waves (Yeh, Optical Waves in Layered Media, ch. 4); values derived."""
    media = [(1.5, 0), (1, 150), (1.5, 0)]
    met = meeting(600, media, at_angle(media, 45.0))
    assert met.on.ravel() == pytest.approx([0.513210232, 0.729652552], abs=PRINTED)


def test_an_absorbing_film_at_60_degrees_as_the_tmm_library_has_it():
    """`tmm` 0.2 (Byrnes, arXiv:1603.02720): coh_tmm("p", [1, 2.5+0.05i, 1.5], [inf, 500, inf], 60 degrees, 770)."""
    media = [(1, 0), (2.5 + 0.05j, 500), (1.5, 0)]
    met = meeting(770, media, at_angle(media, 60.0))
    assert met.back[P].item() == pytest.approx(0.0018892553, abs=PRINTED)
    assert met.on[P].item() == pytest.approx(0.6325094791, abs=PRINTED)
    assert met.taken[1][P].item() == pytest.approx(1.0 - 0.0018892553 - 0.6325094791, abs=2 * PRINTED)


HEMISPHERICAL = {  # outside, inside: Walsh 1926 / Duntley, J. Opt. Soc. Am. 32, 61 (1942), closed form
    1.5: (0.0917779593, 0.5963457597),  # published roundings 0.092 and 0.596 (from memory)
    2.5: (0.2218665735, 0.8754986518),
}


@pytest.mark.parametrize("n", HEMISPHERICAL)
def test_reflectance_of_a_face_for_diffuse_light(n):
    outside, inside = HEMISPHERICAL[n]
    q, weight = panel(0.0, 1.0, 60)

    def reflected(media):
        return float((meeting(600, media, q).back.mean(axis=0)[0] * 2.0 * q) @ weight)

    assert reflected([(1, 0), (n, 0)]) == pytest.approx(outside, abs=PRINTED)
    total = 1.0 - 1.0 / n**2  # beyond the critical angle everything is
    assert reflected([(n, 0), (1, 0)]) / n**2 + total == pytest.approx(inside, abs=PRINTED)


@pytest.mark.parametrize("n", HEMISPHERICAL)
def test_beyond_the_critical_angle_a_clear_face_reflects_everything(n):
    q = np.linspace(1.0 + 1e-9, n, 50, endpoint=False)
    met = meeting(600, [(n, 0), (1, 0)], q)
    np.testing.assert_allclose(met.back, 1.0, atol=1e-14)
    assert np.abs(met.on).max() < 1e-14
