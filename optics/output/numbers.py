"""How many digits of a share are worth showing."""

import math

MOST_DECIMALS = 4  # inputs are never better known than that


def decimals_for(error: float) -> int:
    """Return how many decimals of a share mean something when it may be wrong by `error`: 1 to 4."""
    if not error > 0:
        return MOST_DECIMALS if error == 0 else 1
    return max(1, min(MOST_DECIMALS, math.floor(-math.log10(2 * error))))
