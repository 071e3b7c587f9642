"""Work for tests of the engine: functions that other processes can import."""

import os
import time
from pathlib import Path


def squares(packed):
    """Return squares."""
    return [number * number for number in packed]


def slow(packed):
    """Return squares, a while later."""
    time.sleep(0.05 * len(packed))
    return squares(packed)


def dies_once(packed):
    """End the process at the point 7, as long as no file says that it did."""
    flag, numbers = packed
    if 7 in numbers and not Path(flag).exists():
        Path(flag).touch()
        os._exit(9)
    return squares(numbers)


def dies_always(packed):
    """End the process at the point 7."""
    if 7 in packed:
        os._exit(9)
    return squares(packed)


def threads(packed):
    """Return how many threads of linear algebra the process may use."""
    return [os.environ.get("OPENBLAS_NUM_THREADS") for _ in packed]
