"""The matrix over the depth: sums, symmetry, reciprocity and the limit of no interfaces."""

from dataclasses import replace

import numpy as np
import pytest
from piles import drawn, ledger
from piles import scene_of as only_scene
from scipy.special import expn

from optics import Emission, InputError
from optics.fate.wave import Settings
from optics.transport import depthray, nodes
from optics.transport.depth import indepth
from optics.transport.nodes import bulk_flux, landing_end

from .test_inplane import stack_of

ROWS = 1e-12  # rows are closed by what is left
LEDGER = 1e-8
TWO_HALVES = 2e-6  # two quadratures

STACKS = {
    "film": [(2.5 + 0.02j, 500)],
    "dark film": [(2.5 + 0.3j, 300)],
    "on a plate": [(2.5 + 0.02j, 500), (1.8 + 0.005j, 120), (1.52, 1.1e6)],
    "by a denser neighbour": [(1.65 + 0.005j, 60), (1.95 + 0.005j, 150), (1.52, 1.1e6)],
    "clear": [(2.5, 500), (1.8 + 0.01j, 90)],
    "on a metal": [(2.5 + 0.05j, 200), (0.2 + 4j, 80)],
}


DENSE = {
    "a rare film on a denser one": [(1.25 + 0.1j, 250), (3.4 + 0.1j, 18), (1.9, 160)],
    "a dark film on a denser one": [(2.9 + 0.6j, 77), (3.55, 14)],
}
"""Stacks with near field between slices, or so much of it that a slice at the face radiates less than nothing."""


def of_even_births(found, matrix):
    """Return what even births have taken back and the other ends, per wavelength."""
    births = np.diff(found.edges_nm)[:, None] * matrix.rate_by_wavelength
    births = births / births.sum(axis=0)
    film = np.einsum("iw,wij->w", births, matrix.by_wavelength)
    return film, np.einsum("iw,wie->we", births, matrix.ends_by_wavelength)


@pytest.mark.parametrize("media", STACKS.values(), ids=STACKS.keys())
def test_even_births_reproduce_the_ledger_and_rows_add_to_one(media):
    found = indepth(stack_of(media), slices=20)
    drawing = drawn(
        found.wavelength_nm, [(1.0, 0), *((i, t, "plate") if t > 2e4 else (i, t) for i, t in media), (1.5, 0)]
    )
    for model, matrix in (("wave", found.wave), ("ray", found.ray)):
        said = ledger(drawing, model=model)
        film, ends = of_even_births(found, matrix)
        assert film == pytest.approx(said.shares["reabsorbed"] + said.shares["guided_reabsorbed"], abs=LEDGER)
        assert ends[:, 2] == pytest.approx(said.shares["free_below"], abs=LEDGER)
        assert matrix.by_wavelength.sum(axis=2) + matrix.ends_by_wavelength.sum(axis=2) == pytest.approx(1.0, abs=ROWS)
        assert matrix.matrix.sum(axis=1) + matrix.ends.sum(axis=1) == pytest.approx(1.0, abs=ROWS)
        assert matrix.by_wavelength.min() >= 0.0
        # what was summed here agrees with the ledger before it was scaled to it; leaky lines by a metal are sharp
        metal = np.real(media[-1][0]) < 1.0
        assert matrix.scaled_by < (1e-2 if metal else 1e-4 if model == "wave" else 1e-6)


@pytest.mark.parametrize("media", DENSE.values(), ids=DENSE.keys())
@pytest.mark.parametrize("upright", [1 / 3, 1.0])
def test_mended_slices_still_reproduce_the_ledger_and_are_told_of(media, upright):
    found = indepth(stack_of(media, horizontal_share=1 - upright), slices=40)
    drawing = drawn(found.wavelength_nm, [(1.0, 0), *media, (1.5, 0)], in_plane=1 - upright)
    assert found.wave.mended > 0.01
    assert any("mended" in line for line in found.warnings)
    said = ledger(drawing)
    film, ends = of_even_births(found, found.wave)
    assert film == pytest.approx(said.shares["reabsorbed"] + said.shares["guided_reabsorbed"], abs=LEDGER)
    assert ends[:, 2] == pytest.approx(said.shares["free_below"], abs=LEDGER)
    assert ends[:, 3] == pytest.approx(said.shares["free_above"], abs=LEDGER)
    rows = found.wave.by_wavelength.sum(axis=2) + found.wave.ends_by_wavelength.sum(axis=2)
    assert rows == pytest.approx(1.0, abs=ROWS)
    assert found.wave.by_wavelength.min() >= 0.0


def test_a_ledger_below_zero_is_said_to_fit_no_matrix():
    # ten nm of a rare dark film by denser neighbours: its near field leaves by them more than it radiates
    media = [(1.4532 + 0.515j, 10.5), (3.4, 350)]
    stack = stack_of(media, wavelengths_nm=[700.0])
    said = ledger(drawn(700, [(1.0, 0), *media, (1.5, 0)]))
    assert min(said.shares["reabsorbed"] + said.shares["guided_reabsorbed"]) < -0.01
    assert any("below zero" in line for line in indepth(stack, slices=10).warnings)


