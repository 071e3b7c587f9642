"""A stack is frozen, checked, comparable by value and independent of files; what it takes for granted is said."""

import pickle
from dataclasses import FrozenInstanceError

import numpy as np
import pytest

from optics.assumptions import assumptions
from optics.collection import Collection
from optics.depth import Decay, DepthTable, Pump, Sheet
from optics.errors import InputError
from optics.light import Light, even_wavelengths
from optics.media import Constant, Material, Tabulated, find
from optics.spectrum import Gaussian
from optics.stack import PLATE_LIMIT_NM, Emission, Layer, Outer, Stack

RED = Gaussian(peak_nm=768, fwhm_nm=40)
FILM = Layer(name="film", material=find({"n": 2.5, "k": 0.02}), thickness_nm=480, emits=True)
GLASS = Layer(name="glass", material=find("float-glass"), thickness_nm=1.1e6)
AIR = Outer(material=find("air"))


def _light() -> Light:
    return Light.even(from_nm=700, to_nm=860, step_nm=1, spectrum=RED)


def _stack(*layers: Layer, **parts: object) -> Stack:
    kept = {"above": AIR, "below": AIR, "light": _light(), **parts}
    return Stack(layers=layers or (FILM, GLASS), **kept)


def _faults(make) -> tuple[str, ...]:
    with pytest.raises(InputError) as refusal:
        make()
    return refusal.value.faults


def test_equal_parts_make_equal_stacks_that_hash_and_pickle_alike():
    one, same = _stack(), _stack()
    assert one == same
    assert hash(one) == hash(same)
    assert pickle.loads(pickle.dumps(one)) == one
    assert one != one.with_layer("film", thickness_nm=481)
    assert one != one.with_light(wavelengths_nm=[700, 800])


def test_nothing_of_a_stack_can_be_written_into():
    stack = _stack()
    with pytest.raises(FrozenInstanceError):
        stack.title = "another"
    for one in (stack, pickle.loads(pickle.dumps(stack))):
        with pytest.raises(ValueError, match="read-only"):
            one.light.wavelengths_nm[0] = 1.0


def test_light_keeps_its_own_copy_of_the_wavelengths():
    mine = np.array([700.0, 760.0])
    light = Light(wavelengths_nm=mine, spectrum=RED)
    mine[0] = 1.0
    assert light.range_nm == (700.0, 760.0)


def test_a_layer_over_twenty_micrometres_is_a_plate_unless_told_otherwise():
    def plate(thickness_nm, phases):
        return Layer(name="a", material=FILM.material, thickness_nm=thickness_nm, phases=phases).plate

    assert PLATE_LIMIT_NM == 20e3
    assert not plate(20e3, None)
    assert plate(20.001e3, None)
    assert not plate(1.1e6, "keep")
    assert plate(50, "ignore")


@pytest.mark.parametrize(("change", "nm"), [({"thickness_nm": 250}, 250), ({"thickness_um": 0.25}, 250),
                                            ({"thickness_mm": 1.1}, 1.1e6)])  # fmt: skip
def test_a_changed_thickness_may_be_in_any_unit(change, nm):
    changed = _stack().with_layer("film", **change)
    assert changed.film.thickness_nm == pytest.approx(nm, rel=1e-15)
    assert changed.layers[1:] == _stack().layers[1:]


def test_parts_can_be_exchanged_and_the_rest_stays():
    stack = _stack()
    assert stack.with_layer("film", material=2.2).film.material == find(2.2)
    assert stack.with_layer("film", material="cspbbr3", name="green").film.name == "green"
    assert stack.with_below("float-glass").below == Outer(material=find("float-glass"))
    assert stack.with_above(1.33, counts_as="free").above.free
    assert stack.with_above(Outer(material=find(1.33)), counts_as="free").above.free
    assert stack.with_emission(horizontal_share=1).emission == Emission(horizontal_share=1.0)
    assert stack.with_light(spectrum=Gaussian(peak_nm=750, fwhm_nm=40)).light.spectrum.peak_nm == 750
    assert stack.with_film("glass").film.name == "glass"
    assert stack.with_film("glass").with_film("film") == stack
    assert [layer.name for layer in stack.flipped().layers] == ["glass", "film"]
    assert stack.flipped().film_index == 1
    assert stack.flipped().flipped() == stack == _stack()


