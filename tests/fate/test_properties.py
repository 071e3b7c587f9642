"""What holds for any stack: thin and thick, clear and absorbing, on metals and dense media, under plates.

The numerical promise is that shares hold within 1e-6, or that the estimated error says how well they do.
"""

from dataclasses import dataclass

import numpy as np
import pytest
from hypothesis import HealthCheck, assume, given, settings
from hypothesis import strategies as st
from piles import ISOTROPIC, drawn, ledger, scene_of

from optics.fate import wave
from optics.fate.ledger import ENDS

EXAMPLES = settings(
    max_examples=40, derandomize=True, deadline=None, suppress_health_check=[HealthCheck.too_slow], database=None
)
BELOW_ZERO = -1e-9
CLOSURE = 1e-7
SHARES = 1e-6
AS_GOOD_AS_CLEAR = 1e-12
METALS = (0.15 + 3.5j, 0.05 + 4.2j, 1.2 + 7.0j)


@dataclass(frozen=True)
class Case:
    """A random stack, ready to be drawn."""

    wavelength_nm: float
    media: tuple
    film: int
    in_plane: float
    free: tuple = (True, True)

    def drawn(self, **changes):
        media = changes.pop("media", self.media)
        film = changes.pop("film", self.film)
        parts = {"in_plane": self.in_plane, "free": self.free, **changes}
        return drawn(self.wavelength_nm, list(media), film=film, **parts)

    def with_film_k(self, k):
        index, thickness = self.media[self.film]
        film = (complex(index).real + 1j * k, thickness)
        return self.drawn(media=(*self.media[: self.film], film, *self.media[self.film + 1 :]))


def indices(low=1.3, high=3.9):
    return st.floats(low, high).map(lambda n: round(n, 3))


def absorptions(least, most):
    return st.one_of(st.just(0.0), st.floats(least, most).map(lambda power: 10.0 ** round(power, 2)))


def thicknesses(least_nm, most_nm):
    return st.floats(np.log10(least_nm), np.log10(most_nm)).map(lambda power: round(10.0**power, 2))


def clear_or_absorbing(least=-5.0, most=-0.3):
    return st.builds(complex, indices(), absorptions(least, most))


def layers(nm):
    metal = st.tuples(st.sampled_from(METALS), thicknesses(3, 60))
    other = st.tuples(clear_or_absorbing(), thicknesses(*nm))
    return st.lists(st.one_of(other, other, other, metal), max_size=2)


def side():
    """What ends a side, from the thin layers outwards: a half-space of any kind, one plate, or two."""
    plate = st.tuples(clear_or_absorbing(-7.0, -5.0), thicknesses(2e5, 2e6), st.just("plate"))
    air = st.just((1.0, 0))
    dense = st.tuples(indices(1.0, 3.9), st.just(0))
    absorber = st.tuples(st.builds(complex, indices(), st.floats(0.01, 1.0)), st.just(0))
    metal = st.tuples(st.sampled_from(METALS), st.just(0))
    ends = st.one_of(air, dense, absorber, metal).map(lambda outer: (outer,))
    plates = st.lists(plate, min_size=1, max_size=2).map(lambda some: (*some, (1.0, 0)))
    return st.one_of(ends, plates)


@st.composite
def stacks(draw, film_k=None, film_nm=(5, 20_000), layer_nm=(3, 800)):
    above, below = draw(side()), draw(side())
    upper, lower = draw(layers(layer_nm)), draw(layers(layer_nm))
    k = draw(absorptions(-5.0, 0.0)) if film_k is None else film_k
    film = (complex(draw(indices()), k), draw(thicknesses(*film_nm)))
    media = (*above[::-1], *upper, film, *lower, *below)
    in_plane = draw(st.sampled_from((0.0, ISOTROPIC, 1.0)))
    free = draw(st.tuples(st.booleans(), st.booleans()))
    wavelength = float(draw(st.integers(350, 1200)))
    return Case(wavelength, media, len(above) + len(upper), in_plane, free)


