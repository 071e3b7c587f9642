"""Which integrals the ledger of wave optics needs, and the cases in which an exact answer makes one needless."""

import numpy as np

from optics.arrays import Index, Real
from optics.fate import wave
from optics.fate.exits import COVER, FREE_ABOVE, FREE_BELOW, SUBSTRATE, Layout
from optics.fate.ledger import Account, merge, replaced
from optics.fate.wave import Settings
from optics.waves.scene import Scene

THINNEST_ZONE = 1e-12
"""A bound zone narrower than this, in units of k0, is none."""


LINE_MISSED = 1e-7
"""Power that the real axis lacks against other paths, from which a line has been missed there."""

CLOSURE_MISSED = 4e-8
SHARE_MISSED = 6e-7
"""Beyond these a wavelength is done again, finer: a sharp line slipped between the nodes."""

TALL = 3000.0
"""Phase through the group times its layers from which one round must do: each takes thrice the time of the last."""

ROUNDS, MOST_IN_VAIN = 3, 2
"""Most rounds, and after how many that do not halve the error a wavelength is left as it is."""


def account(scene: Scene, settings: Settings) -> Account:
    """Integrate everything, and again, finer, at the wavelengths where independent paths disagree."""
    whole = _once(scene, settings)
    in_vain = np.zeros(scene.wavelengths, dtype=np.intp)
    for _ in range(ROUNDS if scene.depth * (1 + len(scene.group)) < TALL else 1):
        power = np.abs(whole.power)
        wrong = (np.abs(whole.miss) > CLOSURE_MISSED * power) | (_error(whole) > SHARE_MISSED * power)
        missed = np.flatnonzero(wrong & (in_vain < MOST_IN_VAIN))
        if not len(missed):
            break
        settings = settings.strict
        again = _once(scene.at(missed), settings)
        before = _error(whole)[missed]
        better = _error(again) < before
        in_vain[missed] += _error(again) > 0.5 * before
        whole = replaced(whole, missed[better], again, better)
    return whole


def _error(account: Account) -> Real:
    return account.path_error + account.open_error + account.guided_error


def _once(scene: Scene, settings: Settings) -> Account:
    """Integrate everything, wavelengths that need the same integrals together."""
    film = scene.film_index
    bound = scene.far_end - scene.open_end > THINNEST_ZONE
    others = absorbers(scene)
    shared = bound & (others > 0) & ~((film.imag == 0.0) & (others == 1))
    kinds = np.stack([film.imag > 0.0, scene.far_end > film.real, others > 0, bound, shared])
    parts = []
    for kind in np.unique(kinds, axis=1).T:
        chosen = np.flatnonzero((kinds == kind[:, None]).all(axis=0))
        alike = scene.at(chosen)
        account = _bounded(alike, settings, shared=bool(kind[4])) if kind[3] else _unbounded(alike, settings)
        parts.append((chosen, account))
    return merge(parts, scene.wavelengths)


def absorbers(scene: Scene) -> Index:
    """Count per wavelength what can take bound light apart from the film."""
    count = np.zeros(scene.wavelengths, dtype=np.intp)
    for medium in scene.group:
        count += scene.index[medium].imag > 0.0
    return count + sum(side.absorbs and not side.plates for side in scene.sides)


def _unbounded(scene: Scene, settings: Settings) -> Account:
    """Everything can leave: the film keeps what is not handed on."""
    dip = wave.dip(scene, scene.far_end, settings)
    rise = wave.riser(scene, scene.far_end, settings)
    zone = wave.open_zone(scene, settings)
    nothing = np.zeros(scene.wavelengths)
    no = np.zeros(scene.wavelengths, dtype=bool)
    miss = zone.values[Layout.power] - dip.values[0]
    # the power of the nodes that the fluxes come from: a clear film then keeps nothing, to the last digit
    on_axis = np.where(np.abs(miss) > LINE_MISSED, dip.values[0], zone.values[Layout.power])
    return Account(
        power=on_axis + rise.values[0] - wave.exchange_with_itself(scene),
        zone=_with_missed_lines(scene, zone.values, miss),
        bound_first_flight=nothing,
        bound_taken=np.zeros((scene.media, scene.wavelengths)),
        has_bound=no,
        unfinished=no,
        miss=miss,
        path_error=dip.error + rise.error + np.abs(miss),
        open_error=zone.error,
        guided_error=nothing,
    )


