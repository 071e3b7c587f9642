"""Fitness of a table of n and k: gaps, outliers, noise, sign, range, Kramers-Kronig, and a floor in place of a tail."""

from dataclasses import dataclass

import numpy as np

from optics.arrays import Real
from optics.media.bandtail import DEEPEST_FLOOR, Floor, find_floor, rows_of
from optics.media.kramers import METHOD, Consistency, kramers_kronig
from optics.media.material import Material
from optics.units import absorption_per_cm

__all__ = ["Finding", "Fitness", "examine", "floor_warning"]


SHARE_WORTH_A_WORD = 0.01
"""Share of the births that must lie on the floor before a warning is given."""

GAP = 4.0
"""A step is a gap when it is that many times the median of the steps on either side."""

NEIGHBOURS = 5  # steps on either side of one that may be a gap
OUTLIER = 8.0
"""A row is an outlier when it lies that many times the noise around it off the cubic through its four neighbours."""

LEAST_OUTLIER = 0.01  # of the column's span: less harms nothing
WINDOW = 21  # rows over which noise is estimated
CUBIC_NOISE = 1.394  # of a residual to the cubic through two rows on each side, for noise of 1 in every row
MAD_TO_SIGMA = 1.4826  # for normal noise
NOISY = 0.2
"""k is noisy where its noise is this part of it: absorption is then known to no better."""

NOT_TOGETHER = 0.05
"""n and k do not belong together when they differ in root mean square by this part of the span of n, by more than
``LEAST_DIFFERENCE``, and by twice what hangs on the absorption beyond the table's blue end. Fits to ellipsometry stay
below 0.01 of the span; a k that is 20 % too large reaches 0.05."""

LEAST_DIFFERENCE = 0.01
WEAK_PER_CM = 10.0
"""Absorption of a floor below which no film of micrometres could have shown it: common practice, no source."""

ABSORBS_AT_RED_END = 0.2
"""With a larger k at the red end (metals, free carriers) what lies beyond it decides n: the table cannot be judged."""


@dataclass(frozen=True)
class Finding:
    """One thing found.

    Parameters
    ----------
    kind
        ``"range"``, ``"gap"``, ``"outlier"``, ``"sign"``, ``"noise"``, ``"kramers-kronig"`` or ``"tail"``.
    said
        A sentence.
    short
        The same in a few words.
    fault
        Whether it makes the table unfit as it is.
    at_nm
        Wavelengths [nm] to be marked.
    """

    kind: str
    said: str
    short: str = ""
    fault: bool = False
    at_nm: tuple[float, ...] = ()


@dataclass(frozen=True)
class Fitness:
    """What was found in a table.

    Parameters
    ----------
    name
        What the table is called.
    wavelength_nm, n, k
        The table itself, in ascending wavelength [nm], (row,).
    findings
        In the order of ``Finding.kind``.
    floor
        The absorption floor, if there is one.
    consistency
        How n follows from k, if the table is long enough.
    """

    name: str
    wavelength_nm: Real
    n: Real
    k: Real
    findings: tuple[Finding, ...]
    floor: Floor | None
    consistency: Consistency | None

    @property
    def fit(self) -> bool:
        """Whether nothing found makes the table unfit."""
        return not any(finding.fault for finding in self.findings)


def examine(
    name: str, *, wavelength_nm: Real, n: Real, k: Real, wanted_nm: tuple[float, float] | None = None
) -> Fitness:
    """Look into a table.

    Parameters
    ----------
    name
        What it is called.
    wavelength_nm, n, k
        In ascending wavelength [nm], (row,); k may be negative here.
    wanted_nm
        First and last wavelength [nm] that it shall cover.
    """
    floor = find_floor(wavelength_nm, k)
    consistency = kramers_kronig(wavelength_nm, n, k)
    findings = [
        *_range(wavelength_nm, wanted_nm),
        *_gaps(wavelength_nm),
        *_outliers("n", wavelength_nm, n),
        *_outliers("k", wavelength_nm, k),
        *_signs(wavelength_nm, k),
        *_noise(wavelength_nm, k),
        _belonging(consistency, n, k),
        _tail(floor),
    ]
    return Fitness(name, wavelength_nm, n, k, tuple(findings), floor, consistency)


