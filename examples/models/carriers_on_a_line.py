"""Carriers that diffuse, recombine and are born again from light: a lit stripe with and without recycling.

Reads a CSV bundle and nothing else of the tool that wrote it:

    photonfate handoff examples/models/stack.toml --to bundle --as csv
    python examples/models/carriers_on_a_line.py bundle --to profile

    dn/dt = D d2n/dx2 - n/tau - P B n^2 + integral of kernel(x - x') P B n(x')^2 dx'

The geometry is a line across the stripe, so the kernel is read in its form for a line (line_cumulative: the share that
is taken back within |x - x'|; the light spreads in the plane, and what lands is summed along the stripe). B is the
bulk's radiative coefficient and P the rate factor. Carriers and light are even over the depth. Light held in plates
that comes back later (share_held) spreads over millimetres and is left out: it counts as not taken back.

D, tau and the pulse below are invented.
"""

import argparse
from dataclasses import dataclass
from pathlib import Path

import numpy as np
import pandas as pd
from scipy.integrate import solve_ivp
from scipy.interpolate import PchipInterpolator

DIFFUSION_CM2_PER_S = 0.4
LIFETIME_NS = 800.0  # of what does not radiate
FIRST_DENSITY_PER_CM3 = 4e17
STRIPE_UM = 0.6  # one standard deviation of the first profile
TIMES_NS = (0.0, 10.0, 30.0, 100.0, 300.0)
HALF_WIDTH_UM = 300.0
CELLS = 241  # odd: one lies in the middle
STRETCH = 7.0  # sinh stretching: the middle cell is about 0.03 um wide
NS_CM2_PER_S = 0.1  # 1 cm2/s in um2/ns
NS_PER_S = 1e-9


@dataclass(frozen=True)
class Optics:
    """What is read from a bundle: kernel on a line and radiative coefficient."""

    within_um: np.ndarray  # distances on the line
    cumulative: np.ndarray  # share taken back within each, both sides together
    rate_cm3_per_ns: float  # P B

    @classmethod
    def read(cls, bundle: Path) -> "Optics":
        """Read kernel.csv and radiative.csv."""
        kernel = pd.read_csv(bundle / "data" / "kernel.csv")
        radiative = pd.read_csv(bundle / "data" / "radiative.csv").set_index("quantity")
        coefficient = float(radiative.loc["times P", "coefficient_cm3_per_s"])
        if not coefficient > 0.0:
            raise SystemExit(f"{bundle}: radiative.csv has no coefficient; its stack needs n_i_per_cm3")
        return cls(
            np.concatenate([[0.0], kernel["radius_to_um"]]),
            np.concatenate([[0.0], kernel["line_cumulative"]]),
            coefficient * NS_PER_S,
        )

    @property
    def taken_back(self) -> float:
        """Share of all light that is taken back."""
        return float(self.cumulative[-1])


def edges_um() -> np.ndarray:
    """Return the edges of the cells: narrow in the middle, wide outside."""
    even = np.linspace(-1.0, 1.0, CELLS + 1)
    return HALF_WIDTH_UM * np.sinh(STRETCH * even) / np.sinh(STRETCH)


def transfer(optics: Optics, edges: np.ndarray) -> np.ndarray:
    """Return the share of light born evenly in cell j that is taken back in cell i, (i, j).

    The cumulative share is interpolated by monotone cubics; with G its integral the share is a second difference of
    G, whatever the widths, and a column misses exactly what lands beyond the last cell.
    """
    integral = PchipInterpolator(optics.within_um, 0.5 * optics.cumulative).antiderivative()
    last = optics.within_um[-1]

    def twice_integrated(x: np.ndarray) -> np.ndarray:
        away = np.abs(x)
        return integral(np.minimum(away, last)) + 0.5 * optics.taken_back * np.maximum(away - last, 0.0)

    apart = twice_integrated(edges[:, None] - edges[None, :])  # (edge of i, edge of j)
    share = apart[1:, :-1] - apart[1:, 1:] - apart[:-1, :-1] + apart[:-1, 1:]
    return np.maximum(share, 0.0) / np.diff(edges)


def diffusion(edges: np.ndarray, diffusion_um2_per_ns: float) -> np.ndarray:
    """Return the matrix of D d2/dx2 over the cells; nothing flows out at the ends."""
    width, middle = np.diff(edges), 0.5 * (edges[1:] + edges[:-1])
    flow = diffusion_um2_per_ns / np.diff(middle)
    matrix = np.zeros((len(width), len(width)))
    inner = np.arange(len(flow))
    matrix[inner, inner + 1] += flow / width[:-1]
    matrix[inner, inner] -= flow / width[:-1]
    matrix[inner + 1, inner] += flow / width[1:]
    matrix[inner + 1, inner + 1] -= flow / width[1:]
    return matrix


@dataclass(frozen=True)
class Run:
    """Profiles over time, (cell, time) [1/cm3], and what became of the other carriers, (time,).

    Those are densities integrated over x [um/cm3]: carriers lost without light, as light that is not taken back, and
    as light that lands beyond the last cell.
    """

    times_ns: np.ndarray
    edges: np.ndarray
    density: np.ndarray
    dark: np.ndarray
    light: np.ndarray
    beyond: np.ndarray

    @property
    def left(self) -> np.ndarray:
        """Carriers left."""
        return np.diff(self.edges) @ self.density


