"""Rough faces as graded layers: slices that mix what lies above a face and below it."""

from dataclasses import replace

from optics.layer import Layer
from optics.media.material import Material
from optics.media.mixture import Bruggeman
from optics.stack import HALF_WIDTH_PER_RMS, Stack

SLICES = 6
"""Steps of the grading; twice as many move no share of a film by 1e-4 at the largest roughness allowed."""


def graded(stack: Stack) -> Stack:
    """Return the stack with every rough face as slices of an effective medium, itself where no face is rough.

    Heights spread evenly about a face with this root mean square: the lower layer's share grows in a straight line over
    2 sqrt(3) rms, half of which is taken off the layer on either side (outer media have enough of it). Nothing is born
    in the slices.
    """
    if not any(layer.roughness_nm for layer in stack.layers):
        return stack
    below_rough = [*(layer.roughness_nm for layer in stack.layers[1:]), 0.0]
    layers: list[Layer] = []
    above = stack.above.material
    for layer, next_rough in zip(stack.layers, below_rough, strict=True):
        half = HALF_WIDTH_PER_RMS * layer.roughness_nm
        layers += _slices(above, layer, half)
        rest = layer.thickness_nm - half - HALF_WIDTH_PER_RMS * next_rough
        layers.append(replace(layer, thickness_nm=rest, roughness_nm=0.0, phases="ignore" if layer.plate else "keep"))
        above = layer.repaired
    return replace(stack, layers=tuple(layers))


def _slices(above: Material, layer: Layer, half_nm: float) -> list[Layer]:
    """Return the slices of a layer's upper face, from above."""
    if not half_nm:
        return []
    thickness = 2.0 * half_nm / SLICES
    out = []
    for number in range(SLICES):
        share = (number + 0.5) / SLICES
        name = f"{layer.name} rough {number + 1}"
        medium = Bruggeman(layer.repaired.medium, above.medium, share)
        source = f"{share:.0%} {layer.material.name} in {above.name}, Bruggeman"
        material = Material(name=f"{layer.material.name} in {above.name} {share:.2f}", medium=medium, source=source)
        out.append(Layer(name=name, material=material, thickness_nm=thickness, phases="keep"))
    return out
