"""Rough faces as graded layers: what a stack becomes, its limits, and what is refused."""

import numpy as np
import pytest

from optics.errors import InputError
from optics.fate.solve import solve
from optics.roughness import SLICES, graded
from optics.stackfile import build_stack


def stack(rough=0.0, *, on_glass=0.0, film_nm=500.0, k=0.02):
    return build_stack(
        {
            "above": "air",
            "below": "air",
            "light": {"wavelengths_nm": [760], "spectrum": {"kind": "gaussian", "peak_nm": 760, "fwhm_nm": 40}},
            "layer": [
                {
                    "name": "film",
                    "material": {"n": 2.5, "k": k},
                    "thickness_nm": film_nm,
                    "emits": True,
                    "roughness_nm": rough,
                },
                {"name": "glass", "material": {"n": 1.52}, "thickness_mm": 1.1, "roughness_nm": on_glass},
            ],
        }
    )


def test_smooth_faces_leave_the_stack_as_it_is():
    smooth = stack()
    assert graded(smooth) is smooth


def test_a_rough_face_becomes_slices_that_take_their_half_of_the_layer():
    grown = graded(stack(5.0))
    assert [layer.name for layer in grown.layers] == [
        *(f"film rough {i}" for i in range(1, SLICES + 1)),
        "film",
        "glass",
    ]
    assert sum(layer.thickness_nm for layer in grown.layers[:SLICES]) == pytest.approx(2 * 3**0.5 * 5.0)
    assert grown.film.thickness_nm == pytest.approx(500.0 - 3**0.5 * 5.0)
    index = [layer.material.index(760.0).real for layer in grown.layers[: SLICES + 1]]
    assert np.all(np.diff(index) > 0)
    assert not any(layer.plate for layer in grown.layers[:-1])


def test_the_slices_have_the_given_root_mean_square_height():
    """A share that grows in a straight line over a width is a height spread evenly over it: rms = width/sqrt(12)."""
    grown = graded(stack(5.0))
    width = sum(layer.thickness_nm for layer in grown.layers[:SLICES])
    assert width / 12**0.5 == pytest.approx(5.0)


def test_faint_roughness_changes_little_and_in_proportion():
    smooth, faint, more = (solve(stack(rough)).averages["trapped"] for rough in (0.0, 1.0, 2.0))
    assert abs(faint - smooth) < 1e-3
    assert more - smooth == pytest.approx(2.0 * (faint - smooth), rel=0.2)


def test_a_buried_rough_face_is_graded_as_well():
    grown = graded(stack(on_glass=8.0))
    assert grown.film.thickness_nm == pytest.approx(500.0 - 3**0.5 * 8.0)
    assert grown.layers[1].name == "glass rough 1"
    shares = solve(stack(on_glass=8.0)).averages
    assert sum(shares[name] for name in ("trapped", "substrate", "cover", "free_above", "free_below", "elsewhere")) == (
        pytest.approx(1.0, abs=1e-9)
    )


def test_the_result_keeps_the_stack_that_was_asked_and_says_how_it_was_treated():
    asked = stack(5.0)
    result = solve(asked)
    assert result.stack == asked
    assert any("Bruggeman" in line for line in result.assumptions)


@pytest.mark.parametrize(
    ("change", "said"),
    [
        ({"rough": 50.0}, "twentieth of the shortest wavelength"),
        ({"rough": 20.0, "film_nm": 30.0}, "take 34.64 nm of this layer"),
        ({"rough": -1.0}, "roughness_nm: found -1"),
        ({"rough": "rough"}, "roughness_nm: found"),
    ],
)
def test_faces_that_are_no_graded_layers_are_refused(change, said):
    with pytest.raises(InputError, match=said):
        stack(**change)


def test_a_rough_stack_is_not_turned_upside_down():
    with pytest.raises(InputError, match="upside down"):
        stack(5.0).flipped()


def test_a_rough_face_says_what_it_scatters():
    """Bennett & Porteus 1961 in the denser medium: 1 - exp(-(4 pi 2.5 10/760)^2) = 15.7 %."""
    (said,) = (line for line in solve(stack(10.0)).warnings if "Bennett" in line)
    assert "15.7%" in said
    assert not any("Bennett" in line for line in solve(stack(1.0)).warnings)
