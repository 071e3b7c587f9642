"""Yields: their inverse, published pairs, limits, and refusals that name the bound."""

import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from optics.errors import InputError
from optics.fate.implied import Given, implied
from optics.fate.implied import given as known_yield
from optics.fate.yields import (
    bulk_from_stack,
    external_yield,
    internal_deviation,
    internal_yield,
    largest_external,
    stack_from_bulk,
    voltage,
    yields,
)

INVERSE = 1e-12
SEVEN_DIGITS = 3e-7  # half a unit of the last digit of p_e, times the steepest slope of the three

# Richter et al., Nat. Commun. 7, 13941 (2016), planar and textured; Fassl et al., Matter 4, 1391 (2021): internal and
# external yields. With p_r = 1 - p_e each pair gives the p_e beside it. They test the formula, not the optics.
PUBLISHED = [(0.70, 0.15, 0.0756303), (0.70, 0.57, 0.5681063), (0.780, 0.474, 0.2541679)]


@pytest.mark.parametrize(("internal", "external", "p_e"), PUBLISHED)
def test_published_pairs_of_yields(internal, external, p_e):
    assert external_yield(internal, p_r=1.0 - p_e, p_e=p_e) == pytest.approx(external, abs=SEVEN_DIGITS)
    assert internal_yield(external, p_r=1.0 - p_e, p_e=p_e) == pytest.approx(internal, abs=SEVEN_DIGITS)


def test_a_worked_number():
    assert external_yield(0.9, p_r=0.7, p_e=0.2) == pytest.approx(0.486486486, abs=1e-9)


SHARES = st.tuples(st.floats(0, 1), st.floats(0.01, 1)).map(lambda pair: ((1.0 - pair[1]) * pair[0], pair[1]))


@settings(max_examples=300, deadline=None)
@given(SHARES, st.floats(0, 1))
def test_internal_to_external_and_back_is_the_identity(pair, internal):
    p_r, p_e = pair
    external = external_yield(internal, p_r=p_r, p_e=p_e)
    assert internal_yield(external, p_r=p_r, p_e=p_e) == pytest.approx(internal, abs=INVERSE)


@given(st.floats(0, 1), st.floats(0.05, 3))
def test_bulk_to_stack_and_back_is_the_identity(bulk, rate):
    assert bulk_from_stack(stack_from_bulk(bulk, rate), rate) == pytest.approx(bulk, abs=INVERSE)


def test_generations_of_photons_add_up_to_the_closed_form():
    p_r, p_e, q = 0.8, 0.15, 0.95
    generations = sum(p_e * q * (p_r * q) ** n for n in range(400))
    found = yields(q, p_r=p_r, p_e=p_e, rate_factor=0.9, temperature_K=300)
    assert found.external == pytest.approx(generations, rel=1e-12)
    assert found.recycled == pytest.approx(sum((p_r * q) ** n for n in range(1, 400)), rel=1e-12)
    assert found.radiative_factor == pytest.approx(0.9 * 0.2)
    assert found.lifetime_factor == pytest.approx(1.0 + found.recycled)


def test_the_spread_is_that_of_small_steps():
    p_r, p_e, external = 0.7, 0.2, 0.3
    step = 1e-6
    slope = internal_yield(external + step, p_r=p_r, p_e=p_e) - internal_yield(external - step, p_r=p_r, p_e=p_e)
    assert internal_deviation(external, 0.02, p_r=p_r, p_e=p_e) == pytest.approx(0.02 * slope / (2 * step), rel=1e-6)


def test_a_yield_of_one_percent_costs_119_mV_at_300_K():
    """kT/e at 300 K is 25.852 mV; times ln 100 (Rau 2007)."""
    assert 1e3 * voltage(0.01, 300.0) == pytest.approx(-119.05, abs=0.01)
    assert voltage(1.0, 300.0) == 0.0
    assert voltage(0.0, 300.0) == -math.inf


def test_more_than_the_largest_is_refused_with_the_bound_named():
    assert largest_external(p_r=0.7, p_e=0.2) == pytest.approx(2 / 3)
    with pytest.raises(InputError, match=r"found 0\.7, expected at most 0\.666667"):
        internal_yield(0.7, p_r=0.7, p_e=0.2)
    with pytest.raises(InputError, match="expected at most 0"):
        internal_yield(0.1, p_r=0.5, p_e=0.0)


class Sample:
    """Two readings, made up."""

    def __init__(self):
        from optics.fate.readings import Reading

        self.readings = (Reading("faces", 0.7, 0.1, 0.2, 0.9), Reading("sphere", 0.6, 0.3, 0.1, 0.9))

    def reading(self, name):
        return next(each for each in self.readings if each.name == name)


def test_a_measurement_is_refused_in_the_chosen_reading_alone():
    rows = implied(Sample(), Given("external", 0.5, 0.02), reading="sphere")
    assert rows[0].values is None
    assert rows[0].largest == pytest.approx(1 / 3)
    assert rows[1].values.external == pytest.approx(0.5)
    with pytest.raises(InputError, match=r'expected at most 0\.333333.*reading "faces"'):
        implied(Sample(), Given("external", 0.5, 0.02), reading="faces")


def test_a_spread_past_what_is_possible_is_cut_and_marked():
    row = implied(Sample(), Given("external", 0.74, 0.02), reading="sphere")[1]
    assert row.cut
    assert row.between[1] == pytest.approx(1.0)
    assert not implied(Sample(), Given("external", 0.5, 0.02), reading="sphere")[1].cut


@pytest.mark.parametrize(
    ("arguments", "said"),
    [
        ({"internal": 0.5, "external": 0.2}, "expected one of them"),
        ({"internal": 1.5}, "from 0 up to 1"),
        ({"external": -0.1}, "from 0 up to 1"),
        ({"sd": 0.1}, "without a yield"),
        ({"internal": 0.5, "sd": -1}, "sd: found -1"),
    ],
)
def test_yields_that_are_none_are_refused(arguments, said):
    with pytest.raises(InputError, match=said):
        known_yield(**arguments)


def test_nothing_given_is_nothing_known():
    assert known_yield() is None


@pytest.mark.parametrize(
    ("arguments", "said"),
    [({"reading": "skies"}, "faces, sphere"), ({"reading": "faces", "temperature_K": 0}, "above 0")],
)
def test_unknown_readings_and_temperatures_are_refused(arguments, said):
    with pytest.raises(InputError, match=said):
        implied(Sample(), Given("internal", 0.5), **arguments)
