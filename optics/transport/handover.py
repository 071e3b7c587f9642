"""What a recycling, diffusion or device model takes over from a stack: tables and averaged numbers in one place."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from optics.arrays import Real
from optics.fate.account import ledger_of
from optics.fate.drawing import drawing_of
from optics.fate.ends import SampleEnds, follow
from optics.fate.ledger import SHARES
from optics.fate.readings import LOST_EDGES, READINGS, Reading, per_wavelength, readings
from optics.fate.solve import Result, solve
from optics.fate.wave import Settings
from optics.roughness import graded
from optics.sample import Sample, at_wavelengths
from optics.stack import Stack
from optics.transport.depth import InDepth, indepth
from optics.transport.depthtables import by_wavelength_table
from optics.transport.inplane import InPlane, inplane
from optics.transport.landing import ENDS
from optics.transport.receivers import ALL, Receivers, receivers
from optics.units import absorption_per_cm

if TYPE_CHECKING:
    import pandas as pd

SLICES = 20
"""Slices of the depth matrix where nothing is said."""

WORTH_SAYING = 1e-5
"""Difference of kernel and ledger that deserves a warning; numerical errors are below it."""

TO = "to:"
"""How the columns of receivers begin that name a layer."""

TAKEN = "taken:"
"""How the columns of modes begin that say what a layer absorbs."""


@dataclass(frozen=True)
class Handover:
    """Everything of one stack that another model may read.

    Attributes
    ----------
    result
        What `optics.solve` returned.
    tables
        By name, the most wanted first; columns carry their unit in their name.
    numbers
        Averages over all photons born, by name.
    warnings, assumptions
        Sentences, those of ``result`` included.
    """

    result: Result
    tables: dict[str, pd.DataFrame]
    numbers: dict[str, float]
    warnings: tuple[str, ...]
    assumptions: tuple[str, ...]


def hand_over(stack: Stack, *, slices: int = SLICES, full: bool = False, settings: Settings | None = None) -> Handover:
    """Work out everything that a model may take over from a stack.

    Parameters
    ----------
    stack
        The stack, with one layer that emits; without a sample of its own its readings are those of a sample of
        defaults.
    slices
        Even slices of the film for its depth matrix.
    full
        Whether the depth matrix is wanted wavelength by wavelength too.
    settings
        How finely to integrate.

    Raises
    ------
    InputError
        As `optics.solve`.
    """
    settings = settings or Settings()
    result = solve(stack, settings=settings)
    plane = inplane(stack, settings=settings)
    depth = indepth(stack, slices=slices, settings=settings)
    who = receivers(stack, settings=settings)
    read, by_wavelength = _readings(result, settings)
    tables = {} if result.table is None else {"outcomes": result.table}
    tables |= {
        "outcomes_ray": result.ray_table,
        "readings": readings_table(read),
        "radiative": radiative_table(result, read),
        "kernel": plane.kernel,
        "exponentials": plane.exponentials,
        "compact": plane.compact,
        **depth_tables(depth),
        **({} if result.depth is None else {"birth_depth": result.depth}),
        "index": index_table(result),
        "where": result.where,
        "receivers": receivers_table(who),
        "spectra": result.spectra,
        "reading_spectra": by_wavelength,
        "guided_spectrum": plane.guided_spectrum,
    }
    if len(plane.modes):
        fixed, absorbers = mode_tables(plane.modes)
        tables |= {"modes": fixed, "mode_absorbers": absorbers}
    tables["kernel_spectra"] = plane.by_wavelength
    if full:
        tables["depth_spectra"] = by_wavelength_table(depth)
    return Handover(
        result,
        tables,
        numbers_of(result, read) | plane_numbers(plane),
        _once(result.warnings, plane.warnings, depth.warnings, _unkerneled(result, plane)),
        _once(result.assumptions, plane.assumptions, depth.assumptions, who.assumptions, (_sample_said(stack),)),
    )


def _once(*sentences: tuple[str, ...]) -> tuple[str, ...]:
    return tuple(dict.fromkeys(each for part in sentences for each in part))


def _unkerneled(result: Result, plane: InPlane) -> tuple[str, ...]:
    """Say so where the kernel in the plane holds less or more than the ledger's film share."""
    whole = result.averages["reabsorbed"] + result.averages["guided_reabsorbed"]
    found = plane.averages["taken_back"]
    if abs(found - whole) < WORTH_SAYING:
        return ()
    return (
        f"the kernel in the plane holds {found:.4f} of the births, the film takes back {whole:.4f}: the rest is bound "
        "light that neither modes nor rays of the film carry, and has no distance",
    )


