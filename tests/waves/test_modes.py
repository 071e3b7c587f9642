"""Guided modes against textbooks, against the dispersion relation solved by scipy, and against sums they must meet."""

from itertools import pairwise

import numpy as np
import pytest
from piles import drawn
from piles import scene_of as only_scene
from scipy.interpolate import AAA
from scipy.optimize import brentq, newton

from optics.waves.modes import bound_modes, find, polarised_density


def scene_of(index, thickness_nm, *, wavelength_nm, film=1):
    """Return the scene of a pile of thin layers from its indices and the thicknesses between its outer media."""
    thickness = [0.0, *thickness_nm, 0.0]
    return only_scene(drawn(wavelength_nm, list(zip(index, thickness, strict=True)), film=film))


DIRECT = 1e-10  # agreement asked of two solvers of the same equation
HALF_DIGIT = 0.51  # a published figure is right to half its last digit


def indices(scene, polarisation=0):
    found = find(scene)
    return found.index[found.polarisation == polarisation]


def test_an_asymmetric_slab_has_the_four_te_modes_of_pollock_and_lipson():
    # Pollock & Lipson, Integrated Photonics, ch. 3: kappa_0 = 5497.16 1/cm (from memory); the indices derived from it
    index = indices(scene_of([1.40, 1.50, 1.45], [5000], wavelength_nm=1000)).real
    assert index == pytest.approx([1.49744632183, 1.48981708897, 1.47725149242, 1.46028082025], abs=1e-11)
    kappa = np.sqrt(1.5**2 - index[0] ** 2) * 2 * np.pi / 1e-4
    assert kappa == pytest.approx(5497.16, abs=0.01 * HALF_DIGIT)


def test_a_weak_slab_has_the_angle_and_index_of_a_published_examination():
    index = indices(scene_of([1.5, 1.515, 1.5], [5000], wavelength_nm=1000)).real[0]
    assert np.degrees(np.arcsin(index / 1.515)) == pytest.approx(87.103493, abs=1e-6)
    assert index == pytest.approx(1.513064, abs=1e-6 * HALF_DIGIT)
    assert 2 * np.pi * index == pytest.approx(9.506864, abs=1e-6)  # 9.5068646: the source cut its last digit off


def test_a_slab_of_twenty_micrometres_has_the_ten_angles_of_kasap():
    # Kasap, Optoelectronics and Photonics, ch. 2 (from memory, wavelength inferred)
    index = indices(scene_of([1.44, 1.455, 1.44], [20000], wavelength_nm=900)).real
    angles = [89.2, 88.3, 87.5, 86.7, 85.9, 85.0, 84.2, 83.4, 82.6, 81.9]
    assert np.degrees(np.arcsin(index / 1.455)) == pytest.approx(angles, abs=0.1 * HALF_DIGIT)


def test_four_layers_have_the_te_modes_of_chilwell_and_hodgkinson():
    # Chilwell & Hodgkinson, J. Opt. Soc. Am. A 1, 742 (1984), values from memory
    index = indices(scene_of([1.5, 1.66, 1.60, 1.53, 1.66, 1.0], [500] * 4, wavelength_nm=632.8)).real
    assert index == pytest.approx([1.622728, 1.605276, 1.557136, 1.503587], abs=2e-6 * HALF_DIGIT)


def test_a_lossy_film_has_the_complex_indices_of_an_independent_script():
    scene = scene_of([1.0, 2.5 + 0.01j, 1.5], [500], wavelength_nm=770)
    te = [2.4207417980 + 0.0101539020j, 2.1726109641 + 0.0106399652j]
    assert indices(scene)[:2] == pytest.approx(te, abs=1e-10 * HALF_DIGIT * 1.5)
    assert indices(scene, 1)[0] == pytest.approx(2.3931765575 + 0.0102542901j, abs=1e-10 * HALF_DIGIT * 1.5)


def dispersion(index, order, *, outer, film, phase, magnetic):
    """Textbook form: kappa d = m pi + the two phases of total reflection."""
    kappa = np.sqrt(film**2 - index**2 + 0j)
    total = kappa * phase - order * np.pi
    for medium in outer:
        ratio = film**2 / medium**2 if magnetic else 1.0
        total = total - np.arctan(ratio * np.sqrt(index**2 - medium**2 + 0j) / kappa)
    return total


def solved_directly(order, *, outer, film, phase, magnetic):
    real = film.real

    def clear(index):
        return dispersion(index, order, outer=outer, film=real, phase=phase, magnetic=magnetic).real

    index = complex(brentq(clear, max(outer) * (1 + 1e-14), real * (1 - 1e-14), xtol=1e-15))
    for step in np.linspace(0, 1, 9)[1:] if film.imag else ():
        lossy = real + 1j * film.imag * step
        index = newton(
            lambda at, lossy=lossy: dispersion(at, order, outer=outer, film=lossy, phase=phase, magnetic=magnetic),
            index + 1j * film.imag / 8 * real / index.real,
            x1=index + 1.02j * film.imag / 8 * real / index.real,
            tol=1e-15,
            maxiter=200,
        )
    return index


