"""Absorption floors: found where they begin, replaced by an Urbach tail or by measured absorption, n kept."""

import pickle
from pathlib import Path

import numpy as np
import pytest

from optics.errors import InputError
from optics.media import Material, Tabulated, find
from optics.media.bandtail import find_floor
from optics.media.dispersion import Joined, extinction_table
from optics.media.tail import MeasuredTail, Tail, repair
from optics.media.tailspec import tail_from
from optics.units import absorption_per_cm, energy_eV, k_from_absorption, wavelength_nm

URBACH_EV = 0.015  # of CH3NH3PbI3: De Wolf et al., J. Phys. Chem. Lett. 5, 1035, 2014 (value from memory)
GAP_EV = 1.60
EDGE_PER_CM = 2e4

ROWS = 0.02
"""Relative: slopes are compared over 4 meV on rows 1 nm apart, on which a tail of 15 meV bends by a percent or two."""

ENERGY = np.linspace(1.2, 3.0, 1801)


def edge(energy: np.ndarray, floor: float = 0.0, urbach: float = URBACH_EV) -> np.ndarray:
    """Return absorption [1/cm] that saturates above the gap, ends in an Urbach tail below it, and has a floor."""
    tail = EDGE_PER_CM * np.exp((energy - GAP_EV) / urbach)
    return tail / (1.0 + tail / (4.0 * EDGE_PER_CM)) + floor


def table(floor: float = 0.0, energy: np.ndarray = ENERGY, urbach: float = URBACH_EV) -> Tabulated:
    wavelengths = wavelength_nm(energy)[::-1]
    k = k_from_absorption(edge(energy, floor, urbach)[::-1], wavelengths)
    return Tabulated(wavelengths, 2.4 + 1e4 / wavelengths**2 * 30.0, k)


def film(medium: object) -> Material:
    return Material(name="film", medium=medium)  # type: ignore[arg-type]


def slope(material: Material, nm: float, step: float = 2e-4) -> float:
    """Return the slope of ln(alpha) over energy [1/eV]."""
    at = wavelength_nm(energy_eV(nm) + np.array([-step, step]))
    value = np.log(absorption_per_cm(material.index(at).imag, at))
    return float((value[1] - value[0]) / (2 * step))


FLOOR = 500.0


def test_a_floor_is_found_where_the_logarithm_stops_falling():
    found = find_floor(*_rows(table(FLOOR)))
    # The slope is 1/E_U u/(1 + u), u = tail/floor; it comes down to 10 per eV at u = 0.176.
    onset = GAP_EV + URBACH_EV * np.log(0.176 * FLOOR / EDGE_PER_CM)
    assert energy_eV(found.onset_nm) == pytest.approx(onset, abs=0.012)  # half the window over which slopes are taken
    assert found.steepest_meV == pytest.approx(1e3 * URBACH_EV, rel=0.25)  # saturation above and floor below add to it
    assert found.decay_meV > 500


def _rows(medium: Tabulated) -> tuple[np.ndarray, np.ndarray]:
    return medium.wavelength_nm, medium.k


@pytest.mark.parametrize("urbach", [0.01, 0.015, 0.03, 0.06])
def test_a_tail_that_falls_to_the_end_is_no_floor(urbach):
    energy = ENERGY[ENERGY > 1.4]
    assert find_floor(*_rows(table(0.0, energy, urbach))) is None


@pytest.mark.parametrize("name", ["silicon", "gaas", "gold", "silver", "tio2", "cspbbr3", "pmma", "float-glass"])
def test_bundled_materials_without_a_floor_worth_a_word_have_none(name):
    medium = find(name).medium
    rows = _rows(medium.k_from if isinstance(medium, Joined) else medium)
    found = find_floor(*rows)
    assert found is None or found.k < 1e-4


@pytest.mark.parametrize("noise", [0.02, 0.1, 0.2])
def test_a_noisy_floor_is_found_all_the_same(noise):
    wavelengths, k = _rows(table(FLOOR, np.linspace(1.2, 3.0, 601)))
    noisy = k * (1 + noise * np.random.default_rng(0).standard_normal(k.size)).clip(0.01)
    found = find_floor(wavelengths, noisy)
    assert found is not None
    assert found.onset_nm == pytest.approx(find_floor(wavelengths, k).onset_nm, abs=10)