def floor_warning(name: str, material: Material, wavelength_nm: Real, k: Real, weight: Real) -> str | None:
    """Return a warning where a share of the births worth a word lies on an absorption floor, else None.

    Parameters
    ----------
    name, material
        The film. One whose k is in no table (a number, a repaired tail) is the user's own word and not questioned.
    wavelength_nm, k, weight
        Where light is asked for [nm], the film's extinction there, and the births' weights, (wavelength,).
    """
    rows = rows_of(material.medium)
    floor = find_floor(*rows) if rows else None
    if floor is None:
        return None
    beyond = wavelength_nm >= floor.onset_nm
    share = float(weight[beyond].sum() / weight.sum())
    if share < SHARE_WORTH_A_WORD:
        return None
    level = float(np.median(k[beyond]))
    return (
        f'layer "{name}": k stops falling at {floor.onset_nm:.0f} nm (k = {floor.k:.2g}, {level:.2g} in the median '
        f"beyond) instead of dying off below the gap; {share:.0%} of the births lie beyond, and a floor that a fit "
        "left there overstates what the film takes back; tail = ... replaces it"
    )


def _range(wavelength: Real, wanted: tuple[float, float] | None) -> list[Finding]:
    first, last = float(wavelength[0]), float(wavelength[-1])
    span = f"{wavelength.size} rows from {first:.6g} to {last:.6g} nm"
    if wanted is None:
        return [Finding("range", span)]
    low, high = wanted
    missing = [f"{low:.6g} to {min(first, high):.6g} nm"] if low < first else []
    missing += [f"{max(last, low):.6g} to {high:.6g} nm"] if high > last else []
    said = f"{span}; {' and '.join(missing)} missing" if missing else f"{span}, which cover {low:.6g} to {high:.6g} nm"
    return [Finding("range", said, "range missing", fault=bool(missing))]


def _gaps(wavelength: Real) -> list[Finding]:
    steps = np.diff(wavelength)
    found = []
    for place, step in enumerate(steps):
        before, after = steps[max(0, place - NEIGHBOURS) : place], steps[place + 1 : place + 1 + NEIGHBOURS]
        if min(before.size, after.size) >= 2 and step > GAP * max(np.median(before), np.median(after)):
            found.append(place)
    if not found:
        return []
    ends = [(float(wavelength[place]), float(wavelength[place + 1])) for place in found]
    places = ", ".join(f"{one:.6g} to {two:.6g} nm" for one, two in ends[:5])
    more = f" and {len(ends) - 5} more" if len(ends) > 5 else ""
    return [
        Finding("gap", f"gaps: {places}{more}; what lies in them is a guess", "gaps", fault=True, at_nm=sum(ends, ()))
    ]