def near_field(drawing):
    """Return how much less than nothing the film may keep of in-plane births, in units of power.

    On the real axis every layer takes something of their light, or nothing, up to q = s kr. The rate factor goes on
    to the film's complex light line and takes the exchange of the bulk off: a piece of near field of either sign.
    """
    scene = scene_of(drawing)
    beyond = wave.riser(scene, scene.far_end, wave.Settings()).values[0] - wave.exchange_with_itself(scene)
    return max(0.0, -float(beyond[0]))


def powers(found):
    """Return shares times the rate factor: unlike shares they stay tame where the rate factor all but vanishes."""
    return {name: float(share[0] * found.rate_factor[0]) for name, share in found.shares.items()}


def doubt(*found):
    """Return the numerical error that the ledgers report themselves, in units of power."""
    return sum(float(abs(one.error[0] * one.rate_factor[0])) for one in found)


def assert_alike(first, second, *, swapped=None, within=SHARES, but=()):
    """Compare two ledgers power by power, to the tolerance or what they say of themselves."""
    ours, theirs = powers(first), powers(second)
    allowed = max(within, doubt(first, second))
    assert first.rate_factor[0] == pytest.approx(second.rate_factor[0], abs=allowed)
    for name, power in ours.items():
        if name not in but:
            assert power == pytest.approx(theirs[(swapped or {}).get(name, name)], abs=allowed), name


@pytest.mark.parametrize("model", ["wave", "ray"])
@EXAMPLES
@given(case=stacks())
def test_every_number_is_finite_and_none_below_zero(case, model):
    found = ledger(case.drawn(), model=model)
    everything = [*found.shares.values(), found.rate_factor, found.closure, found.error, found.taken]
    assert all(np.isfinite(values).all() for values in everything)
    power = powers(found)
    handed_out = ("free_above", "free_below", "cover", "substrate", "elsewhere", "guided_elsewhere")
    # in waves the cut between reabsorbed and waveguided is a convention: either piece may be negative
    kept = ("reabsorbed", "waveguided") if model == "ray" else ()
    for name in (*handed_out, *kept):
        assert power[name] >= BELOW_ZERO - doubt(found), name


@EXAMPLES
@given(case=stacks())
def test_a_film_keeps_no_less_of_in_plane_births_than_the_near_field_it_is_charged(case):
    drawing = case.drawn(in_plane=1.0)
    found = ledger(drawing)
    assert powers(found)["trapped"] >= BELOW_ZERO - near_field(drawing) - doubt(found)


@EXAMPLES
@given(case=stacks(film_nm=(20, 20_000)), denser=st.floats(0.0, 0.5))
def test_a_film_denser_than_its_neighbours_keeps_no_less_than_nothing(case, denser):
    """In films of less than about 15 nm, or less dense than a neighbour, near field blurs what is kept."""
    others = [complex(medium[0]) for at, medium in enumerate(case.media) if at != case.film]
    n = max([1.3, *(index.real for index in others if (index * index).real > 0.0)]) + denser
    film = (n + 1j * complex(case.media[case.film][0]).imag, case.media[case.film][1])
    media = (*case.media[: case.film], film, *case.media[case.film + 1 :])
    found = ledger(case.drawn(media=media, in_plane=ISOTROPIC))
    assert powers(found)["trapped"] >= BELOW_ZERO - doubt(found)


@pytest.mark.parametrize("model", ["wave", "ray"])
@EXAMPLES
@given(case=stacks())
def test_shares_add_to_one_and_paths_agree(case, model):
    found = ledger(case.drawn(), model=model)
    assert sum(powers(found)[end] for end in ENDS) == pytest.approx(found.rate_factor[0], abs=CLOSURE)
    assert abs(found.closure[0] * found.rate_factor[0]) <= CLOSURE


@pytest.mark.parametrize("model", ["wave", "ray"])
@EXAMPLES
@given(case=stacks())
def test_twice_the_nodes_change_no_share_by_more_than_the_error_says(case, model):
    assert_alike(ledger(case.drawn(), model=model), ledger(case.drawn(), model=model, finer=2))


