"""Tolerances, alternative tables and unevenness in stacks and their files."""

from dataclasses import replace

import numpy as np
import pytest
from studied import STACK_FILE, small_stack

import optics
from optics.errors import InputError
from optics.media import find
from optics.stackfile import parse_stack, write_stack
from optics.tolerances import Alternatives, Tolerance

SPREAD = 2e-4  # error of a mean over thicknesses with kinks where modes begin
FILM = "thickness_nm = 300\nemits"


def read(*edits):
    text = STACK_FILE
    for before, after in edits:
        assert before in text
        text = text.replace(before, after)
    return parse_stack(text, folder=".")


def test_a_number_may_carry_a_standard_deviation():
    stack = read(
        (FILM, 'thickness_nm = { value = 300, sd = 15, shape = "uniform" }\nn_offset_sd = 0.02\nemits'),
        ("peak_nm = 762", "peak_nm = { value = 762, sd = 2 }"),
    )
    assert stack.film.thickness_nm == 300.0
    assert {(t.key, t.sd, t.shape) for t in stack.tolerances} == {
        ("film.thickness_nm", 15.0, "uniform"),
        ("film.n_offset", 0.02, "normal"),
        ("light.spectrum.peak_nm", 2.0, "normal"),
    }


def test_a_tolerance_of_a_thickness_in_mm_is_kept_in_nm():
    stack = read(("thickness_mm = 1.1", "thickness_mm = { value = 1.1, sd = 0.05 }"))
    assert stack.tolerances == (Tolerance(key="glass.thickness_nm", sd=50_000.0),)


def test_a_material_may_be_a_list_of_tables_of_which_the_first_is_used():
    stack = read(("{ n = 2.4, k = 0.02 }", '[{ n = 2.4, k = 0.02 }, "ch3nh3pbi3"]'))
    assert stack.film.material == find(2.4 + 0.02j)
    assert stack.alternatives == (Alternatives(key="film.material", materials=(find("ch3nh3pbi3"),)),)


@pytest.mark.parametrize(
    "edits",
    [
        ((FILM, "thickness_nm = { value = 300, sd = 15, varies_nm = 12 }\nemits"),),
        ((FILM, 'thickness_nm = 300\nk_scale_sd = { sd = 0.2, shape = "uniform" }\nn_offset_sd = 0.01\nemits'),),
        (("{ n = 2.4, k = 0.02 }", '["ch3nh3pbi3", { n = 2.4, k = 0.02 }, { n = 2.3, k = 0.01 }]'),),
        (
            ("n = 2.4", "n = { value = 2.4, sd = 0.01 }"),
            ('above = "air"', "above = { n = { value = 1.3, sd = 0.01 } }"),
        ),
        (
            ('below = "air"', 'below = { material = "pmma", n_offset_sd = 0.01 }'),
            ("thickness_mm = 1.1", "thickness_mm = { value = 1.1, sd = 0.05 }"),
        ),
    ],
    ids=["thickness", "index", "list", "constants", "outer media"],
)  # fmt: skip
def test_written_and_read_back_it_is_the_same(edits):
    stack = read(*edits)
    assert stack.tolerances or stack.alternatives
    assert parse_stack(write_stack(stack), folder=".") == stack


