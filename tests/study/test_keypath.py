"""Key paths reach every number, word and material of a stack, and refuse what is not there."""

import pytest
from studied import small_stack

from optics.errors import InputError
from optics.media import find
from optics.study.keypath import all_changed, changed, keys_of, value_at


@pytest.mark.parametrize(
    ("key", "value"),
    [
        ("film.thickness_nm", 250.0),
        ("glass.thickness_mm", 0.7),
        ("film.material.n", 2.5),
        ("film.material.k", 0.03),
        ("film.n_offset", 0.02),
        ("film.k_scale", 1.1),
        ("film.roughness_nm", 3.0),
        ("contact.phases", "keep"),
        ("above.counts_as", "held"),
        ("light.spectrum.peak_nm", 770.0),
        ("light.step_nm", 10.0),
        ("emission.horizontal_share", 0.7),
    ],
)
def test_what_is_put_at_a_key_is_found_there(key, value):
    found = value_at(changed(small_stack(), key, value), key)
    assert found == value if isinstance(value, str) else found == pytest.approx(value, rel=1e-14)


def test_a_material_is_put_by_name_number_or_object():
    stack = small_stack()
    for spec in ("sapphire", {"n": 1.9, "k": 0.0}, find("sapphire")):
        assert changed(stack, "glass.material", spec).layers[2].material == find(spec)
    assert changed(stack, "above", "pmma").above.material == find("pmma")


def test_every_key_that_is_named_can_be_read():
    stack = small_stack()
    for key in keys_of(stack):
        value_at(stack, key)


def test_n_and_k_are_moved_at_every_wavelength():
    stack = small_stack()
    moved = all_changed(stack, {"film.k_scale": 2.0, "film.n_offset": 0.1, "film.material": "ch3nh3pbi3"})
    wavelengths = stack.light.wavelengths_nm
    before, after = find("ch3nh3pbi3").index(wavelengths), moved.film.material.index(wavelengths)
    assert after.real == pytest.approx(before.real + 0.1, rel=1e-15)
    assert after.imag == pytest.approx(2.0 * before.imag, rel=1e-15)


def test_a_layer_whose_name_holds_a_point_is_told_from_the_key():
    from dataclasses import replace

    stack = small_stack()
    named = replace(stack, layers=(replace(stack.layers[0], name="film.top"), *stack.layers[1:]))
    assert changed(named, "film.top.thickness_nm", 100.0).film.thickness_nm == 100.0


@pytest.mark.parametrize(
    ("key", "value", "said"),
    [
        ("film.thicknes_nm", 1.0, '"film.thicknes_nm": not a key of this stack; did you mean film.thickness_nm?'),
        ("film.thickness_nm", -1.0, 'film.thickness_nm = -1: layer "film": thickness_nm: found -1, expected a number'),
        ("film.thickness_nm", "thin", 'film.thickness_nm = "thin" (text): '),
        ("glass.material", "flint", "glass.material = "),
        ("film.k_scale", -0.5, "film.k_scale = -0.5: k_scale: found -0.5, expected a number from 0"),
        ("film.n_offset", -3.0, "n_offset: found -3, which takes n to -0.6"),
        ("film.n_offset", "x", 'found "x" (text), expected a number'),
        ("emission.horizontal_share", 1.5, "emission.horizontal_share = 1.5: emission: horizontal_share: found 1.5"),
    ],
)
def test_what_a_stack_cannot_have_is_refused_with_key_and_value(key, value, said):
    with pytest.raises(InputError) as refusal:
        changed(small_stack(), key, value)
    assert said in str(refusal.value)
    assert str(refusal.value).count("\n") == 0