def te_count(*, outer, film, phase):
    """Number of TE modes of a slab, closed form (Marcuse; Yeh, ch. 11)."""
    high, low = max(outer), min(outer)
    depth = np.sqrt(film**2 - high**2)
    return int(np.floor((phase * depth - np.arctan(np.sqrt(high**2 - low**2) / depth)) / np.pi)) + 1


def test_a_hundred_random_guides_have_the_modes_that_scipy_finds():
    random = np.random.default_rng(20)
    worst, compared = 0.0, [0, 0]
    for number in range(100):
        outer = tuple(random.uniform(1.0, 1.7, 2))
        film = complex(random.uniform(max(outer) + 0.2, 3.0), 0.0 if number % 2 else 10 ** random.uniform(-5, -1.5))
        thickness, wavelength = random.uniform(150, 900), random.uniform(400, 1000)
        found = find(scene_of([outer[0], film, outer[1]], [thickness], wavelength_nm=wavelength))
        for index, order, magnetic in zip(found.index, found.order, found.polarisation, strict=True):
            if film.imag and index.real - max(outer) < 0.02:
                continue  # at its cut-off the textbook form has two roots side by side
            if index.real - max(outer) < 1e-6:
                continue  # a root at the very end of brentq's bracket
            phase = 2 * np.pi * thickness / wavelength
            direct = solved_directly(order, outer=outer, film=film, phase=phase, magnetic=bool(magnetic))
            worst = max(worst, abs(index - direct))
            compared[film.imag > 0.0] += 1
    assert worst < DIRECT
    assert min(compared) > 150  # of lossless and of lossy guides


def transcendental(index, *, outer, film, phase, magnetic):
    """Dispersion relation of a slab between any two media, written out with its two faces, for complex indices."""
    kappa = np.sqrt(film**2 - index**2 + 0j)
    weights = [medium**2 if magnetic else 1.0 for medium in (*outer, film)]
    fall = [np.sqrt(index**2 - medium**2 + 0j) / weight for medium, weight in zip(outer, weights, strict=False)]
    own = kappa / weights[2]
    return np.sin(kappa * phase) * (own**2 - fall[0] * fall[1]) - own * (fall[0] + fall[1]) * np.cos(kappa * phase)


def test_guides_between_lossy_media_solve_the_dispersion_relation_too():
    random = np.random.default_rng(21)
    worst, compared = 0.0, 0
    for _ in range(40):
        # absorbing within 20 um: clearer outer media are drawn without their k
        outer = tuple(complex(random.uniform(1.0, 1.7), random.uniform(0.01, 0.05)) for _ in range(2))
        film = complex(random.uniform(2.0, 3.0), 10 ** random.uniform(-5, -1))
        thickness, wavelength = random.uniform(150, 900), random.uniform(400, 1000)
        found = find(scene_of([outer[0], film, outer[1]], [thickness], wavelength_nm=wavelength))
        phase = 2 * np.pi * thickness / wavelength
        for index, magnetic in zip(found.index, found.polarisation, strict=True):
            if index.real - max(outer, key=np.real).real < 0.02:
                continue

            def mismatch(at, outer=outer, film=film, phase=phase, magnetic=bool(magnetic)):
                return transcendental(at, outer=outer, film=film, phase=phase, magnetic=magnetic)

            direct = newton(mismatch, index * (1 + 1e-6), x1=index * (1 - 1e-6j), tol=1e-15, maxiter=200)
            worst, compared = max(worst, abs(index - direct)), compared + 1
    assert worst < DIRECT
    assert compared > 100


@pytest.mark.parametrize("thickness_nm", [100, 480, 2000, 7000, 20000])
@pytest.mark.parametrize("film", [2.5, 2.5 + 0.02j, 2.5 + 0.3j, 2.5 + 1j])
def test_the_number_of_modes_is_right_up_to_twenty_micrometres(thickness_nm, film):
    scene = scene_of([1.0, film, 1.5], [thickness_nm], wavelength_nm=770)
    expected = te_count(outer=(1.0, 1.5), film=2.5, phase=2 * np.pi * thickness_nm / 770)
    count = len(indices(scene))
    # absorption moves the mode next to its cut-off across it; no other is lost, and none is found twice
    assert expected - 1 <= count <= expected if np.imag(film) else count == expected


def te_zeros(film, phase, *, outer=(1.0, 1.5)):
    """Count the zeros of the dispersion relation right of the cut that rises from the denser medium's light line."""
    high, far = 2.2 * film.imag + 0.05, film.real + 0.4 + 0.6 * film.imag
    side = np.linspace(0.0, 1.0, 30_000)[:-1]
    left = max(outer) + 1e-9
    corners = [left - 0.02j, far - 0.02j, far + 1j * high, left + 1j * high, left - 0.02j]
    q = np.concatenate([a + (b - a) * side for a, b in pairwise(corners)])
    kappa = np.sqrt(film**2 - q * q)
    fall = [np.sqrt(q - medium) * np.sqrt(q + medium) for medium in outer]
    value = np.sinc(kappa * phase / np.pi) * phase * (kappa**2 - fall[0] * fall[1])
    value = (value - (fall[0] + fall[1]) * np.cos(kappa * phase)) * np.exp(-np.abs((kappa * phase).imag))
    turns = np.angle(np.roll(value, -1) / value)
    assert np.abs(turns).max() < 0.5  # fine enough to follow the phase
    return round(turns.sum() / (2.0 * np.pi))


