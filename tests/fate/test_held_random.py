"""Samples of random stacks: every reading adds to one, no share leaves its bounds, more edge is less held light."""

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st
from piles import drawn, ledger

from optics.fate.ends import PLACES, follow
from optics.fate.readings import READINGS, per_wavelength
from optics.fate.sampled import largest_gap
from optics.fate.wave import Settings
from optics.sample import Sample

ADDING_UP = 1e-9
SMALL = 1e-6  # numerical error of a share

CLEAR = st.sampled_from([1.0, 1.38, 1.45, 1.52, 1.7, 1.9, 2.4])
LOSSY = st.sampled_from([1.6 + 0.01j, 1.9 + 0.2j, 0.1 + 4j, 1.2 + 1e-5j])
FILMS = st.tuples(
    st.sampled_from([1.7, 2.2, 2.6, 3.4]), st.sampled_from([0.0, 1e-5, 1e-3, 0.05, 0.4]), st.floats(20, 3000)
)
THIN = st.tuples(st.one_of(CLEAR, LOSSY), st.floats(5, 300))
PLATES = st.tuples(
    st.sampled_from([1.38, 1.49, 1.52, 1.77, 1.52 + 1e-6j, 1.6 + 1e-4j]), st.floats(3e4, 3e6), st.just("plate")
)
SIDES = st.tuples(st.lists(THIN, max_size=2), st.lists(PLATES, max_size=2), st.one_of(CLEAR, LOSSY), st.booleans())


@st.composite
def stacks(draw):
    n, k, thickness = draw(FILMS)
    (thin_up, plates_up, above, free_up), (thin_down, plates_down, below, free_down) = draw(SIDES), draw(SIDES)
    upper, lower = [*plates_up[::-1], *thin_up[::-1]], [*thin_down, *plates_down]
    media = [(above, 0), *upper, (n + 1j * k, thickness), *lower, (below, 0)]
    return drawn([620, 700], media, film=1 + len(upper), free=(free_up, free_down))


SAMPLES = st.builds(
    Sample,
    to_edge_mm=st.sampled_from([0.0, 0.3, 5.0, 12.5]),
    guided_scatter_per_cm=st.sampled_from([0.0, 5.0, 1e4]),
    scatter_up_share=st.sampled_from([0.0, 0.5]),
)


@settings(max_examples=25, deadline=None)
@given(stacks(), SAMPLES, st.sampled_from(["wave", "ray"]))
def test_every_reading_of_any_stack_adds_to_one(drawing, sample, model):
    ends = follow(drawing, ledger(drawing, model=model), sample, Settings(), model=model)
    assert largest_gap(ends) < ADDING_UP
    for name in (*READINGS, "lost edges"):
        p_r, p_e, p_a = per_wavelength(ends, name, np.full(2, 0.8))
        np.testing.assert_allclose(p_r + p_e + p_a, 1.0, atol=ADDING_UP)
    for held in ends.held.values():
        assert held.min() > -SMALL
    for scattered in ends.scattered.values():
        assert scattered.min() > -SMALL


@settings(max_examples=10, deadline=None)
@given(stacks(), st.sampled_from(["wave", "ray"]))
def test_the_further_the_edge_the_less_light_gets_there(drawing, model):
    drawn_up = ledger(drawing, model=model)
    at = PLACES.index("at_edge")
    shares = [
        follow(drawing, drawn_up, Sample(to_edge_mm=mm), Settings(), model=model).held["edged"][at]
        for mm in (0.0, 2.0, 20.0)
    ]
    assert np.all(shares[0] >= shares[1] - 1e-4)  # jumps between nodes where light changes sides
    assert np.all(shares[1] >= shares[2] - 1e-4)
