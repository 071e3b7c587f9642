"""The figure of a table's fitness: n, k and the absorption, with what was found marked."""

from textwrap import shorten
from typing import TYPE_CHECKING

import numpy as np
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure
from matplotlib.ticker import MaxNLocator

from optics.output.figures import DPI, SMALL
from optics.output.palette import DARK, ENDS
from optics.units import absorption_per_cm, energy_eV, wavelength_nm

if TYPE_CHECKING:
    from matplotlib.axes import Axes

    from optics.media.checks import Finding, Fitness

SIZE_INCH = (8.0, 8.4)
FAULT = "#c0392b"
TICK_ROOM = 0.05  # of the width
DECADES = 8  # of absorption that are shown below its largest


def fitness_figure(found: "Fitness") -> Figure:
    """Draw n with the n that k implies, k, and the absorption on a logarithmic scale, against wavelength.

    Parameters
    ----------
    found
        What `optics.media.checks.examine` returned.
    """
    figure = Figure(figsize=SIZE_INCH, dpi=DPI)
    FigureCanvasAgg(figure)
    axes = figure.subplots(3, 1, sharex=True)
    figure.subplots_adjust(left=0.11, right=0.97, bottom=0.07, top=0.86, hspace=0.09)
    x = found.wavelength_nm
    axes[0].plot(x, found.n, color=ENDS[1].colour)
    axes[0].set_ylabel("n")
    axes[1].plot(x, found.k, color=ENDS[0].colour)
    axes[1].set_ylabel("k")
    _draw_absorption(axes[2], found)
    for each in axes:
        each.set_xlim(x[0], x[-1])
        each.spines[["top", "right"]].set_visible(False)
    axes[2].set_xlabel("wavelength (nm)")
    _energies_above(axes[0], x)
    _draw_implied(axes[0], found)
    for finding in found.findings:
        _mark(list(axes), found, finding)
    verdict = "fit" if found.fit else "unfit as it is"
    figure.text(0.11, 0.965, shorten(f"{found.name}: {verdict}", 80), fontsize=11, parse_math=False)
    said = [finding.short for finding in found.findings if finding.fault]
    figure.text(0.11, 0.945, shorten("; ".join(said), 115), fontsize=SMALL, color=FAULT, parse_math=False)
    return figure


def _draw_absorption(axes: "Axes", found: "Fitness") -> None:
    alpha = absorption_per_cm(found.k, found.wavelength_nm)
    axes.set_ylabel("absorption (1/cm)")
    if not (alpha > 0.0).any():
        axes.plot(found.wavelength_nm, alpha, color=ENDS[0].colour)
        return
    axes.plot(found.wavelength_nm, np.where(alpha > 0.0, alpha, np.nan), ".-", markersize=2, color=ENDS[0].colour)
    axes.set_yscale("log")
    top = float(alpha.max())
    axes.set_ylim(max(float(alpha[alpha > 0.0].min()), top / 10**DECADES) / 2, top * 2)


def _energies_above(axes: "Axes", x: np.ndarray) -> None:
    last, first = energy_eV(x[[0, -1]])
    energies: list[float] = []
    for each in MaxNLocator(8).tick_values(first, last)[::-1]:  # from the left, leaving room for each number
        here = float(wavelength_nm(each))
        room = TICK_ROOM * float(x[-1] - x[0])
        if first <= each <= last and (not energies or here - float(wavelength_nm(energies[-1])) > room):
            energies.append(float(each))
    upper = axes.secondary_xaxis("top")
    upper.set_xticks(wavelength_nm(energies).tolist(), [f"{each:.10g}" for each in energies])
    upper.set_xlabel("photon energy (eV)")


def _draw_implied(axes: "Axes", found: "Fitness") -> None:
    implied = found.consistency
    if implied is None:
        return
    axes.plot(implied.wavelength_nm, implied.n_from_k, color=DARK, linewidth=0.8, linestyle="--")
    low, high = axes.get_ylim()
    beside = found.n[found.wavelength_nm > found.wavelength_nm[0] + 0.65 * np.ptp(found.wavelength_nm)]
    height = 0.92 if beside.max() < low + 0.85 * (high - low) else 0.05
    said = "dashed: n that k implies"
    axes.text(0.99, height, said, transform=axes.transAxes, ha="right", fontsize=SMALL, color=DARK)


def _mark(axes: "list[Axes]", found: "Fitness", finding: "Finding") -> None:
    """Mark where something was found, in the panel that shows it."""
    at = finding.at_nm
    if not at:
        return
    if finding.kind == "tail":
        floor = found.floor
        axes[2].axvspan(at[0], found.wavelength_nm[-1], color=FAULT, alpha=0.10, linewidth=0)
        axes[2].axvline(at[0], color=FAULT, linewidth=0.8)
        right = at[0] > 0.6 * found.wavelength_nm[0] + 0.4 * found.wavelength_nm[-1]
        word = f"floor from {at[0]:.0f} nm "
        axes[2].text(
            at[0],
            0.06,
            f" {word}",
            transform=axes[2].get_xaxis_transform(),
            fontsize=SMALL,
            color=FAULT,
            ha="right" if right else "left",
        )
        if floor is not None:
            _draw_edge(axes[2], floor.steepest_nm, floor.steepest_meV, found)
    elif finding.kind == "gap":
        for first, last in zip(at[::2], at[1::2], strict=True):
            for each in axes:
                each.axvspan(first, last, color=FAULT, alpha=0.15, linewidth=0)
    elif finding.kind in ("noise", "sign"):
        axes[1].axvspan(*at, color=FAULT, alpha=0.12, linewidth=0)
        high = {"noise": 0.9, "sign": 0.8}[finding.kind]
        place = (float(np.mean(at)), high)
        scale = axes[1].get_xaxis_transform()
        axes[1].text(*place, finding.short, transform=scale, ha="center", fontsize=SMALL, color=FAULT)
    elif finding.kind == "outlier":
        panel, values = (axes[0], found.n) if finding.said.startswith("n") else (axes[1], found.k)
        height = np.interp(at, found.wavelength_nm, values)
        panel.plot(at, height, "o", markersize=7, fillstyle="none", color=FAULT)
    elif finding.kind == "kramers-kronig":
        axes[0].axvline(at[0], color=FAULT, linewidth=0.8)


def _draw_edge(axes: "Axes", steepest_nm: float, meV: float, found: "Fitness") -> None:
    """Draw the straight line that the edge would go on along."""
    alpha = float(np.interp(steepest_nm, found.wavelength_nm, absorption_per_cm(found.k, found.wavelength_nm)))
    low, high = axes.get_ylim()
    span = np.array([min(high, alpha * 3), max(low, alpha / 300)])
    energy = energy_eV(steepest_nm) + meV * 1e-3 * np.log(span / alpha)
    axes.plot(wavelength_nm(energy), span, color=DARK, linewidth=0.8, linestyle="--", scalex=False, scaley=False)
    place = (float(wavelength_nm(energy.mean())), float(np.sqrt(span[0] * span[1])))
    axes.annotate(f"{meV:.0f} meV", place, (6, 2), textcoords="offset points", fontsize=SMALL, color=DARK)