@pytest.mark.parametrize(
    ("change", "said"),
    [
        (lambda s: s.with_layer("flim", thickness_nm=1), 'layer "flim": not in this stack, which has film, glass'),
        (lambda s: s.with_film("flim"), 'layer "flim": not in this stack'),
        (lambda s: s.with_layer("film", thicknes_nm=1), "did you mean thickness_nm"),
        (lambda s: s.with_layer("film", thickness_nm=1, thickness_um=1), "expected one of them"),
        (lambda s: s.with_layer("film", thickness_um="2 um"), 'thickness_um: found "2 um" (text)'),
        (lambda s: s.with_layer("film", material="glas"), 'layer "film": material: no bundled material'),
        (lambda s: s.with_layer("film", emits=False), "no layer emits"),
        (lambda s: s.with_layer("glass", emits=True), "2 layers emit (film, glass)"),
        (lambda s: s.with_layer("glass", name="film"), "used 2 times"),
        (lambda s: s.with_above("airr"), "above: "),
        (lambda s: s.with_below("air", counts_as="open"), 'below: counts_as: found "open"'),
        (lambda s: s.with_light(wavelength_nm=[700]), "light: wavelength_nm: unknown key"),
        (lambda s: s.with_light(wavelengths_nm=[100, 860]), 'layer "glass": material: "float-glass" covers'),
        (lambda s: s.with_emission(depth="top"), 'emission: depth: found "top"'),
    ],
)
def test_a_change_that_makes_no_sense_is_refused(change, said):
    (line,) = _faults(lambda: change(_stack()))
    assert said in line


def test_all_faults_of_a_layer_are_told_at_once():
    lines = _faults(lambda: Layer(name="", material=1.5, thickness_nm=-3, emits="yes", phases="some"))
    keys = ("name", "material", "thickness_nm", "emits", "phases")
    assert [line.split(": ")[1] for line in lines] == list(keys)


def test_all_faults_of_a_stack_are_told_at_once():
    twice = Layer(name="film", material=find("cspbbr3"), thickness_nm=10, emits=True)
    lines = _faults(lambda: _stack(FILM, twice, light=Light(wavelengths_nm=[100, 5000], spectrum=Gaussian(
        peak_nm=500, fwhm_nm=4000))))  # fmt: skip
    assert len(lines) == 3
    assert "used 2 times" in lines[0]
    assert "2 layers emit" in lines[1]
    assert "300 to 1000 nm" in lines[2]


def test_wrong_parts_are_named_with_what_was_found():
    lines = _faults(lambda: Stack(above="air", below=AIR, layers=(3,), light=None, emission=Emission()))
    assert lines == (
        'above: found "air" (text), expected Outer',
        "light: found nothing, expected Light",
        "layer: found 3, expected Layer",
    )


def test_a_stack_needs_a_layer():
    with pytest.raises(InputError, match="found no layer"):
        Stack(above=AIR, below=AIR, layers=(), light=_light())


def test_a_film_whose_index_is_not_above_zero_is_refused():
    class Flat:
        range_nm = (0.0, np.inf)

        def index(self, wavelength_nm):
            return np.zeros(np.shape(wavelength_nm)) + 1j

    film = Layer(name="film", material=Material(name="flat", medium=Flat()), thickness_nm=100, emits=True)
    (line,) = _faults(lambda: _stack(film))
    assert line == 'layer "film": material: found n = 0 at 700 nm, expected n above 0 in the layer that emits'


def test_an_emitting_plate_is_a_stack():
    assert _stack(Layer(name="slab", material=find(2.5), thickness_nm=3e5, emits=True)).film.plate


def test_even_wavelengths_end_exactly_where_they_should():
    # A running sum of 0.1 misses 860 by 1e-11.
    wavelengths = even_wavelengths(from_nm=700, to_nm=860, step_nm=0.1)
    assert wavelengths.size == 1601
    assert (wavelengths[0], wavelengths[-1]) == (700.0, 860.0)


def test_steps_that_do_not_fit_name_the_end_that_does():
    (line,) = _faults(lambda: even_wavelengths(from_nm=700, to_nm=860, step_nm=0.3))
    assert "to_nm = 859.9 does" in line
    assert even_wavelengths(from_nm=700, to_nm=859.9, step_nm=0.3).size == 534


@pytest.mark.parametrize("values", [[0.7, 0.8], [700.0, 2e6]])
def test_wavelengths_that_look_like_another_unit_are_refused(values):
    with pytest.raises(InputError, match="is the unit nm"):
        Light(wavelengths_nm=values, spectrum=Gaussian(peak_nm=1, fwhm_nm=1e9))


@pytest.mark.parametrize("share", [-0.001, 1.001, "2/3", True, None])
def test_a_share_outside_zero_to_one_is_refused(share):
    with pytest.raises(InputError, match="emission: horizontal_share"):
        Emission(horizontal_share=share)


