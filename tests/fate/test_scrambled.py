"""Fully scrambled light: the textbook's film on a mirror, the faces' published reflectances, sums."""

import numpy as np
import pytest
from piles import drawn

from optics.fate.scenes import scenes
from optics.fate.scrambled import _isotropic, scrambled, textbook

NM = 760.0
MIRROR = 1e-9 + 1e4j
FIVE_HUNDRED = 500.0


def film(n, depth):
    """A film 500 nm thick that absorbs exp(-depth) of light at normal incidence."""
    return n + 1j * depth * NM / (4.0 * np.pi * FIVE_HUNDRED), FIVE_HUNDRED


def escape(media, *, open_faces, film=1):
    found = scrambled(drawn(NM, media, film=film), births=np.ones(1), recycling_share=np.ones(1), open_faces=open_faces)
    assert found.p_r + found.p_e + found.p_a == pytest.approx(1.0, abs=1e-12)
    return found


@pytest.mark.parametrize(("n", "depth"), [(2.5, 0.5), (2.5, 0.02), (3.5, 0.1), (1.2, 3.0)])
def test_a_textured_film_on_a_mirror_under_an_open_face(n, depth):
    """Yablonovitch 1982: 4 n^2 alpha d against 1; for n = 2.5 and alpha d = 0.5 that is 2/27."""
    found = escape([(1, 0), film(n, depth), (MIRROR, 0)], open_faces=True)
    assert found.p_e == pytest.approx(float(textbook(index=n, optical_depth=depth)), abs=1e-6)  # the mirror's own loss
    assert textbook(index=2.5, optical_depth=0.5) == pytest.approx(0.0740740741, abs=1e-10)


# Walsh/Duntley: hemispherical reflectance of an index step, outside and inside; 0.092 and 0.596 are the published
# roundings (value from memory), the digits derived from the closed form.
REFLECTED = {1.5: (0.0917779593, 0.5963457597), 2.5: (0.2218665735, 0.8754986518)}


@pytest.mark.parametrize("n", REFLECTED)
def test_a_bare_face_passes_isotropic_light_alike_both_ways(n):
    ((_, scene),) = scenes(drawn(NM, [(1, 0), (n, FIVE_HUNDRED), (n, 0)]))
    outside, inside = REFLECTED[n]
    out, _ = _isotropic(scene, 1, (), 0)
    into, _ = _isotropic(scene, 0, (), 1)
    assert into[0] == pytest.approx(1.0 - outside, abs=1e-9)
    assert out[0] == pytest.approx(n * n * (1.0 - inside), abs=2e-9)


def test_faces_of_the_stack_let_less_out_than_open_ones():
    media = [(1, 0), film(2.5, 0.1), (1.52, 1.1e6, "plate"), (1, 0)]
    bare, opened = (escape(media, open_faces=each) for each in (False, True))
    assert bare.p_e < opened.p_e
    # out through the upper face 1; through the lower one n^2 into the plate and 1 out of it, one after the other
    out = 1.0 + 1.0 / (1.0 + 1.0 / 1.52**2)
    assert opened.p_e == pytest.approx(out / (out + 4.0 * 2.5**2 * 0.1), rel=1e-12)


def test_a_plate_takes_its_part_of_scrambled_light():
    """4 n^2 alpha d of each region, joined by an exchange that is large against both."""
    k = 1e-7
    plate = 4.0 * 1.52**2 * 4.0 * np.pi * k / NM * 1.1e6
    found = escape([(1, 0), film(1.52, 0.01), (1.52 + 1j * k, 1.1e6, "plate"), (MIRROR, 0)], open_faces=True)
    inner = 4.0 * 1.52**2 * 0.01
    # two regions in series: film (inner, out 1), face n^2, plate
    through = 1.52**2 * plate / (1.52**2 + plate)
    assert found.p_e == pytest.approx(1.0 / (1.0 + inner + through), rel=1e-6)
    assert found.p_a == pytest.approx(through / (1.0 + inner + through), rel=1e-4)


def test_nothing_lost_and_nothing_out_is_no_number_out_of_thin_air():
    found = escape([(MIRROR, 0), (2.5, FIVE_HUNDRED), (MIRROR, 0)], open_faces=True)
    assert found.p_e == 0.0
