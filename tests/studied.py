"""Small stacks that tests of studies share: few wavelengths, so that a point takes milliseconds."""

import numpy as np

from optics.light import Light
from optics.media import find
from optics.spectrum import Gaussian
from optics.stack import Layer, Outer, Stack


def small_stack(film=2.4 + 0.02j, *, wavelengths_nm=(740.0, 760.0, 780.0), thickness_nm=300.0, **layer):
    """Return a film on an absorbing contact and a plate, in air."""
    return Stack(
        title="Invented film of a test",
        above=Outer(material=find("air")),
        below=Outer(material=find("air")),
        layers=(
            Layer(name="film", material=find(film), thickness_nm=thickness_nm, emits=True, **layer),
            Layer(name="contact", material=find(1.8 + 0.01j), thickness_nm=80.0),
            Layer(name="glass", material=find("float-glass"), thickness_nm=1.1e6),
        ),
        light=Light(wavelengths_nm=np.array(wavelengths_nm), spectrum=Gaussian(peak_nm=762.0, fwhm_nm=40.0)),
    )


STACK_FILE = """\
title = "Invented film of a test"
above = "air"
below = "air"

[light]
wavelengths_nm = [740, 760, 780]

[light.spectrum]
kind = "gaussian"
peak_nm = 762
fwhm_nm = 40

[[layer]]
name = "film"
material = { n = 2.4, k = 0.02 }
thickness_nm = 300
emits = true

[[layer]]
name = "glass"
material = "float-glass"
thickness_mm = 1.1
"""

FILM_ON_GLASS = """\
title = "Glass and film"
above = "air"
below = "air"
[light]
wavelengths_nm = [760]
[light.spectrum]
kind = "gaussian"
peak_nm = 760
fwhm_nm = 40
[[layer]]
name = "film"
material = { n = 2.5, k = 0.02 }
thickness_nm = 500
emits = true
[[layer]]
name = "glass"
material = { n = 1.52 }
thickness_mm = 1.1
"""
