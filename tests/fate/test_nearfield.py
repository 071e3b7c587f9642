"""Near field on request: dipoles above a metal in full, plasmons, convergence, what is refused."""

import numpy as np
import pytest
from piles import drawn, ledger, scene_of

from optics.errors import InputError
from optics.fate.nearfield import StandOff, beyond, plasmon_index, transfer
from optics.fate.wave import Settings
from optics.sample import NearField
from optics.stackfile import build_stack
from optics.waves.depth import SheetProfile

METAL = np.sqrt(-18.0 + 0.5j)
DIRECTIONS = {"normal": 0.0, "in plane": 1.0}
# Dipole in air 50 nm above eps = -18 + 0.5i, 633 nm, in units of the free dipole: derived from the integrals of Chance,
# Prock & Silbey 1978 by an independent script.
TOTAL = {"normal": 2.7528884, "in plane": 0.51517474}
SEVEN_DIGITS = 1e-7


def dipole(direction):
    """A film of air 100 nm thick between air and the metal, light born at mid-depth."""
    return drawn(633, [(1, 0), (1, 100), (METAL, 0)], in_plane=DIRECTIONS[direction], moments=SheetProfile(0.5))


@pytest.mark.parametrize("direction", DIRECTIONS)
def test_photons_and_near_field_above_a_metal_are_the_whole_power(direction):
    drawing = dipole(direction)
    found = transfer(drawing, NearField(stand_off_nm=40, to_index=60), Settings())
    whole = ledger(drawing).rate_factor[0] + found.power[0]
    assert whole == pytest.approx(TOTAL[direction], abs=SEVEN_DIGITS)
    assert abs(found.further[0]) < SEVEN_DIGITS  # exp(-2 q k0 d) ended long before the cut-off


def test_the_plasmons_index():
    """sqrt(eps/(1 + eps)) between the metal and air."""
    assert plasmon_index(METAL, 1.0) == pytest.approx(1.028967149 + 0.000839973j, abs=1e-9)


def test_most_of_what_a_normal_dipole_loses_there_goes_into_the_plasmon():
    """Its index lies at 1.029: a cut-off of 1.1 has it, one of 1.02 does not."""
    scene = scene_of(dipole("normal"))
    below, above, all_of_it = (beyond(scene, np.array([end]), Settings()).values[0, 0] for end in (1.02, 1.1, 60.0))
    assert below < 0.15 * all_of_it
    assert above > 0.9 * all_of_it


def test_a_clear_film_among_clear_media_has_no_near_field():
    found = transfer(drawn(633, [(1, 0), (2.5, 300), (1.5, 0)]), NearField(stand_off_nm=5, to_index=10), Settings())
    assert abs(found.power[0]) < 1e-7


def test_the_transfer_from_a_clear_film_to_a_metal_converges_with_the_cut_off():
    drawing = drawn(633, [(1, 0), (1.7, 60), (0.05 + 4j, 0)])
    powers = [transfer(drawing, NearField(stand_off_nm=10, to_index=end), Settings()) for end in (20, 40, 80, 160)]
    steps = np.abs(np.diff([each.power[0] for each in powers]))
    assert steps[-1] < 1e-6 < steps[0]
    assert abs(powers[-1].further[0]) < 1e-8


def test_births_nearer_to_the_metal_give_more():
    drawing = drawn(633, [(1, 0), (1.7, 60), (0.05 + 4j, 0)])
    powers = [
        transfer(drawing, NearField(stand_off_nm=off, to_index=60), Settings()).power[0] for off in (20.0, 10.0, 5.0)
    ]
    assert powers[0] < powers[1] < powers[2]


def test_a_stand_off_leaves_out_both_ends_of_the_depth():
    z = np.array([-3.0 + 2.0j, 0.5j, -1e-3 + 0j])
    x = np.linspace(0.2, 0.8, 20001)
    mean = [np.trapezoid(np.exp(each * x), x) / 0.6 for each in z]
    np.testing.assert_allclose(StandOff(0.2)(z)[0], mean, rtol=1e-8)


@pytest.mark.parametrize(
    ("asked", "said"),
    [
        (NearField(stand_off_nm=5, to_index=1.5), "expected above 1.7"),
        (NearField(stand_off_nm=30, to_index=10), "births are left"),
    ],
)
def test_a_near_field_that_is_none_is_refused(asked, said):
    with pytest.raises(InputError, match=said):
        transfer(drawn(633, [(1, 0), (1.7, 60), (0.05 + 4j, 0)]), asked, Settings())


def stack(near_field=None):
    return build_stack(
        {
            "above": "air",
            "below": "silver",
            "light": {"wavelengths_nm": [600, 640], "spectrum": {"kind": "gaussian", "peak_nm": 620, "fwhm_nm": 40}},
            "emission": {} if near_field is None else {"near_field": near_field},
            "layer": [{"name": "film", "material": {"n": 1.7}, "thickness_nm": 60, "emits": True}],
        }
    )


def test_the_column_is_there_when_asked_for_and_the_shares_stay():
    from optics.fate.solve import solve

    without, with_it = solve(stack()), solve(stack({"stand_off_nm": 5, "to_index": 20}))
    assert "near_field" not in without.table
    assert any("near field" in line for line in without.warnings)
    assert with_it.table["near_field"].min() > 0.05
    assert with_it.averages["near_field"] > 0.05
    assert any("up to an in-plane index of 20" in line for line in with_it.assumptions)
    for share in ("trapped", "free_above", "elsewhere"):
        assert with_it.averages[share] == without.averages[share]


def test_a_cut_off_that_matters_is_told():
    from optics.fate.solve import solve

    short, long = (solve(stack({"stand_off_nm": 5, "to_index": end})).warnings for end in (10, 300))
    assert any("has not ended at to_index = 10" in line for line in short)
    assert not any("near field" in line for line in long)
