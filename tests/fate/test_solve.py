"""From a stack to its tables: what `optics.solve` makes of the ledgers."""

import numpy as np
import pytest
from tmm_pile import absorptances, solved

import optics
from optics.fate.ledger import ENDS

SIX_DIGITS = 0.5e-6 + 1e-8
EXACT = 1e-12
AS_TMM = 1e-9

CONTACTS = {"upper": (2.0 + 0.01j, 60.0), "film": (2.5 + 0.02j, 500.0), "lower": (1.8 + 0.005j, 120.0)}


def stack(layers, *, below=1.5, counts_as="free", wavelengths_nm=(740.0, 760.0, 770.0, 800.0), title=""):
    return optics.Stack(
        title=title,
        above=optics.Outer(material=optics.find_material("air")),
        below=optics.Outer(material=optics.find_material(below), counts_as=counts_as),
        layers=tuple(
            optics.Layer(name=name, material=optics.find_material(index), thickness_nm=nm, emits=name == "film")
            for name, (index, nm) in layers.items()
        ),
        light=optics.Light(
            wavelengths_nm=np.array(wavelengths_nm), spectrum=optics.Gaussian(peak_nm=768.0, fwhm_nm=40.0)
        ),
    )


@pytest.fixture(scope="module")
def result():
    return optics.solve(stack(CONTACTS))


def test_a_film_on_a_plate_of_glass_as_computed_by_another_program():
    """The same numbers as in test_numbers.py, from a stack as people write it."""
    film = {"film": (2.5 + 0.02j, 500.0), "glass": (1.52, 1.1e6)}
    row = optics.solve(stack(film, below="air", counts_as=None, wavelengths_nm=[759.9, 760.0, 760.1])).table.iloc[1]
    expected = {
        "rate_factor": 0.947004,
        "free_above": 0.039379,
        "free_below": 0.046045,
        "cover": 0.0,
        "substrate": 0.088988,
        "elsewhere": 0.0,
        "reabsorbed": 0.178025,
        "waveguided": 0.647563,
    }
    assert {name: row[name] for name in expected} == pytest.approx(expected, abs=SIX_DIGITS)


def test_an_outer_medium_that_holds_light_is_the_substrate():
    free = optics.solve(stack(CONTACTS)).averages
    held = optics.solve(stack(CONTACTS, counts_as="held")).averages
    assert held["substrate"] == pytest.approx(free["free_below"], abs=EXACT)
    assert held["free_below"] == 0.0


def test_photons_born_are_the_spectrum_times_the_rate_factor(result):
    table = result.table
    step = np.gradient(table.wavelength_nm)
    step[[0, -1]] = 0.5 * np.diff(table.wavelength_nm)[[0, -1]]
    line = np.exp(-4.0 * np.log(2.0) * ((table.wavelength_nm - 768.0) / 40.0) ** 2)
    born = line * table.rate_factor * step
    np.testing.assert_allclose(table.birth_weight, born / born.sum(), atol=EXACT)
    assert result.averages["rate_factor"] == pytest.approx((born.sum()) / (line * step).sum(), abs=EXACT)
    for name in ENDS:
        assert result.averages[name] == pytest.approx(table.birth_weight @ table[name], abs=EXACT)
    assert table.birth_weight.sum() == pytest.approx(1.0, abs=EXACT)


def test_ends_add_to_one_and_trapped_is_what_stays(result):
    for table in (result.table, result.ray_table):
        np.testing.assert_allclose(table[list(ENDS)].sum(axis=1), 1.0, atol=1e-7)
        np.testing.assert_allclose(table.trapped, table.reabsorbed + table.waveguided, atol=EXACT)
        parts = table.guided_reabsorbed + table.guided_elsewhere + table.guided_unfinished
        np.testing.assert_allclose(parts, table.waveguided, atol=EXACT)


def test_the_difference_of_the_models_is_shown_with_its_sign(result):
    for name in ENDS:
        assert result.wave_minus_ray[name] == result.averages[name] - result.ray_averages[name]


def test_layers_take_what_the_table_says(result):
    where = result.where.pivot_table(index="wavelength_nm", columns=["zone", "layer"], values="share")
    others = where["open"].drop(columns="film").sum(axis=1)
    np.testing.assert_allclose(others, result.table.elsewhere, atol=EXACT)
    guided = where["guided"].drop(columns="film").sum(axis=1)
    np.testing.assert_allclose(guided, result.table.guided_elsewhere, atol=EXACT)
    film = where["open"]["film"] + where["guided"]["film"]
    np.testing.assert_allclose(film, result.table.reabsorbed + result.table.guided_reabsorbed, atol=1e-10)


@pytest.mark.parametrize("side", ["above", "below"])
def test_reflection_is_that_of_tmm(result, side):
    media = [(1.0, 0), *CONTACTS.values(), (1.5, 0)]
    names = list(CONTACTS)
    if side == "below":
        media, names = media[::-1], names[::-1]
    rows = result.reflection[result.reflection.side == side]
    for _, row in rows.iterrows():
        theirs = solved("s", media, row.wavelength_nm, 0.0)
        assert (row.R, row["T"]) == pytest.approx((theirs["R"], theirs["T"]), abs=AS_TMM)
        taken = absorptances("s", media, row.wavelength_nm, 0.0)[1:-1]
        assert [row[f"A:{name}"] for name in names] == pytest.approx(list(taken), abs=AS_TMM)


def test_the_index_used_is_shown(result):
    assert set(result.index["film n"]) == {2.5}
    assert set(result.index["lower k"]) == {0.005}


def test_a_film_without_phases_is_solved_by_rays_alone():
    thick = CONTACTS | {"film": (2.5 + 1e-4j, 50_000.0)}
    found = optics.solve(stack(thick))
    assert found.table is None
    assert not found.wave_minus_ray
    assert found.advised_model == "ray"
    assert found.averages == found.ray_averages


@pytest.mark.parametrize(("thickness_nm", "model"), [(2_500.0, "wave"), (3_500.0, "ray")])
def test_the_advice_parts_films_at_the_coherence_length(thickness_nm, model):
    """lambda^2/(2 n fwhm): 2.96 um for a line 40 nm wide at 770 nm in a film of index 2.5."""
    layers = CONTACTS | {"film": (2.5 + 0.02j, thickness_nm)}
    assert optics.solve(stack(layers, wavelengths_nm=np.linspace(690.0, 850.0, 41))).advised_model == model


def test_a_result_tells_its_numerical_error(result):
    assert 0.0 < result.numerical_error < 1e-6
    assert result.numerical_error == result.errors.max()
    assert max(result.error_by_share.values()) <= result.numerical_error * (1.0 + EXACT)