def _residuals(wavelength: Real, values: Real) -> tuple[Real, Real]:
    """Return how far each row lies off the cubic through two rows on each side, and the noise of one row.

    The first and last two rows are taken to lie on it.
    """
    off = np.zeros_like(values)
    if values.size < WINDOW:
        return off, np.full_like(values, np.inf)
    x = np.lib.stride_tricks.sliding_window_view(wavelength, 5)
    y = np.lib.stride_tricks.sliding_window_view(values, 5)
    predicted = np.zeros(len(x))
    for one in (0, 1, 3, 4):
        weight = np.ones(len(x))
        for other in {0, 1, 3, 4} - {one}:
            weight *= (x[:, 2] - x[:, other]) / (x[:, one] - x[:, other])
        predicted += weight * y[:, one]
    off[2:-2] = y[:, 2] - predicted
    near = np.lib.stride_tricks.sliding_window_view(np.pad(np.abs(off), WINDOW // 2, mode="reflect"), WINDOW)
    return off, MAD_TO_SIGMA * np.median(near, axis=1)


def _outliers(name: str, wavelength: Real, values: Real) -> list[Finding]:
    off, noise = _residuals(wavelength, values)
    large = np.abs(off)
    span = float(np.ptp(values))
    found = []
    for place in np.flatnonzero((large > OUTLIER * noise) & (large > LEAST_OUTLIER * span)):
        around = large[max(0, place - 2) : place + 3]
        # A single row off leaves two thirds of it, of the other sign, in the rows beside it; a true feature does not.
        beside = np.array([off[place - 1], off[place + 1]]) * -np.sign(off[place])
        if large[place] == around.max() and (beside > 0.4 * large[place]).all():
            found.append(float(wavelength[place]))
    if not found:
        return []
    places = ", ".join(f"{nm:.6g}" for nm in found[:5]) + (f" and {len(found) - 5} more" if len(found) > 5 else "")
    return [
        Finding(
            "outlier",
            f"{name} is off its neighbours at {places} nm",
            f"{name} off its neighbours",
            fault=True,
            at_nm=tuple(found),
        )
    ]


def _signs(wavelength: Real, k: Real) -> list[Finding]:
    negative = k < 0.0
    if not negative.any():
        return []
    where = wavelength[negative]
    said = f"k is negative in {where.size} rows, {where[0]:.6g} to {where[-1]:.6g} nm, down to {k.min():.2g}"
    return [Finding("sign", said, "k below zero", fault=True, at_nm=(float(where[0]), float(where[-1])))]


def _noise(wavelength: Real, k: Real) -> list[Finding]:
    off, spread = _residuals(wavelength, k)
    noise = spread / CUBIC_NOISE
    level = np.abs(k)
    noisy = (noise > NOISY * level) & (noise > DEEPEST_FLOOR) & np.isfinite(noise)
    # Noise changes its sign from row to row about two times in three and more; bends of a smooth curve do not.
    turning = np.mean(np.sign(off[2:-3][noisy[2:-3]]) != np.sign(off[3:-2][noisy[2:-3]])) if noisy[2:-3].any() else 0.0
    if noisy.sum() < 5 or turning < 0.5:
        return []
    where = wavelength[noisy]
    said = (
        f"k is noisy in {where.size} rows, {where[0]:.6g} to {where[-1]:.6g} nm: "
        f"{np.median(noise[noisy]):.2g} of noise on {np.median(level[noisy]):.2g}"
    )
    return [Finding("noise", said, "k noisy", fault=True, at_nm=(float(where[0]), float(where[-1])))]


def _belonging(consistency: Consistency | None, n: Real, k: Real) -> Finding:
    if consistency is None:
        return Finding("kramers-kronig", "too few rows for Kramers-Kronig")
    span = float(np.ptp(n))
    said = (
        f"n and the n that k implies differ by {consistency.rms:.2g} (root mean square; {consistency.worst:.2g} at "
        f"most, at {consistency.worst_nm:.0f} nm) of a span of {span:.2g}"
    )
    if k[-1] > ABSORBS_AT_RED_END:
        return Finding("kramers-kronig", f"{said}; not judged, as it absorbs at its red end: {METHOD}")
    apart = consistency.rms > max(NOT_TOGETHER * span, LEAST_DIFFERENCE, 2.0 * consistency.doubt)
    word = "they do not belong together" if apart else "they belong together"
    at = (consistency.worst_nm,) if apart else ()
    return Finding("kramers-kronig", f"{said}; {word}: {METHOD}", "n and k do not belong together", bool(apart), at)


def _tail(floor: Floor | None) -> Finding:
    if floor is None:
        return Finding("tail", "no floor found below an absorption edge")
    falls = f"falls by a factor e in {floor.decay_meV:.0f} meV" if np.isfinite(floor.decay_meV) else "does not fall"
    if absorption_per_cm(floor.k, floor.onset_nm) < WEAK_PER_CM:
        said = (
            f"beyond {floor.onset_nm:.0f} nm k stops falling like a tail (k = {floor.k:.2g}; it {falls} from there): "
            "too weak for the fit of a thin film: another absorber, measured through a thick sample"
        )
        return Finding("tail", said, at_nm=(floor.onset_nm,))
    said = (
        f"beyond {floor.onset_nm:.0f} nm k stops falling like a tail (k = {floor.k:.2g}; it {falls} from there on): a "
        f"floor that a fit left, or another absorber; the edge falls fastest at {floor.steepest_nm:.0f} nm, a factor e "
        f'in {floor.steepest_meV:.0f} meV; tail = "fit" or {{ urbach_meV = ..., red_of_nm = ... }} in the stack file '
        "replaces it"
    )
    return Finding("tail", said, f"floor from {floor.onset_nm:.0f} nm", fault=True, at_nm=(floor.onset_nm,))
