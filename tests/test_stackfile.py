"""A stack file is read with every fault at once, and written so that it reads back the same."""

import math
import os
import subprocess
import sys
import tomllib
from datetime import date
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from malformed import BIRTHS, CASES, FILM, GAUSSIAN, GOOD, GRID, births, edited, film, write_good

from optics.collection import Collection
from optics.depth import Decay, DepthTable, Pump, Sheet
from optics.errors import InputError
from optics.light import Light
from optics.media import find
from optics.media.tail import Tail
from optics.radiation import FromAbsorption
from optics.spectrum import Gaussian, SpectrumTable
from optics.stack import Emission, Layer, Outer, Stack
from optics.stackfile import build_stack, parse_stack, read_stack, write_stack
from optics.tolerances import Alternatives, Tolerance

JACOBIAN = 1e-12  # relative: two roundings of a unit conversion


@pytest.mark.parametrize("case", CASES, ids=lambda case: case.id)
def test_malformed_input_is_refused_with_one_line_a_fault(case, tmp_path):
    path = case.write(tmp_path)
    with pytest.raises(InputError) as refusal:
        read_stack(path)
    lines = str(refusal.value).split("\n")
    assert len(lines) == len(refusal.value.faults) == case.faults, lines
    assert all(line.startswith(f"{path}: ") for line in lines)
    assert all(line.isprintable() for line in lines)
    assert [fragment for fragment in case.fragments if fragment not in str(refusal.value)] == []


def test_the_malformed_inputs_are_many_and_named_once():
    assert len(CASES) >= 100
    assert len({case.id for case in CASES}) == len(CASES)


@pytest.mark.skipif(not hasattr(os, "geteuid") or os.geteuid() == 0, reason="nothing is unreadable to this user")
def test_a_file_without_read_permission_is_refused(tmp_path):
    path = write_good(tmp_path)
    path.chmod(0)
    with pytest.raises(InputError, match="cannot be read"):
        read_stack(path)


def test_a_stack_file_says_what_the_stack_is(tmp_path):
    stack = read_stack(write_good(tmp_path))
    assert stack.title == "Sound"
    assert [layer.name for layer in stack.layers] == ["film", "glass"]
    assert [layer.thickness_nm for layer in stack.layers] == [480.0, 1.1e6]
    assert [layer.plate for layer in stack.layers] == [False, True]
    assert stack.film_index == 0
    assert stack.above.free and stack.below.free
    assert stack.emission == Emission(horizontal_share=0.6667)
    assert stack.light.spectrum == Gaussian(peak_nm=768, fwhm_nm=40)
    assert np.array_equal(stack.light.wavelengths_nm, np.arange(700, 861))
    assert stack.film.material.index(800.0) == 2.4 + 0.02j


@pytest.mark.parametrize("name", ["film.csv", "births.csv", "stack.toml"])
def test_a_byte_order_mark_is_passed_over(name, tmp_path):
    plain = read_stack(births(BIRTHS)(tmp_path))
    file = tmp_path / name
    file.write_bytes(b"\xef\xbb\xbf" + file.read_bytes())
    marked = read_stack(tmp_path / "stack.toml")
    assert marked.light == plain.light
    assert marked.film.material.medium == plain.film.material.medium


def test_windows_line_ends_are_read(tmp_path):
    path = write_good(tmp_path)
    stack = read_stack(path)
    path.write_bytes(GOOD.replace("\n", "\r\n").encode())
    assert read_stack(path) == stack


def test_defaults_stand_in_for_emission_and_title(tmp_path):
    write = edited(('title = "Sound"\n', ""), ('[emission]\nhorizontal_share = 0.6667\ndepth = "uniform"\n', ""))
    stack = read_stack(write(tmp_path))
    assert stack.title == ""
    assert stack.emission == Emission(horizontal_share=2 / 3, depth="uniform")


@pytest.mark.parametrize(("key", "value"), [("thickness_nm", 480), ("thickness_um", 0.48), ("thickness_mm", 0.00048)])
def test_a_thickness_may_be_given_in_any_of_three_units(key, value, tmp_path):
    stack = read_stack(edited(("thickness_nm = 480", f"{key} = {value}"))(tmp_path))
    assert stack.film.thickness_nm == pytest.approx(480.0, rel=JACOBIAN)


def test_uneven_wavelengths_are_taken_as_they_are(tmp_path):
    stack = read_stack(edited((GRID, "wavelengths_nm = [700, 705.5, 760, 860]"))(tmp_path))
    assert stack.light.wavelengths_nm.tolist() == [700.0, 705.5, 760.0, 860.0]


