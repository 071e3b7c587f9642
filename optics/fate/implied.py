"""What a measured or assumed yield implies in every reading of a sample."""

from dataclasses import dataclass

from optics.errors import InputError
from optics.fate import yields
from optics.fate.readings import LOST_EDGES, SPHERE, Reading
from optics.fate.sampled import Sampled
from optics.fate.yields import Yields
from optics.faults import Faults

ROOM_K = 300.0


@dataclass(frozen=True)
class Given:
    """A known yield and its standard deviation; ``kind``: ``"internal"`` (in this stack) or ``"external"``."""

    kind: str
    value: float
    sd: float = 0.0


@dataclass(frozen=True)
class Implied:
    """One reading's answer.

    Attributes
    ----------
    reading
        The reading.
    largest
        Largest external yield that it allows.
    values
        What goes with the yield; None where the external one is above the largest.
    sd
        Standard deviation of the other yield, to first order.
    between
        The other yield at one standard deviation less and more of the given one, cut at 0 and at what is possible.
    cut
        Whether it was cut.
    """

    reading: Reading
    largest: float
    values: Yields | None
    sd: float
    between: tuple[float, float]
    cut: bool


def given(
    *, internal: float | None = None, external: float | None = None, sd: float = 0.0, place: str = "yields"
) -> Given | None:
    """Return the yield that is known, None where neither is given.

    Raises
    ------
    InputError
        When both are given, or one is no share.
    """
    faults = Faults(place)
    if internal is not None and external is not None:
        faults.add("internal", "found together with external, expected one of them")
    if internal is None and external is None and sd:
        faults.add("sd", "found without a yield, expected internal or external with it")
    for key, value in (("internal", internal), ("external", external)):
        if value is not None:
            faults.number(key, value, at_least=0, at_most=1, example=0.9)
    faults.number("sd", sd, at_least=0, at_most=1, example=0.02)
    faults.settle()
    if internal is not None:
        return Given("internal", float(internal), float(sd))
    return None if external is None else Given("external", float(external), float(sd))


def implied(sampled: Sampled, known: Given, *, reading: str, temperature_K: float = ROOM_K) -> tuple[Implied, ...]:
    """Return what a yield implies in every reading.

    Parameters
    ----------
    sampled
        The sample's readings.
    known
        The yield.
    reading
        The reading that has to allow it.
    temperature_K
        For the voltage [K].

    Raises
    ------
    InputError
        When there is no such reading, or a measured yield is above the largest that it allows.
    """
    names = [each.name for each in sampled.readings]
    if reading not in names:
        raise InputError(f'reading: found "{reading}", expected one of {", ".join(names)}')
    faults = Faults()
    faults.number("temperature_K", temperature_K, unit="K", above=0, example=300)
    faults.settle()
    if known.kind == "external":
        chosen = sampled.reading(reading)
        try:
            yields.internal_yield(known.value, p_r=chosen.p_r, p_e=chosen.p_e)
        except InputError as refused:
            raise InputError(f'{refused} (reading "{reading}")') from None
    return tuple(_one(each, known, temperature_K) for each in sampled.readings)


def default_reading(sampled: Sampled) -> str:
    """Return the reading of the sample as it lies: its edges collected, or lost."""
    return LOST_EDGES if sampled.sample.edges == "lost" else SPHERE


def _one(reading: Reading, known: Given, temperature_K: float) -> Implied:
    shares = {"p_r": reading.p_r, "p_e": reading.p_e}
    top = yields.largest_external(**shares)
    limit = 1.0 if known.kind == "internal" else top
    low, high = max(known.value - known.sd, 0.0), min(known.value + known.sd, limit)
    cut = known.value - known.sd < 0.0 or known.value + known.sd > limit
    if known.kind == "internal":
        internal = known.value
        sd = yields.external_deviation(internal, known.sd, **shares) if internal < 1.0 or reading.p_r < 1.0 else 0.0
        between = yields.external_yield(low, **shares), yields.external_yield(high, **shares)
    elif known.value > top:
        return Implied(reading, top, None, 0.0, (0.0, 0.0), True)
    else:
        internal = yields.internal_yield(known.value, **shares)
        sd = yields.internal_deviation(known.value, known.sd, **shares) if reading.p_e > 0.0 else 0.0
        between = yields.internal_yield(low, **shares), yields.internal_yield(high, **shares)
    values = yields.yields(internal, rate_factor=reading.rate_factor, temperature_K=temperature_K, **shares)
    return Implied(reading, top, values, sd, between, cut)


def yields_of(
    sampled: Sampled,
    *,
    internal: float | None = None,
    external: float | None = None,
    sd: float = 0.0,
    reading: str | None = None,
    temperature_K: float = ROOM_K,
) -> tuple[Implied, ...]:
    """Return what an internal or an external yield implies in every reading of a sample.

    Parameters
    ----------
    sampled
        What :func:`optics.sampled` returned.
    internal, external
        The yield that is known, one of them; internal is that in this stack.
    sd
        Its standard deviation.
    reading
        The reading that has to allow a measured external yield; None: that of the sample's edges.
    temperature_K
        For the voltage [K].

    Raises
    ------
    InputError
        When none or both are given, or a measured yield is above the largest that the reading allows.
    """
    known = given(internal=internal, external=external, sd=sd)
    if known is None:
        raise InputError("yields: found neither internal nor external, expected one of them")
    return implied(sampled, known, reading=reading or default_reading(sampled), temperature_K=temperature_K)
