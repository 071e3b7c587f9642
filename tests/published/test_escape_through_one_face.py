"""Escape cone and single pass through one face, and what is left of it by Fresnel reflection."""

import numpy as np
import pytest
from piles import ISOTROPIC, amounts, drawn

TEN_DIGITS = 0.6e-9  # the digits of the derived values, and the quadrature of clear films
PRINTED = {3.4: (0.0221, 5e-5), 2.5: (0.0418, 1e-4), 1.5: (0.127, 5e-4)}
CONE = {3.4: 0.0221153880, 2.5: 0.0417424305, 1.5: 0.1273220038}  # (1 - cos theta_c)/2

# isotropic, normal and in-plane dipoles; derived from the Fresnel formulas by an independent script
SINGLE_PASS = {
    1.5: (0.114833136, 0.042053349, 0.151223030),
    2.5: (0.032427540, 0.004713867, 0.046284376),
    3.5: (0.014079404, 0.001125909, 0.020556151),
}
IN_PLANE = (ISOTROPIC, 0.0, 1.0)


@pytest.mark.parametrize("n", CONE)
def test_a_clear_film_in_air_lets_each_escape_cone_out_in_the_end(n):
    ends = amounts(drawn(700, [(1, 0), (n, 400), (1, 0)]), model="ray")
    assert ends["free_above"] == pytest.approx(CONE[n], abs=TEN_DIGITS)
    assert ends["free_below"] == pytest.approx(CONE[n], abs=TEN_DIGITS)
    value, half_digit = PRINTED[n]  # Schubert, Light-Emitting Diodes, ch. 5: 2.21 %, 4.18 %, 12.7 % (from memory)
    assert ends["free_above"] == pytest.approx(value, abs=half_digit)


def test_both_cones_of_index_2_point_6_hold_one_photon_in_13():
    """1 - sqrt(1 - 1/n^2) at n = 2.6, within the 7 to 13 % of Cho et al., Nat. Commun. 11, 611 (2020)."""
    ends = amounts(drawn(700, [(1, 0), (2.6, 400), (1, 0)]), model="ray")
    assert ends["free_above"] + ends["free_below"] == pytest.approx(1.0 / 13.0, abs=TEN_DIGITS)


@pytest.mark.parametrize("model", ["ray", "wave"])
@pytest.mark.parametrize("n", SINGLE_PASS)
def test_one_face_alone_passes_what_fresnel_leaves_of_the_cone(n, model):
    """With the film's own index below, light meets one face once, and waves have nothing to interfere with."""
    for in_plane, expected in zip(IN_PLANE, SINGLE_PASS[n], strict=True):
        ends = amounts(drawn(700, [(1, 0), (n, 400), (n, 0)], in_plane=in_plane), model=model)
        assert ends["free_above"] == pytest.approx(expected, abs=TEN_DIGITS)


def test_fresnel_reflection_takes_a_fifth_or_more_of_the_cone_at_high_index():
    """Nagel, Opt. Express 20, 27530 (2012): 20 % or more is lost below a critical angle of 25 degrees."""
    n = 1.0 / np.sin(np.radians(25.0))
    passed = amounts(drawn(700, [(1, 0), (n, 400), (n, 0)]), model="ray")["free_above"]
    assert 1.0 - passed / (0.5 * (1.0 - np.cos(np.radians(25.0)))) > 0.20