def test_a_repaired_edge_meets_in_value_and_slope_and_is_an_urbach_tail_beyond():
    whole = film(table(FLOOR))
    done = repair(whole, Tail(urbach_meV=20.0))
    join = done.material.medium.join_nm
    assert "joined in value and slope" in done.said
    assert slope(whole, join) == pytest.approx(1 / 0.02, rel=ROWS)
    assert done.material.index(join * (1 + 1e-12)).imag == pytest.approx(whole.index(join).imag, rel=1e-9)
    assert slope(done.material, join + 1.0) == pytest.approx(1 / 0.02, rel=1e-6)
    beyond = np.linspace(join + 1, 1000.0, 50)
    closed = absorption_per_cm(whole.index(join).imag, join) * np.exp((energy_eV(beyond) - energy_eV(join)) / 0.02)
    assert absorption_per_cm(done.material.index(beyond).imag, beyond) == pytest.approx(closed, rel=1e-12)


def test_n_is_kept_and_so_is_everything_at_shorter_wavelengths():
    whole = film(table(FLOOR))
    done = repair(whole, Tail(urbach_meV=20.0)).material
    everywhere = np.linspace(420.0, 1000.0, 300)
    assert np.array_equal(done.index(everywhere).real, whole.index(everywhere).real)
    blue = everywhere[everywhere <= done.medium.join_nm]
    assert np.array_equal(done.index(blue), whole.index(blue))
    assert (done.index(everywhere).imag <= whole.index(everywhere).imag * (1 + ROWS)).all()


def test_the_repaired_absorption_is_the_one_that_the_floor_was_put_on():
    done = repair(film(table(FLOOR)), Tail(urbach_meV=1e3 * URBACH_EV)).material
    tail = np.linspace(800.0, 900.0, 20)
    ratio = absorption_per_cm(done.index(tail).imag, tail) / edge(energy_eV(tail))
    # The floor adds to the value at the join, and the edge saturates there; floor and truth lie orders apart beyond.
    assert (np.abs(np.log(ratio)) < 1.0).all()


def test_a_fit_takes_the_energy_where_the_edge_falls_fastest_as_an_upper_limit():
    for floor, most in ((10.0, 1.10), (50.0, 1.15), (500.0, 1.25)):
        said = repair(film(table(floor)), Tail(fit=True)).material.medium
        assert URBACH_EV <= said.urbach_eV < most * URBACH_EV


def test_a_tail_steeper_than_the_table_anywhere_is_joined_in_value_and_that_is_said():
    done = repair(film(table(FLOOR, urbach=0.04)), Tail(urbach_meV=15.0, red_of_nm=785.0))
    assert done.material.medium.join_nm >= 785.0
    assert "joined in value only: the table falls by a factor e in" in done.said


def test_the_join_lies_red_of_where_it_is_said_to():
    free = repair(film(table(FLOOR)), Tail(urbach_meV=20.0)).material.medium.join_nm
    later = repair(film(table(FLOOR)), Tail(urbach_meV=25.0, red_of_nm=free)).material.medium.join_nm
    assert later > free


REFUSED = {
    "no floor to fit": (0.0, Tail(fit=True), "no floor was found"),
    "no floor and no place": (0.0, Tail(urbach_meV=15.0), "no floor was found"),
    "faster to the end": (0.0, Tail(urbach_meV=100.0, red_of_nm=785.0), "falls faster than 100 meV to its end"),
    "outside the table": (FLOOR, Tail(urbach_meV=15.0, red_of_nm=2000.0), "red_of_nm: found 2000, expected"),
}


@pytest.mark.parametrize("case", REFUSED)
def test_what_cannot_be_repaired_is_refused(case):
    floor, tail, expected = REFUSED[case]
    with pytest.raises(InputError, match=expected):
        repair(film(table(floor, ENERGY[ENERGY > 1.4])), tail)