@pytest.mark.parametrize("model", ["wave", "ray"])
def test_a_symmetric_stack_has_a_symmetric_matrix(model):
    found = indepth(stack_of([(2.5 + 0.02j, 400)], above=1.5, below=1.5), slices=16)
    matrix = getattr(found, model)
    assert matrix.matrix == pytest.approx(matrix.matrix[::-1, ::-1], abs=1e-9)
    assert matrix.ends[:, 2] == pytest.approx(matrix.ends[::-1, 3], abs=1e-9)


@pytest.mark.parametrize("model", ["wave", "ray"])
def test_births_times_landing_are_the_same_both_ways_for_isotropic_emission(model):
    # Polder & Van Hove (1971), slice to slice: width x rate x share is symmetric
    edges = np.array([0.0, 60, 100, 140, 200, 320, 500])  # slices of a few nm are mended, row by row
    found = indepth(stack_of([(2.5 + 0.02j, 500), (1.9 + 0.01j, 60)]), edges_nm=edges)
    matrix = getattr(found, model)
    assert matrix.mended == 0.0
    amount = matrix.by_wavelength * (np.diff(edges)[:, None] * matrix.rate_by_wavelength).T[:, :, None]
    assert amount == pytest.approx(amount.transpose(0, 2, 1), rel=1e-9, abs=1e-12)


def test_dipoles_in_the_plane_alone_break_that_symmetry():
    stack = stack_of([(2.5 + 0.02j, 500)])
    stack = replace(stack, emission=Emission(horizontal_share=1.0))
    found = indepth(stack, slices=8)
    amount = found.wave.by_wavelength * found.wave.rate_by_wavelength.T[:, :, None]
    assert np.abs(amount - amount.transpose(0, 2, 1)).max() > 1e-4


def test_a_coarse_mesh_is_the_fine_one_added_up():
    stack = stack_of([(2.5 + 0.02j, 500)])
    coarse, fine = indepth(stack, slices=5), indepth(stack, slices=20)
    weight = fine.wave.rate_by_wavelength.T.reshape(3, 5, 4)
    share = fine.wave.by_wavelength.reshape(3, 5, 4, 5, 4).sum(axis=4)
    added = (share * weight[..., None]).sum(axis=2) / weight.sum(axis=2)[..., None]
    off = ~np.eye(5, dtype=bool)
    assert added[:, off] == pytest.approx(coarse.wave.by_wavelength[:, off], abs=1e-9)


@pytest.mark.parametrize("in_plane", [2 / 3, 0.2])
@pytest.mark.parametrize("behind", [[], [(1.52, 1.1e6), (0.2 + 4j, 200)]], ids=["open", "a mirror behind glass"])
def test_two_halves_of_a_film_send_each_other_what_the_ledger_of_two_layers_says(in_plane, behind, monkeypatch):
    # the other half as a layer of its own: who takes what then needs no slices at all; the ledger stops at the film's
    # own light line, beyond which the matrix follows grazing light (0.01 of the births here)
    monkeypatch.setattr(nodes, "landing_end", lambda scene: scene.far_end)
    film, half = 2.5 + 0.03j, 250
    found = indepth(stack_of([(film, 2 * half), *behind], horizontal_share=in_plane), slices=2).wave
    rest = [(i, t, "plate") if t > 2e4 else (i, t) for i, t in behind]
    for birth in (0, 1):
        media = [(1.0, 0), (film, half), (film, half), *rest, (1.5, 0)]
        said = ledger(drawn((760.0, 770.0, 780.0), media, film=1 + birth, in_plane=in_plane))
        # light held in plates is booked as held, and so is no part of the matrix
        other = said.taken[[0, 2], 2 - birth].sum(axis=0)
        matrix = found.by_wavelength[:, birth, 1 - birth]
        assert matrix == pytest.approx(other, abs=TWO_HALVES)


@pytest.mark.parametrize("model", ["wave", "ray"])
def test_what_a_mirror_behind_glass_sends_back_lands_evenly_across_the_slice_of_birth(model):
    # the glass carries intensities: the mirror adds to every slice, and nothing in particular to that of birth
    amounts = []
    for mirror in ([], [(0.2 + 4j, 200)]):
        found = getattr(indepth(stack_of([(2.5 + 0.01j, 500), (1.52, 1.1e6), *mirror], below=1.52), slices=100), model)
        amounts.append(found.by_wavelength * found.rate_by_wavelength.T[:, :, None])
    more = (amounts[1] - amounts[0])[0]
    at = np.arange(2, 98)
    beside = (4 * (more[at, at - 1] + more[at, at + 1]) - more[at, at - 2] - more[at, at + 2]) / 6
    assert more.sum(axis=1).min() > 0.02
    assert more[at, at] == pytest.approx(beside, abs=0.02 * beside.max())