@pytest.mark.parametrize(
    ("before", "after", "said"),
    [
        (
            FILM,
            "thickness_nm = { value = 300, sd = -1 }\nemits",
            "thickness_nm: sd: found -1, expected a number above 0",
        ),
        (FILM, "thickness_nm = { value = 300, sd = 200 }\nemits", "expected at most 75, a quarter of the value"),
        (FILM, "thickness_nm = { value = 300, sdd = 2 }\nemits", "thickness_nm: sdd: unknown key; did you mean sd?"),
        (
            FILM,
            'thickness_nm = { value = 300, sd = 2, shape = "flat" }\nemits',
            'shape: found "flat" (text), expected "normal" or "uniform"',
        ),
        (
            FILM,
            "thickness_nm = { value = 300, varies_nm = 70 }\nemits",
            "varies_nm: found 70, expected at most a sixth of the thickness, 50",
        ),
        (FILM, 'thickness_nm = { value = "x", sd = 1 }\nemits', 'thickness_nm: found "x" (text)'),
        (FILM, "thickness_nm = 300\nk_scale_sd = 0.5\nemits", "film.k_scale: sd: found 0.5, expected at most 0.25"),
        (FILM, 'thickness_nm = 300\nn_offset_sd = "x"\nemits', 'n_offset_sd: sd: found "x" (text)'),
        ("thickness_mm = 1.1", "thickness_mm = { value = 1.1, varies_nm = 1 }", "found in a layer that does not emit"),
        ("fwhm_nm = 40", "fwhm_nm = { value = 40, sd = 0 }", "light: fwhm_nm: sd: found 0"),
        (
            "{ n = 2.4, k = 0.02 }",
            '["ch3nh3pbi3", "nope"]',
            'layer "film": material: no bundled material is called "nope"',
        ),
    ],
)
def test_what_is_wrong_with_a_tolerance_is_one_line_with_its_place(before, after, said):
    with pytest.raises(InputError) as refusal:
        read((before, after))
    assert said in str(refusal.value)
    assert len(refusal.value.faults) == 1


def test_the_answer_does_not_depend_on_what_is_known_of_the_inputs():
    known = replace(small_stack(), tolerances=(Tolerance(key="film.thickness_nm", sd=9.0),))
    assert optics.solve(known).averages == optics.solve(small_stack()).averages
    assert "film.thickness_nm is known to 9 (one standard deviation, normal)" in optics.solve(known).assumptions


def test_tolerances_of_nothing_and_twice_are_refused():
    for keys in (("flim.thickness_nm",), ("film.thickness_nm", "film.thickness_nm")):
        with pytest.raises(InputError):
            replace(small_stack(), tolerances=tuple(Tolerance(key=key, sd=1.0) for key in keys))


def test_an_uneven_film_is_the_mean_over_its_thicknesses():
    sd, at = 12.0, np.linspace(-4.5, 4.5, 91)
    weight = np.exp(-0.5 * at**2)
    parts = [optics.solve(small_stack(thickness_nm=300.0 + sd * each)).table for each in at]
    rate = sum(w * part["rate_factor"] for w, part in zip(weight, parts, strict=True))
    result = optics.solve(small_stack(varies_nm=sd))
    for share in ("trapped", "substrate", "free_above", "elsewhere"):
        mean = sum(w * part["rate_factor"] * part[share] for w, part in zip(weight, parts, strict=True)) / rate
        np.testing.assert_allclose(result.table[share], mean, atol=SPREAD)
        assert np.abs(result.table[share] - mean).max() <= result.errors.max() + 1e-6
    np.testing.assert_allclose(result.table["rate_factor"], rate / weight.sum(), atol=SPREAD)


def test_the_shares_of_an_uneven_film_add_to_one_and_a_hair_of_unevenness_changes_nothing():
    from optics.fate.ledger import ENDS

    even, uneven = optics.solve(small_stack()), optics.solve(small_stack(varies_nm=20.0))
    np.testing.assert_allclose(uneven.table[list(ENDS)].sum(axis=1), 1.0, atol=1e-9)
    hair = optics.solve(small_stack(varies_nm=1e-4))
    assert hair.averages["trapped"] == pytest.approx(even.averages["trapped"], abs=1e-8)
    assert uneven.averages["trapped"] != pytest.approx(even.averages["trapped"], abs=1e-5)
    assert any("uneven within the spot, 20 nm" in line for line in uneven.assumptions)


def test_an_uneven_film_and_an_aperture_are_refused_together():
    from optics.collection import Collection

    with pytest.raises(InputError, match="varies_nm: found together with an aperture"):
        replace(small_stack(varies_nm=5.0), collection=Collection(na=0.5, side="above"))
