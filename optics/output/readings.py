"""Readings and yields as text and as tables."""

from collections.abc import Iterator, Sequence
from dataclasses import asdict
from typing import TYPE_CHECKING, Any

from optics.output.numbers import decimals_for

if TYPE_CHECKING:
    from pandas import DataFrame

    from optics.fate.implied import Given, Implied
    from optics.fate.readings import Reading
    from optics.fate.sampled import Sampled
    from optics.sample import Sample

READINGS_CSV, ENDS_CSV = "readings.csv", "ends.csv"
LIGHTS = (("first", "neither"), ("held", "held"), ("guided", "guided"), ("scattered", "scattered"))
PLACES = (
    ("film", ("reabsorbed", "to_film")),
    ("layers", ("elsewhere", "to_layers")),
    ("faces", ("free_above", "free_below", "to_free")),
    ("outer", ("to_outer",)),
    ("edge", ("at_edge",)),
    ("no end", ("unfinished",)),
)
WIDTH = 10


def readings_text(sampled: "Sampled") -> Iterator[str]:
    """Yield the table of ends of this sample and that of all readings, which are never shown apart."""
    decimals = decimals_for(sampled.error)
    yield from _ends(sampled, decimals)
    yield ""
    heads = ("p_r", "p_e", "p_a", "bulk p_r", "bulk p_e", "bulk p_a")
    yield f"{'Reading':<26}" + "".join(f"{name:>{WIDTH}}" for name in heads)
    for reading in sampled.readings:
        yield _reading(
            _named(reading.name, sampled.sample), (reading.p_r, reading.p_e, reading.p_a), reading.bulk, decimals
        )
    if sampled.model == "wave":
        for reading in sampled.ray_readings:
            name = f"  {reading.name}, rays"
            yield _reading(name, (reading.p_r, reading.p_e, reading.p_a), reading.bulk, decimals)
    for limit in sampled.scrambled:
        name = "scrambled, open faces" if limit.open_faces else "scrambled, these faces"
        yield _reading(name, (limit.p_r, limit.p_e, limit.p_a), None, decimals)
    yield "p_r: the film takes it back and makes carriers; p_e: it leaves; p_a: lost. faces: held light lost;"
    yield "wide: no edges, held light followed to its end; sphere: light at the edge leaves too. bulk: per emission in"
    yield "the bulk. P (rate factor) and p_r depend on where the film's exchange with itself is cut, P (p_e + p_a) not."


def _named(name: str, sample: "Sample") -> str:
    return f"{name}, edge at {sample.to_edge_mm:g} mm" if name in ("sphere", "lost edges") else name


def _reading(name: str, shares: Sequence[float], bulk: Sequence[float] | None, decimals: int) -> str:
    return f"{name:<26}" + "".join(_cell(value, decimals) for value in (*shares, *(bulk or ())))


def _cell(value: float, decimals: int) -> str:
    return f"{round(value, decimals) + 0.0:>{WIDTH}.{decimals}f}"  # adding 0.0 makes -0.0 plain


def _ends(sampled: "Sampled", decimals: int) -> Iterator[str]:
    """Yield where first, held, guided and scattered light ends in a sample with this edge."""
    sample = sampled.sample
    yield f"{f'Ends, edge at {sample.to_edge_mm:g} mm':<26}" + "".join(f"{name:>{WIDTH}}" for name, _ in PLACES)
    for light, name in LIGHTS:
        cells = [sum(sampled.averages.get(("edged", light, place), 0.0) for place in places) for _, places in PLACES]
        if any(round(cell, decimals) for cell in cells):
            yield f"{f'{name} light':<26}" + "".join(_cell(cell, decimals) for cell in cells)


def yields_text(rows: Sequence["Implied"], known: "Given", *, temperature_K: float) -> Iterator[str]:
    """Yield the table of what a yield implies, a line a reading; no +- where none was given, for that is not zero."""
    other = "external" if known.kind == "internal" else "internal"
    spread = f" +- {known.sd:g}" if known.sd else ""
    where = " in this stack" if known.kind == "internal" else ""
    yield f"{known.kind.capitalize()} yield {known.value:g}{spread}{where}"
    heads = (other, *(("+-",) if known.sd else ()), "bulk", "recycled", "rate x", "life x", "mV", "largest")
    yield f"{'Reading':<14}" + "".join(f"{head:>{WIDTH}}" for head in heads)
    for row in rows:
        if row.values is None:
            room = (len(heads) - 1) * WIDTH
            yield f"{row.reading.name:<14}{'more than this reading allows':>{room}}{row.largest:>{WIDTH}.4f}"
            continue
        v = row.values
        value = v.external if other == "external" else v.internal
        spread_of = [f"{row.sd:.4f}" + ("*" if row.cut else "")] if known.sd else []
        cells = [f"{value:.4f}", *spread_of, f"{v.bulk:.4f}", f"{v.recycled:.3f}"]
        cells += [f"{v.radiative_factor:.4f}", f"{v.lifetime_factor:.3f}", f"{1e3 * v.voltage_V:.1f}"]
        yield f"{row.reading.name:<14}" + "".join(f"{cell:>{WIDTH}}" for cell in (*cells, f"{row.largest:.4f}"))
    if known.sd and any(row.cut for row in rows):
        yield "* one standard deviation reaches past what is possible; the table yields.csv has where it is cut."
    yield "bulk: internal yield of the material in the bulk; recycled: times a photon is taken back per excitation;"
    yield "rate x: radiative coefficient over the bulk's; life x: lifetime over that without recycling;"
    yield f"mV: (kT/e) ln of the external yield at {temperature_K:g} K; largest: external yield at internal 1."


def readings_table(sampled: "Sampled") -> "DataFrame":
    """Return all readings of both models and the scrambled limits, a row each."""
    import pandas as pd

    rows = [_row(sampled.model, reading) for reading in sampled.readings]
    if sampled.model == "wave":
        rows += [_row("ray", reading) for reading in sampled.ray_readings]
    for limit in sampled.scrambled:
        name = "open faces" if limit.open_faces else "these faces"
        rows.append({"model": "scrambled", "reading": name, "p_r": limit.p_r, "p_e": limit.p_e, "p_a": limit.p_a})
    return pd.DataFrame(rows)


def _row(model: str, reading: "Reading") -> dict[str, Any]:
    bulk = dict(zip(("p_r_bulk", "p_e_bulk", "p_a_bulk"), reading.bulk, strict=True))
    shares = {"p_r": reading.p_r, "p_e": reading.p_e, "p_a": reading.p_a, "rate_factor": reading.rate_factor}
    return {"model": model, "reading": reading.name} | shares | bulk


def sample_summary(sampled: "Sampled") -> dict[str, Any]:
    """Return the readings and the mean ends in plain values."""
    ends: dict[str, dict[str, dict[str, float]]] = {}
    for (sample, light, place), value in sampled.averages.items():
        ends.setdefault(sample, {}).setdefault(light, {})[place] = value
    return {
        "model": sampled.model,
        "readings": {each.name: asdict(each) for each in sampled.readings},
        "ray_readings": {each.name: asdict(each) for each in sampled.ray_readings},
        "scrambled": [asdict(each) for each in sampled.scrambled],
        "ends": ends,
        "numerical_error_of_held_light": sampled.error,
        "warnings": sampled.warnings,
    }