@pytest.mark.parametrize(
    ("spec", "free"),
    [
        ('"air"', True),
        ('"float-glass"', False),
        ("1.5", False),
        ('{ material = "float-glass", counts_as = "free" }', True),
        ('{ material = "air", counts_as = "held" }', False),
        ("{ n = 1.5, k = 0.001 }", False),
    ],
)
def test_gases_count_as_free_space_and_other_media_hold_light_unless_told_otherwise(spec, free, tmp_path):
    assert read_stack(edited(('below = "air"', f"below = {spec}"))(tmp_path)).below.free is free


def test_births_per_eV_become_births_per_nm_with_their_jacobian(tmp_path):
    # Flat per eV: per nm it falls as 1/wavelength^2 (dE = -hc dwavelength/wavelength^2).
    rows = "".join(f"{energy:.6f},1\n" for energy in np.linspace(1.2, 2.2, 400))
    spectrum = read_stack(births("energy_eV,births_per_eV\n" + rows)(tmp_path)).light.spectrum
    assert isinstance(spectrum, SpectrumTable)
    assert np.all(np.diff(spectrum.wavelength_nm) > 0)
    flat = spectrum.per_nm * spectrum.wavelength_nm**2
    assert np.allclose(flat, flat[0], rtol=JACOBIAN)
    # hc = 1239.841984 eV nm, from the exact SI values of h, c and e
    assert flat[0] == pytest.approx(1239.841984, rel=1e-9)


def test_the_same_births_in_nm_um_and_eV_are_the_same_spectrum(tmp_path):
    wavelength = np.linspace(650.0, 900.0, 26)
    births_nm = np.exp(-(((wavelength - 768) / 30) ** 2))
    energy = 1239.8419843320026 / wavelength
    columns = {
        "wavelength_nm,births_per_nm": (wavelength, births_nm),
        "wavelength_um,births_per_um": (wavelength / 1e3, births_nm * 1e3),
        "energy_eV,births_per_eV": (energy, births_nm * wavelength / energy),
        "energy_eV,births_per_nm": (energy, births_nm),
    }
    for header, pair in columns.items():
        rows = "".join(f"{axis!r},{value!r}\n" for axis, value in zip(*(c.tolist() for c in pair), strict=True))
        spectrum = read_stack(births(f"{header}\n{rows}")(tmp_path)).light.spectrum
        assert np.allclose(spectrum.wavelength_nm, wavelength, rtol=JACOBIAN), header
        assert np.allclose(spectrum.per_nm, births_nm, rtol=JACOBIAN), header


def test_tables_are_found_beside_the_stack_file_from_any_working_directory(tmp_path, monkeypatch):
    path = write_good(tmp_path)
    stack = read_stack(path)
    monkeypatch.chdir(tmp_path)
    assert read_stack("stack.toml") == stack
    monkeypatch.chdir("/")
    assert read_stack(path) == stack


def test_plain_tables_give_the_stack_that_the_file_gives(tmp_path):
    stack = read_stack(write_good(tmp_path))
    tables = {
        "title": "Sound",
        "above": "air",
        "below": stack.below,
        "light": {
            "wavelengths_nm": np.arange(700, 861),
            "spectrum": {"kind": "gaussian", "peak_nm": 768, "fwhm_nm": 40},
        },
        "emission": {"horizontal_share": 0.6667},
        "layer": [
            {"name": "film", "material": stack.film.material, "thickness_nm": np.float64(480), "emits": True},
            {"name": "glass", "material": "float-glass", "thickness_mm": 1.1},
        ],
    }
    assert build_stack(tables) == stack


def test_a_written_stack_names_its_tables_from_where_it_will_stand(tmp_path):
    stack = read_stack(births(BIRTHS)(tmp_path))
    text = write_stack(stack, folder=tmp_path / "result")
    assert 'material = "../film.csv"' in text
    assert 'file = "../births.csv"' in text
    (tmp_path / "result").mkdir()
    assert parse_stack(text, folder=tmp_path / "result") == stack
    assert parse_stack(write_stack(stack), folder="/") == stack


def test_a_written_stack_reads_as_people_write_it(tmp_path):
    text = write_stack(read_stack(write_good(tmp_path)), folder=tmp_path)
    for line in ("from_nm = 700", "step_nm = 1", "thickness_nm = 480", "thickness_mm = 1.1", "[[layer]]"):
        assert f"\n{line}\n" in text