def _bounded(scene: Scene, settings: Settings, *, shared: bool) -> Account:
    """Some light cannot leave; what several absorbing media take of it (``shared``) is integrated on the real axis.

    Its power is what the whole path has beyond the open zone; scaling what they take to it lets a nearly clear film
    keep its few digits.
    """
    flies = wave.flies_to_the_end(scene)
    dip = wave.dip(scene, scene.far_end, settings)
    rise = wave.riser(scene, scene.far_end, settings, flights=flies)
    zone = wave.open_zone(scene, settings)
    own = (
        wave.bound_zone(scene, settings)
        if shared
        else wave.dip(scene, scene.far_end, settings, start=scene.open_end, flights=flies)
    )
    # the part of the power that does not lie on the real axis is the film's own
    near = rise.values[0] - wave.exchange_with_itself(scene)
    miss = zone.values[Layout.power] + own.values[0] - dip.values[0]
    booked = _with_missed_lines(scene, zone.values, miss)
    bound = dip.values[0] - booked[Layout.power]
    error = dip.error + rise.error + np.abs(miss) + (0.0 if shared else own.error)
    flown = np.zeros(scene.wavelengths)
    if flies:
        flown = own.values[1] * (bound / own.values[0] if shared else 1.0) + rise.values[1]
    elif scene.film_index[0].imag > 0.0:
        flown, missed = _flown_within_film(scene, settings)
        error = error + missed
    yes = np.ones(scene.wavelengths, dtype=bool)
    return Account(
        power=dip.values[0] + near,
        zone=booked,
        bound_first_flight=flown,
        bound_taken=own.values[2:] * (bound / own.values[0]) if shared else _taken_by_one(scene, bound + near),
        has_bound=yes,
        unfinished=yes & (absorbers(scene) == 0) & (scene.film_index.imag == 0.0),
        miss=miss,
        path_error=error,
        open_error=zone.error,
        guided_error=own.error + np.abs(miss) if shared else np.zeros(scene.wavelengths),
    )


def _with_missed_lines(scene: Scene, zone: Real, miss: Real) -> Real:
    """Return the open zone with the power of lines too narrow for any node given to the one outlet they have.

    Such lines lie beyond the light line of the rarer side, so that what they hold leaves towards the denser one; only
    where nothing in the group absorbs is that the whole story. ``miss`` stays in the closure and in the error.
    """
    layout = Layout(scene.media)
    rarer, denser = np.sort([scene.index[side.touching].real for side in scene.sides], axis=0)
    alone = (scene.film_index.imag == 0.0) & (absorbers(scene) == 0) & (denser > rarer)
    lost = np.where(alone & (np.abs(miss) > LINE_MISSED), -miss, 0.0)
    out = zone.copy()
    out[layout.power] += lost
    for k, side in enumerate(scene.sides):
        held = bool(side.plates) or not side.free
        end = ((FREE_ABOVE, COVER), (FREE_BELOW, SUBSTRATE))[k][held]
        out[layout.end(end)] += np.where(scene.index[side.touching].real == denser, lost, 0.0)
    return out


def _flown_within_film(scene: Scene, settings: Settings) -> tuple[Real, Real]:
    """Return first-flight absorption up to the film's own light line, where neighbours reach beyond it."""
    edge = scene.film_index.real
    own = wave.dip(scene, edge, settings, start=np.minimum(scene.open_end, edge), flights=True)
    rise = wave.riser(scene, edge, settings, flights=True)
    return own.values[1] + rise.values[1], own.error + rise.error


def _taken_by_one(scene: Scene, power: Real) -> Real:
    """Return what each medium but the film takes of bound light where one alone, or none, takes any."""
    taken = np.zeros((scene.media, scene.wavelengths))
    clear = scene.film_index.imag == 0.0
    for medium in scene.group:
        taken[medium] = np.where(clear & (scene.index[medium].imag > 0.0), power, 0.0)
    for side in scene.sides:
        if side.absorbs and not side.plates:
            taken[side.outer] = np.where(clear, power, 0.0)
    return taken
