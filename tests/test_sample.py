"""The sample, rough faces and the near field in a stack file: read, written, refused."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from malformed import GOOD, write_good

from optics.errors import InputError
from optics.sample import NearField, PerWavelength, Sample
from optics.stackfile import parse_stack, read_stack, write_stack

FILES = {
    "scatter.csv": "wavelength_nm,guided_scatter_per_cm\n900,1\n600,3\n",
    "share.csv": "wavelength_nm,recycling_share\n600,1\n900,0.4\n",
    "short.csv": "wavelength_nm,recycling_share\n750,1\n900,0.4\n",
    "other.csv": "wavelength_nm,scatter\n600,1\n900,0.4\n",
}


def read(tmp_path, text="", *, film="", emission=""):
    """Read the sound stack file with a sample, and more in the film's layer or the emission."""
    write_good(tmp_path)
    for name, content in FILES.items():
        (tmp_path / name).write_text(content, encoding="utf-8")
    content = GOOD.replace("emits = true\n", f"emits = true\n{film}\n").replace(
        'depth = "uniform"\n', f'depth = "uniform"\n{emission}\n'
    )
    path = tmp_path / "stack.toml"
    path.write_text(content + (f"\n[sample]\n{text}\n" if text else ""), encoding="utf-8")
    return read_stack(path)


def test_without_a_sample_there_is_none(tmp_path):
    stack = read(tmp_path)
    assert stack.sample is None
    assert stack.emission.near_field is None
    assert stack.film.roughness_nm == 0.0


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("to_edge_mm = 5", Sample(to_edge_mm=5.0)),
        ("diameter_mm = 25", Sample(to_edge_mm=12.5)),
        ('edges = "lost"', Sample(edges="lost")),
        ("guided_scatter_per_cm = 2", Sample(guided_scatter_per_cm=2.0)),
        ("rms_nm = 3\ncorrelation_nm = 50", Sample(rms_nm=3.0, correlation_nm=50.0)),
        ("recycling_share = 0.9\nscatter_up_share = 1", Sample(recycling_share=0.9, scatter_up_share=1.0)),
        (
            'guided_scatter_per_cm = { file = "scatter.csv" }',
            Sample(
                guided_scatter_per_cm=PerWavelength(wavelength_nm=np.array([600.0, 900.0]), values=np.array([3.0, 1.0]))
            ),
        ),
        (
            "recycling_share = { wavelength_nm = [600, 900], values = [1, 0.4] }",
            Sample(recycling_share=PerWavelength(wavelength_nm=np.array([600.0, 900.0]), values=np.array([1.0, 0.4]))),
        ),
    ],
)
def test_what_a_file_says_of_its_sample(text, expected, tmp_path):
    stack = read(tmp_path, text)
    assert stack.sample == expected
    assert parse_stack(write_stack(stack), folder="/") == stack


def test_near_field_and_rough_faces_are_read_and_written(tmp_path):
    stack = read(tmp_path, film="roughness_nm = 4", emission="near_field = { stand_off_nm = 5, to_index = 4 }")
    assert stack.emission.near_field == NearField(stand_off_nm=5.0, to_index=4.0)
    assert stack.film.roughness_nm == 4.0
    assert parse_stack(write_stack(stack), folder="/") == stack


