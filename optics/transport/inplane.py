"""Transport in the plane: how far from its birth a photon is taken back by the film."""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING

import numpy as np

from optics.arrays import Index, Real
from optics.assumptions import assumptions
from optics.fate import births
from optics.fate.account import ledger_of
from optics.fate.drawing import drawing_of
from optics.fate.ledger import Ledger
from optics.fate.scenes import Drawing, scenes
from optics.fate.wave import Settings
from optics.roughness import graded
from optics.spectrum import weights
from optics.stack import Stack
from optics.transport import compact, continuum, flights, rings
from optics.transport.flights import Taken
from optics.transport.guided import Guided, guided_modes, modes_table
from optics.waves.modes import Modes

if TYPE_CHECKING:
    import pandas as pd

KERNEL_COLUMNS = (
    "radius_from_um",
    "radius_to_um",
    "share",
    "share_rays",
    "share_guided",
    "share_held",
    "cumulative",
    "per_um_radius",
    "per_cm2",
    "line_per_cm",
    "line_cumulative",
)
"""Columns of ``InPlane.kernel``: a row a ring (or, for the two on a line, a cell on either side of the birth)."""

RAY_WARNING = "the film carries intensities alone (a plate): no guided modes, all of its kernel is from rays"

REACHES_UM = (1.0, 3.0, 10.0, 30.0, 100.0, 300.0, 1000.0, 10000.0)

CONVENTIONS = (
    "in the plane: the sample is endless; light held in plates and taken back later stands apart (share_held)",
    "in the plane: rays give the shape of what the open zone takes, with births spread evenly; the ledger its amount",
    "in the plane: bound light decays mode by mode, exp(-2 Im(q) r); what no mode carries follows bound rays",
    "in the plane: where the film has no bound rays (a neighbour is denser), what no mode carries is spread at each q "
    "by the exponential of the field's own mean square distance (slope of the field in q, Parseval's theorem)",
    "in the plane: what the ledger has below zero in one zone (near field of neighbours) comes off the other's share",
)


ROUNDING = 1e-13
"""Shares below which nothing is missing."""

WORTH_SAYING = 1e-5
"""Share of the births from which light in no mode and no ray is told of."""

UNEVEN = "in the plane: an uneven film's kernel has the shape of its mean thickness and the amounts of the whole spot"


@dataclass(frozen=True)
class InPlane:
    """How far in the plane photons travel before the film takes them back.

    Attributes
    ----------
    stack
        The stack.
    model
        ``"wave"`` or ``"ray"`` (a film that is a plate).
    kernel
        Averaged over the births, columns ``KERNEL_COLUMNS``: per ring from ``radius_from_um`` to ``radius_to_um`` [um]
        the share of all births that the film takes back there (``share`` = ``share_rays`` + ``share_guided``, which
        add to the ledger's film share), ``share_held`` (what it takes of light held in plates on later round trips; the
        ledger books that as substrate or cover), ``cumulative`` share within ``radius_to_um``, ``per_um_radius`` (per
        unit radius), ``per_cm2`` (per area) and, projected on a line, ``line_per_cm`` (mean over the cells
        from_um < |x| < to_um) and ``line_cumulative`` (|x| < to_um).
    by_wavelength
        wavelength_nm, radius_from_um, radius_to_um, share, cumulative: shares of the births at that wavelength.
    modes
        As `optics.transport.guided.modes_table`; empty for rays.
    guided_spectrum
        wavelength_nm, births_per_nm and ``guided_per_nm_<d>_um``: guided light left after 0, 1, 3, 10, 30, 100 um, per
        nm and per photon born.
    compact
        A row a wavelength, see `optics.transport.compact.COLUMNS`.
    exponentials
        form ("radius" or "line"), weight, length_um, largest_miss: non-negative sums of exponentials fitted to the
        kernel's cumulative share.
    averages
        Numbers over all births: shares, distances [um], what reaches given radii.
    """

    stack: Stack
    model: str
    kernel: pd.DataFrame
    by_wavelength: pd.DataFrame
    modes: pd.DataFrame
    guided_spectrum: pd.DataFrame
    compact: pd.DataFrame
    exponentials: pd.DataFrame
    averages: dict[str, float]
    warnings: tuple[str, ...] = field(default=())
    assumptions: tuple[str, ...] = field(default=())


