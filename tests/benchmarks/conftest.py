"""The compiled yardstick: the unit in which this package's speed is given."""

import ctypes
import shutil
import subprocess
from pathlib import Path

import numpy as np
import pytest

SOURCE = Path(__file__).with_name("yardstick.c")
FLAGS = ("-O3", "-march=native", "-ffast-math", "-fcx-limited-range", "-shared", "-fPIC")
INDEX = np.array([1.0, 2.0 + 0.01j, 2.5 + 0.02j, 1.8 + 0.005j, 1.5])
THICKNESS_NM = np.array([0.0, 60.0, 500.0, 120.0, 0.0])
FILM = 2
NODES = 48 + 64


@pytest.fixture(scope="session")
def yardstick(tmp_path_factory):
    """Return the yardstick as a function without arguments: one spectrum, 161 wavelengths, five media."""
    if shutil.which("gcc") is None:
        pytest.skip("no gcc: nothing to compare with")
    library = tmp_path_factory.mktemp("yardstick") / "yardstick.so"
    subprocess.run(["gcc", *FLAGS, str(SOURCE), "-o", str(library), "-lm"], check=True)
    run = ctypes.CDLL(str(library)).run
    wavelength = np.linspace(700.0, 860.0, 161)
    real = np.repeat(INDEX.real[:, None], len(wavelength), 1).copy()
    imaginary = np.repeat(INDEX.imag[:, None], len(wavelength), 1).copy()
    nodes = np.linspace(0.01, 0.99, NODES)
    out = np.zeros(len(wavelength))
    arrays = [array.ctypes.data_as(ctypes.POINTER(ctypes.c_double)) for array in (wavelength, real, imaginary)]
    thickness, places, sums = (
        array.ctypes.data_as(ctypes.POINTER(ctypes.c_double)) for array in (THICKNESS_NM, nodes, out)
    )
    held = (wavelength, real, imaginary, nodes, out)  # ctypes keeps no reference to what it points at

    def once():
        run(len(held[0]), len(INDEX), FILM, *arrays, thickness, NODES, places, sums)

    return once