@pytest.mark.parametrize("model", ["wave", "ray"])
@EXAMPLES
@given(case=stacks(film_k=0.0, layer_nm=(3, 60)))
def test_a_film_that_absorbs_next_to_nothing_is_a_clear_film(case, model):
    clear = ledger(case.drawn(), model=model)
    almost = ledger(case.with_film_k(AS_GOOD_AS_CLEAR), model=model)
    # how guided light ends is decided by the least absorber there is; that it is guided is not. Layers are too thin
    # here for light to tunnel more slowly than the film absorbs
    # light that grazes the film's faces meets the least of absorbers, a share of about the root of alpha d, or of k;
    # many times that where a neighbour takes little of it: a good mirror, a weak absorber
    k = AS_GOOD_AS_CLEAR
    phase = 2.0 * np.pi * case.media[case.film][1] / case.wavelength_nm
    grazing = 30.0 * (np.sqrt(2.0 * k * phase) + np.sqrt(2.0 * k))
    parts = ("guided_unfinished", "guided_reabsorbed", "guided_elsewhere")
    assert_alike(clear, almost, within=SHARES + grazing, but=parts)


@EXAMPLES
@given(case=stacks(film_nm=(20, 3000)), upper=st.booleans())
def test_the_rate_factor_is_continuous_as_a_neighbours_index_crosses_the_films(case, upper):
    """It has a cusp there: it falls by the root of the distance at most, for absorbing films next to a half-space."""
    film = complex(case.media[case.film][0])
    place = 0 if upper else len(case.media) - 1
    assume("plate" not in case.media[place - 1 if not upper else 1])

    def rate_factor(step):
        media = list(case.media)
        media[place] = (film.real + step, 0)
        return ledger(case.drawn(media=media))

    below, above = rate_factor(-1e-9), rate_factor(1e-9)
    jump = abs(below.rate_factor[0] - above.rate_factor[0])
    cusp = np.sqrt(1e-9) * max(1.0, below.rate_factor[0])
    assert jump <= max(SHARES, 10.0 * cusp, doubt(below, above))


@pytest.mark.parametrize("model", ["wave", "ray"])
@EXAMPLES
@given(case=stacks())
def test_isotropic_births_are_two_thirds_in_plane_and_one_third_normal(case, model):
    isotropic, in_plane, normal = (ledger(case.drawn(in_plane=h), model=model) for h in (ISOTROPIC, 1.0, 0.0))
    allowed = max(2.0 * SHARES, doubt(isotropic, in_plane, normal))  # each share may be off, these and that
    for name, power in powers(isotropic).items():
        mixed = (2.0 * powers(in_plane)[name] + powers(normal)[name]) / 3.0
        assert power == pytest.approx(mixed, abs=allowed), name


@pytest.mark.parametrize("model", ["wave", "ray"])
@EXAMPLES
@given(case=stacks())
def test_turned_over_a_stack_swaps_above_and_below(case, model):
    turned = case.drawn(media=case.media[::-1], film=len(case.media) - 1 - case.film, free=case.free[::-1])
    swapped = {"free_above": "free_below", "free_below": "free_above", "cover": "substrate", "substrate": "cover"}
    assert_alike(ledger(case.drawn(), model=model), ledger(turned, model=model), swapped=swapped)


@pytest.mark.parametrize("model", ["wave", "ray"])
@EXAMPLES
@given(case=stacks(), thickness_nm=thicknesses(3, 1000))
def test_a_clear_layer_of_the_outer_mediums_index_changes_nothing(case, thickness_nm, model):
    outer = complex(case.media[0][0])
    assume(outer.imag == 0.0)
    padded = (case.media[0], (outer, thickness_nm), *case.media[1:])
    assert_alike(ledger(case.drawn(), model=model), ledger(case.drawn(media=padded, film=case.film + 1), model=model))


@pytest.mark.parametrize("model", ["wave", "ray"])
@EXAMPLES
@given(case=stacks(), share=st.floats(0.1, 0.9))
def test_a_thin_layer_cut_in_two_is_the_same_layer(case, share, model):
    thin = [at for at, medium in enumerate(case.media[:-1]) if at not in (0, case.film) and "plate" not in medium]
    assume(thin)
    index, thickness = case.media[thin[0]]
    halves = ((index, share * thickness), (index, (1.0 - share) * thickness))
    cut = (*case.media[: thin[0]], *halves, *case.media[thin[0] + 1 :])
    film = case.film + (thin[0] < case.film)
    assert_alike(ledger(case.drawn(), model=model), ledger(case.drawn(media=cut, film=film), model=model))
