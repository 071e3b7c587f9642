"""Ledgers of drawings by either model; scenes of one structure are integrated side by side."""

from collections.abc import Hashable, Sequence

from optics.arrays import Index
from optics.fate import ray, wave, wave_account
from optics.fate.ledger import Account, Ledger, draw_up, merge
from optics.fate.scenes import Drawing, scenes
from optics.fate.uneven import doubted, evened, mean_of
from optics.fate.wave import Settings
from optics.waves.scene import Scene, side_by_side

MODELS = {"wave": wave_account.account, "ray": ray.account}

MOST_WAVELENGTHS, PER_DEPTH = 4000, 16.0
"""Wavelengths side by side, fewer by one and the phase through the group over the second: memory stays flat."""


def ledger_of(drawing: Drawing, settings: Settings, *, model: str) -> Ledger:
    """Return the ledger of one model, ``"wave"`` or ``"ray"``; of an uneven film, the mean over its thicknesses."""
    return ledgers_of([drawing], settings, model=model)[0]


def ledgers_of(drawings: Sequence[Drawing], settings: Settings, *, model: str) -> list[Ledger]:
    """Return the ledgers of several drawings, the same as one by one but in less time.

    Calls on small arrays cost more than the arithmetic, and films that differ in thickness alone share the halves of
    their thin groups.
    """
    patches = [[evened(drawing, rule) for rule in drawing.uneven] or [[(1.0, drawing)]] for drawing in drawings]
    even = iter(_even_ledgers([part for rules in patches for rule in rules for _, part in rule], settings, model))
    found = []
    for drawing, rules in zip(drawings, patches, strict=True):
        means = [[(weight, next(even)) for weight, _ in rule] for rule in rules]
        found.append(doubted(*map(mean_of, means)) if drawing.uneven else means[0][0][1])
    return found


def _even_ledgers(drawings: Sequence[Drawing], settings: Settings, model: str) -> list[Ledger]:
    pieces: list[list[tuple[Index, Account]]] = [[] for _ in drawings]
    waiting: dict[Hashable, list[tuple[int, Index, Scene]]] = {}
    for number, drawing in enumerate(drawings):
        for chosen, scene in scenes(drawing):
            waiting.setdefault(_structure(scene, model), []).append((number, chosen, scene))
    for alike in waiting.values():
        for batch in _batches(alike):
            whole, places = side_by_side([scene for _, _, scene in batch])
            account = MODELS[model](whole, settings)
            for (number, chosen, _), place in zip(batch, places, strict=True):
                pieces[number].append((chosen, account.at(place)))
    return [_drawn_up(drawing, parts) for drawing, parts in zip(drawings, pieces, strict=True)]


def _structure(scene: Scene, model: str) -> Hashable:
    """Return what scenes have in common that ask for the same nodes."""
    seen = ray.real_film(scene) if model == "ray" else scene
    guides = ray.guides_of(seen) if model == "ray" else wave.guides_of(seen)
    paces = tuple(scene.depth_through(guide.layers) for guide in guides)
    media = scene.film, scene.sides, scene.layers_up, scene.layers_down
    return media, scene.in_plane, id(scene.moments), scene.depth, guides, paces


def most_together(wavelengths: int, depth: float) -> int:
    """Return how many drawings of so many wavelengths, ``depth`` the phase through the group, stand side by side."""
    return max(1, int(MOST_WAVELENGTHS / (1.0 + depth / PER_DEPTH) / wavelengths))


def _batches(alike: list[tuple[int, Index, Scene]]) -> list[list[tuple[int, Index, Scene]]]:
    size = most_together(max(scene.wavelengths for _, _, scene in alike), alike[0][2].depth)
    return [alike[at : at + size] for at in range(0, len(alike), size)]


def _drawn_up(drawing: Drawing, parts: Sequence[tuple[Index, Account]]) -> Ledger:
    walls = [medium for medium, plate in enumerate(drawing.plate) if plate and medium != drawing.film]
    return draw_up(merge(parts, len(drawing.wavelength_nm)), film=drawing.film, walls=walls)