MALFORMED = {
    "to_edge_mm = -1": ["sample: to_edge_mm: found -1, expected a number in mm from 0"],
    'to_edge_mm = "12 mm"': ["to_edge_mm: found", "expected a number in mm"],
    "to_edge_mm = 5\ndiameter_mm = 10": ["found to_edge_mm and diameter_mm, expected one of them"],
    "diameter_mm = -3": ["diameter_mm: found -3"],
    'edges = "open"': ['edges: found "open" (text), expected "collected" or "lost"'],
    "to_egde_mm = 5": ["to_egde_mm: unknown key; did you mean to_edge_mm?"],
    "guided_scatter_per_cm = -1": ["guided_scatter_per_cm: found -1"],
    "rms_nm = 3": ["correlation_nm: missing", "go together"],
    "rms_nm = 3\ncorrelation_nm = 0": ["correlation_nm: found 0, expected a number in nm above 0"],
    "rms_nm = 3\ncorrelation_nm = 50\nguided_scatter_per_cm = 2": ["found together with guided_scatter_per_cm"],
    "recycling_share = 1.2": ["recycling_share: found 1.2, expected a number from 0 up to 1"],
    "recycling_share = { wavelength_nm = [600, 900], values = [1, 2] }": ["value 2: found 2"],
    "recycling_share = { wavelength_nm = [600, 900] }": ["values: missing"],
    "recycling_share = { wavelength_nm = [600, 900], values = [1] }": ["found 1, expected 2"],
    'recycling_share = { file = "missing.csv" }': ["recycling_share: file: missing.csv"],
    'recycling_share = { file = "short.csv" }': ["covers 750 to 900 nm, the light asks for 700 to 860 nm"],
    'recycling_share = { file = "other.csv" }': ['found columns "wavelength_nm", "scatter"'],
    "scatter_up_share = 2": ["scatter_up_share: found 2"],
}


@pytest.mark.parametrize("text", MALFORMED)
def test_a_malformed_sample_is_refused_in_one_line_that_says_where(text, tmp_path):
    with pytest.raises(InputError) as refusal:
        read(tmp_path, text)
    assert len(refusal.value.faults) == 1, refusal.value.faults
    assert "sample" in str(refusal.value)
    assert [fragment for fragment in MALFORMED[text] if fragment not in str(refusal.value)] == []


@pytest.mark.parametrize(
    ("emission", "said"),
    [
        ("near_field = 5", "emission: near_field: found 5, expected a table"),
        ("near_field = { stand_off_nm = 5 }", "to_index: missing"),
        ("near_field = { stand_off_nm = 0, to_index = 4 }", "stand_off_nm: found 0"),
        ("near_field = { stand_off = 5, to_index = 4 }", "did you mean stand_off_nm"),
    ],
)
def test_a_malformed_near_field_is_refused(emission, said, tmp_path):
    with pytest.raises(InputError) as refusal:
        read(tmp_path, emission=emission)
    assert len(refusal.value.faults) == 1
    assert said in str(refusal.value)


AMOUNTS = st.one_of(
    st.floats(0, 1),
    st.lists(st.floats(0, 1), min_size=2, max_size=5).map(
        lambda values: PerWavelength(wavelength_nm=np.linspace(400, 1200, len(values)), values=np.array(values))
    ),
)
ROUGH = st.one_of(st.just({}), st.fixed_dictionaries({"rms_nm": st.floats(0, 50), "correlation_nm": st.floats(1, 500)}))
SAMPLES = st.builds(
    lambda rough, scatter, **rest: Sample(**rest, **(rough or {"guided_scatter_per_cm": scatter})),
    ROUGH,
    AMOUNTS,
    to_edge_mm=st.floats(0, 1e4),
    edges=st.sampled_from(["collected", "lost"]),
    recycling_share=AMOUNTS,
    scatter_up_share=st.floats(0, 1),
)


@settings(max_examples=60, deadline=None)
@given(
    SAMPLES,
    st.one_of(st.none(), st.builds(NearField, stand_off_nm=st.floats(0.1, 50), to_index=st.floats(1, 100))),
    st.floats(0, 30),
)
def test_written_and_read_back_is_the_same_to_the_last_digit(sample, near_field, rough):
    light = "[light]\nwavelengths_nm = [760]\n[light.spectrum]\nkind = 'gaussian'\npeak_nm = 760\nfwhm_nm = 40\n"
    layers = "[[layer]]\nname = 'film'\nmaterial = { n = 2.5, k = 0.02 }\nthickness_nm = 480\nemits = true\n"
    plain = parse_stack("above = 'air'\nbelow = 'air'\n" + light + layers, folder=".")
    stack = plain.with_emission(near_field=near_field).with_layer("film", roughness_nm=rough)
    stack = stack.with_sample(**{name: getattr(sample, name) for name in Sample.__dataclass_fields__})
    assert stack.sample == sample
    assert parse_stack(write_stack(stack), folder=".") == stack