def test_a_material_that_no_file_holds_is_not_written(tmp_path):
    stack = read_stack(write_good(tmp_path))
    (tmp_path / "film.csv").write_text(FILM.replace("2.4", "2.6"), encoding="utf-8")
    with pytest.raises(InputError, match=r'layer "film": material: .*save its n and k'):
        write_stack(stack)


def test_reading_a_stack_file_loads_no_heavy_library():
    code = (
        "import sys, optics.stackfile; "
        "sys.exit(','.join({'pandas', 'matplotlib', 'pydantic', 'tomlkit', 'click'} & set(sys.modules)) or 0)"
    )
    subprocess.run([sys.executable, "-c", code], check=True, cwd=Path(__file__).parents[1])


def _positive(low: float, high: float) -> st.SearchStrategy[float]:
    return st.floats(low, high, allow_nan=False)


NAMES = st.text(st.characters(categories=("L", "N", "P", "S")), min_size=1, max_size=8).filter(
    lambda name: name not in ("above", "below")
)
MATERIALS = st.one_of(
    st.sampled_from(["air", "float-glass", "fused-silica", "ch3nh3pbi3"]).map(find),
    st.tuples(_positive(1.01, 4), st.floats(0, 1)).map(lambda nk: find({"n": nk[0], "k": nk[1]})),
)
OUTERS = st.builds(Outer, material=MATERIALS, counts_as=st.sampled_from([None, "free", "held"]))
SPECTRA = st.one_of(
    st.builds(Gaussian, peak_nm=_positive(600, 900), fwhm_nm=_positive(60, 300)),
    st.builds(
        Gaussian,
        peak_nm=_positive(600, 900),
        fwhm_nm=_positive(60, 300),
        seen=st.sampled_from(["above", "below"]),
        na=st.one_of(st.none(), _positive(0.01, 1)),
    ),
    st.lists(st.floats(0.01, 1e6), min_size=2, max_size=6).map(
        lambda values: SpectrumTable(wavelength_nm=np.linspace(400, 1200, len(values)), per_nm=np.array(values))
    ),
)
SIDES = st.sampled_from(["above", "below"])
COLLECTIONS = st.one_of(st.none(), st.builds(Collection, na=_positive(0.01, 1), side=SIDES))
DEPTHS = st.one_of(
    st.just("uniform"),
    st.builds(Decay, decay_nm=_positive(0.01, 1e5), side=SIDES),
    st.builds(Sheet, at_nm=_positive(0, 1)),
    st.lists(_positive(0.01, 1e6), min_size=2, max_size=6).map(
        lambda values: DepthTable(depth_nm=np.linspace(0, 5e6, len(values)), births=np.array(values))
    ),
)
GRIDS = st.one_of(
    st.tuples(_positive(500, 700), _positive(0.01, 3), st.integers(2, 60)).map(
        lambda grid: np.linspace(grid[0], grid[0] + grid[1] * grid[2], grid[2] + 1)
    ),
    st.lists(_positive(500, 900), min_size=1, max_size=5, unique=True).map(sorted).map(np.array),
)


TAILS = st.one_of(
    st.just(None),
    st.just(Tail(fit=True)),
    st.builds(Tail, urbach_meV=_positive(1, 30), red_of_nm=st.one_of(st.just(None), _positive(700, 900))),
)


@st.composite
def stacks(draw: st.DrawFn) -> Stack:
    names = draw(st.lists(NAMES, min_size=1, max_size=4, unique=True))
    film = draw(st.integers(0, len(names) - 1))
    materials = [draw(MATERIALS) for _ in names]
    layers = [
        Layer(
            name=name,
            material=materials[place],
            tail=draw(TAILS) if materials[place].name == "ch3nh3pbi3" else None,
            thickness_nm=draw(st.one_of(_positive(1, 3000), _positive(2e4, 5e6), st.sampled_from([1.1e6, 2e5 / 3]))),
            emits=place == film,
            phases=draw(st.sampled_from([None, "keep", "ignore"])),
            receives=draw(st.booleans()),
        )
        for place, name in enumerate(names)
    ]
    spectrum, share = draw(SPECTRA), draw(st.floats(0, 1))
    known = [f"{layer.name}.{key}" for layer in layers for key in ("thickness_nm", "n_offset", "k_scale")]
    known += ["emission.horizontal_share"] + (["light.spectrum.peak_nm"] if isinstance(spectrum, Gaussian) else [])
    keys = draw(st.lists(st.sampled_from(known), max_size=3, unique=True))
    others = draw(st.lists(st.sampled_from([layer.name for layer in layers]), max_size=1))
    return Stack(
        title=draw(st.one_of(st.just(""), NAMES)),
        tolerances=tuple(
            Tolerance(key=key, sd=draw(_positive(1e-3, 0.2)), shape=draw(st.sampled_from(["normal", "uniform"])))
            for key in keys
        ),
        alternatives=tuple(
            Alternatives(key=f"{name}.material", materials=tuple(draw(st.lists(MATERIALS, min_size=1, max_size=2))))
            for name in others
        ),
        above=draw(OUTERS),
        below=draw(OUTERS),
        layers=tuple(layers),
        light=Light(wavelengths_nm=draw(GRIDS), spectrum=spectrum),
        emission=Emission(horizontal_share=share, depth=draw(DEPTHS)),
        collection=draw(COLLECTIONS),
    )


