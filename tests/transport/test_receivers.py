"""Several layers that emit or receive."""

from dataclasses import replace

import numpy as np
import pytest

from optics import Gaussian, InputError, Layer, Light, Outer, Stack, find_material, parse_stack, solve, write_stack
from optics.transport.receivers import ALL, ENDS, receivers


def stack_of(**film):
    """Return two films, one over the other, above a silicon-like cell; invented numbers."""
    layers = (
        Layer(name="wide", material=find_material(2.2 + 0.05j), thickness_nm=200, **film),
        Layer(name="spacer", material=find_material(1.6 + 0.001j), thickness_nm=80),
        Layer(name="narrow", material=find_material(2.6 + 0.08j), thickness_nm=300),
        Layer(name="cell", material=find_material(3.7 + 0.01j), thickness_nm=1.5e5, receives=True),
    )
    air = Outer(material=find_material("air"))
    light = Light(wavelengths_nm=np.array([740.0, 760.0, 780.0]), spectrum=Gaussian(peak_nm=760, fwhm_nm=40))
    return Stack(above=air, below=air, layers=layers, light=light)


@pytest.fixture
def two():
    one = stack_of(emits=True)
    layers = [replace(layer) for layer in one.layers]
    layers[0] = replace(layers[0], births_share=0.3)
    layers[2] = replace(layers[2], emits=True, births_share=0.7)
    return replace(one, layers=tuple(layers))


def test_every_row_adds_to_one_and_the_last_is_the_mean_by_births(two):
    table = receivers(two).table.set_index("source")
    columns = ["to:wide", "to:narrow", "to:cell", "other_layers", *ENDS]
    assert table.index.tolist() == ["wide", "narrow", ALL]
    assert table[columns].sum(axis=1).to_numpy() == pytest.approx(np.ones(3), abs=1e-9)
    mean = 0.3 * table.loc["wide", columns] + 0.7 * table.loc["narrow", columns]
    assert table.loc[ALL, columns].to_numpy(float) == pytest.approx(mean.to_numpy(float), abs=1e-12)


def test_one_emitting_layer_is_what_solve_says():
    stack = stack_of(emits=True)
    row = receivers(stack).table.iloc[0]
    result = solve(stack)
    assert row["to:wide"] == pytest.approx(result.averages["reabsorbed"] + result.averages["guided_reabsorbed"])
    weight = dict(zip(result.table["wavelength_nm"], result.table["birth_weight"], strict=True))
    cell = result.where[result.where["layer"] == "cell"]
    assert row["to:cell"] == pytest.approx((cell["share"] * cell["wavelength_nm"].map(weight)).sum())


def test_exchange_between_the_two_films_is_the_same_both_ways(two):
    # Polder & Van Hove (1971): n^2 alpha d x rate x share is symmetric for isotropic emission
    found = receivers(two).by_wavelength.set_index("source")
    media = {"wide": (2.2 + 0.05j, 200), "narrow": (2.6 + 0.08j, 300)}
    amount = {}
    for source, other in (("wide", "narrow"), ("narrow", "wide")):
        index, thickness = media[source]
        row = found.loc[source]
        amount[source] = index.real**2 * index.imag * thickness * row["rate_factor"] * row[f"to:{other}"]
    assert amount["wide"].to_numpy() == pytest.approx(amount["narrow"].to_numpy(), rel=1e-4)  # guided lines' quadrature


def test_stacks_of_several_emitters_are_written_and_read_back_the_same(two):
    assert parse_stack(write_stack(two), folder=".") == two


def test_what_needs_one_film_says_where_several_are_followed(two):
    with pytest.raises(InputError, match=r"2 layers emit .* receivers"):
        solve(two)


@pytest.mark.parametrize(
    ("shares", "said"),
    [((None, None), "births_share in each"), ((0.3, None), "births_share in each"), ((0.3, 0.6), "add to 0.9")],
)
def test_shares_of_births_that_do_not_add_up_are_refused(two, shares, said):
    layers = list(two.layers)
    for place, share in zip((0, 2), shares, strict=True):
        layers[place] = replace(layers[place], births_share=share)
    with pytest.raises(InputError, match=said):
        replace(two, layers=tuple(layers))


def test_a_share_of_births_in_a_layer_that_does_not_emit_is_refused():
    with pytest.raises(InputError, match="does not emit"):
        Layer(name="quiet", material=find_material(1.5), thickness_nm=10, births_share=0.5)
