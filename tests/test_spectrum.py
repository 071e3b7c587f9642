"""The spectrum born inside: scaled to one photon, read from a table or a Gaussian, refused where it says nothing."""

import math
import pickle

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from optics.errors import InputError
from optics.spectrum import Gaussian, SpectrumTable, births_per_nm, spectrum_notes, weights

ROUNDING = 1e-12  # relative: sums of a few hundred terms near 1
FINE = np.linspace(600.0, 940.0, 3401)


def _table(wavelength: list[float], per_nm: list[float]) -> SpectrumTable:
    return SpectrumTable(wavelength_nm=np.array(wavelength), per_nm=np.array(per_nm))


UNEVEN = st.lists(st.floats(650, 900), min_size=2, max_size=30, unique=True).map(sorted).map(np.array)


@settings(deadline=None)
@given(UNEVEN)
def test_births_integrate_to_one_by_the_trapezoid_rule_on_any_wavelengths(wavelengths):
    births = births_per_nm(Gaussian(peak_nm=768, fwhm_nm=120), wavelengths)
    assert np.trapezoid(births, wavelengths) == pytest.approx(1.0, rel=ROUNDING)
    assert births @ weights(wavelengths) == pytest.approx(1.0, rel=ROUNDING)


def test_steps_add_up_to_the_range():
    assert weights([700.0, 701.0, 705.0, 705.5]).tolist() == [0.5, 2.5, 2.25, 0.25]


def test_one_wavelength_alone_takes_all_births():
    assert weights([760.0]).tolist() == [1.0]
    assert births_per_nm(Gaussian(peak_nm=768, fwhm_nm=40), [760.0]).tolist() == [1.0]


def test_a_gaussian_falls_to_half_at_half_its_width_from_the_peak():
    births = births_per_nm(Gaussian(peak_nm=770, fwhm_nm=40), FINE)
    peak, half = np.interp([770.0, 790.0], FINE, births)
    assert half / peak == pytest.approx(0.5, rel=ROUNDING)
    # area of a Gaussian of unit height: fwhm sqrt(pi / (4 ln 2)); all but 1e-15 of it lies in the range
    assert peak == pytest.approx(math.sqrt(4 * math.log(2) / math.pi) / 40, rel=1e-9)


def test_a_table_is_read_linearly_between_its_rows_whatever_its_unit():
    births = births_per_nm(_table([700, 800, 900], [0, 5, 0]), [700, 725, 800, 850, 900])
    assert births / births.max() == pytest.approx([0, 0.25, 1, 0.5, 0], rel=ROUNDING)


def test_a_table_that_does_not_reach_is_refused_not_filled():
    with pytest.raises(InputError, match=r"covers 700 to 800 nm, the light asks for 690 to 800 nm; .*zeros"):
        births_per_nm(_table([700, 800], [1, 1]), [690, 800])


@pytest.mark.parametrize(
    "spectrum", [Gaussian(peak_nm=5000, fwhm_nm=10), _table([600, 610, 950], [1, 0, 0])], ids=["gaussian", "table"]
)
def test_a_spectrum_without_births_on_the_light_is_refused(spectrum):
    with pytest.raises(InputError, match="no births fall on the light's wavelengths, 700 to 800 nm"):
        births_per_nm(spectrum, [700, 750, 800])


def test_a_gaussian_cut_off_by_the_light_is_mentioned_with_its_share():
    # P(|x| > 1.96 sigma) = 0.0500 (any table of the normal distribution)
    sigma = 40 / (2 * math.sqrt(2 * math.log(2)))
    ends = [768 - 1.959964 * sigma, 768 + 1.959964 * sigma]
    (note,) = spectrum_notes(Gaussian(peak_nm=768, fwhm_nm=40), ends)
    assert note.startswith("5 % of the Gaussian's births lie outside")


def test_a_gaussian_inside_the_light_needs_no_note():
    assert spectrum_notes(Gaussian(peak_nm=768, fwhm_nm=40), FINE) == ()


def test_the_share_left_out_keeps_its_digits_just_above_what_is_worth_saying():
    sigma = 40 / (2 * math.sqrt(2 * math.log(2)))
    # P(x > 3 sigma) = 0.00134990, P(x > 3.2 sigma) = 0.00068714 (tables of the normal distribution)
    (note,) = spectrum_notes(Gaussian(peak_nm=768, fwhm_nm=40), [600, 768 + 3 * sigma])
    assert note.startswith("0.13 %")
    assert spectrum_notes(Gaussian(peak_nm=768, fwhm_nm=40), [600, 768 + 3.2 * sigma]) == ()


def test_a_spectrum_compares_hashes_and_pickles_by_value_and_not_by_its_file():
    one = SpectrumTable(wavelength_nm=np.array([700.0, 800.0]), per_nm=np.array([0.0, 1.0]), path="/here", sha256="1")
    same = SpectrumTable(wavelength_nm=np.array([700.0, 800.0]), per_nm=np.array([-0.0, 1.0]))
    other = SpectrumTable(wavelength_nm=np.array([700.0, 800.0]), per_nm=np.array([0.5, 1.0]))
    assert one == same
    assert hash(one) == hash(same)
    assert one != other
    assert one != Gaussian(peak_nm=1, fwhm_nm=1)
    copy = pickle.loads(pickle.dumps(one))
    assert copy == one
    assert not copy.per_nm.flags.writeable


def test_a_table_keeps_its_own_copy_that_nobody_can_write_into():
    rows = np.array([0.0, 1.0])
    spectrum = SpectrumTable(wavelength_nm=np.array([700.0, 800.0]), per_nm=rows)
    rows[0] = 7.0
    assert spectrum.per_nm.tolist() == [0.0, 1.0]
    with pytest.raises(ValueError, match="read-only"):
        spectrum.per_nm[0] = 7.0


@pytest.mark.parametrize(
    ("wavelength", "per_nm", "said"),
    [
        ([700, 800], [1], "found 1 values, expected 2"),
        ([800, 700], [1, 1], "700 after 800"),
        ([700, 700], [1, 1], "700 twice"),
        ([700, 800], [1, -1], "value 2: found -1"),
        ([700, 800], [0, 0], "zeros alone"),
        ([700, 800], [1, math.nan], "value 2: found nan"),
        ([700], [1], "expected two or more"),
        ("700", [1], '"700" \\(text\\)'),
    ],
)
def test_a_table_that_is_none_is_refused(wavelength, per_nm, said):
    with pytest.raises(InputError, match=f"light.spectrum: .*{said}"):
        SpectrumTable(wavelength_nm=wavelength, per_nm=per_nm)


def test_all_faults_of_a_gaussian_are_told_at_once():
    with pytest.raises(InputError) as refusal:
        Gaussian(peak_nm=-1, fwhm_nm="40 nm", seen="outside")
    assert [line.split(": ")[1] for line in refusal.value.faults] == ["peak_nm", "fwhm_nm", "seen"]
