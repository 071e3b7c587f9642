"""Births that are not even over depth: published and separately computed numbers, reciprocity, limits."""

import numpy as np
import pytest
import tmm
from piles import ISOTROPIC, amounts, drawn, ledger

from optics.fate.collection import pattern
from optics.fate.ledger import ENDS
from optics.waves.depth import SheetProfile, decay, exponentials, pieces
from optics.waves.source import uniform

EIGHT_DIGITS = 0.5e-8 + 1e-9  # half a unit of the last digit given, and what the quadrature adds
SHARES = 2e-7  # tolerance of the shares by the package's own quadrature
SPECIAL = exponentials([1.0, 0.3, 0.2 + 0.1j, 0.2 - 0.1j], [-2.0] * 4, [0.0, -4.0, -2 + 30j, -2 - 30j])


# Computed apart from this package by another program.
@pytest.mark.parametrize(("in_plane", "expected"), [(0.0, 0.98951221), (1.0, 0.93842670)])
def test_dipoles_at_mid_depth_radiate_as_computed_elsewhere(in_plane, expected):
    drawing = drawn(770, [(1, 0), (2.5, 500), (1.5, 0)], in_plane=in_plane, moments=SheetProfile(0.5))
    assert ledger(drawing).rate_factor[0] == pytest.approx(expected, abs=EIGHT_DIGITS)


MEDIA = [(1, 0), (1.8, 60), (2.5 + 0.05j, 300), (2.0 + 0.01j, 100), (1.5, 0)]


@pytest.mark.parametrize("at", [0.0, 0.2, 0.77, 1.0])
@pytest.mark.parametrize("angle", [0.0, 20.0, 50.0, 80.0])
def test_a_sheet_sends_out_what_it_would_absorb(at, angle):
    # Reciprocity (Wuerfel 1982; Rau 2007), depth by depth: power per steradian from births at one depth is
    # cos(theta) n_above^2 / (4 pi n^2 alpha) times the unpolarised absorption per length there, from the tmm library.
    drawing = drawn(700, MEDIA, film=2, moments=SheetProfile(at))
    index = [complex(medium[0]) for medium in MEDIA]
    thickness = [np.inf, *(medium[1] for medium in MEDIA[1:-1]), np.inf]
    absorption = 0.0
    for polarisation in "sp":
        field = tmm.coh_tmm(polarisation, index, thickness, np.deg2rad(angle), 700)
        absorption += 0.5 * tmm.position_resolved(2, at * thickness[2], field)["absor"]
    n, alpha = index[2].real, 4 * np.pi * index[2].imag / 700
    expected = np.cos(np.deg2rad(angle)) / (4 * np.pi * n**2 * alpha) * absorption
    assert pattern(drawing, np.array([angle]), side=0, model="wave")[0, 0] == pytest.approx(expected, rel=1e-9)


@pytest.mark.parametrize("model", ["wave", "ray"])
def test_sheets_at_all_depths_together_are_the_profile(model):
    node, weight = np.polynomial.legendre.leggauss(48)
    at = np.sin(0.25 * np.pi * (node + 1)) ** 2  # crowded at the faces, where grazing rays change fast
    step = 0.25 * np.pi * weight * np.sin(0.5 * np.pi * (node + 1))
    # What is reabsorbed and what is guided are cut apart by a convention that is not linear in the births.
    ends = (*ENDS[2:], "trapped")
    for moments in (uniform, SPECIAL):
        share = step if moments is uniform else step * moments.density(at)
        sheets = [amounts(drawn(700, MEDIA, film=2, moments=SheetProfile(x)), model=model) for x in at]
        whole = amounts(drawn(700, MEDIA, film=2, moments=moments), model=model)
        for end in ends:
            mean = sum(part * sheet[end] for part, sheet in zip(share, sheets, strict=True))
            assert whole[end] == pytest.approx(mean, abs=SHARES), end


@pytest.mark.parametrize("model", ["wave", "ray"])
@pytest.mark.parametrize("moments", [SheetProfile(0.1), decay(2.0), SPECIAL, pieces([0, 0.2, 1], [1, 3, 0])])
def test_the_ledger_adds_to_one_for_every_profile(model, moments):
    media = [(1, 0), (1.5, 2e6, "plate"), (2.5 + 0.05j, 300), (1.9, 100), (1.52, 1e6, "plate"), (1, 0)]
    found = ledger(drawn(700, media, film=2, moments=moments), model=model)
    assert sum(found.shares[end][0] for end in ENDS) == pytest.approx(1.0, abs=SHARES)


def test_a_film_and_its_profile_upside_down_swap_above_and_below():
    upright = ledger(drawn(700, MEDIA, film=2, moments=decay(2.0)))
    turned = ledger(drawn(700, MEDIA[::-1], film=2, moments=decay(2.0, from_below=True)))
    assert upright.rate_factor == pytest.approx(turned.rate_factor, abs=SHARES)
    assert upright.shares["free_above"] == pytest.approx(turned.shares["free_below"], abs=SHARES)
    assert upright.shares["reabsorbed"] == pytest.approx(turned.shares["reabsorbed"], abs=SHARES)


def test_rays_from_a_sheet_die_by_the_path_to_the_faces():
    # No refraction: escape of births at a is (E2(tau a/d) + E2(tau b/d))/2, E2 the exponential integral.
    from scipy.special import expn

    tau, at = 0.7, 0.3
    k = tau * 700 / (4 * np.pi * 300)
    media = [(2.0, 0), (2.0 + 1j * k, 300), (2.0, 0)]
    found = ledger(drawn(700, media, moments=SheetProfile(at)), model="ray")
    expected = 0.5 * (expn(2, tau * at) + expn(2, tau * (1 - at)))
    assert found.shares["free_above"][0] + found.shares["free_below"][0] == pytest.approx(expected, abs=SHARES)


def test_isotropic_births_of_half_a_film_each_make_the_whole():
    upper = pieces([0, 0.5 - 1e-9, 0.5, 1], [1, 1, 0, 0])
    lower = pieces([0, 0.5, 0.5 + 1e-9, 1], [0, 0, 1, 1])
    halves = [amounts(drawn(700, MEDIA, film=2, moments=half, in_plane=ISOTROPIC)) for half in (upper, lower)]
    whole = amounts(drawn(700, MEDIA, film=2))
    for end in (*ENDS[2:], "trapped"):
        assert whole[end] == pytest.approx(0.5 * (halves[0][end] + halves[1][end]), abs=SHARES), end
