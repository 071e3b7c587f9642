"""A drawing's ledger by either model, its wavelengths shared out among threads."""

from concurrent.futures import ThreadPoolExecutor
from dataclasses import replace

import numpy as np

from optics.arrays import Index
from optics.fate import ray, wave_account
from optics.fate.ledger import Account, Ledger, draw_up, merge
from optics.fate.scenes import Drawing, scenes
from optics.fate.uneven import doubted, evened, mean_of
from optics.fate.wave import Settings

FEWEST_A_THREAD = 40
"""Wavelengths below which a thread is not worth its start."""

MODELS = {"wave": wave_account.account, "ray": ray.account}


def ledger_of(drawing: Drawing, settings: Settings, *, model: str) -> Ledger:
    """Return the ledger of one model, ``"wave"`` or ``"ray"``; of an uneven film, the mean over its thicknesses."""
    if drawing.uneven:
        fine, coarse = (
            mean_of([(weight, ledger_of(part, settings, model=model)) for weight, part in evened(drawing, rule)])
            for rule in drawing.uneven
        )
        return doubted(fine, coarse)
    count = len(drawing.wavelength_nm)
    threads = max(1, min(settings.threads, count // FEWEST_A_THREAD))
    # every n-th wavelength: hard ones come in rows and are shared out alike
    shares = [np.arange(first, count, threads) for first in range(threads)]
    if threads == 1:
        parts = [_accounted(drawing, shares[0], settings, model)]
    else:
        with ThreadPoolExecutor(threads) as pool:
            parts = list(pool.map(lambda share: _accounted(drawing, share, settings, model), shares))
    walls = [medium for medium, plate in enumerate(drawing.plate) if plate and medium != drawing.film]
    whole = merge([piece for part in parts for piece in part], count)
    return draw_up(whole, film=drawing.film, walls=walls)


def _accounted(drawing: Drawing, share: Index, settings: Settings, model: str) -> list[tuple[Index, Account]]:
    part = replace(drawing, wavelength_nm=drawing.wavelength_nm[share], index=drawing.index[:, share])
    return [(share[chosen], MODELS[model](scene, settings)) for chosen, scene in scenes(part)]
