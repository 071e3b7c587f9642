"""How many digits of a share are worth showing."""

import math

MOST_DECIMALS = 4  # inputs are never better known than that


def plain(value: float, digits: int = 3) -> str:
    """Return a number with so many significant digits, without an exponent where people write none."""
    rounded = float(f"{value:.{digits}g}")
    return f"{rounded:.0f}" if 10**digits <= abs(rounded) < 1e6 else f"{value:.{digits}g}"


def decimals_for(error: float) -> int:
    """Return how many decimals of a share mean something when it may be wrong by `error`: 1 to 4."""
    if not error > 0:
        return MOST_DECIMALS if error == 0 else 1
    return max(1, min(MOST_DECIMALS, math.floor(-math.log10(2 * error))))
