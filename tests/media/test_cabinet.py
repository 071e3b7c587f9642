"""Where a material is found."""

import pickle
from pathlib import Path

import numpy as np
import pytest

from optics.errors import InputError
from optics.media import Constant, Material, find


def test_a_material_is_returned_as_it_is() -> None:
    material = Material(name="mine", medium=Constant(1.7))
    assert find(material) is material


@pytest.mark.parametrize(("alias", "name"), [("Ag", "silver"), ("SiO2", "fused-silica"), ("MAPbI3", "ch3nh3pbi3")])
def test_aliases_and_case_do_not_matter(alias: str, name: str) -> None:
    assert find(alias) == find(alias.lower()) == find(name.upper()) == find(name)


def test_air_and_vacuum_are_gases_of_index_one() -> None:
    for spec in ("air", "vacuum", 1, 1.0, {"n": 1}):
        material = find(spec)
        assert material.gas
        assert np.array_equal(material.index([1.0, 1e7]), [1.0, 1.0])
    assert not find(1.0001).gas
    assert not find(1 + 1e-9j).gas


@pytest.mark.parametrize("spec", [2.5 + 0.02j, np.complex128(2.5 + 0.02j), {"n": 2.5, "k": 0.02}])
def test_numbers_are_constants(spec: complex) -> None:
    material = find(spec)
    assert material.name == "2.5+0.02i"
    assert material.index(770.0) == 2.5 + 0.02j
    assert find(np.float64(2.5)) == find(2.5) == find({"n": 2.5}) != material


@pytest.mark.parametrize(
    ("spec", "expected"),
    [
        ("silvr", "did you mean silver?"),
        ("float glass", "did you mean float-glass"),
        ("unobtainium", "expected one of air, borosilicate-crown"),
        ("", "no bundled material"),
        (True, "found True, expected a bundled name, a table file, a number"),
        (None, "found None, expected"),
        ([1.5, 0.0], "found [1.5, 0.0], expected"),
        (-1.5, "n: found -1.5"),
        (float("nan"), "n: found nan"),
        (float("inf"), "n: found inf"),
        (1.5 - 0.1j, "k: found -0.1, expected a finite number, 0 or more; absorption is a positive k here"),
        ({"n": 1.5, "k": -1}, "k: found -1"),
        ({"n": "1.5"}, "n: found '1.5'"),
        ({"n": 1.5, "k": float("nan")}, "k: found nan"),
        ({"k": 0.1}, "found no n"),
        ({}, "found no n"),
        ({"n": 1.5, "kk": 0.1}, 'key "kk" is not known, expected n and k, or published; did you mean "k"?'),
        ({"publishd": "main/Ag/Johnson"}, 'did you mean "published"?'),
        ({"published": "main/Ag/Johnson", "k": 0.0}, "found published together with n or k"),
        ("silver.csv", "silver.csv: no such file"),
        ("tables/silver", "tables/silver: no such file"),
    ],
)
def test_what_cannot_be_found_is_refused_with_the_nearest(spec: object, expected: str) -> None:
    with pytest.raises(InputError) as caught:
        find(spec)  # type: ignore[arg-type]
    assert any(expected in fault for fault in caught.value.faults), caught.value.faults
    assert all("\n" not in fault for fault in caught.value.faults)


def test_impossible_n_and_k_are_told_together() -> None:
    with pytest.raises(InputError) as caught:
        find({"n": 0, "k": -1})
    assert len(caught.value.faults) == 2


def test_every_kind_of_material_compares_by_value_hashes_and_pickles(tmp_path: Path) -> None:
    (tmp_path / "film.csv").write_text("wavelength_nm,n,k\n400,1.5,0.1\n500,1.6,0.2\n")
    for spec in ("silver", "float-glass", "fused-silica", "film.csv", 1.5):
        material = find(spec, folder=tmp_path)
        copy = pickle.loads(pickle.dumps(material))
        assert copy == material
        assert hash(copy) == hash(material)
        assert np.array_equal(copy.index(450.0), material.index(450.0))


@pytest.mark.parametrize("name", ["", "  ", None, 3])
def test_a_material_needs_a_name(name: object) -> None:
    with pytest.raises(InputError, match="name: found"):
        Material(name=name, medium=Constant(1.5))  # type: ignore[arg-type]


def test_a_material_needs_an_index() -> None:
    with pytest.raises(InputError, match=r'material "mine": medium: found 1\.5, expected an index'):
        Material(name="mine", medium=1.5)  # type: ignore[arg-type]


def test_a_material_names_itself_when_it_refuses() -> None:
    with pytest.raises(InputError) as caught:
        find("silver").index([500.0, 2500.0])
    (fault,) = caught.value.faults
    assert fault.startswith('material "silver": wavelength 2500 nm lies outside the range 187.9 to 1937 nm')
