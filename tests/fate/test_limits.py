"""Limits in which the answer is known: no interface at all, layers that change nothing, films thick against fringes."""

import numpy as np
import pytest
from piles import ISOTROPIC, amounts, bound_at, drawn, ledger, open_at, scene_of
from scipy.integrate import quad_vec

from optics.fate import wave
from optics.fate.exits import SUBSTRATE, Layout
from optics.fate.ledger import ENDS

EXACT = 1e-9
SHARES = 1e-7  # tolerance of the shares by the package's own quadrature
FILM = (2.5 + 0.02j, 500)


@pytest.mark.parametrize("thickness_nm", [5.0, 500.0, 20_000.0])
@pytest.mark.parametrize("in_plane", [0.0, ISOTROPIC, 1.0])
@pytest.mark.parametrize("k", [0.0, 0.02, 0.3, 1.0])
def test_the_rate_factor_of_the_bulk_is_one_for_any_absorption(k, in_plane, thickness_nm):
    index = 2.0 + 1j * k
    found = ledger(drawn(700, [(index, 0), (index, thickness_nm), (index, 0)], in_plane=in_plane))
    assert found.rate_factor[0] == pytest.approx(1.0, abs=EXACT)


@pytest.mark.parametrize("k", [0.0, 0.02, 0.3])
def test_the_rate_factor_of_the_bulk_is_one_when_a_layer_of_the_same_index_touches_the_film(k):
    index = 2.0 + 1j * k
    media = [(index, 0), (index, 130), (index, 40), (index, 310), (index, 0)]
    assert ledger(drawn(700, media, film=2)).rate_factor[0] == pytest.approx(1.0, abs=EXACT)


@pytest.mark.parametrize("k", [0.05, 0.3])
@pytest.mark.parametrize("beyond", [1.0, 1.8, 2.5, 3.4])
def test_what_lies_behind_20_um_of_the_films_own_absorbing_index_is_not_felt(k, beyond):
    index = 2.0 + 1j * k
    media = [(index, 0), (index, 20_000), (index, 300), (index, 20_000), (beyond, 0)]
    assert ledger(drawn(700, media, film=2)).rate_factor[0] == pytest.approx(1.0, abs=1e-5)


STACKS = {
    "half-space": [(1, 0), FILM, (1.5, 0)],
    "absorbing neighbour": [(1, 0), FILM, (1.8 + 0.005j, 120), (1.5, 0)],
    "plate": [(1, 0), FILM, (1.8 + 0.005j, 120), (1.52, 1.1e6, "plate"), (1, 0)],
    "dense half-space": [(1, 0), FILM, (3.5, 0)],
    "metal": [(1, 0), FILM, (1.8, 80), (0.05 + 4.2j, 0)],
}


@pytest.mark.parametrize("model", ["wave", "ray"])
@pytest.mark.parametrize("name", STACKS)
def test_shares_add_to_one(name, model):
    found = ledger(drawn(760, STACKS[name]), model=model)
    assert sum(found.shares[end][0] for end in ENDS) == pytest.approx(1.0, abs=SHARES)
    assert abs(found.closure[0]) < SHARES


@pytest.mark.parametrize("model", ["wave", "ray"])
@pytest.mark.parametrize("name", STACKS)
def test_turned_over_a_stack_swaps_above_and_below(name, model):
    media = STACKS[name]
    upright = ledger(drawn(760, media), model=model)
    turned = ledger(drawn(760, media[::-1], film=len(media) - 2), model=model)
    swapped = {"free_above": "free_below", "free_below": "free_above", "cover": "substrate", "substrate": "cover"}
    assert turned.rate_factor[0] == pytest.approx(upright.rate_factor[0], abs=EXACT)
    for share, values in upright.shares.items():
        assert turned.shares[swapped.get(share, share)][0] == pytest.approx(values[0], abs=SHARES)


@pytest.mark.parametrize("model", ["wave", "ray"])
@pytest.mark.parametrize("name", STACKS)
def test_layers_of_a_neighbours_own_index_change_nothing(name, model):
    media = STACKS[name]
    plain = ledger(drawn(760, media), model=model)
    padded = [media[0], (media[0][0], 330), *media[1:]]
    found = ledger(drawn(760, padded, film=2), model=model)
    assert found.rate_factor[0] == pytest.approx(plain.rate_factor[0], abs=SHARES)
    for share, values in plain.shares.items():
        assert found.shares[share][0] == pytest.approx(values[0], abs=SHARES)


