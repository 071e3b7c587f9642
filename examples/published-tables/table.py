"""The same film from three published tables, with and without repair of the floor: python table.py."""

from pathlib import Path

import numpy as np

import optics

HERE = Path(__file__).parent
NAMES = ("phillips", "ball", "leguy")
HEAD = ("table", "births to", "k at 770 nm", "at 788 nm", "floor from", "trapped", "reabsorbed", "repaired: trapped")
WIDER_NM = 860.0  # where births end in the second round; one of the tables does not reach so far


def main() -> None:
    """Print a table, and what the tool says of each table as it is."""
    print("| " + " | ".join((*HEAD, "reabsorbed")) + " |")
    print("|" + "---|" * (len(HEAD) + 1))
    stacks = [(name, optics.read_stack(HERE / f"{name}.toml")) for name in NAMES]
    wider = np.arange(700.0, WIDER_NM + 1.0, 2.0)
    stacks += [
        (name, stack.with_light(wavelengths_nm=wider))
        for name, stack in stacks
        if stack.film.material.range_nm[1] > WIDER_NM
    ]
    said = [line(name, stack) for name, stack in stacks]
    print("\n" + "\n".join(said))


def line(name: str, stack: optics.Stack) -> str:
    """Print one line of the table, the averages of both solutions; return the warnings of the one without repair."""
    found = optics.check_material({"published": stack.film.material.name})
    bare, repaired = (optics.solve(each) for each in (stack.with_layer("film", tail=None), stack))
    k = stack.film.material.index([770.0, 788.0]).imag
    last = stack.light.range_nm[1]
    cells = [name.capitalize(), f"{last:.0f} nm", f"{k[0]:.3f}", f"{k[1]:.3f}", f"{found.floor.onset_nm:.0f} nm"]
    cells += [f"{each.averages[share]:.3f}" for each in (bare, repaired) for share in ("trapped", "reabsorbed")]
    print("| " + " | ".join(cells) + " |")
    return f"{name.capitalize()}, births to {last:.0f} nm: {' '.join(bare.warnings) or 'no warning'}"


if __name__ == "__main__":
    main()
