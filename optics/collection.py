"""What gathers light outside: a microscope objective or a fibre."""

from dataclasses import dataclass

from optics.depth import SIDES, Side
from optics.faults import Faults
from optics.spectrum import check_na

PLACE = "collection"


@dataclass(frozen=True, kw_only=True)
class Collection:
    """An aperture on the stack's normal, in the outer medium.

    Parameters
    ----------
    na
        Numerical aperture: outer index times the sine of the half angle; above 1 with an immersion medium.
    side
        The side it stands on.
    """

    na: float
    side: Side

    def __post_init__(self) -> None:
        faults = Faults(PLACE)
        aperture = check_na(faults, self.na)
        faults.choice("side", self.side, SIDES)
        faults.settle()
        object.__setattr__(self, "na", aperture)
