"""From a stack to its arrays: indices and thicknesses at chosen wavelengths, and where in the film births are."""

from dataclasses import replace

import numpy as np

from optics.arrays import Complex, Real
from optics.depth import Decay, DepthTable, Pump, Sheet, in_film
from optics.errors import InputError
from optics.fate.pump import Pumped, pumped
from optics.fate.scenes import Drawing
from optics.fate.uneven import Rule, rules
from optics.stack import Stack
from optics.waves.depth import SheetProfile, decay, pieces
from optics.waves.source import Moments, uniform


def drawn(stack: Stack, wavelength_nm: Real) -> Drawing:
    """Return a stack's arrays at any wavelengths [nm], births spread evenly.

    Raises
    ------
    InputError
        Where a material's table does not reach.
    """
    index = np.array([material.index(wavelength_nm) for _, material, _ in stack.media])
    film = stack.film_index + 1
    return Drawing(
        wavelength_nm=wavelength_nm,
        index=index,
        thickness_nm=np.array([0.0, *(layer.thickness_nm for layer in stack.layers), 0.0]),
        plate=(True, *(layer.plate for layer in stack.layers), True),
        film=film,
        free=(stack.above.free, stack.below.free),
        in_plane=stack.emission.horizontal_share,
        uneven=_uneven(stack, index[film], wavelength_nm),
    )


def _uneven(stack: Stack, index: Complex, wavelength_nm: Real) -> tuple[Rule, ...]:
    film = stack.film
    if not film.varies_nm:
        return ()
    largest, shortest = float(index.real.max()), float(wavelength_nm.min())
    return rules(thickness_nm=film.thickness_nm, sd_nm=film.varies_nm, index=largest, wavelength_nm=shortest)


def drawing_of(stack: Stack) -> Drawing:
    """Return a stack's arrays at its wavelengths, births over depth included.

    Raises
    ------
    InputError
        Where a material's table does not reach, a pump does not get to the film, or several layers emit.
    """
    emitting = [layer.name for layer in stack.layers if layer.emits]
    if len(emitting) > 1:
        raise InputError(
            f"layer: emits: {len(emitting)} layers emit ({', '.join(emitting)}), expected one here; the command "
            "receivers (in Python: optics.receivers) follows each of them"
        )
    return replace(drawn(stack, stack.light.wavelengths_nm), moments=profile_of(stack))


def profile_of(stack: Stack) -> Moments:
    """Return the stack's depth profile of births."""
    depth, thickness = stack.emission.depth, stack.film.thickness_nm
    if isinstance(depth, Pump):
        return pump_of(stack, depth).profile(depth.births)
    if isinstance(depth, Decay):
        return decay(thickness / depth.decay_nm, from_below=depth.side == "below")
    if isinstance(depth, Sheet):
        return SheetProfile(depth.at_nm / thickness)
    if isinstance(depth, DepthTable):
        at, births = in_film(depth, thickness)
        return pieces(at / thickness, births)
    return uniform


def pump_of(stack: Stack, pump: Pump) -> Pumped:
    """Return what the stack makes of a pump.

    Raises
    ------
    InputError
        When an opaque medium lies between the pump and the film.
    """
    return pumped(drawn(stack, np.array([pump.pump_nm])), from_below=pump.side == "below")


def bracket(drawing: Drawing, pump: Pumped) -> dict[str, Drawing]:
    """Return drawings with even births, births along the pump's absorption and along its square.

    Luminescence of free carriers follows the square before they spread; they end spread evenly: the three bracket
    a pulsed measurement.
    """
    profiles: dict[str, Moments] = {"uniform": uniform, "linear": pump.linear, "square": pump.square}
    return {name: replace(drawing, moments=moments) for name, moments in profiles.items()}
