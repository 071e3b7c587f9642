"""Three readings of a sample: quoted numbers, sum rules, what is convention, what each key of the sample does."""

import numpy as np
import pytest

from optics.fate.implied import Given, implied
from optics.fate.readings import READINGS
from optics.fate.sampled import sampled
from optics.fate.yields import external_yield, stack_from_bulk
from optics.sample import PerWavelength
from optics.stackfile import build_stack

FOUR_DIGITS = 0.5e-4 + 1e-7
TWO_DIGITS = 0.5e-2
ADDING_UP = 1e-9


def stack(*, k=0.02, glass=1.52, wavelengths=(760,), below="air", **sample):
    return build_stack(
        {
            "above": "air",
            "below": below,
            "light": {
                "wavelengths_nm": list(wavelengths),
                "spectrum": {"kind": "gaussian", "peak_nm": 760, "fwhm_nm": 40},
            },
            "layer": [
                {"name": "film", "material": {"n": 2.5, "k": k}, "thickness_nm": 500, "emits": True},
                {"name": "glass", "material": glass, "thickness_mm": 1.1},
            ],
            "sample": sample or None,
        }
    )


def shares(found):
    return {each.name: (each.p_r, each.p_e, each.p_a) for each in found.readings}


def test_the_readings_of_a_film_on_glass():
    """Numbers computed apart from this package, by a first script."""
    found = shares(sampled(stack()))
    assert found["faces"] == pytest.approx((0.8256, 0.0854, 0.0890), abs=FOUR_DIGITS)
    assert found["wide"] == pytest.approx((0.9146, 0.0854, 0.0), abs=FOUR_DIGITS)


def test_what_the_readings_make_of_an_internal_yield_of_90_percent():
    rows = implied(sampled(stack(to_edge_mm=12.5)), Given("internal", 0.9), reading="wide")
    external = {row.reading.name: row.values.external for row in rows}
    assert external == pytest.approx({"faces": 0.30, "wide": 0.43, "sphere": 0.51}, abs=TWO_DIGITS)


@pytest.mark.parametrize(
    "sample",
    [
        {},
        {"edges": "lost"},
        {"guided_scatter_per_cm": 30.0},
        {"rms_nm": 4.0, "correlation_nm": 80.0},
        {"recycling_share": 0.4},
        {"to_edge_mm": 0.0},
        {"recycling_share": PerWavelength(wavelength_nm=np.array([700.0, 800.0]), values=np.array([1.0, 0.5]))},
    ],
    ids=str,
)
@pytest.mark.parametrize("glass", [{"n": 1.52}, {"n": 1.52, "k": 1e-6}], ids=["clear", "dim"])
def test_the_three_shares_of_every_reading_add_to_one(sample, glass):
    found = sampled(stack(glass=glass, wavelengths=(740, 760, 775), **sample))
    names = [each.name for each in found.readings]
    assert names[:3] == list(READINGS)
    assert len(names) == (4 if sample.get("edges") == "lost" else 3)
    for each in (*found.readings, *found.ray_readings, *found.scrambled):
        assert each.p_r + each.p_e + each.p_a == pytest.approx(1.0, abs=ADDING_UP)
        assert min(each.p_r, each.p_e, each.p_a) > -ADDING_UP


def test_film_absorption_that_makes_no_carriers_is_lost():
    whole = shares(sampled(stack(recycling_share=1.0)))
    none = shares(sampled(stack(recycling_share=0.0)))
    half = shares(sampled(stack(recycling_share=0.5)))
    for name in READINGS:
        assert none[name][0] == 0.0
        assert none[name][1] == pytest.approx(whole[name][1], rel=1e-12)
        assert none[name][2] == pytest.approx(whole[name][0] + whole[name][2], rel=1e-12)
        assert half[name][0] == pytest.approx(0.5 * whole[name][0], rel=1e-12)


def test_light_at_an_edge_is_out_or_lost():
    found = shares(sampled(stack(edges="lost", to_edge_mm=5)))
    at_edge = found["sphere"][1] - found["faces"][1]
    assert found["lost edges"] == pytest.approx(
        (found["sphere"][0], found["faces"][1], found["sphere"][2] + at_edge), rel=1e-12
    )
    assert at_edge == pytest.approx(0.058, abs=0.5e-3)


def test_a_sphere_around_a_sample_of_no_width_sees_all_but_the_films_own():
    found = shares(sampled(stack(to_edge_mm=0)))["sphere"]
    wide = shares(sampled(stack()))["wide"]
    assert found[1] > 0.8
    assert found[0] < wide[0] - 0.7


def test_a_sphere_around_an_endless_sample_sees_what_a_wide_one_gives():
    found = shares(sampled(stack(to_edge_mm=1e9)))
    assert found["sphere"] == pytest.approx(found["wide"], abs=1e-9)


def test_scattering_lets_guided_light_out():
    still, rough = (shares(sampled(stack(guided_scatter_per_cm=value))) for value in (0.0, 500.0))
    for name in READINGS:
        assert rough[name][1] > still[name][1] + 0.01
        assert rough[name][0] < still[name][0]


def test_the_bulk_set_and_the_stacks_set_give_the_same_external_yield():
    """Kirchartz, Staub & Rau 2016 with q; this stack's shares with q_stack (Furno et al. 2012)."""
    for each in sampled(stack()).readings:
        p_r, p_e, p_a = each.bulk
        assert p_r + p_e + p_a == pytest.approx(1.0, abs=1e-12)
        for bulk in (0.1, 0.5, 0.9, 0.999):
            here = external_yield(stack_from_bulk(bulk, each.rate_factor), p_r=each.p_r, p_e=each.p_e)
            assert here == pytest.approx(external_yield(bulk, p_r=p_r, p_e=p_e), rel=1e-12)


def test_light_that_never_ends_is_lost_and_told():
    found = sampled(stack(k=0.0))
    assert any("never end" in line for line in found.warnings)
    assert shares(found)["wide"][2] == pytest.approx(1.0 - shares(found)["wide"][1], abs=1e-12)
    assert shares(found)["sphere"][1] == pytest.approx(1.0, abs=1e-12)


def test_light_in_an_outer_medium_that_holds_it_is_lost_in_every_reading_and_told():
    found = sampled(stack(below={"n": 1.5}))
    assert any("outer medium" in line for line in found.warnings)
    assert min(p_a for _, _, p_a in shares(found).values()) > 0.03


def test_averages_are_weighted_with_the_photons_born():
    found = sampled(stack(wavelengths=(740, 760, 780)))
    alone = [sampled(stack(wavelengths=(nm,))) for nm in (740, 760, 780)]
    weight = found.ends["birth_weight"][:3]
    assert weight.sum() == pytest.approx(1.0, abs=1e-12)
    mean = sum(w * shares(each)["wide"][0] for w, each in zip(weight, alone, strict=True))
    assert shares(found)["wide"][0] == pytest.approx(mean, rel=1e-9)
