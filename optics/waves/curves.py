"""Curves in the plane of the in-plane wave number on which the densities are integrated.

``panel`` stays on the real axis between two light lines; ``dip`` runs below it; ``riser`` climbs from the end of a
dip to a point that moves with the film's complex wave number. Every one is analytic in its parameter u in (0, 1) and
clusters its nodes where a square-root end of the density may sit.
"""

from dataclasses import dataclass
from typing import Any

import numpy as np

from optics.arrays import Complex, Index, Real
from optics.waves.elementary import Crossing
from optics.waves.paths import Rows

DEPTH = 0.7
"""How far a dip leaves the real axis, in units of the angle it runs through over pi/2."""


@dataclass(frozen=True)
class Points:
    """Nodes of a path: the in-plane wave number, its derivative, and the film's wave number less it.

    On the real axis ``q`` and ``slope`` are real.
    """

    q: Any
    slope: Any
    short_of_film: Complex  # film index - q, without cancellation


def panels(owner: Index, low: Real, high: Real) -> Rows:
    """Return rows for real-axis panels from ``low`` to ``high``, numbered so that pieces know their panel."""
    count = len(owner)
    return Rows(owner, np.zeros(count), np.ones(count), np.stack([low, high, np.arange(count)]))


def on_panel(rows: Rows, u: Real, film: Complex, left: Real | None = None) -> Points:
    """Return q = low + (high - low) sin^2(pi u/2): square-root ends turn analytic.

    ``left`` is 1 - u, for callers that know it better than the difference does.
    """
    low, high = rows.shape[0][:, None], rows.shape[1][:, None]
    sine = np.sin(0.5 * np.pi * u)
    cosine = np.sin(0.5 * np.pi * (1.0 - u if left is None else left))
    width = high - low
    q = low + width * (sine * sine)
    short = np.empty(q.shape, dtype=complex)
    np.add(film.real - high, width * (cosine * cosine), out=short.real)
    nearer = np.abs(film.real - low) < np.abs(film.real - high)
    if nearer.any():  # the panel starts at the film's light line: count from there
        short.real = np.where(nearer, (film.real - low) - width * (sine * sine), short.real)
    short.imag = film.imag
    return Points(q, (np.pi * width) * (sine * cosine), short)


def on_crowded_panel(rows: Rows, u: Real, film: Complex) -> Points:
    """Return nodes as :func:`on_panel` does, crowded further towards the upper end.

    At the film's light line rays that graze the faces change from surviving to dying within a small cosine.
    """
    rest = 1.0 - u
    points = on_panel(rows, 1.0 - rest * rest, film, rest * rest)
    return Points(points.q, 2.0 * rest * points.slope, points.short_of_film)


def middle(q: Real) -> Real:
    """Return a q inside each row's panel, (row, 1): on which side of a light line the row lies."""
    return q[:, q.shape[1] // 2, None]


def on_dip(rows: Rows, u: Real, film: Complex, start: Real | None = None) -> Points:
    """Return nodes below the real axis from ``start`` (0 if None) to the real end ``rows.shape[0]``.

    q = end sin(phi); from 0 the nodes cluster at the end alone, from a light line at both ends.
    """
    end = rows.shape[0][:, None]
    if start is None:
        first, rest, step = 0.0, (1.0 - u) ** 2, 2.0 * (1.0 - u)
    else:
        first = np.arcsin(np.minimum(start / end, 1.0))
        rest, step = np.cos(0.5 * np.pi * u) ** 2, 0.5 * np.pi * np.sin(np.pi * u)
    run = 0.5 * np.pi - first
    dip = DEPTH * run / (0.5 * np.pi)
    half_angle, sag, sag_slope = 0.5 * run * rest, dip * np.sin(np.pi * rest), np.pi * dip * np.cos(np.pi * rest)
    # to go are the angle 2 half_angle + i sag; its sine and 1 - cosine from exp(i angle) - 1, which keeps small ones
    less_one = Crossing(half_angle, 0.5 * sag).turn_less_one()
    over = 1.0 / (1.0 + less_one)
    over *= less_one
    drop = -0.5 * less_one
    drop *= over
    sine = -0.5j * (less_one + over)
    speed = np.empty(sine.shape, dtype=complex)
    speed.real, speed.imag = run * step, sag_slope * step
    speed *= sine
    fallen = end * drop
    return Points(end - fallen, end * speed, (film - end) + fallen)


def on_riser(rows: Rows, u: Real, film: Complex) -> Points:
    """Return nodes straight up from the real end ``rows.shape[0]``, as high as ``end / Re(film)`` times Im(film).

    They cluster at both ends: a guided mode may lie next to the foot, the film's branch point at the top.
    """
    end = rows.shape[0][:, None]
    reach = end / film.real
    sine, cosine = np.sin(0.5 * np.pi * u), np.cos(0.5 * np.pi * u)
    height = reach * film.imag
    q = np.empty((len(rows), u.shape[1]), dtype=complex)
    q.real = end
    q.imag = height * (sine * sine)
    short = np.empty(q.shape, dtype=complex)
    short.real = film.real - end
    short.imag = film.imag * (1.0 - reach) + height * (cosine * cosine)
    return Points(q, 1j * np.pi * height * (sine * cosine), short)
