"""Figures of light outside: spectra to lay over data, and the angular pattern."""

from textwrap import fill, shorten
from typing import TYPE_CHECKING, Any

import numpy as np
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure

from optics.output.figures import DPI, NOTE_CHARACTERS, SIZE_INCH, SMALL, TITLE_CHARACTERS
from optics.output.palette import DARK

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from pandas import DataFrame

    from optics.fate.overlay import Measured

ORDER = ("births", "collected", "below", "above")  # from the bottom: dashes show what they cover
# Dark to light in the order of the way out, apart in grey print and for every kind of colour vision.
CURVES = {
    "births": ("born inside", "#3b1a4f", 2.2),
    "below": ("out below (dashed)", "#a86f00", 1.6),
    "above": ("out above (dotted)", "#146c69", 2.0),
    "collected": ("collected", "#c2452d", 1.6),
}
DASHED: dict[str, Any] = {"below": (0, (6, 2)), "above": (0, (0.1, 1.9)), "births": "-", "collected": "-"}
CAPS: dict[str, Any] = {"above": "round"}  # the shortest of dashes with round ends: dots
GREY = "#777777"
FRAME = (0.09, 0.12, 0.70, 0.74)  # left, bottom, width, height: names have their column on the right
GAP = 0.055  # between names beside the plot, in heights of the plot
EDGE = 1.03  # where they begin, in widths of the plot


def spectra_figure(spectra: "DataFrame", *, measured: "Measured | None" = None, title: str = "") -> Figure:
    """Draw the shapes of what is born and of what gets out, each with its peak at 1, and a measurement fitted to one.

    Parameters
    ----------
    spectra
        Births and light per nm against ``wavelength_nm``.
    measured
        Light laid over one of the curves.
    title
        The stack's title.
    """
    fitted = "" if measured is None else ", measured points to fit theirs"
    figure, axes = _blank(title, f"each curve scaled to a peak of 1{fitted}; names with the wavelength of the peak")
    x = spectra["wavelength_nm"].to_numpy(dtype=float)
    names: list[tuple[str, str]] = []
    for key, (name, colour, width) in CURVES.items():
        column = f"{key}_per_nm"
        if column not in spectra or not spectra[column].any():
            continue
        y = spectra[column].to_numpy(dtype=float)
        axes.plot(
            x, y / y.max(), color=colour, linewidth=width, linestyle=DASHED[key], dash_capstyle=CAPS.get(key, "butt"),
            zorder=ORDER.index(key) + 2,
        )  # fmt: skip
        names.append((f"{name},\n{x[np.argmax(y)]:g} nm", colour))
    if measured is not None:
        top = spectra[f"{measured.curve}_per_nm"].max()
        axes.plot(
            measured.wavelength_nm, measured.per_nm / top, "o", markersize=2.6, color=DARK, markerfacecolor="none"
        )
        over = CURVES[measured.curve][0].partition(" (")[0]
        names.append((f"measured (circles),\nlaid over {over}", DARK))
    _list(axes, names)
    axes.set_xlim(x[0], x[-1])
    axes.set_ylim(bottom=0.0)
    axes.set_xlabel("wavelength (nm)")
    axes.set_ylabel("light per nm, peak = 1" if measured is None else "light per nm, peak of each curve = 1")
    return figure


def pattern_figure(
    pattern: "DataFrame", *, side: str, aperture_deg: float | None, na: float, title: str = ""
) -> Figure:
    """Draw the light that leaves on one side per steradian against its angle, a Lambertian of the same whole dashed.

    Parameters
    ----------
    pattern
        ``angle_deg`` and, for wave and ray optics where there are both, ``_per_sr`` and ``_lambertian_per_sr``.
    side
        ``"above"`` or ``"below"``.
    aperture_deg, na
        Half angle of the aperture [deg], None where it takes all, and its numerical aperture.
    title
        The stack's title.
    """
    figure, axes = _blank(title, f"light out {side}, share of the photons born per steradian, in the outer medium")
    x = pattern["angle_deg"].to_numpy(dtype=float)
    lead = "wave" if "wave_per_sr" in pattern else "ray"
    curves: list[tuple[str, str, str, float, Any]] = [(f"{lead}_per_sr", f"{lead} optics", "#146c69", 2.0, "-")]
    if lead == "wave":
        curves.append(("ray_per_sr", "ray optics (thin)", DARK, 0.8, "-"))
    curves.append(
        (f"{lead}_lambertian_per_sr", f"Lambertian of the same\nwhole, {lead} (dashed)", GREY, 1.3, (0, (5, 3)))
    )
    for column, _, colour, width, style in curves:
        axes.plot(x, pattern[column].to_numpy(dtype=float), color=colour, linewidth=width, linestyle=style)
    if aperture_deg is not None:
        axes.axvline(aperture_deg, color=GREY, linewidth=0.8, linestyle=":")
        axes.annotate(
            f"NA {na:g}", (aperture_deg, 1.0), (3, -3), xycoords=("data", "axes fraction"),
            textcoords="offset points", va="top", fontsize=SMALL, color=GREY,
        )  # fmt: skip
    _list(axes, [(name, colour) for _, name, colour, *_ in curves])
    axes.set_xlim(0.0, 90.0)
    axes.set_xticks(np.arange(0.0, 91.0, 15.0))
    axes.set_ylim(bottom=0.0)
    axes.set_xlabel("angle from the normal, outside (deg)")
    axes.set_ylabel("share of births per steradian")
    return figure


def _blank(title: str, note: str) -> "tuple[Figure, Axes]":
    figure = Figure(figsize=SIZE_INCH, dpi=DPI)
    FigureCanvasAgg(figure)
    axes = figure.add_axes(FRAME)
    axes.spines[["top", "right"]].set_visible(False)
    figure.text(FRAME[0], 0.965, shorten(title, TITLE_CHARACTERS), fontsize=11, va="center", parse_math=False)
    figure.text(FRAME[0], 0.93, fill(note, NOTE_CHARACTERS), fontsize=SMALL, va="top", color="#444444")
    return figure, axes


def _list(axes: "Axes", names: list[tuple[str, str]]) -> None:
    """Write the curves' names beside the plot in their colours."""
    height = 0.95
    for name, colour in names:
        axes.text(EDGE, height, name, transform=axes.transAxes, color=colour, fontsize=SMALL, va="top")
        height -= GAP * (1 + name.count("\n")) + 0.02
