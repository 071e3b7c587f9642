"""Held light followed to its end: against a first script's numbers, limits, and rays followed by chance."""

import numpy as np
import pytest
from chance import followed
from piles import drawn, ledger
from scipy.optimize import newton

from optics.fate.ends import PLACES, follow
from optics.fate.sampled import largest_gap
from optics.fate.wave import Settings
from optics.sample import Sample

NM = 760
FILM = (2.5 + 0.02j, 500)
CLEAR = (2.5, 500)
GLASS = (1.52, 1.1e6, "plate")
COVER = (1.5, 0.4e6, "plate")
THREE_DIGITS = 0.5e-3  # half a unit of the last digit of the numbers quoted
ADDING_UP = 1e-9
FAR_MM, AT_SPOT_MM = 1e9, 0.0


def ends_of(media, *, model="wave", film=1, free=(True, True), **sample):
    drawing = drawn(NM, media, film=film, free=free)
    return follow(drawing, ledger(drawing, model=model), Sample(**sample), Settings(), model=model)


def place(ends, light, sample, name):
    return float(getattr(ends, light)[sample][PLACES.index(name)][0])


@pytest.mark.parametrize(("edge_mm", "expected"), [(5, 0.058), (12.5, 0.030), (25, 0.014), (100, 0.002)])
def test_of_the_light_held_in_the_glass_the_share_that_reaches_an_edge(edge_mm, expected):
    """Numbers computed apart from this package, by a first script."""
    ends = ends_of([(1, 0), FILM, GLASS, (1, 0)], to_edge_mm=edge_mm)
    assert place(ends, "held", "edged", "at_edge") == pytest.approx(expected, abs=THREE_DIGITS)
    assert ends.entered[0] == pytest.approx(0.0890, abs=0.5e-4)


STACKS = {
    "on glass": [(1, 0), FILM, GLASS, (1, 0)],
    "on dim glass": [(1, 0), FILM, (1.52 + 2e-6j, 1.1e6, "plate"), (1, 0)],
    "under a cover": [(1, 0), COVER, FILM, GLASS, (1, 0)],
    "on a mirror": [(1, 0), COVER, FILM, (0.1 + 5j, 100), GLASS, (1, 0)],
    "on a half-space": [(1, 0), COVER, FILM, (1.7, 0)],
    "clear": [(1, 0), CLEAR, GLASS, (1, 0)],
}


def film_of(media):
    return next(i for i, medium in enumerate(media) if medium in (FILM, CLEAR))


@pytest.mark.parametrize("model", ["wave", "ray"])
@pytest.mark.parametrize("scatter", [0.0, 50.0])
@pytest.mark.parametrize("name", STACKS)
def test_all_ends_add_to_one(name, scatter, model):
    media = STACKS[name]
    free = (True, name != "on a half-space")
    ends = ends_of(media, model=model, film=film_of(media), free=free, to_edge_mm=7.0, guided_scatter_per_cm=scatter)
    assert largest_gap(ends) < ADDING_UP


@pytest.mark.parametrize("model", ["wave", "ray"])
def test_at_an_edge_without_distance_all_held_and_guided_light_is_there_at_once(model):
    ends = ends_of(STACKS["under a cover"], film=2, model=model, to_edge_mm=AT_SPOT_MM)
    assert place(ends, "held", "edged", "at_edge") == pytest.approx(ends.entered[0], rel=1e-12)
    along = ends.along["edged"][:, 0]
    flown = -along[PLACES.index("to_film")]  # first flights along the film are cut short as well
    assert along[PLACES.index("at_edge")] == pytest.approx(ends.guided[0] + flown, rel=1e-12)


@pytest.mark.parametrize("model", ["wave", "ray"])
@pytest.mark.parametrize("name", ["on glass", "under a cover", "on a mirror"])
def test_a_far_edge_is_no_edge(name, model):
    media = STACKS[name]
    ends = ends_of(media, film=film_of(media), model=model, to_edge_mm=FAR_MM)
    np.testing.assert_allclose(ends.held["edged"], ends.held["wide"], atol=1e-9)
    np.testing.assert_allclose(ends.along["edged"], ends.along["wide"], atol=1e-12)