def run(
    optics: Optics,
    first: np.ndarray,
    *,
    recycling: bool,
    times_ns: tuple[float, ...] = TIMES_NS,
    diffusion_cm2_per_s: float = DIFFUSION_CM2_PER_S,
    lifetime_ns: float = LIFETIME_NS,
) -> Run:
    """Solve by the method of lines, the three losses beside the densities."""
    edges = edges_um()
    width = np.diff(edges)
    spread = diffusion(edges, diffusion_cm2_per_s * NS_CM2_PER_S)
    back = transfer(optics, edges) if recycling else np.zeros((CELLS, CELLS))
    taken_back = optics.taken_back if recycling else 0.0
    reborn = back * width[None, :] / width[:, None]  # densities instead of amounts
    missed = taken_back - back.sum(axis=0)
    unit, rate = np.eye(CELLS), optics.rate_cm3_per_ns

    def slope(_: float, state: np.ndarray) -> np.ndarray:
        density = state[:CELLS]
        born = rate * density**2
        change = spread @ density - density / lifetime_ns - born + reborn @ born
        counts = [width @ density / lifetime_ns, (1.0 - taken_back) * (width @ born), (width * missed) @ born]
        return np.concatenate([change, counts])

    def jacobian(_: float, state: np.ndarray) -> np.ndarray:
        born = 2.0 * rate * state[:CELLS]
        out = np.zeros((CELLS + 3, CELLS + 3))
        out[:CELLS, :CELLS] = spread - unit / lifetime_ns + (reborn - unit) * born
        out[CELLS, :CELLS] = width / lifetime_ns
        out[CELLS + 1, :CELLS] = (1.0 - taken_back) * width * born
        out[CELLS + 2, :CELLS] = width * missed * born
        return out

    start = np.concatenate([first, np.zeros(3)])
    scale = np.concatenate([np.full(CELLS, first.max()), np.full(3, width @ first)])
    solved = solve_ivp(
        slope,
        (times_ns[0], times_ns[-1]),
        start,
        method="BDF",
        t_eval=times_ns,
        jac=jacobian,
        rtol=1e-6,
        atol=1e-10 * scale,
    )
    dark, light, beyond = solved.y[CELLS:]
    return Run(solved.t, edges, solved.y[:CELLS], dark, light, beyond)


def stripe() -> np.ndarray:
    """Return the first profile, a Gaussian, as means over the cells."""
    from scipy.special import erf

    edges = edges_um()
    inside = 0.5 * erf(edges / (np.sqrt(2.0) * STRIPE_UM))
    return FIRST_DENSITY_PER_CM3 * np.sqrt(2.0 * np.pi) * STRIPE_UM * np.diff(inside) / np.diff(edges)


def table(runs: dict[str, Run]) -> pd.DataFrame:
    """Return all profiles, tidy."""
    parts = []
    for name, each in runs.items():
        middle = 0.5 * (each.edges[1:] + each.edges[:-1])
        for time, density in zip(each.times_ns, each.density.T, strict=True):
            head = {"recycling": name, "time_ns": time, "x_um": middle}
            parts.append(pd.DataFrame(head | {"carriers_per_cm3": density}))
    return pd.concat(parts, ignore_index=True)


def draw(runs: dict[str, Run], path: Path) -> None:
    """Draw the profiles: with recycling as lines, without as dashes."""
    from matplotlib.figure import Figure

    figure = Figure(figsize=(7.0, 4.4), layout="constrained")
    axes = figure.subplots()
    shades = ("#9a9a9a", "#c98b2b", "#b5533c", "#7a2f5d", "#2b2350")
    for name, dashes in (("without", (0, (4, 2))), ("with", "-")):
        each = runs[name]
        middle = 0.5 * (each.edges[1:] + each.edges[:-1])
        for shade, time, density in zip(shades, each.times_ns, each.density.T, strict=True):
            label = f"{time:g} ns" if name == "with" else None
            axes.plot(middle, density, color=shade, linestyle=dashes, linewidth=1.4, label=label)
    axes.set(xlim=(0.0, 40.0), ylim=(1e12, 1e18), yscale="log")
    axes.set(xlabel="Distance from the middle of the stripe (um)", ylabel="Carriers (1/cm$^3$)")
    axes.legend(frameon=False, title="after the pulse", loc="upper right")
    axes.set_title("With recycling (lines) and without (dashes); invented parameters", fontsize=10, loc="left")
    axes.spines[["top", "right"]].set_visible(False)
    figure.savefig(path, dpi=150)


def main() -> None:
    """Read a bundle, solve with and without recycling, write table and figure."""
    options = argparse.ArgumentParser(description="Carriers on a line, with and without recycling.")
    options.add_argument("bundle", type=Path, help="a folder of `photonfate handoff --as csv`")
    options.add_argument("--to", type=Path, default=Path("carriers-on-a-line"), help="folder for table and figure")
    chosen = options.parse_args()
    optics = Optics.read(chosen.bundle)
    runs = {name: run(optics, stripe(), recycling=name == "with") for name in ("without", "with")}
    chosen.to.mkdir(parents=True, exist_ok=True)
    table(runs).to_csv(chosen.to / "profiles.csv", index=False)
    draw(runs, chosen.to / "profiles.png")
    print(f"Film takes back {optics.taken_back:.3f} of its light; of all carriers, after {TIMES_NS[-1]:g} ns:")
    print(f"{'recycling':<12}{'left':>9}{'dark':>9}{'light':>9}{'beyond':>9}{'sum - 1':>11}{'rms width':>12}")
    for name, each in runs.items():
        whole = each.left[0]
        parts = [each.left[-1] / whole, each.dark[-1] / whole, each.light[-1] / whole, each.beyond[-1] / whole]
        middle, weight = 0.5 * (each.edges[1:] + each.edges[:-1]), each.density[:, -1] * np.diff(each.edges)
        wide = np.sqrt(weight @ middle**2 / weight.sum())
        print(f"{name:<12}" + "".join(f"{part:>9.4f}" for part in parts) + f"{sum(parts) - 1:>11.1e}{wide:>9.2f} um")


if __name__ == "__main__":
    main()
