"""Rays followed one by one, by chance, through a film between plates until they are absorbed, out, or at an edge.

Shares no code with the package: Fresnel's formulas for bare faces, Beer's law, straight lines.
"""

import numpy as np

ENDS = ("film", "plates", "free", "edge")


def fresnel(n1, n2, q, s_polarised):
    """Return the power reflectance between clear media for the in-plane wave number q."""
    c1, c2 = np.sqrt(np.maximum(n1 * n1 - q * q, 0.0)), np.sqrt(np.maximum(n2 * n2 - q * q, 0.0))
    weight1, weight2 = np.where(s_polarised, 1.0, n2 / n1), np.where(s_polarised, 1.0, n1 / n2)
    amplitude = (c1 * weight1 - c2 * weight2) / np.maximum(c1 * weight1 + c2 * weight2, 1e-300)
    return np.where(q >= n2, 1.0, amplitude**2)


def followed(*, index, thickness_nm, absorption_per_nm, film, edge_nm, rays, seed, beyond=1.0):
    """Return the shares of ``ENDS`` of rays born evenly and isotropically in the slab ``film``.

    Slabs run from above to below; ``beyond`` is the index of the free space on both sides. A ray that is on its way
    out keeps to its slab until it leaves: the edge stops only rays that no face would let out.
    """
    rng = np.random.default_rng(seed)
    index, thick, alpha = (np.asarray(v, float) for v in (index, thickness_nm, absorption_per_nm))
    slab = np.full(rays, film)
    cosine = rng.uniform(-1.0, 1.0, rays)
    q = index[film] * np.sqrt(1.0 - cosine**2)
    down = cosine > 0.0
    s_polarised = rng.random(rays) < 0.5
    to_face = rng.random(rays) * thick[film]
    along = np.zeros(rays)
    counts = np.zeros(len(ENDS))
    while len(slab):
        n = index[slab]
        sine = q / n
        cosine = np.sqrt(1.0 - sine**2)
        face, edge = to_face / cosine, (edge_nm - along) / np.maximum(sine, 1e-300)
        edge = np.where(q < beyond, np.inf, edge)
        with np.errstate(divide="ignore"):
            path = np.where(alpha[slab] > 0.0, rng.exponential(size=len(slab)) / alpha[slab], np.inf)
        step = np.minimum(np.minimum(face, edge), path)
        along = along + step * sine
        absorbed = step == path
        at_edge = ~absorbed & (step == edge)
        counts[0] += (absorbed & (slab == film)).sum()
        counts[1] += (absorbed & (slab != film)).sum()
        counts[3] += at_edge.sum()
        target = slab + np.where(down, 1, -1)
        outside = (target < 0) | (target >= len(index))
        n2 = np.where(outside, beyond, index[np.clip(target, 0, len(index) - 1)])
        back = rng.random(len(slab)) < fresnel(n, n2, q, s_polarised)
        out = ~absorbed & ~at_edge & ~back & outside
        counts[2] += out.sum()
        alive = ~(absorbed | at_edge | out)
        slab = np.where(back, slab, np.where(outside, slab, target))[alive]
        down = np.where(back, ~down, down)[alive]
        q, along, s_polarised = q[alive], along[alive], s_polarised[alive]
        to_face = thick[slab]
    return dict(zip(ENDS, counts / rays, strict=True))