def _sample_said(stack: Stack) -> str:
    sample = stack.sample or Sample()
    given = "" if stack.sample else " (no sample given)"
    return f'readings: the edge lies at {sample.to_edge_mm:g} mm, edges = "{sample.edges}"{given}'


def plane_numbers(plane: InPlane) -> dict[str, float]:
    """Return the averages of transport in the plane by names that end in their unit."""
    renamed = {"within_90_um": "90_percent_within_um", "within_99_um": "99_percent_within_um"}
    return {f"inplane_{renamed.get(name, name)}": value for name, value in plane.averages.items()}


def depth_tables(depth: InDepth) -> dict[str, pd.DataFrame]:
    """Return the depth matrix averaged over the births, tidy, and what of each slice of birth ends elsewhere."""
    import pandas as pd

    edges, lead = depth.edges_nm, depth.lead
    count = len(edges) - 1
    birth, landing = np.repeat(np.arange(count), count), np.tile(np.arange(count), count)
    matrix = pd.DataFrame(
        {
            "birth_from_nm": edges[birth],
            "birth_to_nm": edges[birth + 1],
            "landing_from_nm": edges[landing],
            "landing_to_nm": edges[landing + 1],
            "share": lead.matrix.ravel(),
        }
    )
    head = {"birth_from_nm": edges[:-1], "birth_to_nm": edges[1:], "rate_factor": lead.rate_factor}
    ends = dict(zip(ENDS, lead.ends.T, strict=True))
    return {"depth_matrix": matrix, "depth_slices": pd.DataFrame(head | {"film": lead.matrix.sum(axis=1)} | ends)}


def receivers_table(who: Receivers) -> pd.DataFrame:
    """Return who takes the light of whom, tidy: source, receiver (a layer by name, or another end), share."""
    sources = who.table[who.table["source"] != ALL]
    wide = sources.drop(columns=["births_share", "rate_factor"])
    tidy = wide.melt(id_vars="source", var_name="receiver", value_name="share")
    return tidy.assign(receiver=tidy["receiver"].str.removeprefix(TO))


def mode_tables(modes: pd.DataFrame) -> tuple[pd.DataFrame, pd.DataFrame]:
    """Return the modes without their absorbers, and the absorbers of each, tidy."""
    keys = ["wavelength_nm", "polarisation", "order"]
    columns = [name for name in modes.columns if name.startswith(TAKEN)]
    tidy = modes.melt(id_vars=keys, value_vars=columns, var_name="layer", value_name="absorbed_share")
    tidy = tidy[tidy["absorbed_share"] > 0.0]
    tidy = tidy.assign(layer=tidy["layer"].str.removeprefix(TAKEN)).sort_values(keys, kind="stable", ignore_index=True)
    return modes.drop(columns=columns), tidy


def _readings(result: Result, settings: Settings) -> tuple[tuple[Reading, ...], pd.DataFrame]:
    """Return the readings averaged over the births, and a row a wavelength and reading."""
    import pandas as pd

    stack, model = result.stack, "ray" if result.table is None else "wave"
    table = result.ray_table if result.table is None else result.table
    sample = stack.sample or Sample()
    drawing = drawing_of(graded(stack))
    ledger = ledger_of(drawing, settings, model=model)
    ends: SampleEnds = follow(drawing, ledger, sample, settings, model=model)
    makes = at_wavelengths("recycling_share", sample.recycling_share, drawing.wavelength_nm)
    born = table["birth_weight"].to_numpy()
    factor, lost = result.averages["rate_factor"], sample.edges == "lost"
    read = readings(ends, births=born, rate_factor=factor, recycling_share=makes, edges_lost=lost)
    parts = []
    for name in (*READINGS, LOST_EDGES) if lost else READINGS:
        p_r, p_e, p_a = per_wavelength(ends, name, makes)
        head = {"wavelength_nm": drawing.wavelength_nm, "reading": name}
        parts.append(pd.DataFrame(head | {"p_r": p_r, "p_e": p_e, "p_a": p_a}))
    whole = pd.concat(parts, ignore_index=True).sort_values("wavelength_nm", kind="stable", ignore_index=True)
    return read, whole


