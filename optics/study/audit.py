"""The audit of one stack: independent checks of its own answer, each with a figure, a bound and a verdict."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from dataclasses import asdict, dataclass, replace
from typing import Any

import numpy as np

from optics.arrays import Real
from optics.errors import InputError
from optics.fate.account import ledger_of
from optics.fate.advice import coherence_length_nm, linewidth
from optics.fate.ledger import ENDS, SHARES
from optics.fate.scenes import Drawing, scenes, swallows
from optics.fate.solve import Result, solve
from optics.fate.wave import Settings
from optics.media.checks import examine, floor_warning
from optics.media.dispersion import Tabulated
from optics.stack import Stack
from optics.study.chance import follow
from optics.study.keypath import without_doubts
from optics.study.planewaves import LEAST_K, against_tmm, exchange, plain, reciprocity

PASS, FAIL, NOTE = "pass", "FAIL", "note"

PLANE_WAVES = 1e-9
"""Difference from the library on thin layers: rounding, over hundreds of terms."""

PER_PLATE_K = 5.0
"""A plate's k counts inside it alone here, not at its faces; this times k is allowed."""

ON_FILE = 1e-6
RECIPROCITY = 1e-6
EXCHANGE = 1e-6
PATHS = 1e-6
DOUBLED = 1e-6
SIGMAS = 4.5
"""One audit in some ten thousand fails by chance: seven ends, two-sided."""

FRINGE = 0.1
"""Share that fringes move between wave and ray in a film much thinner than its coherence length."""

NEAR_FACES = 0.3
"""Part of lambda/(2 n d), the part of a film within half a wave of its faces, by which the models may differ."""

RAYS = 40_000
WIDEST_ROWS = 0.5
"""Rows of a table may lie this part of the emission's width apart; between them a cubic knows no structure."""

LEFT_OUT = 0.01
"""Births outside the light's range beyond which the averages are of another spectrum."""


@dataclass(frozen=True)
class Check:
    """One line of an audit: what was checked, what came out, what is allowed, and the verdict."""

    name: str
    figure: float | None
    bound: float | None
    verdict: str
    said: str = ""


@dataclass(frozen=True)
class Audit:
    """All lines of an audit."""

    title: str
    checks: tuple[Check, ...]

    @property
    def passed(self) -> bool:
        """Whether no check failed."""
        return all(check.verdict != FAIL for check in self.checks)

    def plain(self) -> dict[str, Any]:
        """Return the audit as plain values."""
        return {"title": self.title, "passed": self.passed, "checks": [asdict(check) for check in self.checks]}


