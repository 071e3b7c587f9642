"""What one layer sends to another and gets back: Polder & Van Hove, Phys. Rev. B 4, 3303 (1971).

n_i^2 alpha_i d_i times the power that layer j takes of light born uniformly in layer i is symmetric in i and j, for
every in-plane wave number. It tests each layer's emission against each layer's absorption.
"""

from itertools import pairwise

import numpy as np
import pytest
from piles import bound_at, drawn, ledger, open_at, panel, scene_of

from optics.fate.exits import Layout

PER_NODE = 1e-9  # rounding, of differences of fluxes; in units of the largest exchange on the panel
INTEGRATED = 1e-6
WAVELENGTH_NM = 640.0

LAYERS = [(1.7 + 0.02j, 60), (2.4 + 0.05j, 300), (1.9 + 0.3j, 15), (2.1 + 0.001j, 180)]
STACKS = {
    "air and glass": ([(1, 0), *LAYERS, (1.5, 0)], 1),
    "dense outer medium": ([(1, 0), *LAYERS, (3.5, 0)], 1),
    "metal below": ([(1.5, 0), *LAYERS, (0.05 + 4.2j, 0)], 1),
    "plates": (
        [(1, 0), (1.45, 1e6, "plate"), (1.6 + 1e-7j, 1e6, "plate"), *LAYERS, (1.52 + 1e-7j, 2e6, "plate"), (1, 0)],
        3,
    ),
}


def weight(medium):
    index, thickness = complex(medium[0]), medium[1]
    return index.real**2 * index.imag * thickness


def pairs(first):
    return [(i, j) for i in range(first, first + len(LAYERS)) for j in range(first, i)]


def zones(media, first):
    """Return panels of the open zone and the bound one; the former ends at the higher of the media that touch."""
    touching = (media[first - 1], media[first + len(LAYERS)])
    real = [complex(medium[0]).real for medium in media]
    end = max(index for medium, index in zip(media, real, strict=True) if medium in touching)
    lines = [line for line in sorted({0.0, *real}) if line <= end]
    panels = [("open", low, high) for low, high in pairwise(lines)]
    return panels + ([("bound", end, 2.4)] if end < 2.4 else [])


def taken(zone, scene, q):
    """Return what each medium takes at each q, (medium, q)."""
    if zone == "bound":
        return bound_at(scene, q)[1:]
    layout = Layout(scene.media)
    return open_at(scene, q)[layout.open(0) : layout.open(scene.media)]


@pytest.mark.parametrize("name", STACKS)
def test_exchange_is_symmetric_at_every_node_of_every_zone(name):
    media, first = STACKS[name]
    for zone, low, high in zones(media, first):
        q, _ = panel(low, high, 12)
        sent = {
            i: weight(media[i]) * taken(zone, scene_of(drawn(WAVELENGTH_NM, media, film=i)), q)
            for i in range(first, first + len(LAYERS))
        }
        largest = max(np.abs(sent[i][j]).max() for i, j in pairs(first))
        for i, j in pairs(first):
            np.testing.assert_allclose(sent[i][j], sent[j][i], atol=PER_NODE * largest, rtol=PER_NODE)


@pytest.mark.parametrize("name", STACKS)
def test_exchange_is_symmetric_in_the_ledger(name):
    media, first = STACKS[name]
    sent = {}
    for i in range(first, first + len(LAYERS)):
        found = ledger(drawn(WAVELENGTH_NM, media, film=i))
        sent[i] = weight(media[i]) * found.rate_factor[0] * found.taken[..., 0]  # (zone, medium)
    for i, j in pairs(first):
        scale = max(weight(media[i]), weight(media[j]))
        np.testing.assert_allclose(sent[i][:, j], sent[j][:, i], atol=INTEGRATED * scale, rtol=0)
        assert sent[i][0, j] > 10 * INTEGRATED * min(weight(media[i]), weight(media[j]))  # there is light to exchange


@pytest.mark.parametrize("name", STACKS)
def test_a_layer_sends_the_same_to_two_halves_of_another_as_to_the_whole(name):
    media, first = STACKS[name]
    index, thickness = media[first + 1]
    cut = [*media[: first + 1], (index, 0.4 * thickness), (index, 0.6 * thickness), *media[first + 2 :]]
    whole = ledger(drawn(WAVELENGTH_NM, media, film=first))
    halves = ledger(drawn(WAVELENGTH_NM, cut, film=first))
    np.testing.assert_allclose(halves.rate_factor, whole.rate_factor, atol=INTEGRATED)
    both = halves.taken[:, first + 1] + halves.taken[:, first + 2]
    np.testing.assert_allclose(both, whole.taken[:, first + 1], atol=INTEGRATED)