def test_a_number_has_no_floor_to_repair():
    with pytest.raises(InputError, match="is in no table"):
        repair(find(2.5 + 0.02j), Tail(fit=True))


def measured(factor: float = 1.0, low: float = 1.3) -> MeasuredTail:
    """Return the true absorption, as another method would see it, times a factor."""
    energy = np.linspace(low, 1.7, 401)
    wavelengths = wavelength_nm(energy)[::-1]
    return MeasuredTail(
        table=extinction_table(wavelengths, k_from_absorption(factor * edge(energy)[::-1], wavelengths))
    )


def test_measured_absorption_takes_the_floors_place_where_both_meet():
    done = repair(film(table(FLOOR)), Tail(measured=measured(1.05))).material
    assert done.range_nm[1] == pytest.approx(wavelength_nm(1.3))
    join = done.medium.join_nm
    beyond = np.linspace(join + 1, 950.0, 40)
    assert absorption_per_cm(done.index(beyond).imag, beyond) == pytest.approx(1.05 * edge(energy_eV(beyond)), rel=1e-3)
    assert done.index(join + 1e-6).imag == pytest.approx(done.index(join - 1e-6).imag, rel=1e-5)


def test_measured_absorption_of_another_scale_is_scaled_only_when_told_to():
    with pytest.raises(InputError, match=r"meets the material's nowhere; .* scaled = true"):
        repair(film(table(FLOOR)), Tail(measured=measured(1e-3)))
    done = repair(film(table(FLOOR)), Tail(measured=measured(1e-3), scaled=True))
    assert done.material.medium.factor == pytest.approx(1e3, rel=0.2)
    assert "multiplied by" in done.said
    tail = np.linspace(800.0, 900.0, 10)
    ratio = absorption_per_cm(done.material.index(tail).imag, tail) / edge(energy_eV(tail))
    assert ratio == pytest.approx(1.0, rel=0.2)


def test_a_measured_tail_is_read_from_alpha_or_k_in_any_dialect(tmp_path: Path):
    (tmp_path / "pds.txt").write_text("E (eV);alpha (1/cm)\n1,3;0,5\n1,5;40,0\n1,7;2e4\n", encoding="utf-8")
    tail = tail_from({"table": "pds.txt", "scaled": True}, folder=tmp_path)
    assert tail.scaled
    assert tail.measured.table.range_nm == pytest.approx((float(wavelength_nm(1.7)), float(wavelength_nm(1.3))))
    assert tail.measured.path == str((tmp_path / "pds.txt").resolve())
    assert "read as alpha in 1/cm" in " ".join(tail.measured.understood)


@pytest.mark.parametrize(
    ("spec", "expected"),
    [
        ("fitt", 'found "fitt" \\(text\\), expected "fit"'),
        (15, "found 15, expected"),
        ({}, "found neither urbach_meV nor table"),
        ({"red_of_nm": 785}, "found neither urbach_meV nor table"),
        ({"urbach_meV": -15}, "urbach_meV: found -15, expected a number in meV above 0"),
        ({"urbach_meV": "15"}, "urbach_meV: found"),
        ({"urbach_mev": 15}, "did you mean urbach_meV"),
        ({"urbach_meV": 15, "red_of_nm": 0}, "red_of_nm: found 0"),
        ({"urbach_meV": 15, "table": "a.csv"}, "found together with urbach_meV"),
        ({"urbach_meV": 15, "scaled": True}, "scaled: found without a table"),
        ({"table": 5}, "table: found 5"),
        ({"table": "nowhere.csv"}, "nowhere.csv: no such file"),
    ],
)
def test_a_tail_that_cannot_be_meant_is_refused(spec, expected, tmp_path):
    with pytest.raises(InputError, match=expected):
        tail_from(spec, folder=tmp_path)


def test_a_repaired_material_compares_hashes_and_pickles():
    one, two = (repair(film(table(FLOOR)), Tail(urbach_meV=20.0)).material for _ in range(2))
    assert one == two
    assert pickle.loads(pickle.dumps(one)) == one
    assert hash(one) == hash(two)
    assert one != film(table(FLOOR))