def test_a_sharp_leaky_line_that_slips_through_the_nodes_is_found_in_the_end():
    # found by fuzzing: light leaks from the film through 160 nm of a rare medium; the ends were off by their whole
    media = [(1.126, 158.8), (2.4667 + 0.0243j, 9.1), (1.762 + 0.00015j, 343.2)]
    stack = stack_of(media, above=1.664, below=1.0, wavelengths_nm=[779.8, 806.7], horizontal_share=0.0)
    layers = [replace(layer, emits=place == 2) for place, layer in enumerate(stack.layers)]
    assert indepth(replace(stack, layers=tuple(layers)), slices=12).wave.scaled_by < 1e-4


def exchange(edges, tau):
    """Return the matrix of a slab without interfaces: differences of E3 (Case, de Hoffmann & Placzek 1953)."""
    depth = tau * edges / edges[-1]
    out = np.empty((len(edges) - 1, len(edges) - 1))
    for i in range(len(out)):
        for j in range(len(out)):
            own, other = depth[i + 1] - depth[i], depth[j + 1] - depth[j]
            if i == j:
                out[i, j] = 1.0 - (0.5 - expn(3, own)) / own
                continue
            gap = depth[j] - depth[i + 1] if j > i else depth[i] - depth[j + 1]
            e3 = [expn(3, x) for x in (gap, gap + own, gap + other, gap + own + other)]
            out[i, j] = 0.5 * (e3[0] - e3[1] - e3[2] + e3[3]) / own
    return out


@pytest.mark.parametrize("k", [0.01, 0.1, 1.0])
def test_rays_without_interfaces_are_differences_of_exponential_integrals(k):
    stack = stack_of([(2.5 + 1j * k, 500)], above=2.5, below=2.5, wavelengths_nm=[770.0])
    found = indepth(stack, slices=10)
    expected = exchange(found.edges_nm, 4 * np.pi * k * 500 / 770)
    assert found.ray.matrix == pytest.approx(expected, abs=5e-5)  # the rule over angles near the grazing ones


def test_waves_far_from_faces_come_near_the_same_limit():
    k = 0.02
    stack = stack_of([(2.5 + 1j * k, 2000)], above=2.5, below=2.5, wavelengths_nm=[770.0])
    found = indepth(stack, slices=40)
    expected = exchange(found.edges_nm, 4 * np.pi * k * 2000 / 770)
    middle = slice(12, 28)
    inner, limit = found.wave.matrix[middle, middle], expected[middle, middle]
    apart = np.abs(np.subtract.outer(np.arange(16), np.arange(16)))
    # physics.md: off by about 0.1 k in a film's share; slices of 50 nm feel the film's finite wavelength
    assert inner[(apart > 0) & (apart < 8)] == pytest.approx(limit[(apart > 0) & (apart < 8)], rel=0.05)


def test_grazing_light_is_followed_until_the_bulk_has_given_all_its_flux():
    scene = only_scene(drawn(760, [(1.0, 0), (2.5 + 0.02j, 500), (1.5, 0)]))
    assert bulk_flux(scene, landing_end(scene)) == pytest.approx(1.0, abs=1e-9)
    # the closed form against the integral of the fluxes themselves
    q = np.linspace(0.0, 3.0, 400_001)
    eps = (2.5 + 0.02j) ** 2
    kz = np.sqrt(eps - q * q + 0j)
    size, n = np.abs(kz) ** 2, 2.5
    flux = 0.5 * q * kz.real / size + 0.5 * q * (kz / eps).real + 0.5 * q**3 * (kz / eps).real / size
    assert bulk_flux(scene, np.array([3.0]))[0] == pytest.approx(np.trapezoid(flux, q) / n, abs=1e-6)


def test_a_very_dark_film_keeps_its_neighbours_and_overflows_nowhere():
    scene = only_scene(drawn(500, [(1.0, 0), (2.5 + 1j, 30_000, "plate"), (1.5, 0)]))
    landing = depthray.land(scene, scene.phase[scene.film][:, None] * np.linspace(0, 1, 31), Settings())
    assert np.isfinite(landing.matrix).all()
    tau = 4 * np.pi * 1000 / 500
    assert landing.matrix[0, 10, 11] == pytest.approx(0.25 / tau, rel=1e-3)  # E3(0) = 1/2, half of it each way


@pytest.mark.parametrize(
    ("edges", "said"),
    [
        ([0, 100, 90, 500], "expected ascending"),
        ([0, 100, 480], "expected 0 to 500 nm"),
        ([10, 100, 500], "expected 0 to 500 nm"),
        ([0, 500], "expected 3 to 401"),
        ([0, np.nan, 500], "expected 3 to 401"),
    ],
)
def test_a_mesh_that_does_not_span_the_film_is_refused(edges, said):
    with pytest.raises(InputError, match=said):
        indepth(stack_of([(2.5 + 0.02j, 500)]), edges_nm=np.array(edges, dtype=float))
