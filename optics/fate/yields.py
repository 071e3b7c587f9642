"""External from internal luminescence yield and back, with recycling: closed forms on the shares of a reading.

Q_e = p_e Q_i/(1 - p_r Q_i) (Richter et al., Nat. Commun. 7, 13941 (2016); Kirchartz, Staub & Rau, ACS Energy Lett. 1,
731 (2016)): of every generation of photons p_e leaves and p_r is born again with the internal yield Q_i.
"""

import math
from dataclasses import dataclass

from optics.errors import InputError
from optics.radiation import EV_PER_K


@dataclass(frozen=True)
class Yields:
    """What one reading makes of a yield.

    Attributes
    ----------
    internal, external
        Internal yield in this stack and external yield.
    bulk
        The internal yield that the same material has in the bulk.
    recycled
        Mean number of times that the film takes a photon back, per excitation.
    radiative_factor
        Effective radiative coefficient over the bulk's: P (1 - p_r).
    lifetime_factor
        Lifetime of carriers with recycling over that without: 1/(1 - p_r Q_i).
    voltage_V
        (kT/e) ln Q_e, what the yield costs of the radiative limit of the voltage (zero or below).
    """

    internal: float
    external: float
    bulk: float
    recycled: float
    radiative_factor: float
    lifetime_factor: float
    voltage_V: float


def external_yield(internal: float, *, p_r: float, p_e: float) -> float:
    """Return the external yield that an internal one gives; 0 where nothing leaves."""
    return p_e * internal / (1.0 - p_r * internal) if p_e > 0.0 else 0.0


def internal_yield(external: float, *, p_r: float, p_e: float) -> float:
    """Return the internal yield that gives an external one, the inverse of :func:`external_yield`.

    Raises
    ------
    InputError
        When nothing leaves, or the external yield is above the largest possible.
    """
    top = largest_external(p_r=p_r, p_e=p_e)
    if not 0.0 <= external <= top * (1.0 + 1e-12):
        raise InputError(
            f"external: found {external:.6g}, expected at most {top:.6g}: the largest that this stack gives in this "
            "reading, with an internal yield of 1"
        )
    return external / (p_e + p_r * external) if external > 0.0 else 0.0


def largest_external(*, p_r: float, p_e: float) -> float:
    """Return the external yield at an internal yield of 1, p_e/(1 - p_r)."""
    return p_e / (1.0 - p_r) if p_e > 0.0 else 0.0


def internal_deviation(external: float, deviation: float, *, p_r: float, p_e: float) -> float:
    """Return the standard deviation of the internal yield, to first order, from that of the external one."""
    return p_e * deviation / (p_e + p_r * external) ** 2


def external_deviation(internal: float, deviation: float, *, p_r: float, p_e: float) -> float:
    """Return the standard deviation of the external yield, to first order, from that of the internal one."""
    return p_e * deviation / (1.0 - p_r * internal) ** 2


def stack_from_bulk(bulk: float, rate_factor: float) -> float:
    """Return the internal yield in the stack: radiative rates times P (Furno et al. 2012)."""
    return rate_factor * bulk / (1.0 - bulk + rate_factor * bulk)


def bulk_from_stack(internal: float, rate_factor: float) -> float:
    """Return the bulk's internal yield, the inverse of :func:`stack_from_bulk`."""
    return internal / (internal + rate_factor * (1.0 - internal))


def voltage(external: float, temperature_K: float) -> float:
    """Return (kT/e) ln Q_e [V], the distance from the radiative limit (Rau, Phys. Rev. B 76, 085303 (2007))."""
    return EV_PER_K * temperature_K * math.log(external) if external > 0.0 else -math.inf


def yields(internal: float, *, p_r: float, p_e: float, rate_factor: float, temperature_K: float) -> Yields:
    """Return everything that goes with an internal yield in one reading."""
    external = external_yield(internal, p_r=p_r, p_e=p_e)
    back = p_r * internal
    return Yields(
        internal=internal,
        external=external,
        bulk=bulk_from_stack(internal, rate_factor),
        recycled=back / (1.0 - back) if back < 1.0 else math.inf,
        radiative_factor=rate_factor * (1.0 - p_r),
        lifetime_factor=1.0 / (1.0 - back) if back < 1.0 else math.inf,
        voltage_V=voltage(external, temperature_K),
    )