def audit(
    stack: Stack, *, seed: int = 1, settings: Settings | None = None, on_file: Mapping[str, float] | None = None
) -> Audit:
    """Check a stack's answer by independent means.

    Parameters
    ----------
    stack
        The stack.
    seed
        Of the rays followed by chance.
    settings
        How finely the answer under audit is integrated; the default is that of `optics.solve`.
    on_file
        Averages that a result folder holds, to be found again; None: there is none.
    """
    settings = settings or Settings()
    bare = without_doubts(stack)
    result = solve(bare, settings=settings)
    sampled = wavelengths_sampled(result)
    parts: list[Callable[[], Iterator[Check]]] = [
        lambda: _on_file(result, on_file),
        lambda: _tables(bare, result),
        lambda: _plane_waves(bare, sampled),
        lambda: _reciprocity(bare, sampled, settings),
        lambda: _exchange(bare, sampled, settings),
        lambda: _paths(result),
        lambda: _doubled(bare, result, settings),
        lambda: _models(result),
        lambda: _chance(bare, sampled[len(sampled) // 2 :][:1], settings, seed),
    ]
    return Audit(stack.title, tuple(check for part in parts for check in part()))


def unreadable(title: str, error: InputError) -> Audit:
    """Return the audit of a stack whose tables or cards are refused: a failing line a fault."""
    return Audit(title, tuple(Check("tables and cards", None, None, FAIL, fault) for fault in error.faults))


def of_tables(error: InputError) -> bool:
    """Say whether all that a stack file is refused for are its tables and cards: then the audit has its lines."""
    return all("material" in fault or "card " in fault for fault in error.faults)


def wavelengths_sampled(result: Result) -> Real:
    """Return wavelengths [nm] at a tenth, the half and nine tenths of the births."""
    table = _table(result)
    wavelength = table["wavelength_nm"].to_numpy(dtype=float)
    births = np.cumsum(table["birth_weight"].to_numpy(dtype=float))
    places = np.unique(np.minimum(np.searchsorted(births, [0.1, 0.5, 0.9]), len(wavelength) - 1))
    out: Real = wavelength[places]
    return out


def _table(result: Result) -> Any:
    return result.ray_table if result.table is None else result.table


def _judged(name: str, figure: float, bound: float, said: str) -> Check:
    return Check(name, figure, bound, PASS if figure <= bound else FAIL, said)


def _on_file(result: Result, on_file: Mapping[str, float] | None) -> Iterator[Check]:
    """Check that the result beside the stack file is the one this stack gives."""
    if on_file is None:
        return
    figure = max((abs(result.averages[name] - on_file.get(name, np.inf)) for name in SHARES), default=0.0)
    said = "largest difference of an averaged share from the result folder's"
    changed = "" if figure <= ON_FILE else "; the stack or a table has changed since"
    yield _judged("result on file", figure, ON_FILE, said + changed)


def _tables(stack: Stack, result: Result) -> Iterator[Check]:
    """Check what tables are fit for: rows close enough, an absorption that dies off, births inside the range."""
    wavelength, table = stack.light.wavelengths_nm, _table(result)
    _, width = linewidth(wavelength, table["birth_weight"].to_numpy(dtype=float))
    spans = {name: _widest_rows(material.medium, stack) for name, material, _ in stack.media}
    name = max(spans, key=lambda each: spans[each])
    if width and spans[name]:
        said = f"widest step between rows used, nm ({name}); {100 * WIDEST_ROWS:g} % of the emission's width"
        yield _judged("tables: rows", spans[name], WIDEST_ROWS * width, said)
    yield from _fitness(stack)
    yield _floor(stack, result)
    edge = float(table["births_per_nm"].iloc[[0, -1]].max() / table["births_per_nm"].max())
    said = "births per nm at the ends of the light's range, over the largest: what lies outside is left out"
    if len(wavelength) > 1:
        yield Check("spectrum inside the range", edge, LEFT_OUT, PASS if edge <= LEFT_OUT else NOTE, said)


def _widest_rows(medium: Any, stack: Stack) -> float:
    if not isinstance(medium, Tabulated):
        return 0.0
    first, last = stack.light.range_nm
    rows = medium.wavelength_nm
    used = rows[max(int(np.searchsorted(rows, first, "right")) - 1, 0) : int(np.searchsorted(rows, last)) + 1]
    return float(np.diff(used).max()) if len(used) > 1 and last > first else 0.0


def _floor(stack: Stack, result: Result) -> Check:
    """Note an absorption floor of the film; it is an honest caution of the table, not a fault of the computation."""
    wavelength, weight = stack.light.wavelengths_nm, _table(result)["birth_weight"].to_numpy(dtype=float)
    film = stack.film
    found = floor_warning(film.name, film.repaired, wavelength, film.repaired.index(wavelength).imag, weight)
    said = found or "k of the film dies off below the gap, or is the user's own word"
    return Check("film: absorption floor", None, None, NOTE if found else PASS, said)


def _fitness(stack: Stack) -> Iterator[Check]:
    """Note what makes a table unfit as it is: gaps, outliers, n and k that do not belong together."""
    for name, material, _ in stack.media:
        medium = material.medium
        if not isinstance(medium, Tabulated):
            continue
        found = examine(
            name, wavelength_nm=medium.wavelength_nm, n=medium.n, k=medium.k, wanted_nm=stack.light.range_nm
        )
        said = "; ".join(finding.short or finding.said for finding in found.findings if finding.fault)
        yield Check(
            f"fitness of {material.name}",
            None,
            None,
            NOTE if said else PASS,
            said or "no gap, outlier or noise that harms",
        )


def _plane_waves(stack: Stack, wavelength: Real) -> Iterator[Check]:
    figure, count = against_tmm(stack, wavelength)
    dull = [layer.repaired.index(wavelength).imag.max() for layer in stack.layers if layer.plate]
    bound = PLANE_WAVES + PER_PLATE_K * float(max(dull, default=0.0))
    said = f"R and every layer's absorptance against the tmm library, {count} values at {len(wavelength)} wavelengths"
    yield _judged("plane waves", figure, bound, said)


def _reciprocity(stack: Stack, wavelength: Real, settings: Settings) -> Iterator[Check]:
    bound = RECIPROCITY
    for side, figure in reciprocity(stack, wavelength, settings):
        said = f"light sent {side} against the film's absorption of light from {side}, isotropic and even births"
        yield _judged(f"reciprocity {side}", figure, bound, said)


def _exchange(stack: Stack, wavelength: Real, settings: Settings) -> Iterator[Check]:
    figure, names = exchange(stack, wavelength, settings)
    if not names:
        yield Check("exchange between layers", None, None, NOTE, "no two thin layers to compare")
        return
    said = f"what each sends the others and gets back: {', '.join(names)} (k at least {LEAST_K:g})"
    yield _judged("exchange between layers", figure, EXCHANGE, said)


def _paths(result: Result) -> Iterator[Check]:
    figure = float(np.abs(_table(result)["closure"]).max())
    yield _judged(
        "power by two paths",
        figure,
        PATHS,
        "light that can leave and bound light, each on its own path, less all of it",
    )


def _doubled(stack: Stack, result: Result, settings: Settings) -> Iterator[Check]:
    fine = replace(Settings(), finer=2 * max(1, settings.finer), tolerance=0.1 * Settings().tolerance)
    finer = _table(solve(stack, settings=fine))
    figure = max(float(np.abs(finer[name] - _table(result)[name]).max()) for name in (*SHARES, "rate_factor"))
    yield _judged(
        "doubled quadrature",
        figure,
        DOUBLED,
        "largest change of a share or rate with twice the nodes, a tenth of the tolerance",
    )


def _models(result: Result) -> Iterator[Check]:
    """Compare wave and ray with the difference to be expected of them."""
    stack = result.stack
    if result.table is None:
        yield Check("wave against ray", None, None, NOTE, "the film is a plate: ray optics alone")
        return
    figure = max(abs(result.wave_minus_ray[name]) for name in (*ENDS, "trapped"))
    wavelength, weight = stack.light.wavelengths_nm, result.table["birth_weight"].to_numpy(dtype=float)
    mean, width = linewidth(wavelength, weight)
    index = float(weight @ stack.film.repaired.index(wavelength).real)
    thickness = stack.film.thickness_nm
    length = coherence_length_nm(wavelength_nm=mean, index=index, fwhm_nm=width) if width else np.inf
    bound = NEAR_FACES * mean / (2.0 * index * thickness) + FRINGE * float(np.exp(-thickness / length))
    expected = f"{NEAR_FACES:g} lambda/(2 n d) + {FRINGE:g} exp(-d/L), L = {length:.0f} nm"
    said = f"largest difference of an average; expected up to {expected}"
    if _couples_by_evanescence(result):
        yield Check(
            "wave against ray",
            figure,
            bound,
            NOTE,
            f"{said}; a neighbour denser than the film or a metal: rays leave that out",
        )
        return
    yield _judged("wave against ray", figure, bound, said)


def _couples_by_evanescence(result: Result) -> bool:
    drawing = plain(result.stack, result.stack.light.wavelengths_nm)
    film = drawing.index[drawing.film].real
    metal = bool(((drawing.index**2).real < 0.0).any())
    dark = any(swallows(drawing, medium).any() for medium in (0, len(drawing.index) - 1))
    return metal or dark or bool((np.delete(drawing.index.real, drawing.film, axis=0) > film).any())


def _chance(stack: Stack, wavelength: Real, settings: Settings, seed: int) -> Iterator[Check]:
    drawing = replace(
        plain(stack, wavelength), in_plane=stack.emission.horizontal_share, free=(stack.above.free, stack.below.free)
    )
    found = follow(_scene(drawing), rays=RAYS, seed=seed)
    ledger = ledger_of(drawing, settings, model="ray")
    ray = np.array([ledger.shares[end][0] for end in ENDS])
    away = np.abs(found.shares - ray) / found.errors
    worst = int(np.argmax(away))
    end = ENDS[worst].replace("_", " ")
    said = (
        f"{found.rays} rays followed by chance at {wavelength[0]:g} nm, standard errors of {end}: "
        f"{found.shares[worst]:.4f} +- {found.errors[worst]:.4f} against {ray[worst]:.4f}"
    )
    yield _judged("rays by chance", float(away[worst]), SIGMAS, said)


def _scene(drawing: Drawing) -> Any:
    return next(scene for _, scene in scenes(drawing))