def readings_table(read: tuple[Reading, ...]) -> pd.DataFrame:
    """Return a row a reading: its shares, and the set that refers to emission in the bulk."""
    import pandas as pd

    rows = []
    for each in read:
        p_r, p_e, p_a = each.bulk
        rows.append((each.name, each.p_r, each.p_e, each.p_a, each.rate_factor, p_r, p_e, p_a))
    columns = ("reading", "p_r", "p_e", "p_a", "rate_factor", "p_r_bulk", "p_e_bulk", "p_a_bulk")
    return pd.DataFrame(rows, columns=list(columns))


def radiative_table(result: Result, read: tuple[Reading, ...]) -> pd.DataFrame:
    """Return radiative coefficients: the bulk's, times P, and times P (1 - p_r) of each reading.

    ``factor`` is what multiplies the bulk's rate, always known. Rate and coefficient are not a number unless births
    follow from absorption (and, for the coefficient, the intrinsic carrier density is given).
    """
    import pandas as pd

    factor = result.averages["rate_factor"]
    rows: list[tuple[str, str, float]] = [("bulk", "any", 1.0), ("times P", "any", factor)]
    rows += [("times P (1 - p_r)", each.name, factor * (1.0 - each.p_r)) for each in read]
    known = result.radiation
    rate = np.nan if known is None else known.equilibrium_rate
    coefficient = np.nan if known is None or known.coefficient is None else known.coefficient
    table = pd.DataFrame(rows, columns=["quantity", "reading", "factor"])
    return table.assign(rate_per_cm3_s=table["factor"] * rate, coefficient_cm3_per_s=table["factor"] * coefficient)


def index_table(result: Result) -> pd.DataFrame:
    """Return the index values used, tidy: a row a wavelength and medium, from above to below."""
    import pandas as pd

    wide = result.index
    wavelength: Real = wide["wavelength_nm"].to_numpy()
    names = [name.removesuffix(" n") for name in wide.columns if name.endswith(" n")]
    parts = [
        pd.DataFrame(
            {
                "wavelength_nm": wavelength,
                "layer": name,
                "n": wide[f"{name} n"],
                "k": wide[f"{name} k"],
                "absorption_per_cm": absorption_per_cm(wide[f"{name} k"].to_numpy(), wavelength),
            }
        )
        for name in names
    ]
    return pd.concat(parts, ignore_index=True).sort_values("wavelength_nm", kind="stable", ignore_index=True)


def numbers_of(result: Result, read: tuple[Reading, ...]) -> dict[str, float]:
    """Return the averages by name."""
    averages = result.averages
    numbers = {name: averages[name] for name in (*SHARES, "rate_factor")}
    numbers["taken_back"] = averages["reabsorbed"] + averages["guided_reabsorbed"]
    numbers["held"] = averages["substrate"] + averages["cover"]
    numbers |= {name: averages[name] for name in ("collected",) if name in averages}
    for each in read:
        label = each.name.replace(" ", "_")
        numbers |= {f"p_r_{label}": each.p_r, f"p_e_{label}": each.p_e, f"p_a_{label}": each.p_a}
        numbers[f"radiative_factor_{label}"] = each.rate_factor * (1.0 - each.p_r)
    if result.pump is not None:
        numbers["pump_absorbed"] = result.pump.absorbed
        numbers["pump_carriers_per_cm3"] = result.pump.carriers_per_cm3
        numbers["pump_peak_carriers_per_cm3"] = result.pump.peak_carriers_per_cm3
    numbers |= {f"ray_{name}": value for name, value in result.ray_averages.items() if name in SHARES}
    if result.radiation is not None:
        numbers["temperature_K"] = result.radiation.temperature_K
    numbers["numerical_error"] = result.numerical_error
    return numbers