@dataclass(frozen=True)
class Parts:
    """What the film takes within each radius, per wavelength, as shares of its births."""

    radius_nm: Real
    rays: Taken
    guided: Taken
    held: Taken
    modes: Guided | None
    mode_shares: Real  # share of the births that the film takes from each mode, (mode,)
    guided_shares: Real  # share of the births in each mode, whoever takes it, (mode,)
    continuum: Real  # share of the births in the bound zone that no mode carries, (wavelength,)
    unguided: Taken  # the part of ``guided`` that neither modes nor rays carry


def inplane(stack: Stack, *, model: str | None = None, settings: Settings | None = None) -> InPlane:
    """Work out how far in the plane photons travel before the film takes them back.

    Parameters
    ----------
    stack
        The stack.
    model
        ``"wave"`` or ``"ray"``; None: wave optics unless the film is a plate.
    settings
        How finely to integrate the ledger.

    Raises
    ------
    InputError
        As `optics.solve`.
    """
    settings = settings or Settings()
    smooth = graded(stack)
    drawing = drawing_of(smooth)
    model = "ray" if stack.film.plate else (model or "wave")
    ledger = ledger_of(drawing, settings, model=model)
    born = births.born_inside(smooth, drawing, ledger, model=model, settings=settings).per_nm
    births_nm = born * ledger.rate_factor
    births_nm = births_nm / (births_nm @ weights(drawing.wavelength_nm))
    parts = taken_in_plane(smooth, drawing, ledger, model=model)
    uneven = (UNEVEN,) if stack.film.varies_nm else ()
    said = (*assumptions(stack), *CONVENTIONS, *uneven, *compact.ASSUMPTIONS)
    return replace(_tables(smooth, drawing, ledger, parts, births_nm, model), stack=stack, assumptions=said)


def taken_in_plane(stack: Stack, drawing: Drawing, ledger: Ledger, *, model: str) -> Parts:
    """Return the parts of the kernel, wavelength by wavelength, each with the amount that the ledger gives it."""
    radius = rings.edges_nm()
    count = len(drawing.wavelength_nm)
    film = drawing.film
    open_rays, bound_rays, held = (flights.nothing(len(radius), count) for _ in range(3))
    for chosen, scene in scenes(drawing):
        at = radius[:, None] * (2.0 * np.pi / drawing.wavelength_nm[chosen])
        _put(open_rays, chosen, flights.flights(scene, at, bound=False).plus(flights.returns(scene, at)))
        _put(bound_rays, chosen, flights.flights(scene, at, bound=True))
        _put(held, chosen, flights.held(scene, at, model=model))
    held = Taken(held.within / ledger.rate_factor, held.total / ledger.rate_factor)
    free, bound = _zones(ledger.taken[0, film], ledger.taken[2, film])
    rays = open_rays.scaled(free)
    none = flights.nothing(len(radius), count)
    if model == "ray":
        rays = rays.plus(bound_rays.scaled(bound))
        return Parts(radius, rays, none, held, None, np.zeros(0), np.zeros(0), np.zeros(count), none)
    return _with_modes(stack, drawing, ledger, rays, bound_rays, held)


def _zones(free: Real, bound: Real) -> tuple[Real, Real]:
    """Return what the film takes in the open and the bound zone; what one has below zero comes off the other.

    Near field that leaves by a neighbour may bring one zone below zero; only where the sum is below zero is some left.
    """
    left = np.maximum(np.maximum(free, 0.0) + np.minimum(bound, 0.0), 0.0)
    return left, free + bound - left


def _put(whole: Taken, chosen: Index, part: Taken) -> None:
    whole.within[:, chosen] = part.within
    whole.total[chosen] = part.total


