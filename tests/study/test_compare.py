"""Comparisons equal separate solves, and every change is accounted for by zone and layer."""

import numpy as np
import pytest
from studied import small_stack

import optics
from optics.errors import InputError
from optics.fate.ledger import ENDS, SHARES
from optics.study.compare import compare

SAME = 1e-10  # the same integrals, summed in another order
CLOSED = 1e-9  # percentage points: rounding of some hundred additions


@pytest.fixture(scope="module")
def stacks():
    bare = small_stack()
    return {"bare": bare, "sapphire": bare.with_layer("glass", material="sapphire"), "covered": bare.with_above("pmma")}


@pytest.fixture(scope="module")
def found(stacks):
    return compare(stacks)


def test_every_share_equals_a_separate_solve(stacks, found):
    for name, stack in stacks.items():
        own = optics.solve(stack).averages
        for share in (*SHARES, "rate_factor"):
            assert found.shares.loc[share, name] == pytest.approx(own[share], abs=SAME)


def test_differences_are_signed_points_against_the_first(found):
    assert list(found.differences.columns) == ["sapphire", "covered"]
    expected = 100 * (found.shares.loc[list(SHARES), "covered"] - found.shares.loc[list(SHARES), "bare"])
    np.testing.assert_allclose(found.differences["covered"], expected, atol=1e-12)
    assert found.differences.loc["substrate", "sapphire"] > 0  # denser glass takes more


def test_the_parts_of_a_change_add_to_nothing_and_each_stack_to_one(found):
    for name, rows in found.why.groupby("stack"):
        assert rows["change_points"].sum() == pytest.approx(0.0, abs=CLOSED), name
        assert rows["share"].sum() == pytest.approx(1.0, abs=1e-9)
        assert rows["first"].sum() == pytest.approx(1.0, abs=1e-9)
        ordered = rows["change_points"].abs().to_numpy()
        assert (np.diff(ordered) <= 0).all()


def test_what_leaves_no_layer_is_named_by_its_end(found):
    out = found.why[(found.why["stack"] == "covered") & (found.why["zone"] == "out")].set_index("layer")
    assert out.loc["cover", "first"] == 0.0
    assert out.loc["cover", "share"] == pytest.approx(found.shares.loc["cover", "covered"], abs=1e-12)


def test_differences_by_wavelength_are_those_of_the_tables(stacks, found):
    rows = found.by_wavelength[found.by_wavelength["stack"] == "sapphire"]
    first, own = (optics.solve(stacks[name]).table for name in ("bare", "sapphire"))
    for end in ENDS:
        np.testing.assert_allclose(rows[end], 100 * (own[end] - first[end]), atol=100 * SAME)


def test_stacks_on_other_wavelengths_are_not_compared(stacks):
    other = stacks["bare"].with_light(wavelengths_nm=np.array([750.0, 760.0]))
    with pytest.raises(InputError, match="other: light: the wavelengths differ from those of bare"):
        compare({"bare": stacks["bare"], "other": other})


def test_one_stack_alone_is_no_comparison(stacks):
    with pytest.raises(InputError, match="expected two or more"):
        compare({"bare": stacks["bare"]})