def test_a_clear_layer_of_a_plates_own_index_changes_nothing():
    plate = (1.52, 1.1e6, "plate")
    plain = amounts(drawn(760, [(1, 0), FILM, plate, (1, 0)]))
    padded = amounts(drawn(760, [(1, 0), FILM, (1.52, 700), plate, (1.52, 90), (1, 0)]))
    assert padded == pytest.approx(plain, abs=SHARES)


def test_a_clear_plate_of_a_plates_own_index_changes_nothing():
    plain = amounts(drawn(760, [(1, 0), FILM, (1.52, 1.1e6, "plate"), (1, 0)]))
    cut = amounts(drawn(760, [(1, 0), FILM, (1.52, 6e5, "plate"), (1.52, 5e5, "plate"), (1, 0)]))
    assert cut == pytest.approx(plain, abs=SHARES)


@pytest.mark.parametrize("model", ["wave", "ray"])
@pytest.mark.parametrize("name", STACKS)
def test_isotropic_births_are_two_thirds_in_plane_and_one_third_normal(name, model):
    by_direction = {h: amounts(drawn(760, STACKS[name], in_plane=h), model=model) for h in (0.0, ISOTROPIC, 1.0)}
    for share, value in by_direction[ISOTROPIC].items():
        mixed = by_direction[1.0][share] * 2.0 / 3.0 + by_direction[0.0][share] / 3.0
        assert value == pytest.approx(mixed, abs=SHARES)


BOUND = {"glass": [(1, 0), None, (1.5, 0)], "absorber": [(1, 0), None, (1.8 + 0.01j, 90), (1.5, 0)]}


@pytest.mark.parametrize("name", BOUND)
@pytest.mark.parametrize("k", [1e-3, 0.01, 0.1, 0.3])
def test_bound_light_is_the_same_on_the_axis_as_on_the_path_below_it(k, name):
    """What film and layers take of bound light, integrated over its lines on the axis by scipy, against the dip."""
    media = [medium or (2.5 + 1j * k, 500) for medium in BOUND[name]]
    scene = scene_of(drawn(760, media))
    end = scene.far_end[0]

    def on_axis(angle):
        q = 1.5 + (end - 1.5) * np.sin(angle) ** 2
        return bound_at(scene, [q])[:, 0] * (end - 1.5) * np.sin(2.0 * angle)

    lines = np.linspace(0.0, 0.5 * np.pi, 60)[1:-1]
    axis, _ = quad_vec(on_axis, 0.0, 0.5 * np.pi, epsabs=1e-10, epsrel=0, points=lines, limit=20_000)
    path = wave.dip(scene, scene.far_end, wave.Settings(), start=scene.open_end).values[0, 0]
    assert axis[0] == pytest.approx(path, abs=SHARES)
    taken = axis[1:].sum()
    assert taken == pytest.approx(amounts(drawn(760, media))["guided_elsewhere"], abs=SHARES)


@pytest.mark.parametrize("name", BOUND)
def test_open_light_is_the_same_on_the_axis_as_on_the_path_below_it(name):
    media = [medium or FILM for medium in BOUND[name]]
    scene = scene_of(drawn(760, media))
    axis = wave.open_zone(scene, wave.Settings()).values[Layout.power, 0]
    whole = wave.dip(scene, scene.far_end, wave.Settings()).values[0, 0]
    bound = wave.dip(scene, scene.far_end, wave.Settings(), start=scene.open_end).values[0, 0]
    assert axis == pytest.approx(whole - bound, abs=SHARES)


LEAVING = 5e-5  # fringes that one period of the thickness does not average out: those of slanted light
TRAPPED = 3e-4  # what the edges of the film change, of first order in 1/thickness, is extrapolated away
SPLIT = 1e-3  # in wave optics the cut between these two is a convention; only their sum is sharp
THICK_STACKS = {
    "on glass": [(1, 0), None, (1.5, 0)],
    "on an absorber": [(1, 0), None, (1.8 + 0.02j, 120), (1.5, 0)],
    "on an absorber and a plate": [(1, 0), None, (1.8 + 0.02j, 120), (1.52, 1e6, "plate"), (1, 0)],
    "on a mirror": [(1, 0), (1.6 + 0.05j, 50), None, (0.2 + 3j, 0)],
}