@settings(max_examples=100, deadline=None)
@given(stacks())
def test_a_stack_written_and_read_back_is_the_same_to_the_last_digit(stack):
    assert parse_stack(write_stack(stack), folder=".") == stack


@pytest.mark.parametrize("births", ["linear", "square"])
def test_a_pumped_stack_with_births_from_absorption_written_and_read_back_is_the_same(births, tmp_path):
    rows = [f"{nm},2.5,{min(0.1, 0.1 * 10 ** ((760 - nm) / 12))}" for nm in range(500, 901, 4)]
    stack = read_stack(film("\n".join(["wavelength_nm,n,k", *rows]))(tmp_path))
    pumped = stack.with_emission(depth=Pump(pump_nm=532.0, side="below", births=births)).with_light(
        spectrum=FromAbsorption(temperature_K=310.0, splitting_eV=1.1, n_i_per_cm3=2.5e9)
    )
    assert parse_stack(write_stack(pumped, folder=tmp_path), folder=tmp_path) == pumped


def test_a_profile_is_read_from_its_table_and_written_by_its_name(tmp_path):
    (tmp_path / "profile.csv").write_text("depth_um,births\n0,3\n0.5,1\n", encoding="utf-8")
    stack = read_stack(edited(('"uniform"', '{ table = "profile.csv" }'))(tmp_path))
    assert stack.emission.depth == DepthTable(depth_nm=np.array([0.0, 500.0]), births=np.array([3.0, 1.0]))
    text = write_stack(stack, folder=tmp_path)
    assert 'depth = {table = "profile.csv"}' in text
    assert parse_stack(text, folder=tmp_path) == stack


@settings(max_examples=300, deadline=None)
@given(st.text(max_size=200), st.integers(0, len(GOOD)), st.integers(0, 30))
def test_no_edit_of_a_stack_file_gives_anything_but_a_stack_or_a_refusal(text, place, cut):
    try:
        parse_stack(GOOD[:place] + text + GOOD[place + cut :], folder="/nowhere")
    except InputError as refusal:
        assert refusal.faults
        assert all(line.isprintable() for line in refusal.faults)


ODD = [
    *(None, True, 0, -1, 1e300, 5e-324, math.nan, 10**400, date(2020, 1, 1)),
    *("", "a\nb", "film.csv", ".", "a\0.csv", "table"),
    *([], [1], [[1]], [{}]),
    *({}, {"n": "1"}, {"published": ""}, {"material": {"material": 1}}, {"kind": ["gaussian"]}),
    *({"kind": "table", "file": 5, "wavelength_nm": 3}, {"kind": "table", "per_nm": [1], "wavelength_nm": [[1]]}),
]


def _places(value, place=()):
    parts = value.items() if isinstance(value, dict) else enumerate(value) if isinstance(value, list) else ()
    for key, part in parts:
        yield (*place, key)
        yield from _places(part, (*place, key))


@pytest.mark.parametrize("place", list(_places(tomllib.loads(GOOD))), ids=lambda place: ".".join(map(str, place)))
def test_no_value_at_any_key_gives_anything_but_a_stack_or_a_refusal(place, tmp_path):
    write_good(tmp_path)
    for odd in ODD:
        tables = tomllib.loads(GOOD)
        table = tables
        for key in place[:-1]:
            table = table[key]
        table[place[-1]] = odd
        try:
            assert isinstance(build_stack(tables, folder=tmp_path), Stack)
        except InputError as refusal:
            assert refusal.faults
            assert all(line.isprintable() for line in refusal.faults)


def test_the_pieces_that_the_malformed_inputs_replace_are_in_the_sound_file():
    assert GOOD.count(GAUSSIAN) == GOOD.count(GRID) == 1