def test_a_depth_that_is_none_is_refused_with_the_ways_to_say_one():
    with pytest.raises(InputError, match=r'emission: depth: found a table, expected "uniform", \{ pump_nm = 532'):
        Emission(depth={"at_nm": 250})


def test_what_is_taken_for_granted_is_said():
    tabulated = Tabulated(np.array([600.0, 900.0]), np.array([2.5, 2.4]), np.array([0.1, 0.0]))
    film = Layer(name="film", material=Material(name="red", medium=tabulated), thickness_nm=480, emits=True)
    cure = Layer(name="cure", material=find(1.5), thickness_nm=8000, phases="ignore")
    light = Light.even(from_nm=750, to_nm=860, step_nm=1, spectrum=RED)
    said = assumptions(_stack(film, cure, GLASS, below=Outer(material=find(1.5)), light=light))
    assert said == (
        "above = air: counts as free space (counts_as not given)",
        "below = 1.5: holds the light that enters it; it does not count as free space (counts_as not given)",
        'layer "cure", 8000 nm: a plate, without phases (phases = "ignore")',
        'layer "glass", 1.1 mm: a plate, without phases (over 20 um, phases not given)',
        "horizontal_share = 0.6667 (isotropic, the default); births spread evenly over the depth of the film",
        'the spectrum is the film material\'s own (seen = "inside"); births follow it times the rate factor',
        "14 % of the Gaussian's births lie outside the light's 750 to 860 nm and are left out",
        "n and k between the rows of a table by monotone cubic interpolation: red, float-glass",
        "the same index at every wavelength: 1.5",
    )


def test_choices_that_were_made_are_told_as_such():
    slab = Layer(name="slab", material=find(2.5), thickness_nm=3e4, emits=True)
    stack = _stack(slab, below=Outer(material=find(1.5), counts_as="free"), emission=Emission(horizontal_share=0.9))
    said = assumptions(stack)
    assert "below = 1.5: counts as free space" in said
    assert (
        'layer "slab", 30 um: a plate, without phases (over 20 um, phases not given); it emits, so ray optics alone'
        in said
    )
    assert any(line.startswith("horizontal_share = 0.9 (of the dipoles lie in the plane)") for line in said)


def test_a_constant_medium_covers_any_light():
    wide = Light(wavelengths_nm=[10, 1e6], spectrum=Gaussian(peak_nm=1000, fwhm_nm=1e6))
    layer = Layer(name="film", material=Material(name="any", medium=Constant(2.0)), thickness_nm=1, emits=True)
    assert _stack(layer, light=wide).light.range_nm == (10.0, 1e6)


@pytest.mark.parametrize(
    ("depth", "said"),
    [
        (Pump(pump_nm=620, side="below"), 'births = "linear"), 620 nm from below at normal incidence'),
        (Decay(decay_nm=80, side="above"), "births fall by a factor e every 80 nm from the film's face above"),
        (Sheet(at_nm=20), "all births in a sheet 20 nm below the film's upper face"),
        (DepthTable(depth_nm=[0, 1e4], births=[1, 2]), "births over depth as the table says"),
    ],
)
def test_where_births_are_is_told(depth, said):
    assert any(said in line for line in assumptions(_stack(FILM).with_emission(depth=depth)))


def test_where_a_spectrum_was_seen_is_told():
    seen = _stack(FILM).with_light(spectrum=Gaussian(peak_nm=768, fwhm_nm=40, seen="above", na=0.5))
    assert any("light within na = 0.5 above the stack; divided by" in line for line in assumptions(seen))


@pytest.mark.parametrize(
    ("depth", "upside_down"),
    [
        ("uniform", "uniform"),
        (Pump(pump_nm=620, side="below", births="square"), Pump(pump_nm=620, side="above", births="square")),
        (Decay(decay_nm=80, side="above"), Decay(decay_nm=80, side="below")),
        (Sheet(at_nm=20), Sheet(at_nm=460)),
        (DepthTable(depth_nm=[0, 100, 480], births=[1, 2, 5]), DepthTable(depth_nm=[0, 380, 480], births=[5, 2, 1])),
    ],
)
def test_a_stack_upside_down_has_its_births_and_apertures_on_the_other_side(depth, upside_down):
    seen = Gaussian(peak_nm=768, fwhm_nm=40, seen="above", na=0.5)
    stack = _stack(FILM, GLASS).with_emission(depth=depth).with_light(spectrum=seen)
    turned = stack.with_collection(Collection(na=0.7, side="below")).flipped()
    assert turned.emission.depth == upside_down
    assert turned.collection == Collection(na=0.7, side="above")
    assert turned.light.spectrum.seen == "below"
    assert turned.flipped().flipped() == turned
