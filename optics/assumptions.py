"""What a stack takes for granted, in words: every default and convention that shapes the answer."""

import math
from collections.abc import Sequence

from optics.depth import Decay, DepthTable, Pump, Sheet
from optics.media.dispersion import Constant, Joined, Tabulated
from optics.media.tail import Grafted, UrbachTail, repair
from optics.radiation import FromAbsorption
from optics.sample import near_field_note, roughness_note, sample_notes
from optics.spectrum import spectrum_notes
from optics.stack import ISOTROPIC, PLATE_LIMIT_NM, Layer, Outer, Stack, layer_place
from optics.tolerances import Alternatives, stated


def assumptions(stack: Stack) -> tuple[str, ...]:
    """Return one sentence for each assumption that the answer for this stack rests on."""
    said = [_outer("above", stack.above), _outer("below", stack.below)]
    said += [sentence for layer in stack.layers if (sentence := _plate(layer))]
    said += [_births(stack), _seen(stack)]
    said += [sentence] if (sentence := _several(stack)) else []
    said += spectrum_notes(stack.light.spectrum, stack.light.wavelengths_nm)
    said += _indices(stack)
    said += [sentence for layer in stack.layers for sentence in _tail(layer)]
    said += [roughness_note(layer_place(each.name), each.roughness_nm) for each in stack.layers if each.roughness_nm]
    said += [] if stack.emission.near_field is None else [near_field_note(stack.emission.near_field)]
    said += [] if stack.sample is None else sample_notes(stack.sample)
    said += [*_uneven(stack.film), *stated(stack.tolerances), *_alternatives(stack.alternatives)]
    return tuple(said)


def _outer(side: str, outer: Outer) -> str:
    fate = "counts as free space" if outer.free else "holds the light that enters it; it does not count as free space"
    why = "" if outer.counts_as else " (counts_as not given)"
    return f"{side} = {outer.material.name}: {fate}{why}"


def _plate(layer: Layer) -> str:
    """Say how a layer of more than 20 um, or one told otherwise, is treated."""
    limit = f"{PLATE_LIMIT_NM / 1e3:g} um"
    if layer.phases is None and not layer.plate:
        return ""
    why = f"over {limit}, phases not given" if layer.phases is None else f'phases = "{layer.phases}"'
    rays = "; it emits, so ray optics alone" if layer.plate and layer.emits else ""
    kind = "a plate, without phases" if layer.plate else "a thin layer, with phases"
    return f"{layer_place(layer.name)}, {length_text(layer.thickness_nm)}: {kind} ({why}){rays}"


def length_text(nm: float) -> str:
    """Return a thickness [nm] in the unit that people write it in."""
    if nm >= 1e5:
        return f"{nm / 1e6:.6g} mm"
    return f"{nm / 1e3:.6g} um" if nm >= 1e4 else f"{nm:.6g} nm"


def _uneven(film: Layer) -> list[str]:
    if not film.varies_nm:
        return []
    return [
        f"{layer_place(film.name)}: uneven within the spot, {film.varies_nm:g} nm (one standard deviation, normal): "
        "the answer is the mean over it, births weighted with the rate factor alone; reflection.csv is for its value"
    ]


def _alternatives(alternatives: Sequence[Alternatives]) -> list[str]:
    return [
        f"{each.key}: the first of {1 + len(each.materials)} tables is used; the others are "
        f"{', '.join(material.name for material in each.materials)}"
        for each in alternatives
    ]


def _several(stack: Stack) -> str:
    """Say which layers emit, where several do."""
    emitting = [layer for layer in stack.layers if layer.emits]
    if len(emitting) < 2:
        return ""
    shares = ", ".join(f"{layer.name} {layer.births_share:g}" for layer in emitting)
    return f"births are shared out among layers that emit ({shares}), all with the same spectrum and depth"


def _births(stack: Stack) -> str:
    share = stack.emission.horizontal_share
    isotropic = math.isclose(share, ISOTROPIC, abs_tol=5e-5)  # 0.6667, as people write it
    kind = "isotropic, the default" if isotropic else "of the dipoles lie in the plane"
    return f"horizontal_share = {share:.4g} ({kind}); {_depth(stack)}"


def _depth(stack: Stack) -> str:
    depth = stack.emission.depth
    if isinstance(depth, Pump):
        law = {"linear": "the absorption of the pump", "square": "the square of the pump's absorption"}[depth.births]
        return (
            f'births follow {law} (births = "{depth.births}"), {depth.pump_nm:g} nm from {depth.side} at normal '
            "incidence, too weak to change the film"
        )
    if isinstance(depth, Decay):
        return f"births fall by a factor e every {depth.decay_nm:g} nm from the film's face {depth.side}"
    if isinstance(depth, Sheet):
        return f"all births in a sheet {depth.at_nm:g} nm below the film's upper face"
    if isinstance(depth, DepthTable):
        return "births over depth as the table says, linear between its rows, depths from the film's upper face"
    return "births spread evenly over the depth of the film"


def _seen(stack: Stack) -> str:
    spectrum = stack.light.spectrum
    if spectrum.seen == "inside":
        return 'the spectrum is the film material\'s own (seen = "inside"); births follow it times the rate factor'
    na = None if isinstance(spectrum, FromAbsorption) else spectrum.na
    part = "all light that gets out there (na not given)" if na is None else f"light within na = {na:g}"
    return (
        f"the spectrum is {part} {spectrum.seen} the stack; divided by this stack's own share of it, wavelength by "
        "wavelength, it gives the one born inside"
    )


def _tail(layer: Layer) -> list[str]:
    """Say what a layer's tail replaced, and how the table that it came from was read."""
    if layer.tail is None:
        return []
    said = [f"{layer_place(layer.name)}: tail: {repair(layer.material, layer.tail).said}"]
    if layer.tail.measured and layer.tail.measured.understood:
        said.append(f"{layer_place(layer.name)}: tail: table: {'; '.join(layer.tail.measured.understood)}")
    return said


def _indices(stack: Stack) -> list[str]:
    """Say how tables are read between their rows, and which indices do not depend on wavelength."""
    media = {material.name: material.medium for _, material, _ in stack.media}
    tables = [name for name, medium in media.items() if isinstance(medium, Tabulated | Joined | UrbachTail | Grafted)]
    constant = [
        name for name, medium in media.items() if isinstance(medium, Constant) and (medium.n, medium.k) != (1.0, 0.0)
    ]
    read = {material.name: material.understood for _, material, _ in stack.media if material.understood}
    said = [f"table {name} was read so: {'; '.join(how)}" for name, how in read.items()]
    if tables:
        said.append(f"n and k between the rows of a table by monotone cubic interpolation: {', '.join(tables)}")
    if constant:
        said.append(f"the same index at every wavelength: {', '.join(constant)}")
    return said