@pytest.mark.parametrize("k", [0.005, 0.02])
@pytest.mark.parametrize("name", THICK_STACKS)
def test_a_thick_film_averaged_over_its_fringes_is_what_rays_say(name, k):
    """Over one period of 20 um, share by share; bound light feels the film's edges, less and less as it thickens."""
    media = THICK_STACKS[name]
    place = media.index(None)
    period = 760.0 / (2.0 * 2.5)

    def averaged(thickness_nm):
        steps = [
            drawn(760, [medium or (2.5 + 1j * k, thickness_nm + period * step / 12.0) for medium in media], film=place)
            for step in range(12)
        ]
        both = [(amounts(one), amounts(one, model="ray")) for one in steps]
        return {share: np.mean([wave[share] - ray[share] for wave, ray in both]) for share in both[0][0]}

    thin, thick = averaged(9_900.0), averaged(19_800.0)
    for share in ("free_above", "free_below", "cover", "substrate", "elsewhere"):
        assert abs(thick[share]) < LEAVING
    for share, within in (
        ("trapped", TRAPPED),
        ("guided_elsewhere", TRAPPED),
        ("reabsorbed", SPLIT),
        ("waveguided", SPLIT),
    ):
        assert abs(2.0 * thick[share] - thin[share]) < within


def test_an_almost_clear_film_between_absorbing_contacts_guides_light_to_them_as_a_clear_one_does():
    def guided(k):
        return amounts(
            drawn(760, [(1, 0), (2.0 + 0.01j, 60), (2.5 + 1j * k, 500), (1.8 + 0.005j, 120), (1.5, 0)], film=2)
        )

    assert guided(1e-12) == pytest.approx(guided(0.0), abs=SHARES)
    assert guided(0.0)["guided_elsewhere"] > 0.5


def test_held_light_survives_a_plate_as_beer_and_lambert_say():
    """Beyond the air cone the far face reflects everything: there and back, exp(-2 alpha t/cos) is still held."""
    k, thickness_nm, n = 3e-7, 1.1e6, 1.52
    plate = (n + 1j * k, thickness_nm, "plate")
    scene = scene_of(drawn(760, [(1, 0), FILM, plate, (1, 0)]))
    q = np.linspace(1.05, 1.5, 40)
    found, layout = open_at(scene, q), Layout(scene.media)
    held, taken = found[layout.end(SUBSTRATE)], found[layout.held(2)]
    round_trip = 2.0 * 4.0 * np.pi * k * thickness_nm / 760.0 / np.sqrt(1.0 - (q / n) ** 2)
    np.testing.assert_allclose(held / (held + taken), np.exp(-round_trip), rtol=1e-9)
    clear = open_at(scene_of(drawn(760, [(1, 0), FILM, (n, thickness_nm, "plate"), (1, 0)])), q)
    np.testing.assert_allclose(held + taken, clear[layout.end(SUBSTRATE)], rtol=1e-9)


@pytest.mark.parametrize("k", [1e-6, 1e-3, 0.1])
def test_the_absorption_of_a_plate_does_not_change_its_faces(k):
    """Faces of plates take the real index; what the plate absorbs is taken on the way through it."""
    clear = amounts(drawn(760, [(1, 0), FILM, (1.52, 1.1e6, "plate"), (1, 0)]))
    media = [(1, 0), FILM, (1.52 + 1j * k, 1.1e6, "plate"), (1, 0)]
    absorbing = amounts(drawn(760, media))
    assert ledger(drawn(760, media)).rate_factor[0] == pytest.approx(sum(clear[end] for end in ENDS), abs=SHARES)
    assert absorbing["waveguided"] == pytest.approx(clear["waveguided"], abs=SHARES)
    if k >= 1e-3:  # opaque: nothing comes back from its far face, nothing gets there
        assert absorbing["free_below"] + absorbing["substrate"] < SHARES
        half_space = amounts(drawn(760, [(1, 0), FILM, (1.52, 0)]))
        assert absorbing["elsewhere"] == pytest.approx(half_space["free_below"], abs=SHARES)
        assert absorbing["free_above"] == pytest.approx(half_space["free_above"], abs=SHARES)
