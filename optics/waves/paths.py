"""Quadrature over the in-plane wave number: nested rules, curves in the complex plane, refinement row by row."""

from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace
from functools import cache

import numpy as np
from numpy.typing import NDArray

from optics.arrays import Index, Real

BLOCK = 12000
"""Nodes evaluated at a time: enough to hide the cost of a call, few enough for the arrays to stay in cache."""

BLOCKS = 6
"""Blocks whose rough rows are done again together."""

DOUBLINGS = 2
"""How often the order is doubled before a row is halved."""

HEAP_TO_KEEP = 24 << 20
"""Bytes, below the 32 MB from which glibc no longer learns; see :func:`_keep_heap`."""


@cache
def fejer(order: int) -> tuple[Real, Real]:
    """Return nodes on (0, 1) and three columns of weights: Fejer's second rule and those of half and quarter order.

    Waldvogel, BIT 46, 195 (2006), eq. 2.3, mapped from (-1, 1). The rules are nested and none uses the end points,
    where a map and an integrand can meet as zero times infinity.
    """
    if order % 8:
        raise ValueError("the order of a nested rule is a multiple of eight")
    theta = np.pi * np.arange(1, order) / order
    weights = np.zeros((order - 1, 3))
    for column, stride in enumerate((1, 2, 4)):
        weights[stride - 1 :: stride, column] = _fejer_weights(theta[stride - 1 :: stride], order // stride)
    # 1 - cos loses digits near zero, where curves start at square-root ends
    nodes = np.sin(0.5 * theta) ** 2
    nodes.setflags(write=False)
    weights.setflags(write=False)
    return nodes, weights


def _fejer_weights(theta: Real, order: int) -> Real:
    odd = 2.0 * np.arange(1, order // 2 + 1) - 1.0
    terms = np.sin(np.outer(theta, odd)) / odd
    weights: Real = 2.0 * np.sin(theta) / order * terms.sum(axis=1)
    return weights


@dataclass(frozen=True)
class Rows:
    """Pieces of integration paths: one row is one wavelength on one piece.

    ``owner`` is the wavelength a row belongs to; ``start`` and ``stop`` bound the curve parameter; ``shape`` holds
    what the curve needs, (parameter, row).
    """

    owner: Index
    start: Real
    stop: Real
    shape: Real

    def __len__(self) -> int:
        return len(self.owner)

    def take(self, which: Index | NDArray[np.bool_] | slice) -> "Rows":
        """Return the chosen rows."""
        return Rows(self.owner[which], self.start[which], self.stop[which], self.shape[:, which])

    def halves(self) -> "Rows":
        """Return both halves of every row."""
        middle = 0.5 * (self.start + self.stop)
        lower, upper = replace(self, stop=middle), replace(self, start=middle)
        return join((lower, upper))


def join(parts: tuple[Rows, ...]) -> Rows:
    """Return the rows of several sets as one."""
    return Rows(
        np.concatenate([p.owner for p in parts]),
        np.concatenate([p.start for p in parts]),
        np.concatenate([p.stop for p in parts]),
        np.concatenate([p.shape for p in parts], axis=1),
    )


@dataclass(frozen=True)
class Integral:
    """Integrals per quantity and wavelength, with an error estimate per wavelength (largest over the quantities)."""

    values: Real  # (quantity, wavelength)
    error: Real  # (wavelength,)


@cache
def _keep_heap() -> None:
    """Free one large block, once: the C library then keeps freed memory at hand.

    glibc raises its thresholds for giving memory back to the size of the largest block freed (mallopt(3),
    M_MMAP_THRESHOLD); without this the temporaries of every block are mapped and cleared anew, a third of the time.
    Elsewhere it does nothing.
    """
    np.empty(HEAP_TO_KEEP, dtype=np.uint8)


Density = Callable[[Rows, Real], Real]
"""Takes rows and curve parameters (row or 1, node); returns (quantity, row, node), the Jacobian included."""


def integrate(
    density: Density,
    rows: Rows,
    *,
    wavelengths: int,
    order: int,
    tolerance: float,
    trust: float = 0.0,
    halvings: int = 30,
) -> Integral:
    """Integrate ``density`` along every row; where nested rules disagree, double the order, then halve the row.

    With e1 the difference between the half and the quarter rule and e2 that between the full and the half rule, the
    error of a row is taken as e2 min(1, e2/e1)^trust. A rule that converges by a factor with every doubling errs by e2
    times that factor, one that gains digits in proportion to its order by e2 times its square; without ``trust`` there
    is room for e1 and e2 being small by chance, where no other path tells. Rows that still disagree after ``halvings``
    are counted with what they have.
    """
    _keep_heap()
    values: Real | None = None
    error = np.zeros(wavelengths)
    for left in range(halvings, -1, -1):
        if not len(rows):
            break
        sums, guess = _evaluate(density, rows, _Rule(order, tolerance, trust))
        if values is None:
            values = np.zeros((len(sums), wavelengths))
        if not np.isfinite(sums).all():
            raise FloatingPointError("a density is not finite on its path")
        done = (guess <= tolerance) if left else np.ones(len(rows), dtype=bool)
        np.add.at(values.T, rows.owner[done], sums[:, done].T)
        np.add.at(error, rows.owner[done], guess[done])
        rows = rows.take(~done).halves()
    if values is None:
        raise ValueError("nothing to integrate: no rows")
    return Integral(values, error)


@dataclass(frozen=True)
class _Rule:
    order: int
    tolerance: float
    trust: float

    def judged(self, rows: Rows, total: Real) -> tuple[Real, Real]:
        """Return integrals and errors from the sums of the full, half and quarter rule, (quantity, row, rule)."""
        total *= (rows.stop - rows.start)[:, None]
        last = np.abs(total[..., 0] - total[..., 1])
        before = np.abs(total[..., 1] - total[..., 2])
        last *= np.minimum(last / np.maximum(before, 1e-300), 1.0) ** self.trust
        return total[..., 0], last.max(axis=0)


def _evaluate(density: Density, rows: Rows, rule: _Rule) -> tuple[Real, Real]:
    """Return the integrals of all rows, (quantity, row), and their error estimates, (row,)."""
    step = max(1, BLOCKS * BLOCK // rule.order)
    parts = [_refined(density, rows.take(slice(at, at + step)), rule) for at in range(0, len(rows), step)]
    return np.concatenate([p[0] for p in parts], axis=1), np.concatenate([p[1] for p in parts])


def _refined(density: Density, rows: Rows, rule: _Rule) -> tuple[Real, Real]:
    """Double the order for those rows whose nested rules disagree."""
    nodes, weights = fejer(rule.order)
    blocks, values = [], []
    for part in _blocks(rows, rule.order):
        value = density(part, _at(part, nodes))
        blocks.append(rule.judged(part, value @ weights))
        values.append(value[:, blocks[-1][1] > rule.tolerance])
    sums, guess = np.concatenate([b[0] for b in blocks], axis=1), np.concatenate([b[1] for b in blocks])
    known = np.concatenate(values, axis=1)
    rough = np.flatnonzero(guess > rule.tolerance)
    for doubling in range(1, DOUBLINGS + 1):
        if not len(rough):
            break
        again, order = rows.take(rough), rule.order << doubling
        nodes, weights = fejer(order)
        fresh = [density(part, _at(part, nodes[::2])) for part in _blocks(again, order // 2)]
        both = np.empty((len(known), len(rough), order - 1))
        both[..., 1::2], both[..., ::2] = known, np.concatenate(fresh, axis=1)
        sums[:, rough], guess[rough] = rule.judged(again, both @ weights)
        still = guess[rough] > rule.tolerance
        rough, known = rough[still], both[:, still]
    return sums, guess


def _blocks(rows: Rows, nodes: int) -> Iterator[Rows]:
    step = max(1, BLOCK // nodes)
    for at in range(0, len(rows), step):
        yield rows.take(slice(at, at + step))


def _at(rows: Rows, nodes: Real) -> Real:
    """Return the curve parameter at the nodes of every row; one row for all where their pieces agree."""
    start, run = rows.start[:, None], (rows.stop - rows.start)[:, None]
    if (start == start[0]).all() and (run == run[0]).all():
        start, run = start[:1], run[:1]
    return start + run * nodes
