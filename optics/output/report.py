"""What the screen shows: plain text, no more digits than the error supports."""

from collections.abc import Iterator, Mapping, Sequence
from pathlib import Path
from typing import TYPE_CHECKING

from optics.assumptions import length_text
from optics.output.numbers import decimals_for
from optics.output.readings import readings_text
from optics.output.result import largest_closure

if TYPE_CHECKING:
    from optics.fate.solve import Result
    from optics.stack import Layer, Stack

CELL = 12  # characters of a column at least
ROWS = (
    ("trapped", "trapped"),
    ("reabsorbed", "  reabsorbed"),
    ("waveguided", "  waveguided"),
    ("substrate", "substrate"),
    ("cover", "cover"),
    ("free_below", "free below"),
    ("free_above", "free above"),
    ("elsewhere", "elsewhere"),
)


def report(
    result: "Result",
    *,
    folder: Path | None = None,
    uncertainty: Mapping[str, float] | None = None,
    known: Sequence[str] = (),
) -> str:
    """Return what to show of a result.

    Parameters
    ----------
    result
        What `optics.solve` returned.
    folder
        Where its files are.
    uncertainty
        How far each share moves within the uncertainty of the inputs, where that is known.
    known
        What that uncertainty rests on, a line each.
    """
    parts = [
        "\n".join(heading(result.stack)),
        listed("Assumed", result.assumptions),
        listed("Warnings", result.warnings),
        "\n".join([*_table(result, uncertainty or {}), *known]),
        *("\n".join(part(result)) for part in (_depth, _outside, _radiation, _sampled)),
        "\n".join(_trust(result)),
        f"Files: {folder}" if folder else "",
    ]
    return "\n\n".join(part for part in parts if part)


def _sampled(result: "Result") -> Iterator[str]:
    """Yield the near field where asked for, the ends of held and guided light and all readings of a sample."""
    asked = result.stack.emission.near_field
    if asked is not None and "near_field" in result.averages:
        near = result.averages["near_field"]
        yield (
            f"Near field per photon born: {near:.4f} (up to an index of {asked.to_index:g}, "
            f"births {asked.stand_off_nm:g} nm off the faces; not part of the shares)"
        )
    if result.sample is not None:
        yield from readings_text(result.sample)
        yield from (f"Warning: {line}" for line in result.sample.warnings)


def stack_line(stack: "Stack") -> str:
    """Return a stack in one line, from above to below."""
    layers = [_layer(layer) for layer in stack.layers]
    return " / ".join([stack.above.material.name, *layers, stack.below.material.name])


def _layer(layer: "Layer") -> str:
    return (
        f"{layer.name} {length_text(layer.thickness_nm)}"
        + (" (emits)" if layer.emits else "")
        + (" (plate)" if layer.plate else "")
    )


def heading(stack: "Stack") -> Iterator[str]:
    """Yield title, stack and wavelengths, a line each."""
    if stack.title:
        yield stack.title
    yield stack_line(stack)
    first, last = stack.light.range_nm
    count = stack.light.wavelengths_nm.size
    yield f"{count} wavelengths, {first:g} to {last:g} nm" if count > 1 else f"1 wavelength, {first:g} nm"


def listed(name: str, lines: Sequence[str]) -> str:
    """Return a named list, nothing where it has no lines."""
    return "\n".join([f"{name}:", *(f"  - {line}" for line in lines)]) if lines else ""


def _table(result: "Result", uncertainty: Mapping[str, float]) -> Iterator[str]:
    """Yield the table of ends; trapped leads, because the cut between its two parts is a convention."""
    decimals = decimals_for(result.numerical_error)
    columns: list[tuple[str, Mapping[str, float], str]] = [("ray", result.ray_averages, "")]
    if result.table is not None:
        columns = [("wave", result.averages, ""), *columns, ("wave - ray", result.wave_minus_ray, "+")]
    if result.moved_by_tail:
        columns.append(("by the tail", result.moved_by_tail, "+"))
    if uncertainty:
        columns.append(("inputs +-", uncertainty, ""))
    widths = [max(CELL, len(name) + 2) for name, _, _ in columns]
    yield "Share of photons born" + "".join(f"{c[0]:>{wide}}" for c, wide in zip(columns, widths, strict=True))
    for share, name in ROWS:
        cells = [_number(values.get(share), decimals, sign) for _, values, sign in columns]
        yield f"{name:<21}" + "".join(f"{cell:>{wide}}" for cell, wide in zip(cells, widths, strict=True))


def _depth(result: "Result") -> Iterator[str]:
    """Yield the pump and what the three readings of it give; they bracket a pulsed measurement."""
    pump = result.pump
    if pump is None:
        return
    decimals = decimals_for(result.numerical_error)
    yield f"Pump absorbed in the film: {pump.absorbed:.4f} of what comes in"
    mean, peak = pump.carriers_per_cm3, pump.peak_carriers_per_cm3
    yield f"Carriers for 1 uJ/cm2: {mean:.3g} 1/cm3 in the mean, {peak:.3g} 1/cm3 at most"
    yield "Births over depth     " + "".join(f"{name:>12}" for name in result.depth_averages)
    for share, name in (*ROWS, ("rate_factor", "rate factor")):
        cells = [_number(averages[share], decimals, "") for averages in result.depth_averages.values()]
        yield f"{name:<22}" + "".join(f"{cell:>12}" for cell in cells)


def _outside(result: "Result") -> Iterator[str]:
    """Yield what an aperture gathers, and how a measurement fits."""
    collection = result.stack.collection
    if collection is not None:
        decimals = decimals_for(result.numerical_error)
        models = (
            {"ray": result.ray_averages}
            if result.table is None
            else {"wave": result.averages, "ray": result.ray_averages}
        )
        shares = ", ".join(f"{name} {_number(each['collected'], decimals, '')}" for name, each in models.items())
        yield f"Collected {collection.side} with NA {collection.na:g}: {shares} of the photons born"
    measured = result.measured
    if measured is not None:
        yield f"Measured light laid over {measured.curve}: {measured.misfit:.1%} of its peak apart (root mean square)"


def _radiation(result: "Result") -> Iterator[str]:
    """Yield what the absorption implies for the dark."""
    said = result.radiation
    if said is None:
        return
    yield (
        f"Equilibrium emission rate at {said.temperature_K:g} K: {said.equilibrium_rate:.4g} 1/(cm3 s) in the bulk, "
        f"{said.equilibrium_rate_in_stack:.4g} in this stack (times the mean rate factor)"
    )
    if said.coefficient is not None:
        bulk, stack = said.coefficient, said.coefficient_in_stack
        yield f"Radiative coefficient: {bulk:.4g} cm3/s in the bulk, {stack:.4g} cm3/s in this stack"


def _number(value: float | None, decimals: int, sign: str) -> str:
    if value is None:
        return ""
    rounded = round(value, decimals) + 0.0  # adding 0.0 makes -0.0 plain
    return f"{rounded:{sign if rounded else ''}.{decimals}f}"


def _trust(result: "Result") -> Iterator[str]:
    decimals = decimals_for(result.numerical_error)
    if result.table is not None:
        yield "Reabsorbed and waveguided are cut apart by a convention; their sum, trapped, is not."
        yield f"Rate factor: {result.averages['rate_factor']:.{decimals}f}"
    yield f"Closure: {largest_closure(result):.0e} at worst"
    yield f"Numerical error of the shares: {result.numerical_error:.0e} (largest estimate; inputs not counted)"
    yield f"Advised model: {result.advised_model}. {result.advice}"
