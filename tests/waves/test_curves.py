"""Curves of integration: where they start and end, and that slope and distance belong to them."""

import numpy as np
import pytest

from optics.waves.curves import Rows, on_dip, on_panel, on_riser, panels

STEP = 1e-6
BY_DIFFERENCE = 1e-8
FILM = np.array([[2.5 + 0.3j]])


def row(*shape):
    return Rows(np.zeros(1, dtype=np.intp), np.zeros(1), np.ones(1), np.array([[value] for value in shape]))


def curve(name):
    return {
        "panel": lambda u: on_panel(panels(np.zeros(1, dtype=np.intp), np.array([1.0]), np.array([1.5])), u, FILM),
        "dip from zero": lambda u: on_dip(row(3.0), u, FILM),
        "dip from a light line": lambda u: on_dip(row(3.0), u, FILM, np.array([[1.5]])),
        "riser": lambda u: on_riser(row(3.0), u, FILM),
    }[name]


ENDS = {
    "panel": (1.0, 1.5),
    "dip from zero": (0.0, 3.0),
    "dip from a light line": (1.5, 3.0),
    "riser": (3.0, 3.0 + 0.3j * 3.0 / 2.5),
}


@pytest.mark.parametrize("name", ENDS)
def test_a_curve_runs_from_its_start_to_its_end(name):
    ends = curve(name)(np.array([[1e-12, 1.0 - 1e-12]])).q[0]
    assert ends == pytest.approx(np.array(ENDS[name]), abs=1e-9)


@pytest.mark.parametrize("name", ENDS)
def test_the_slope_of_a_curve_is_its_derivative(name):
    u = np.linspace(0.01, 0.99, 25)[None, :]
    at = curve(name)
    difference = (at(u + STEP).q - at(u - STEP).q) / (2.0 * STEP)
    np.testing.assert_allclose(at(u).slope, difference, atol=BY_DIFFERENCE)


@pytest.mark.parametrize("name", ENDS)
def test_the_distance_to_the_films_index_belongs_to_the_point(name):
    points = curve(name)(np.linspace(0.01, 0.99, 25)[None, :])
    np.testing.assert_allclose(points.short_of_film, FILM - points.q, atol=1e-14)


def test_the_distance_to_the_films_index_keeps_its_digits_where_a_dip_ends_there():
    u = 1.0 - np.array([[1e-6]])
    clear = np.array([[2.5 + 0j]])
    left = on_dip(row(2.5), u, clear).short_of_film.item()
    # q = n cos(x) with x = (pi/2) e + i c sin(pi e), e = 1e-12: n - q = n x^2/2
    x = 0.5 * np.pi * 1e-12 + 0.5j * np.sin(np.pi * 1e-12)
    assert left == pytest.approx(1.25 * x * x, rel=1e-3)


def test_a_dip_stays_below_the_axis_and_a_riser_climbs_straight():
    u = np.linspace(0.01, 0.99, 50)[None, :]
    assert curve("dip from zero")(u).q.imag.max() < 0.0
    assert curve("dip from a light line")(u).q.imag.max() < 0.0
    climbed = curve("riser")(u).q
    assert np.ptp(climbed.real) == 0.0
    assert np.diff(climbed.imag[0]).min() > 0.0
