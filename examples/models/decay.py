"""A luminescence decay whose radiative coefficient uses the shares of a stack: without recycling, and in each reading.

Reads a CSV bundle and nothing else of the tool that wrote it:

    photonfate handoff examples/models/stack.toml --to bundle --as csv
    python examples/models/decay.py bundle --to decay

    dn/dt = -n/tau - f B n^2 - C n^3,     light out = P p_e B n^2,     light lost = P p_a B n^2

f is P (1 - p_r) = P (p_e + p_a) in a reading. "none" is the film as if it took nothing back: f = P, and all light that
does not leave is lost. tau, C and the first density are invented.
"""

import argparse
from dataclasses import dataclass
from pathlib import Path

import numpy as np
import pandas as pd
from scipy.integrate import solve_ivp

LIFETIME_NS = 900.0  # of what neither radiates nor is Auger
AUGER_CM6_PER_S = 3e-29
FIRST_DENSITY_PER_CM3 = 3e17
LAST_NS = 1500.0
NS_PER_S = 1e-9


@dataclass(frozen=True)
class Light:
    """Radiative coefficients [cm3/ns]: of the net rate, of light that leaves and of light that is lost."""

    net: float
    out: float
    lost: float


def read(bundle: Path) -> dict[str, Light]:
    """Read radiative.csv and readings.csv: the stack in each reading, by its name."""
    radiative = pd.read_csv(bundle / "data" / "radiative.csv")
    readings = pd.read_csv(bundle / "data" / "readings.csv").set_index("reading")
    bulk = float(radiative.set_index("quantity").loc["bulk", "coefficient_cm3_per_s"]) * NS_PER_S
    if not bulk > 0.0:
        raise SystemExit(f"{bundle}: radiative.csv has no coefficient; its stack needs n_i_per_cm3")
    net = radiative[radiative["quantity"] == "times P (1 - p_r)"].set_index("reading")["coefficient_cm3_per_s"]
    emitted = bulk * float(readings.loc["faces", "rate_factor"])
    out = emitted * float(readings.loc["faces", "p_e"])
    found = {"none": Light(emitted, out, emitted - out)}
    for name, row in readings.iterrows():
        found[str(name)] = Light(float(net[name]) * NS_PER_S, emitted * row["p_e"], emitted * row["p_a"])
    return found


@dataclass(frozen=True)
class Decay:
    """Densities over time [1/cm3]: carriers left, and lost without light, by Auger, as light out and as light lost."""

    time_ns: np.ndarray
    left: np.ndarray
    dark: np.ndarray
    auger: np.ndarray
    out: np.ndarray
    lost: np.ndarray


def decay(
    light: Light,
    *,
    first: float = FIRST_DENSITY_PER_CM3,
    lifetime_ns: float = LIFETIME_NS,
    auger_cm6_per_s: float = AUGER_CM6_PER_S,
    last_ns: float = LAST_NS,
) -> Decay:
    """Solve the rate equation, every loss beside the carriers."""

    def slope(_: float, state: np.ndarray) -> list[float]:
        n = state[0]
        dark, auger = n / lifetime_ns, auger_cm6_per_s * NS_PER_S * n**3
        return [-dark - auger - light.net * n**2, dark, auger, light.out * n**2, light.lost * n**2]

    times = np.concatenate([[0.0], np.geomspace(last_ns * 1e-4, last_ns, 200)])
    start = [first, 0.0, 0.0, 0.0, 0.0]
    solved = solve_ivp(slope, (0.0, last_ns), start, method="LSODA", t_eval=times, rtol=1e-10, atol=1e-12 * first)
    return Decay(solved.t, *solved.y)


def table(runs: dict[str, Decay]) -> pd.DataFrame:
    """Return all decays, tidy."""
    parts = []
    for name, each in runs.items():
        parts.append(pd.DataFrame({"reading": name} | {key: getattr(each, key) for key in Decay.__annotations__}))
    return pd.concat(parts, ignore_index=True)


def draw(runs: dict[str, Decay], path: Path) -> None:
    """Draw the luminescence, which goes as n^2, over its first value."""
    from matplotlib.figure import Figure

    figure = Figure(figsize=(7.0, 4.4), layout="constrained")
    axes = figure.subplots()
    shades = ("#9a9a9a", "#c98b2b", "#b5533c", "#7a2f5d", "#2b2350")
    for shade, (name, each) in zip(shades, runs.items(), strict=False):
        axes.plot(each.time_ns, (each.left / each.left[0]) ** 2, color=shade, linewidth=1.4, label=name)
    axes.set(xlim=(0.0, LAST_NS / 2), ylim=(1e-3, 1.0), yscale="log")
    axes.set(xlabel="Time after the pulse (ns)", ylabel="Luminescence over its first value")
    axes.legend(frameon=False, loc="upper right")
    axes.set_title("What the reading of a stack's light does to a decay; invented parameters", fontsize=10)
    axes.spines[["top", "right"]].set_visible(False)
    figure.savefig(path, dpi=150)


def main() -> None:
    """Read a bundle, solve without recycling and in every reading, write table and figure."""
    options = argparse.ArgumentParser(description="Luminescence decay in every reading.")
    options.add_argument("bundle", type=Path, help="a folder of `photonfate handoff --as csv`")
    options.add_argument("--to", type=Path, default=Path("decay"), help="folder for table and figure")
    chosen = options.parse_args()
    lights = read(chosen.bundle)
    runs = {name: decay(light) for name, light in lights.items()}
    chosen.to.mkdir(parents=True, exist_ok=True)
    table(runs).to_csv(chosen.to / "decays.csv", index=False)
    draw(runs, chosen.to / "decays.png")
    print(f"Of {FIRST_DENSITY_PER_CM3:g} carriers per cm3, after {LAST_NS:g} ns:")
    names = ("left", "dark", "auger", "out", "lost")
    print(f"{'reading':<12}" + "".join(f"{part:>9}" for part in names) + f"{'1/e':>12}")
    for name, each in runs.items():
        parts = [getattr(each, part)[-1] / each.left[0] for part in names]
        fall = float(np.interp(-1.0, -each.left / each.left[0] / np.exp(-1.0), each.time_ns))
        print(f"{name:<12}" + "".join(f"{part:>9.4f}" for part in parts) + f"{fall:>9.0f} ns")


if __name__ == "__main__":
    main()
