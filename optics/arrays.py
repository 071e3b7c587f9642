"""Kinds of arrays."""

import numpy as np
from numpy.typing import NDArray

Real = NDArray[np.float64]
Complex = NDArray[np.complex128]
Index = NDArray[np.intp]
Mask = NDArray[np.bool_]