def test_a_clear_film_between_clear_plates_sends_all_held_and_guided_light_to_the_edges():
    ends = ends_of([(1, 0), COVER, CLEAR, GLASS, (1, 0)], film=2, to_edge_mm=12.5)
    assert place(ends, "held", "edged", "at_edge") == pytest.approx(ends.entered[0], rel=1e-12)
    assert place(ends, "along", "edged", "at_edge") == pytest.approx(ends.guided[0], rel=1e-12)
    assert place(ends, "held", "wide", "unfinished") == pytest.approx(ends.entered[0], rel=1e-12)


def test_without_edges_only_what_absorbs_takes_held_light():
    ends = ends_of(STACKS["on glass"])
    assert place(ends, "held", "wide", "to_film") == pytest.approx(ends.entered[0], rel=1e-12)
    dim = ends_of(STACKS["on dim glass"])
    assert place(dim, "held", "wide", "to_layers") > 0.01
    assert place(dim, "held", "wide", "to_film") + place(dim, "held", "wide", "to_layers") == pytest.approx(
        dim.entered[0], rel=1e-12
    )


def test_light_held_above_leaves_through_a_dense_half_space_below_on_its_returns():
    """Beyond the cover's cone the half-space of index 1.7 still lets light in."""
    free = ends_of(STACKS["on a half-space"], film=2, free=(True, True))
    assert place(free, "held", "wide", "to_free") > 0.1 * free.entered[0]
    held = ends_of(STACKS["on a half-space"], film=2, free=(True, False))
    assert place(held, "held", "wide", "to_outer") > place(free, "held", "wide", "to_free")


@pytest.mark.parametrize("model", ["wave", "ray"])
def test_scattering_without_limit_takes_all_guided_light(model):
    ends = ends_of(STACKS["on glass"], model=model, guided_scatter_per_cm=1e12)
    scattered = ends.scattered["wide"].sum(axis=0)[0]
    flown = -place(ends, "along", "wide", "to_film")
    assert scattered == pytest.approx(ends.guided[0] + flown, rel=1e-6)


def test_scattering_of_nothing_is_no_scattering():
    still = ends_of(STACKS["on glass"])
    faint = ends_of(STACKS["on glass"], guided_scatter_per_cm=1e-9)
    for sample in ("wide", "edged"):
        for name in PLACES:
            assert faint.total(sample, name) == pytest.approx(still.total(sample, name), abs=1e-9)
    assert not still.scattered["wide"].any()


def test_scattered_light_follows_the_share_that_is_sent_up():
    media = [(1, 0), FILM, (0.1 + 5j, 100), (0.1 + 5j, 0)]  # a mirror below takes what is sent down
    up, down = (
        ends_of(media, guided_scatter_per_cm=1e12, scatter_up_share=share).scattered["wide"][:, 0] for share in (1, 0)
    )
    assert up[PLACES.index("to_free")] == pytest.approx(up.sum(), rel=1e-9)
    assert down[PLACES.index("to_film")] + down[PLACES.index("to_layers")] == pytest.approx(down.sum(), rel=1e-9)


def test_the_one_mode_of_a_thin_guide_decays_by_its_own_loss():
    """The dispersion relation of a three-layer guide (s-polarised), solved for the complex index by scipy."""
    film, below, k0d = 2.0 + 1e-3j, 1.5, 2.0 * np.pi * 100 / NM  # TE0 alone: TM0 is cut off below 118 nm

    def closes(index):
        across = np.sqrt(film**2 - index**2)
        tails = np.sqrt(index**2 - below**2), np.sqrt(index**2 - 1.0)
        return across * k0d - sum(np.arctan(tail / across) for tail in tails)

    loss = 2.0 * newton(closes, 1.6 + 5e-4j, tol=1e-13).imag * 2.0 * np.pi / (NM * 1e-6)  # per mm
    media = [(1, 0), (film, 100), (below, 0)]
    for edge_mm in (1e-3, 5e-3, 2e-2):
        ends = ends_of(media, to_edge_mm=edge_mm)
        bound = ends.guided[0] - place(ends_of(media, to_edge_mm=0), "along", "edged", "to_film")
        share = place(ends, "along", "edged", "at_edge") / bound
        assert share == pytest.approx(np.exp(-loss * edge_mm), rel=1e-6)


