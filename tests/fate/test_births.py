"""The spectrum born inside: forward and backward through what is seen, from absorption, and what is refused."""

import numpy as np
import pytest

from optics.collection import Collection
from optics.depth import Decay, Pump
from optics.errors import InputError
from optics.fate.overlay import lay_over
from optics.fate.solve import solve
from optics.light import Light
from optics.media import find
from optics.media.dispersion import Tabulated
from optics.media.material import Material
from optics.radiation import FromAbsorption
from optics.spectrum import Gaussian, SpectrumTable, births_per_nm, weights
from optics.stack import Emission, Layer, Outer, Stack
from optics.units import energy_eV

ROUND_TRIP = 1e-8
WAVELENGTHS = np.linspace(700.0, 860.0, 41)


def tail_film(floor=0.0, urbach_eV=0.015, gap_eV=1.62):
    """Return an invented film with an Urbach tail, and a floor where one is asked for."""
    nm = np.arange(500.0, 1000.5, 1.0)
    k = 0.12 * np.exp(np.minimum(energy_eV(nm) - gap_eV, 0.0) / urbach_eV)
    return Material(
        name="invented", medium=Tabulated(wavelength_nm=nm, n=np.full(nm.size, 2.4), k=np.maximum(k, floor))
    )


def made(
    *, spectrum=None, film=None, below="air", glass=True, collection=None, depth="uniform", wavelengths=WAVELENGTHS
):
    plate = [Layer(name="glass", material=find("float-glass"), thickness_nm=1.1e6)] if glass else []
    return Stack(
        above=Outer(material=find("air")),
        below=below if isinstance(below, Outer) else Outer(material=find(below)),
        layers=(Layer(name="film", material=film or tail_film(), thickness_nm=480.0, emits=True), *plate),
        light=Light(wavelengths_nm=wavelengths, spectrum=spectrum or Gaussian(peak_nm=768.0, fwhm_nm=40.0)),
        emission=Emission(depth=depth),
        collection=collection,
    )


def own_spectrum(result):
    """Return the spectrum of the film material that a result was computed with: births less the rate factor."""
    table = result.ray_table if result.table is None else result.table
    own = (table["births_per_nm"] / table["rate_factor"]).to_numpy()
    return own / (own @ weights(result.stack.light.wavelengths_nm))


@pytest.mark.parametrize(
    ("seen", "na", "options"),
    [
        ("above", None, {}),
        ("below", None, {}),
        ("above", 0.5, {}),
        ("below", 0.9, {"depth": Decay(decay_nm=80.0, side="above")}),
        ("above", 0.7, {"depth": Pump(pump_nm=532.0, side="below", births="square")}),
        ("below", 1.2, {"below": Outer(material=find(1.5)), "glass": False}),
        ("below", None, {"below": Outer(material=find(1.5)), "glass": False}),
    ],
)
def test_light_sent_out_and_read_back_gives_the_birth_spectrum(seen, na, options):
    collection = Collection(na=na or 1.5, side=seen)
    if na is None and "below" not in options:
        collection = Collection(na=1.0, side=seen)
    forward = solve(made(collection=collection, **options))
    free = na is None and "below" not in options
    curve = forward.spectra[f"{seen}_per_nm" if free else "collected_per_nm"].to_numpy()
    spectrum = SpectrumTable(wavelength_nm=WAVELENGTHS, per_nm=curve, seen=seen, na=na)
    backward = solve(made(spectrum=spectrum, **options))
    expected = births_per_nm(Gaussian(peak_nm=768.0, fwhm_nm=40.0), WAVELENGTHS)
    assert own_spectrum(backward) == pytest.approx(expected, rel=ROUND_TRIP)
    for share, average in forward.averages.items():
        if share != "collected":
            assert backward.averages[share] == pytest.approx(average, abs=ROUND_TRIP), share


def test_light_seen_outside_lies_to_the_red_of_what_is_born():
    result = solve(made(spectrum=FromAbsorption()))
    mean = {
        name: np.average(result.spectra["wavelength_nm"], weights=result.spectra[f"{name}_per_nm"])
        for name in ("births", "above")
    }
    assert mean["above"] > mean["births"] + 1.0


def test_the_curves_of_spectra_are_births_times_shares():
    result = solve(made(collection=Collection(na=0.9, side="above")))
    spectra, table = result.spectra, result.table
    births = table["births_per_nm"]
    assert spectra["above_per_nm"].to_numpy() == pytest.approx((births * table["free_above"]).to_numpy())
    assert spectra["held_per_nm"].to_numpy() == pytest.approx(
        (births * (table["substrate"] + table["cover"])).to_numpy()
    )
    assert spectra["collected_per_nm"] @ weights(WAVELENGTHS) == pytest.approx(result.averages["collected"])
    assert result.averages["collected"] < result.averages["free_above"]


