"""Drawings solved together have the ledgers that they have alone, whatever stands beside them."""

from dataclasses import replace

import numpy as np
import pytest
from piles import drawn

from optics.fate import account
from optics.fate.account import ledgers_of
from optics.fate.uneven import rules
from optics.fate.wave import Settings
from optics.waves.coherent import outlook_at
from optics.waves.depth import decay
from optics.waves.repeated import handed_out
from optics.waves.scene import side_by_side

WAVELENGTH_NM = np.array([650.0, 700.0, 770.0])
SAME = 1e-12


def on_glass(thickness_nm, *, film=2.4 + 0.01j, contact=1.9 + 0.02j, **options):
    media = [(1.0, 0), (film, thickness_nm), (contact, 80), (1.52 + 1e-7j, 1e6, "plate"), (1.0, 0)]
    return drawn(WAVELENGTH_NM, media, **options)


MIXED = [
    *(on_glass(thickness) for thickness in (90, 300, 310, 480, 2500)),
    on_glass(300, film=2.2),
    on_glass(300, contact=1.6),
    on_glass(300, contact=1.85 + 0.03j),
    on_glass(300, in_plane=1.0),
    on_glass(310, moments=decay(2.0, from_below=False)),
    drawn(WAVELENGTH_NM, [(1.0, 0), (2.4 + 0.01j, 300), (0.05 + 4j, 0)]),
    replace(on_glass(400), uneven=rules(thickness_nm=400, sd_nm=15, index=2.4, wavelength_nm=650)),
]


@pytest.mark.parametrize("model", ["wave", "ray"])
def test_every_drawing_has_its_own_ledger(model):
    together = ledgers_of(MIXED, Settings(), model=model)
    for drawing, found in zip(MIXED, together, strict=True):
        (alone,) = ledgers_of([drawing], Settings(), model=model)
        np.testing.assert_allclose(found.rate_factor, alone.rate_factor, rtol=0, atol=SAME)
        np.testing.assert_allclose(found.taken, alone.taken, rtol=0, atol=SAME)
        for name, share in alone.shares.items():
            np.testing.assert_allclose(found.shares[name], share, rtol=0, atol=SAME, err_msg=name)


def test_halves_are_computed_once_for_all_thicknesses(monkeypatch):
    rows = []

    def counted(behind):
        rows.append(behind.shape[-2])
        return outlook_at(behind)

    monkeypatch.setattr("optics.waves.plates.outlook_at", counted)
    films = [on_glass(thickness, film=1.9 + 0.02j, contact=1.6) for thickness in np.linspace(300, 303, 8)]
    for film in films:
        ledgers_of([film], Settings(), model="wave")
    alone = sum(rows)
    rows.clear()
    ledgers_of(films, Settings(), model="wave")
    assert sum(rows) < 0.3 * alone


def test_twins_stand_together_and_are_found_again():
    scenes = [next(iter(account.scenes(on_glass(thickness))))[1] for thickness in (300, 310, 320)]
    whole, places = side_by_side(scenes)
    for scene, place in zip(scenes, places, strict=True):
        np.testing.assert_array_equal(whole.phase[:, place], scene.phase)
        np.testing.assert_array_equal(whole.index[:, place], scene.index)
    one, copies = whole.repeats(np.arange(9))
    np.testing.assert_array_equal(one, [0, 3, 6])
    np.testing.assert_array_equal(copies, np.repeat([0, 1, 2], 3))
    assert whole.repeats(np.arange(9), np.arange(9.0)) is None
    assert scenes[0].repeats(np.arange(3)) is None


def test_what_was_made_once_is_handed_out_row_by_row():
    array = np.arange(12.0).reshape(2, 3, 2)
    given = handed_out({"a": [array, None], "b": (1.5, array[0])}, np.array([0, 0, 2]))
    np.testing.assert_array_equal(given["a"][0], array[:, [0, 0, 2]])
    np.testing.assert_array_equal(given["b"][1], array[0][[0, 0, 2]])
    assert given["a"][1] is None
    assert given["b"][0] == 1.5
