"""Encapsulation limits in closed form."""

from itertools import pairwise

import numpy as np
import pytest

import optics
from optics.light import Light
from optics.media import find
from optics.spectrum import Gaussian
from optics.stack import Layer, Outer, Stack

CONE = 0.1273220038  # (1 - cos theta_c)/2 at n = 1.5: Schubert, Light-Emitting Diodes, ch. 5 prints 12.7 % (memory)
CLOSE = 1e-6  # numerical error of shares
CLEAR = 1e-12  # k: too little to take anything


def between_plates(film, cover, substrate=1.5, film_nm=400.0):
    return Stack(
        above=Outer(material=find("vacuum")),
        below=Outer(material=find("vacuum")),
        layers=(
            Layer(name="cover", material=find(cover), thickness_nm=1e6),
            Layer(name="film", material=find(film), thickness_nm=film_nm, emits=True),
            Layer(name="glass", material=find(substrate), thickness_nm=1e6),
        ),
        light=Light(wavelengths_nm=np.array([750.0, 770.0]), spectrum=Gaussian(peak_nm=760.0, fwhm_nm=40.0)),
    )


def test_an_index_matched_thick_cover_gives_the_covers_cone():
    averages = optics.solve(between_plates(1.5, 1.5)).averages
    # either face sends out its own cone, in the end, however often light goes to and fro between them
    assert averages["free_above"] == pytest.approx(CONE, abs=CLOSE)
    assert averages["free_below"] == pytest.approx(CONE, abs=CLOSE)
    # the other light is held where it went first: half of it in either plate
    assert averages["cover"] == pytest.approx(0.5 - CONE, abs=CLOSE)
    assert averages["substrate"] == pytest.approx(0.5 - CONE, abs=CLOSE)
    assert averages["trapped"] == pytest.approx(0.0, abs=CLOSE)


@pytest.mark.parametrize("film_nm", [80.0, 400.0, 2500.0])
def test_a_cover_of_the_films_own_index_leaves_no_bound_zone(film_nm):
    result = optics.solve(between_plates(2.4 + 0.01j, 2.4 + CLEAR * 1j, film_nm=film_nm))
    assert result.averages["waveguided"] == 0.0
    assert result.averages["guided_elsewhere"] == 0.0
    assert not (result.where["zone"] == "guided").any()


def test_a_cover_a_little_less_dense_than_the_film_leaves_a_little():
    shares = [optics.solve(between_plates(2.4 + 0.01j, n)).averages["waveguided"] for n in (1.5, 2.0, 2.3, 2.399)]
    assert all(later < earlier for earlier, later in pairwise(shares))
    assert 0.0 < shares[-1] < 0.05


def test_a_thick_cover_of_the_films_index_takes_the_half_that_goes_up():
    # thick film without reflection above: half is launched up, and what the film's own absorption spares gets over
    result = optics.solve(between_plates(2.4 + CLEAR * 1j, 2.4 + CLEAR * 1j, substrate=2.4))
    assert result.averages["cover"] + result.averages["free_above"] == pytest.approx(0.5, abs=CLOSE)