def _with_modes(stack: Stack, drawing: Drawing, ledger: Ledger, rays: Taken, bound_rays: Taken, held: Taken) -> Parts:
    """Add the guided part: modes, and bound rays for what the film takes of bound light that is in none of them."""
    radius = rings.edges_nm()
    count = len(drawing.wavelength_nm)
    guided = guided_modes(stack, drawing)
    modes = guided.modes
    share = modes.power / ledger.rate_factor[modes.wavelength]
    # lines that overlap may leave a mode less than nothing; no ring of a kernel holds that
    film_share = np.maximum(share, 0.0) * modes.taken[drawing.film]
    whole = ledger.taken[0, drawing.film] + ledger.taken[2, drawing.film]
    bound = _zones(ledger.taken[0, drawing.film], ledger.taken[2, drawing.film])[1]
    found = modes.summed(film_share, count)
    # modes that overlap hold a little more than there is: they are cut to it
    fit = np.where(found > bound, np.maximum(bound, 0.0) / np.where(found > 0.0, found, 1.0), 1.0)
    film_share = film_share * fit[modes.wavelength]
    within = np.zeros((len(radius), count))
    rate = 4.0 * np.pi * modes.index.imag / drawing.wavelength_nm[modes.wavelength]
    reach = film_share * rings.within_of_exponential(rate, radius[:, None])
    for i, row in enumerate(reach):
        within[i] = modes.summed(row, count)
    carried = Taken(within, modes.summed(film_share, count))
    carried = carried.plus(bound_rays.scaled(np.maximum(bound - found, 0.0)))
    rest = _unguided(drawing, modes, whole - rays.total - carried.total)
    taken = carried.plus(rest)
    zone = ledger.taken[2].sum(axis=0) + ledger.shares["guided_unfinished"]
    walls = [medium for medium, plate in enumerate(drawing.plate) if plate and medium != drawing.film]
    in_modes = modes.summed(share * (1.0 - modes.taken[walls].sum(axis=0)), count)
    return Parts(radius, rays, taken, held, guided, film_share, share, zone - in_modes, rest)


def _unguided(drawing: Drawing, modes: Modes, amount: Real) -> Taken:
    """Return ``amount``, what the film takes of light in no mode and no ray, (wavelength,), with its distances."""
    radius = rings.edges_nm()
    count = len(amount)
    shape = flights.nothing(len(radius), count)
    lacking = np.abs(amount) > ROUNDING
    for chosen, scene in scenes(drawing):
        some = np.flatnonzero(lacking[chosen])
        if not len(some):
            continue
        place = np.full(count, -1, dtype=np.intp)
        place[chosen[some]] = np.arange(len(some))
        mine = modes.take(np.flatnonzero(place[modes.wavelength] >= 0))
        part, mine = scene.at(some), replace(mine, wavelength=place[mine.wavelength])
        at = radius[:, None] * (2.0 * np.pi / drawing.wavelength_nm[chosen[some]])
        found = continuum.continuum(part, at, mine)
        plain = continuum.along_the_plane(part, at)
        _put(
            shape,
            chosen[some],
            Taken(
                np.where(found.total > 0.0, found.within, plain.within),
                np.where(found.total > 0.0, found.total, plain.total),
            ),
        )
    return shape.scaled(np.where(lacking, amount, 0.0))


def _tables(stack: Stack, drawing: Drawing, ledger: Ledger, parts: Parts, births_nm: Real, model: str) -> InPlane:
    import pandas as pd

    weight = births_nm * weights(drawing.wavelength_nm)
    kernel = _kernel(drawing, parts, weight)
    fits, line_fit = rings.fitted_exponentials, kernel["line_cumulative"].to_numpy()
    radius_um = parts.radius_nm * 1e-3
    terms = {"radius": fits(kernel["cumulative"].to_numpy(), radius_um), "line": fits(line_fit, radius_um)}
    modes = pd.DataFrame()
    if parts.modes is not None:
        modes = modes_table(stack, parts.modes, wavelength_nm=drawing.wavelength_nm, rate_factor=ledger.rate_factor)
    table = compact.table(drawing, parts)
    spectrum = compact.guided_spectrum(drawing, parts, births_nm)
    return InPlane(
        stack=stack,
        model=model,
        kernel=kernel,
        by_wavelength=_by_wavelength(drawing, parts),
        modes=modes,
        guided_spectrum=spectrum,
        compact=table,
        exponentials=_terms(terms),
        averages=_averages(parts, kernel, weight) | compact.averages(drawing, parts, table, spectrum, weight),
        warnings=(RAY_WARNING,) if model == "ray" else _unguided_said(parts, weight),
    )


def _unguided_said(parts: Parts, weight: Real) -> tuple[str, ...]:
    """Say how much light neither modes nor rays carry, how far it was spread, and where a share is below zero."""
    said = []
    within, total = parts.unguided.within @ weight, float(parts.unguided.total @ weight)
    if total > WORTH_SAYING:
        half = rings.quantile(within, parts.radius_nm * 1e-3, 0.5)
        said.append(
            f"in the plane: {total:.4f} of the births are taken by the film as light that neither modes nor rays "
            f"carry: spread by the slope of its field, half of it within {half:.3g} um, and counts as guided"
        )
    below = float(np.minimum(parts.rays.total + parts.guided.total, 0.0) @ weight)
    if below < -WORTH_SAYING:
        said.append(
            f"in the plane: at some wavelengths neighbours' near field leaves the film less than nothing ({below:.2g} "
            "of the births); rings below zero are that"
        )
    return tuple(said)