def test_scattering_competes_with_the_modes_own_loss():
    media = [(1, 0), (2.0 + 1e-3j, 100), (1.5, 0)]
    bound = -place(ends_of(media, to_edge_mm=0), "along", "edged", "to_film")
    ends = ends_of(media, guided_scatter_per_cm=100.0)
    bound += ends.guided[0]
    far, near = (place(ends_of(media, to_edge_mm=mm), "along", "edged", "at_edge") for mm in (2e-2, 1e-2))
    loss_per_cm = np.log(near / far) / 1e-3
    scattered = ends.scattered["wide"].sum(axis=0)[0]
    assert scattered / bound == pytest.approx(100.0 / (100.0 + loss_per_cm), rel=1e-6)


def slabs(*layers):
    """Return the media of a bare pile in air: (n, k, thickness in nm), the film being the thinnest."""
    film = min(range(len(layers)), key=lambda i: layers[i][2])
    plates = [(n + 1j * k, d) if i == film else (n + 1j * k, d, "plate") for i, (n, k, d) in enumerate(layers)]
    return [(1, 0), *plates, (1, 0)], film


BY_CHANCE = {
    "glass, edge at 12.5 mm": (((2.5, 0.02, 500), (1.52, 0, 1.1e6)), 12.5),
    "glass, edge at 5 mm": (((2.5, 0.02, 500), (1.52, 0, 1.1e6)), 5.0),
    "glass, edge at 25 mm": (((2.5, 0.02, 500), (1.52, 0, 1.1e6)), 25.0),
    "dim glass": (((2.5, 0.02, 500), (1.52, 2e-6, 1.1e6)), 12.5),
    "cover and glass": (((1.52, 0, 0.7e6), (2.5, 0.02, 500), (1.52, 0, 1.1e6)), 12.5),
    "thin cover, weak film": (((1.5, 0, 0.2e6), (2.0, 0.002, 300), (1.52, 1e-6, 0.5e6)), 5.0),
    "two plates above": (((1.52, 0, 2e6), (1.49, 0, 0.4e6), (2.5, 0.02, 500), (1.52, 0, 1.1e6)), 12.5),
    "dense glass": (((2.5, 0.02, 500), (1.77, 1e-6, 0.5e6)), 5.0),
    "dense cover on two plates": (((1.77, 0, 0.5e6), (2.2, 0.01, 800), (1.49, 0, 0.2e6)), 10.0),
    "nearly clear film, guided light at the edge": (((2.0, 1e-5, 2000), (1.52, 1e-6, 3e4)), 0.3),
}
RAYS = 100_000
SPREADS = 4.0  # standard deviations: one of forty numbers passes that by chance once in four hundred runs


@pytest.mark.parametrize("name", BY_CHANCE)
def test_rays_followed_by_chance_end_in_the_same_places(name):
    layers, edge_mm = BY_CHANCE[name]
    media, film = slabs(*layers)
    index, k, thickness = np.transpose(layers)
    found = followed(
        index=index,
        thickness_nm=thickness,
        absorption_per_nm=4.0 * np.pi * k / NM,
        film=film,
        edge_nm=edge_mm * 1e6,
        rays=RAYS,
        seed=20,
    )
    ends = ends_of(media, film=film + 1, model="ray", to_edge_mm=edge_mm)
    names = {"film": "to_film", "plates": "to_layers", "free": "to_free", "edge": "at_edge"}
    for counted, computed in names.items():
        share = float(ends.total("edged", computed)[0])
        spread = np.sqrt(share * (1.0 - share) / RAYS) + 1.0 / RAYS
        assert found[counted] == pytest.approx(share, abs=SPREADS * spread), counted


def test_more_round_trips_than_are_counted_run_into_the_averaged_decay():
    """A foil of 30 um: the share at the edge has no step where counting ends, at 40 trips."""
    media = [(1, 0), (2.0 + 0.001j, 300), (1.52, 3e4, "plate"), (1, 0)]
    shares = [place(ends_of(media, to_edge_mm=mm), "held", "edged", "at_edge") for mm in (2.1, 2.2, 2.3, 2.4)]
    steps = np.diff(np.log(shares))
    assert np.ptp(steps) < 0.15 * abs(steps.mean())


def test_a_node_on_a_thin_layers_light_line_is_no_hole():
    """The middle of a panel from 1.38 to 1.52 is 1.45, to the last digit."""
    media = [(1, 0), (1.38, 3e4, "plate"), (1.7, 20), (1.45, 5), (1.52, 3e4, "plate"), (1, 0)]
    ends = ends_of(media, film=2, free=(False, False), to_edge_mm=0)
    assert largest_gap(ends) < ADDING_UP