@pytest.mark.parametrize(
    ("film", "thickness_nm"),
    [(2.5 + 0.02j, d) for d in (100, 480, 2000, 7000, 20000)]
    + [(2.5 + 0.3j, d) for d in (100, 480, 2000, 7000)]
    + [(2.5 + 1j, d) for d in (100, 480)],
)
def test_lossy_films_have_as_many_modes_as_the_argument_principle_counts(film, thickness_nm):
    scene = scene_of([1.0, film, 1.5], [thickness_nm], wavelength_nm=770)
    assert len(indices(scene)) == te_zeros(film, 2 * np.pi * thickness_nm / 770)


@pytest.mark.parametrize("film", [2.5 + 0.003j, 2.5 + 0.05j, 2.5 + 0.2j])
def test_a_rational_fit_of_the_density_finds_the_same_poles(film):
    # second opinion: AAA (Nakatsukasa, Sete & Trefethen 2018) fitted below the real axis, away from the poles
    scene = scene_of([1.0, film, 1.5], [500], wavelength_nm=770)
    found = find(scene)
    q = np.linspace(1.55, 2.6, 400) - 0.02j
    for polarisation in (0, 1):
        mine = found.index[found.polarisation == polarisation]
        value = polarised_density(scene.view(np.zeros(1, dtype=int)), q[None], np.array([polarisation]))[0]
        poles = AAA(q, value, rtol=1e-12).poles()
        for index in mine[mine.real > 1.6]:
            assert np.abs(poles - index).min() < 1e-5  # what a fit from so far away resolves


def test_without_absorption_the_modes_hold_all_the_bound_power():
    # checks.md: guided power of air / 2.5, 500 nm / 1.5 at 770 nm, derived two ways
    modes = bound_modes(scene_of([1.0, 2.5, 1.5], [500], wavelength_nm=770))
    assert modes.power.sum() == pytest.approx(0.75480298, abs=1e-8)


def test_who_absorbs_a_mode_follows_from_how_its_index_moves_with_each_k():
    base = [1.0, 1.8 + 0.002j, 2.3 + 0.003j, 1.6 + 0.004j, 1.45]
    thickness = [120, 300, 200]
    modes = bound_modes(scene_of(base, thickness, wavelength_nm=700, film=2))
    moved = []
    for layer in (1, 2, 3):
        near = [base[i] + (1e-7j if i == layer else 0) for i in range(5)]
        there = find(scene_of(near, thickness, wavelength_nm=700, film=2)).index
        moved.append((there - modes.index).imag / 1e-7 * base[layer].imag)
    share = np.array(moved) / np.sum(moved, axis=0)
    # to first order in k: Im q is the sum of what each layer's k brings
    assert modes.taken[1:4] == pytest.approx(share, abs=3e-4)


def test_an_absorbing_outer_medium_has_its_share_of_a_mode_too():
    base, thickness = [1.0, 2.3 + 0.003j, 1.5 + 0.01j], [160]
    modes = bound_modes(scene_of(base, thickness, wavelength_nm=700))
    moved = []
    for medium in (1, 2):
        near = [base[i] + (1e-7j if i == medium else 0) for i in range(3)]
        there = find(scene_of(near, thickness, wavelength_nm=700)).index
        moved.append((there - modes.index).imag / 1e-7 * base[medium].imag)
    share = np.array(moved) / np.sum(moved, axis=0)
    assert share[1].min() > 0.05
    assert modes.taken[1:3] == pytest.approx(share, abs=2e-3)  # to first order in k


def test_light_guided_by_a_denser_neighbour_is_found_and_shared_out():
    scene = scene_of([1.0, 1.65 + 0.005j, 1.95 + 0.005j, 1.52], [60, 150], wavelength_nm=520)
    modes = bound_modes(scene)
    assert modes.index.real == pytest.approx(np.clip(modes.index.real, 1.52, 1.95))
    assert (modes.power * modes.taken[2]).sum() > 5 * (modes.power * modes.taken[1]).sum()


def test_the_same_order_is_the_same_mode_at_every_wavelength():
    scene = scene_of([1.0, 2.5 + 0.02j, 1.5], [1500], wavelength_nm=np.linspace(700, 860, 81))
    found = find(scene)
    for polarisation in (0, 1):
        for order in range(4):
            mine = (found.polarisation == polarisation) & (found.order == order)
            assert np.abs(np.diff(found.index[mine], 2)).max() < 1e-4  # smooth: second differences of 2 nm steps