def _kernel(drawing: Drawing, parts: Parts, weight: Real) -> pd.DataFrame:
    import pandas as pd

    radius = parts.radius_nm
    low = np.concatenate([[0.0], radius[:-1]])
    within = {name: getattr(parts, name).within @ weight for name in ("rays", "guided", "held")}
    ring = {name: np.diff(inside, prepend=0.0) for name, inside in within.items()}
    share = ring["rays"] + ring["guided"]
    line = np.minimum(_on_line(drawing, parts, weight), within["rays"][-1] + within["guided"][-1])
    width_cm, area_cm2 = (radius - low) * 1e-7, np.pi * (radius - low) * (radius + low) * 1e-14
    columns = {
        "radius_from_um": low * 1e-3,
        "radius_to_um": radius * 1e-3,
        "share": share,
        "share_rays": ring["rays"],
        "share_guided": ring["guided"],
        "share_held": ring["held"],
        "cumulative": np.cumsum(share),
        "per_um_radius": share / (width_cm * 1e4),
        "per_cm2": share / area_cm2,
        "line_per_cm": np.diff(line, prepend=0.0) / (2.0 * width_cm),
        "line_cumulative": line,
    }
    return pd.DataFrame({name: columns[name] for name in KERNEL_COLUMNS})


def _on_line(drawing: Drawing, parts: Parts, weight: Real) -> Real:
    """Return the share projected within each distance on a line: modes in closed form, the rest ring by ring."""
    radius = parts.radius_nm
    rest = (parts.rays.within + parts.guided.within) @ weight
    if parts.modes is None or not len(parts.modes.modes):
        return rings.on_line(rest, radius)
    modes = parts.modes.modes
    rate = 4.0 * np.pi * modes.index.imag / drawing.wavelength_nm[modes.wavelength]
    share = parts.mode_shares * weight[modes.wavelength]
    rest = rest - rings.within_of_exponential(rate, radius[:, None]) @ share
    return rings.on_line(rest, radius) + rings.on_line_of_exponential(rate, radius[:, None]) @ share


def _by_wavelength(drawing: Drawing, parts: Parts) -> pd.DataFrame:
    import pandas as pd

    radius, count = parts.radius_nm * 1e-3, len(drawing.wavelength_nm)
    within = (parts.rays.within + parts.guided.within).T  # (wavelength, radius)
    return pd.DataFrame(
        {
            "wavelength_nm": np.repeat(drawing.wavelength_nm, len(radius)),
            "radius_from_um": np.tile(np.concatenate([[0.0], radius[:-1]]), count),
            "radius_to_um": np.tile(radius, count),
            "share": np.diff(within, axis=1, prepend=0.0).ravel(),
            "cumulative": within.ravel(),
        }
    )


def _terms(terms: dict[str, tuple[Real, Real, float]]) -> pd.DataFrame:
    import pandas as pd

    parts = [
        pd.DataFrame({"form": form, "weight": weight, "length_um": length, "largest_miss": miss})
        for form, (weight, length, miss) in terms.items()
        if len(weight)
    ]
    if not parts:
        return pd.DataFrame(columns=["form", "weight", "length_um", "largest_miss"])
    return pd.concat(parts, ignore_index=True)


def _averages(parts: Parts, kernel: pd.DataFrame, weight: Real) -> dict[str, float]:
    """Return shares and distances over all births."""
    radius_um = parts.radius_nm * 1e-3
    inside = kernel["cumulative"].to_numpy()
    total = float((parts.rays.total + parts.guided.total) @ weight)
    said = {
        "taken_back": total,
        "taken_back_rays": float(parts.rays.total @ weight),
        "taken_back_guided": float(parts.guided.total @ weight),
        "taken_back_held": float(parts.held.total @ weight),
        "beyond_grid": total - float(inside[-1]),
        "bound_in_no_mode": float(parts.continuum @ weight),
    }
    rings_um = rings.ring_means(radius_um)
    said["mean_um"] = float(kernel["share"].to_numpy() @ rings_um / inside[-1]) if inside[-1] > 0.0 else float("nan")
    for name, share in (("median_um", 0.5), ("within_90_um", 0.9), ("within_99_um", 0.99)):
        said[name] = rings.quantile(inside, radius_um, share)
    for reach in REACHES_UM:
        said[f"taken_back_beyond_{reach:g}_um"] = total - float(np.interp(np.log(reach), np.log(radius_um), inside))
    return said