def test_wavelengths_at_which_little_gets_out_are_marked():
    nm = np.arange(500.0, 1000.5, 1.0)
    k = np.where(nm < 750.0, 3.0, 0.01)  # invented: black below 750 nm
    film = Material(name="invented", medium=Tabulated(wavelength_nm=nm, n=np.full(nm.size, 2.4), k=k))
    result = solve(made(spectrum=Gaussian(peak_nm=768.0, fwhm_nm=60.0, seen="above"), film=film))
    marked = result.spectra["amplifies_noise"].to_numpy(dtype=bool)
    assert marked[WAVELENGTHS < 745.0].all()
    assert not marked[WAVELENGTHS > 760.0].any()
    (warning,) = (line for line in result.warnings if "amplifies_noise" in line)
    assert "light seen above: at" in warning


def test_light_seen_where_none_gets_out_is_refused():
    with pytest.raises(InputError, match='seen: found "below", but none of the light born at 700 nm gets out there'):
        solve(made(spectrum=Gaussian(peak_nm=768.0, fwhm_nm=40.0, seen="below"), below="silver", glass=False))


def test_the_births_of_a_spectrum_seen_outside_are_not_to_be_had_without_the_stack():
    with pytest.raises(InputError, match="follows only from a solved stack"):
        births_per_nm(Gaussian(peak_nm=768.0, fwhm_nm=40.0, seen="above"), WAVELENGTHS)


def test_births_from_absorption_follow_the_films_own_n_and_alpha():
    result = solve(made(spectrum=FromAbsorption(temperature_K=320.0)))
    index = tail_film().index(WAVELENGTHS)
    kt = 8.617333262e-5 * 320.0
    energy = energy_eV(WAVELENGTHS)
    expected = index.real**2 * index.imag * energy**5 / np.expm1(energy / kt)  # alpha ~ k E, dE/dnm ~ E^2
    expected /= expected @ weights(WAVELENGTHS)
    assert own_spectrum(result) == pytest.approx(expected, rel=1e-9)


def test_the_radiative_coefficient_is_told_for_bulk_and_stack():
    result = solve(made(spectrum=FromAbsorption(n_i_per_cm3=1e5)))
    told = result.radiation
    assert told.coefficient == pytest.approx(told.equilibrium_rate / 1e10)
    assert told.coefficient_in_stack == pytest.approx(told.coefficient * result.averages["rate_factor"])
    assert solve(made(spectrum=FromAbsorption())).radiation.coefficient is None
    assert solve(made()).radiation is None


@pytest.mark.parametrize(
    ("film", "spectrum", "said"),
    [
        (tail_film(floor=1e-3), FromAbsorption(), "births still rise at the red end.*a floor or a cut, not a tail"),
        (tail_film(urbach_eV=0.026), FromAbsorption(), "of the births lie in the last 5 nm"),
        (find({"n": 2.5, "k": 0.02}), FromAbsorption(), 'tail = "fit"'),
        (find({"n": 2.5, "k": 0.0}), FromAbsorption(), "the film absorbs nothing"),
        (tail_film(), FromAbsorption(splitting_eV=1.5), "splitting_eV: found 1.5, expected less.*there would be gain"),
        (tail_film(), FromAbsorption(temperature_K=1.0), "too few for numbers to hold"),
    ],
)
def test_what_is_no_emission_spectrum_is_refused(film, spectrum, said):
    with pytest.raises(InputError, match=f"light.spectrum: .*{said}"):
        made(spectrum=spectrum, film=film)


def test_a_splitting_that_bleaches_much_is_warned_of():
    result = solve(made(spectrum=FromAbsorption(splitting_eV=1.44)))
    assert any("bleaches" in line for line in result.warnings)
    assert not any("bleaches" in line for line in solve(made(spectrum=FromAbsorption(splitting_eV=1.0))).warnings)


def test_a_pump_gives_three_readings_of_which_one_is_the_answer():
    for births in ("linear", "square"):
        result = solve(made(depth=Pump(pump_nm=532.0, side="above", births=births)))
        assert list(result.depth_averages) == ["uniform", "linear", "square"]
        assert result.averages == pytest.approx(result.depth_averages[births])
        assert list(result.depth.columns) == ["depth_nm", "linear", "square"]
    even = solve(made())
    assert result.depth_averages["uniform"] == pytest.approx(even.averages)
    assert even.depth_averages == {}
    assert even.depth is None


def test_a_measurement_is_scaled_to_its_curve_and_the_misfit_told():
    result = solve(made())
    above = result.spectra["above_per_nm"].to_numpy()
    same = lay_over(result, WAVELENGTHS, 731.0 * above)
    assert same.measured.curve == "above"
    assert same.measured.misfit == pytest.approx(0.0, abs=1e-12)
    assert same.spectra["measured_per_nm"].to_numpy() == pytest.approx(above)
    part = lay_over(result, WAVELENGTHS[5:20], np.ones(15), curve="below").spectra["measured_per_nm"]
    assert part.notna().sum() == 15
    for curve, nm, said in (("collected", WAVELENGTHS, "above, below"), ("above", WAVELENGTHS + 500, "700 to 860 nm")):
        with pytest.raises(InputError, match=said):
            lay_over(result, nm, np.ones(nm.size), curve=curve)
